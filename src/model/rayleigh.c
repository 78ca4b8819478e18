/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Rayleigh fading: power over its mean is exponential, P(y <= x) = 1 - exp(-x)
 * (Lord Rayleigh 1880; Rec. ITU-R P.1057). Closed forms throughout.
 */
#include <gsl/gsl_math.h>
#include <stddef.h>

#include "model/model.h"
#include "special/tails.h"

static enum rfade_status tails(double parameter, double x_db, struct rfade_tails *result)
{
    (void)parameter;
    if (!rfade_level_valid(x_db)) {
        *result = rfade_tails_nan();
        return RFADE_DOMAIN;
    }
    const double y = exp(rfade_log_ratio(x_db));
    *result = y > M_LN2 ? rfade_tails_from(exp(-y), -y, true)
                        : rfade_tails_from(-expm1(-y), log(-expm1(-y)), false);
    return RFADE_OK;
}

static enum rfade_status log_density_of(const struct rfade_prepared *prepared, double x_db,
                                        struct rfade_log_gradient *result)
{
    (void)prepared;
    *result = rfade_log_gradient_nan();
    if (!rfade_level_valid(x_db) || isinf(x_db)) {
        return RFADE_DOMAIN;
    }
    const double log_y = rfade_log_ratio(x_db);
    const double excess = expm1(log_y); /* y - 1 */
    result->value = log(RFADE_LN_PER_DB) - 1.0 + (log_y - excess);
    result->d_mean_db = RFADE_LN_PER_DB * excess;
    result->d_parameter = 0.0;
    return RFADE_OK;
}

static enum rfade_status prepare(double parameter, struct rfade_prepared *prepared)
{
    *prepared = (struct rfade_prepared){.parameter = parameter};
    return RFADE_OK;
}

/* exp(-y) - exp(-(y + d)) = exp(-y) (1 - exp(-d)), d the width in power. */
static enum rfade_status log_interval_of(const struct rfade_prepared *prepared, double low_db,
                                         double high_db, struct rfade_log_gradient *result)
{
    (void)prepared;
    *result = rfade_log_gradient_nan();
    if (!rfade_interval_valid(low_db, high_db)) {
        return RFADE_DOMAIN;
    }
    const double y = exp(rfade_log_ratio(low_db));
    const double d = isinf(low_db) ? exp(rfade_log_ratio(high_db))
                                   : y * expm1(rfade_log_ratio(high_db - low_db));
    /* d/expm1(d) has the limits 1 and 0, which the quotient reaches as 0/0 and inf/inf. */
    const double quotient = d > 700.0 ? 0.0 : d > 0.0 ? d / expm1(d) : 1.0;
    const double log_rest = d > M_LN2 ? log1p(-exp(-d)) : log(-expm1(-d));
    result->value = log_rest - y;
    result->d_mean_db = RFADE_LN_PER_DB * (y - quotient);
    result->d_parameter = 0.0;
    return RFADE_OK;
}

static enum rfade_status log_density(double parameter, double x_db,
                                     struct rfade_log_gradient *result)
{
    return rfade_log_density_once(&rfade_model_rayleigh, parameter, x_db, result);
}

static enum rfade_status log_interval(double parameter, double low_db, double high_db,
                                      struct rfade_log_gradient *result)
{
    return rfade_log_interval_once(&rfade_model_rayleigh, parameter, low_db, high_db, result);
}

static enum rfade_status quantile(double parameter, double lower, double upper, double *x_db)
{
    return rfade_quantile_by_newton(&rfade_model_rayleigh, parameter, lower, upper, x_db);
}

static double normalised_variance(double parameter)
{
    (void)parameter;
    return 1.0;
}

const struct rfade_model rfade_model_rayleigh = {
    .id = RFADE_RAYLEIGH,
    .name = "rayleigh",
    .parameter_name = NULL,
    .parameter_min = 0.0,
    .parameter_max = 0.0,
    .fit_min = 0.0,
    .tails = tails,
    .log_density = log_density,
    .log_interval = log_interval,
    .prepare = prepare,
    .log_density_of = log_density_of,
    .log_interval_of = log_interval_of,
    .quantile = quantile,
    .from_normalised_variance = NULL,
    .normalised_variance = normalised_variance,
};
