/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Quantiles of fast fading over a lognormal local mean, by Newton's method on the small tail
 * t, kept inside a bracket. What is driven to zero is sqrt(-ln t): straight in the level where
 * the lognormal decides (ln t falls as the square of it), and smooth enough where the fast
 * fading does (a power law below, an exponential one above).
 */
#include <float.h>
#include <math.h>
#include <stdbool.h>

#include "routefade/predict.h"

static const double sum_tolerance = 1e-9;
static const double forward_tolerance = 1e-10;
/* Where a step has become as small as the tails' own noise, more of them gain nothing. */
static const double good_enough = 1e-13;
enum { ITERATIONS_MAX = 200 };

struct target {
    const struct rfade_model *model;
    double parameter;
    double shadowing_db;
    double log_tail;
    bool is_upper;
};

struct place {
    double log_tail;
    double slope; /* d ln tail / d level, per dB */
};

static enum rfade_status look_at(const struct target *target, double x_db, struct place *place)
{
    struct rfade_tails tails;
    double log_density = NAN;
    enum rfade_status status =
        rfade_outage(target->model, target->parameter, target->shadowing_db, x_db, &tails);
    if (status == RFADE_OK) {
        status = rfade_outage_log_density(target->model, target->parameter,
                                          target->shadowing_db, x_db, &log_density);
    }
    if (status != RFADE_OK) {
        return status;
    }
    place->log_tail = target->is_upper ? tails.log_upper : tails.log_lower;
    place->slope = (target->is_upper ? -1.0 : 1.0) * exp(log_density - place->log_tail);
    return RFADE_OK;
}

/* Of g = sqrt(-ln t): (g_target - g) over g' = -slope / (2 g). */
static double newton_step(const struct target *target, const struct place *place)
{
    const double root = sqrt(-place->log_tail);
    return 2.0 * root * (root - sqrt(-target->log_tail)) / place->slope;
}

static enum rfade_status solve(const struct target *target, double *x_db)
{
    double low = -RFADE_OUTAGE_LEVEL_LIMIT_DB;
    double high = RFADE_OUTAGE_LEVEL_LIMIT_DB;
    double x = 0.0;
    for (int i = 0; i < ITERATIONS_MAX; i++) {
        struct place place;
        const enum rfade_status status = look_at(target, x, &place);
        if (status != RFADE_OK) {
            return status;
        }
        const double error = place.log_tail - target->log_tail;
        if ((error > 0.0) == target->is_upper) {
            low = x;
        } else {
            high = x;
        }
        const double step = newton_step(target, &place);
        const double resolution = DBL_EPSILON * fabs(x);
        if (fabs(error) <= good_enough || fabs(step) <= 0.5 * resolution ||
            high - low <= 2.0 * resolution) {
            *x_db = x;
            const double allowed = forward_tolerance + 2.0 * resolution * fabs(place.slope);
            return fabs(error) <= allowed ? RFADE_OK : RFADE_NO_CONVERGENCE;
        }
        const double next = x + step;
        x = next > low && next < high ? next : 0.5 * (low + high);
    }
    return RFADE_NO_CONVERGENCE;
}

enum rfade_status rfade_outage_quantile(const struct rfade_model *model, double parameter,
                                        double shadowing_db, double lower, double upper,
                                        double *x_db)
{
    *x_db = NAN;
    if (!(lower >= 0.0 && upper >= 0.0) || !(fabs(lower + upper - 1.0) <= sum_tolerance)) {
        return RFADE_DOMAIN;
    }
    const bool is_upper = upper < lower;
    const double end_db = is_upper ? RFADE_OUTAGE_LEVEL_LIMIT_DB : -RFADE_OUTAGE_LEVEL_LIMIT_DB;
    struct rfade_tails end;
    enum rfade_status status = rfade_outage(model, parameter, shadowing_db, end_db, &end);
    if (status != RFADE_OK) {
        return status;
    }
    if (shadowing_db == 0.0) {
        return model->quantile(parameter, lower, upper, x_db);
    }
    const struct target target = {model, parameter, shadowing_db, log(is_upper ? upper : lower),
                                  is_upper};
    if (isinf(target.log_tail)) {
        *x_db = is_upper ? INFINITY : -INFINITY;
        return RFADE_OK;
    }
    if ((is_upper ? end.log_upper : end.log_lower) > target.log_tail) {
        return RFADE_DOMAIN;
    }
    double x = NAN;
    status = solve(&target, &x);
    *x_db = status == RFADE_OK ? x : NAN;
    return status;
}
