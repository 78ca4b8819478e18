/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <gsl/gsl_math.h>

#include "model/model.h"

struct rfade_interval_end rfade_interval_end_at_infinity(bool positive)
{
    const struct rfade_log_gradient all = {0.0, 0.0, 0.0};
    const struct rfade_log_gradient nothing = {-INFINITY, 0.0, 0.0};
    return positive ? (struct rfade_interval_end){all, nothing}
                    : (struct rfade_interval_end){nothing, all};
}

struct rfade_interval_end rfade_interval_end_from(const struct rfade_tails *tails,
                                                  bool is_upper, double d_mean_db,
                                                  double d_parameter)
{
    const double ratio = is_upper ? tails->upper / tails->lower : tails->lower / tails->upper;
    const struct rfade_log_gradient computed = {is_upper ? tails->log_upper : tails->log_lower,
                                                d_mean_db, d_parameter};
    const struct rfade_log_gradient other = {is_upper ? tails->log_lower : tails->log_upper,
                                             -ratio * d_mean_db, -ratio * d_parameter};
    return is_upper ? (struct rfade_interval_end){other, computed}
                    : (struct rfade_interval_end){computed, other};
}

/* ln(big - small) of two tails on one side. */
static struct rfade_log_gradient tail_difference(const struct rfade_log_gradient *big,
                                                 const struct rfade_log_gradient *small)
{
    const double log_share = small->value - big->value;
    const double share = exp(log_share);
    const double rest = -expm1(log_share);
    /* a share that underflows takes slopes along that may be infinite */
    const double mean_shift = share > 0.0 ? share * small->d_mean_db : 0.0;
    const double parameter_shift = share > 0.0 ? share * small->d_parameter : 0.0;
    return (struct rfade_log_gradient){
        big->value + log(rest),
        (big->d_mean_db - mean_shift) / rest,
        (big->d_parameter - parameter_shift) / rest,
    };
}

/* ln(1 - what lies outside), for an interval that holds the median. */
static struct rfade_log_gradient tail_complement(const struct rfade_log_gradient *below,
                                                 const struct rfade_log_gradient *above)
{
    const double lower = exp(below->value);
    const double upper = exp(above->value);
    const double inside = 1.0 - (lower + upper);
    return (struct rfade_log_gradient){
        log1p(-(lower + upper)),
        -(lower * below->d_mean_db + upper * above->d_mean_db) / inside,
        -(lower * below->d_parameter + upper * above->d_parameter) / inside,
    };
}

struct rfade_log_gradient rfade_interval_from_ends(const struct rfade_interval_end *low,
                                                   const struct rfade_interval_end *high)
{
    if (high->lower.value <= -M_LN2) {
        return tail_difference(&high->lower, &low->lower);
    }
    if (low->upper.value <= -M_LN2) {
        return tail_difference(&low->upper, &high->upper);
    }
    return tail_complement(&low->lower, &high->upper);
}

enum rfade_status rfade_log_density_once(const struct rfade_model *model, double parameter,
                                         double x_db, struct rfade_log_gradient *result)
{
    struct rfade_prepared prepared;
    *result = rfade_log_gradient_nan();
    const enum rfade_status status = model->prepare(parameter, &prepared);
    return status == RFADE_OK ? model->log_density_of(&prepared, x_db, result) : status;
}

enum rfade_status rfade_log_interval_once(const struct rfade_model *model, double parameter,
                                          double low_db, double high_db,
                                          struct rfade_log_gradient *result)
{
    struct rfade_prepared prepared;
    *result = rfade_log_gradient_nan();
    const enum rfade_status status = model->prepare(parameter, &prepared);
    return status == RFADE_OK ? model->log_interval_of(&prepared, low_db, high_db, result)
                              : status;
}
