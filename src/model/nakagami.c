/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Nakagami-m fading: power y over its mean has the gamma density
 *     m^m y^(m-1) exp(-m y) / Gamma(m)
 * (M. Nakagami, "The m-distribution", in Statistical Methods in Radio Wave Propagation,
 * 1960). In s = ln y, with phi(s) = exp(s) - 1 - s, it is
 *     exp(-m phi(s)) sqrt(m / (2 pi)) / Gamma*(m)
 * and its logarithm has the slope ln m - psi(m) - phi(s) in m and -m (y - 1) in s.
 */
#include <gsl/gsl_math.h>
#include <stddef.h>

#include "model/model.h"
#include "special/gamma_tails.h"
#include "special/gauss_legendre.h"
#include "special/tails.h"

static const double m_min = 0.5;
static const double m_fit_min = 0.1;
static const double m_max = 1e4;

static bool parameter_valid(double m)
{
    return m >= m_fit_min && m <= m_max;
}

/* ln of the density per dB where phi = 0. */
static double log_density_at_mean(double m)
{
    return log(RFADE_LN_PER_DB * sqrt(m / (2.0 * M_PI))) - rfade_log_gamma_star(m);
}

static enum rfade_status tails(double m, double x_db, struct rfade_tails *result)
{
    if (!parameter_valid(m) || !rfade_level_valid(x_db)) {
        *result = rfade_tails_nan();
        return RFADE_DOMAIN;
    }
    *result = rfade_gamma_tails_at(m, rfade_log_ratio(x_db));
    return RFADE_OK;
}

enum { LOG_DENSITY_AT_MEAN, LOG_MINUS_PSI }; /* constants */

static enum rfade_status prepare(double m, struct rfade_prepared *prepared)
{
    *prepared = (struct rfade_prepared){.parameter = NAN};
    if (!parameter_valid(m)) {
        return RFADE_DOMAIN;
    }
    prepared->parameter = m;
    prepared->constants[LOG_DENSITY_AT_MEAN] = log_density_at_mean(m);
    return rfade_log_minus_psi(m, &prepared->constants[LOG_MINUS_PSI], NULL);
}

static enum rfade_status log_density_of(const struct rfade_prepared *prepared, double x_db,
                                        struct rfade_log_gradient *result)
{
    const double m = prepared->parameter;
    *result = rfade_log_gradient_nan();
    if (!parameter_valid(m) || !rfade_level_valid(x_db) || isinf(x_db)) {
        return RFADE_DOMAIN;
    }
    const double log_y = rfade_log_ratio(x_db);
    const double phi = rfade_exp_excess(log_y);
    result->value = prepared->constants[LOG_DENSITY_AT_MEAN] - m * phi;
    result->d_mean_db = RFADE_LN_PER_DB * m * expm1(log_y);
    result->d_parameter = prepared->constants[LOG_MINUS_PSI] - phi;
    return RFADE_OK;
}

/* Relative to the interval's middle the density is exp(-m h(t)), h = y expm1(t) - t. */
static struct rfade_log_gradient narrow_interval(const struct rfade_prepared *prepared,
                                                 double middle_db, double width_db,
                                                 const struct rfade_gauss_rule *rule)
{
    const double m = prepared->parameter;
    const double half_width = 0.5 * RFADE_LN_PER_DB * width_db;
    const double log_y = rfade_log_ratio(middle_db);
    const double y = exp(log_y);
    const double phi = rfade_exp_excess(log_y);
    double sum = 0.0;
    double sum_power = 0.0;
    double sum_h = 0.0;
    for (int i = 0; i < rule->half_count; i++) {
        for (int side = -1; side <= 1; side += 2) {
            const double t = side * half_width * rule->node[i];
            const double power = y * expm1(t);
            const double term = rule->weight[i] * exp(-m * (power - t));
            sum += term;
            sum_power += term * power;
            sum_h += term * (power - t);
        }
    }
    return (struct rfade_log_gradient){
        prepared->constants[LOG_DENSITY_AT_MEAN] - m * phi + log(0.5 * width_db * sum),
        RFADE_LN_PER_DB * m * (expm1(log_y) + sum_power / sum),
        prepared->constants[LOG_MINUS_PSI] - phi - sum_h / sum,
    };
}

static struct rfade_interval_end interval_end(double m, double x_db)
{
    if (isinf(x_db)) {
        return rfade_interval_end_at_infinity(x_db > 0.0);
    }
    const struct rfade_gamma_scaled scaled = rfade_gamma_scaled(m, rfade_log_ratio(x_db));
    const struct rfade_scaled_tail *tail = &scaled.tail;
    const struct rfade_tails both = rfade_tails_from_scaled(tail, exp(tail->exponent));
    const double share = exp(log_density_at_mean(m) - tail->log_factor);
    return rfade_interval_end_from(&both, tail->is_upper, tail->is_upper ? share : -share,
                                   scaled.slope);
}

static enum rfade_status log_interval_of(const struct rfade_prepared *prepared, double low_db,
                                         double high_db, struct rfade_log_gradient *result)
{
    const double m = prepared->parameter;
    *result = rfade_log_gradient_nan();
    if (!parameter_valid(m) || !rfade_interval_valid(low_db, high_db)) {
        return RFADE_DOMAIN;
    }
    const double width_db = high_db - low_db;
    if (width_db <= RFADE_NARROW_DB) {
        /* g = m (s - exp(s)): slope and curvature are greatest at the ends */
        const double half_width = 0.5 * RFADE_LN_PER_DB * width_db;
        const double y_high = exp(rfade_log_ratio(high_db));
        const double slope =
            m * fmax(fabs(1.0 - y_high), fabs(1.0 - y_high * exp(-2.0 * half_width)));
        const struct rfade_gauss_rule *rule =
            rfade_gauss_rule_for(half_width * slope, half_width * half_width * m * y_high);
        if (rule != NULL) {
            *result = narrow_interval(prepared, 0.5 * (low_db + high_db), width_db, rule);
            return RFADE_OK;
        }
    }
    const struct rfade_interval_end low = interval_end(m, low_db);
    const struct rfade_interval_end high = interval_end(m, high_db);
    *result = rfade_interval_from_ends(&low, &high);
    return RFADE_OK;
}

static enum rfade_status log_density(double m, double x_db, struct rfade_log_gradient *result)
{
    return rfade_log_density_once(&rfade_model_nakagami, m, x_db, result);
}

static enum rfade_status log_interval(double m, double low_db, double high_db,
                                      struct rfade_log_gradient *result)
{
    return rfade_log_interval_once(&rfade_model_nakagami, m, low_db, high_db, result);
}

static enum rfade_status quantile(double m, double lower, double upper, double *x_db)
{
    return rfade_quantile_by_newton(&rfade_model_nakagami, m, lower, upper, x_db);
}

/* m is the inverse normalised variance by definition (Nakagami 1960). */
static double from_normalised_variance(double normalised_variance)
{
    if (!(normalised_variance > 0.0)) {
        return m_max;
    }
    return fmin(fmax(1.0 / normalised_variance, m_fit_min), m_max);
}

static double normalised_variance(double m)
{
    return 1.0 / m;
}

const struct rfade_model rfade_model_nakagami = {
    .id = RFADE_NAKAGAMI,
    .name = "nakagami",
    .parameter_name = "m",
    .parameter_min = m_min,
    .parameter_max = m_max,
    .fit_min = m_fit_min,
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
