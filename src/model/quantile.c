/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Quantiles by Newton's method on the small tail t, kept inside a bracket. The unknown is
 * the level in dB; what is driven to zero is nearly straight in it: ln t below (a power law
 * in power) and ln(-ln t) above (an exponential law).
 */
#include <float.h>

#include "model/model.h"

static const double sum_tolerance = 1e-9;
static const double forward_tolerance = 1e-11;
enum { ITERATIONS_MAX = 200 };

struct target {
    const struct rfade_model *model;
    double parameter;
    double log_tail;
    bool is_upper;
};

/* At x_db: ln of the tail over its target, and d ln tail / d x_db. */
static enum rfade_status tail_error(const struct target *target, double x_db, double *error,
                                    double *slope, double *log_tail)
{
    struct rfade_tails tails;
    struct rfade_log_gradient density;
    enum rfade_status status = target->model->tails(target->parameter, x_db, &tails);
    if (status == RFADE_OK) {
        status = target->model->log_density(target->parameter, x_db, &density);
    }
    if (status != RFADE_OK) {
        return status;
    }
    *log_tail = target->is_upper ? tails.log_upper : tails.log_lower;
    *error = *log_tail - target->log_tail;
    *slope = (target->is_upper ? -1.0 : 1.0) * exp(density.value - *log_tail);
    return RFADE_OK;
}

static double newton_step(const struct target *target, double error, double slope,
                          double log_tail)
{
    if (!target->is_upper) {
        return -error / slope;
    }
    /* d ln(-ln t)/dx = slope / ln t */
    return -log(log_tail / target->log_tail) * log_tail / slope;
}

static enum rfade_status solve(const struct target *target, double *x_db)
{
    double low = -RFADE_LEVEL_LIMIT_DB;
    double high = RFADE_LEVEL_LIMIT_DB;
    double x = 0.0;
    for (int i = 0; i < ITERATIONS_MAX; i++) {
        double error = NAN;
        double slope = NAN;
        double log_tail = NAN;
        const enum rfade_status status = tail_error(target, x, &error, &slope, &log_tail);
        if (status != RFADE_OK) {
            return status;
        }
        if ((error > 0.0) == target->is_upper) {
            low = x;
        } else {
            high = x;
        }
        const double step = newton_step(target, error, slope, log_tail);
        const double resolution = DBL_EPSILON * fabs(x);
        if (fabs(error) <= DBL_EPSILON || fabs(step) <= 0.5 * resolution ||
            high - low <= 2.0 * resolution) {
            const double allowed = forward_tolerance + 2.0 * resolution * fabs(slope);
            *x_db = x;
            return fabs(error) <= allowed ? RFADE_OK : RFADE_NO_CONVERGENCE;
        }
        const double next = x + step;
        x = next > low && next < high ? next : 0.5 * (low + high);
    }
    return RFADE_NO_CONVERGENCE;
}

enum rfade_status rfade_quantile_by_newton(const struct rfade_model *model, double parameter,
                                           double lower, double upper, double *x_db)
{
    *x_db = NAN;
    if (!(lower >= 0.0 && upper >= 0.0) || !(fabs(lower + upper - 1.0) <= sum_tolerance)) {
        return RFADE_DOMAIN;
    }
    const bool is_upper = upper < lower;
    const struct target target = {model, parameter, log(is_upper ? upper : lower), is_upper};
    double end_error = NAN;
    double slope = NAN;
    double log_tail = NAN;
    const double end_db = is_upper ? RFADE_LEVEL_LIMIT_DB : -RFADE_LEVEL_LIMIT_DB;
    enum rfade_status status = tail_error(&target, end_db, &end_error, &slope, &log_tail);
    if (status != RFADE_OK) {
        return status;
    }
    if (isinf(target.log_tail)) {
        *x_db = is_upper ? INFINITY : -INFINITY;
        return RFADE_OK;
    }
    if (end_error > 0.0) {
        return RFADE_DOMAIN;
    }
    double x = NAN;
    status = solve(&target, &x);
    if (status == RFADE_OK) {
        *x_db = x;
    }
    return status;
}
