/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Lognormal power: the level in dB is normal about its mean with standard deviation
 * sigma_db (Rec. ITU-R P.1057). The location of this model is the mean of the dB values.
 */
#include <gsl/gsl_math.h>
#include <gsl/gsl_sf_erf.h>
#include <stddef.h>

#include "model/model.h"
#include "special/gauss_legendre.h"
#include "special/tails.h"

static const double sigma_min_db = 0.001;
static const double sigma_max_db = 100.0;

static bool parameter_valid(double sigma_db)
{
    return sigma_db >= sigma_min_db && sigma_db <= sigma_max_db;
}

/* ln of the density per dB, z standard deviations from the mean. */
static double log_density_at(double sigma_db, double z)
{
    return -0.5 * z * z - log(sigma_db * (M_SQRT2 * M_SQRTPI));
}

static enum rfade_status tails(double sigma_db, double x_db, struct rfade_tails *result)
{
    if (!parameter_valid(sigma_db) || !rfade_level_valid(x_db)) {
        *result = rfade_tails_nan();
        return RFADE_DOMAIN;
    }
    return rfade_normal_tails(x_db / sigma_db, result);
}

static enum rfade_status log_density_of(const struct rfade_prepared *prepared, double x_db,
                                        struct rfade_log_gradient *result)
{
    const double sigma_db = prepared->parameter;
    *result = rfade_log_gradient_nan();
    if (!parameter_valid(sigma_db) || !rfade_level_valid(x_db) || isinf(x_db)) {
        return RFADE_DOMAIN;
    }
    const double z = x_db / sigma_db;
    result->value = log_density_at(sigma_db, z);
    result->d_mean_db = z / sigma_db;
    result->d_parameter = (z - 1.0) * (z + 1.0) / sigma_db;
    return RFADE_OK;
}

/* Relative to the interval's middle z the density is exp(-t (z + t/2)). */
static struct rfade_log_gradient narrow_interval(double sigma_db, double middle_db,
                                                 double width_db,
                                                 const struct rfade_gauss_rule *rule)
{
    const double half_width = 0.5 * width_db / sigma_db;
    const double z = middle_db / sigma_db;
    double sum = 0.0;
    double sum_t = 0.0;
    double sum_square = 0.0;
    for (int i = 0; i < rule->half_count; i++) {
        for (int side = -1; side <= 1; side += 2) {
            const double t = side * half_width * rule->node[i];
            const double term = rule->weight[i] * exp(-t * (z + 0.5 * t));
            sum += term;
            sum_t += term * t;
            sum_square += term * (z + t - 1.0) * (z + t + 1.0);
        }
    }
    return (struct rfade_log_gradient){
        log_density_at(sigma_db, z) + log(0.5 * width_db * sum),
        (z + sum_t / sum) / sigma_db,
        sum_square / sum / sigma_db,
    };
}

static struct rfade_interval_end interval_end(double sigma_db, double x_db)
{
    if (isinf(x_db)) {
        return rfade_interval_end_at_infinity(x_db > 0.0);
    }
    const double z = x_db / sigma_db;
    const bool is_upper = z > 0.0;
    struct rfade_tails both;
    gsl_sf_result hazard; /* density over the small tail, of the standardised level */
    (void)rfade_normal_tails(z, &both);
    (void)gsl_sf_hazard_e(fabs(z), &hazard);
    const double d_mean_db = (is_upper ? 1.0 : -1.0) * hazard.val / sigma_db;
    return rfade_interval_end_from(&both, is_upper, d_mean_db, z * d_mean_db);
}

static enum rfade_status prepare(double sigma_db, struct rfade_prepared *prepared)
{
    const bool valid = parameter_valid(sigma_db);
    *prepared = (struct rfade_prepared){.parameter = valid ? sigma_db : NAN};
    return valid ? RFADE_OK : RFADE_DOMAIN;
}

static enum rfade_status log_interval_of(const struct rfade_prepared *prepared, double low_db,
                                         double high_db, struct rfade_log_gradient *result)
{
    const double sigma_db = prepared->parameter;
    *result = rfade_log_gradient_nan();
    if (!parameter_valid(sigma_db) || !rfade_interval_valid(low_db, high_db)) {
        return RFADE_DOMAIN;
    }
    const double width_db = high_db - low_db;
    if (isfinite(width_db)) {
        const double half_width = 0.5 * width_db / sigma_db;
        const double slope = fmax(fabs(low_db), fabs(high_db)) / sigma_db;
        const struct rfade_gauss_rule *rule =
            rfade_gauss_rule_for(half_width * slope, half_width * half_width);
        if (rule != NULL) {
            *result = narrow_interval(sigma_db, 0.5 * (low_db + high_db), width_db, rule);
            return RFADE_OK;
        }
    }
    const struct rfade_interval_end low = interval_end(sigma_db, low_db);
    const struct rfade_interval_end high = interval_end(sigma_db, high_db);
    *result = rfade_interval_from_ends(&low, &high);
    return RFADE_OK;
}

static enum rfade_status log_density(double sigma_db, double x_db,
                                     struct rfade_log_gradient *result)
{
    return rfade_log_density_once(&rfade_model_lognormal, sigma_db, x_db, result);
}

static enum rfade_status log_interval(double sigma_db, double low_db, double high_db,
                                      struct rfade_log_gradient *result)
{
    return rfade_log_interval_once(&rfade_model_lognormal, sigma_db, low_db, high_db, result);
}

static enum rfade_status quantile(double sigma_db, double lower, double upper, double *x_db)
{
    return rfade_quantile_by_newton(&rfade_model_lognormal, sigma_db, lower, upper, x_db);
}

/* var(y)/mean(y)^2 = exp((c sigma)^2) - 1, c = ln(10)/10 */
static double from_normalised_variance(double normalised_variance)
{
    const double sigma_db = sqrt(log1p(normalised_variance)) / RFADE_LN_PER_DB;
    return fmin(fmax(sigma_db, sigma_min_db), sigma_max_db);
}

static double normalised_variance(double sigma_db)
{
    const double sigma = RFADE_LN_PER_DB * sigma_db;
    return expm1(sigma * sigma);
}

const struct rfade_model rfade_model_lognormal = {
    .id = RFADE_LOGNORMAL,
    .name = "lognormal",
    .parameter_name = "sigma_db",
    .parameter_min = sigma_min_db,
    .parameter_max = sigma_max_db,
    .fit_min = sigma_min_db,
    .tails = tails,
    .log_density = log_density,
    .log_interval = log_interval,
    .prepare = prepare,
    .log_density_of = log_density_of,
    .log_interval_of = log_interval_of,
    .quantile = quantile,
    .from_normalised_variance = from_normalised_variance,
    .normalised_variance = normalised_variance,
};
