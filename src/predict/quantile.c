/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Quantiles of fast fading over a lognormal local mean, by Newton's method on the small tail
 * t, kept inside a bracket. What is driven to zero is sqrt(-ln t): straight in the level where
 * the lognormal decides (ln t falls as the square of it), and smooth enough where the fast
 * fading does (a power law below, an exponential one above).
 */
#include <math.h>
#include <stdbool.h>

#include "model/tail_search.h"
#include "routefade/predict.h"

/* Where a step has become as small as the tails' own noise, more of them gain nothing. */
static const double good_enough = 1e-13;
static const double forward_tolerance = 1e-10;

struct distribution {
    const struct rfade_model *model;
    double parameter;
    double shadowing_db;
};

static enum rfade_status look_at(const struct rfade_tail_search *search, double x_db,
                                 struct rfade_tail_place *place)
{
    const struct distribution *of = search->context;
    struct rfade_tails tails;
    double log_density = NAN;
    enum rfade_status status =
        rfade_outage(of->model, of->parameter, of->shadowing_db, x_db, &tails);
    if (status == RFADE_OK) {
        status = rfade_outage_log_density(of->model, of->parameter, of->shadowing_db, x_db,
                                          &log_density);
    }
    if (status != RFADE_OK) {
        return status;
    }
    place->log_tail = search->is_upper ? tails.log_upper : tails.log_lower;
    place->slope = (search->is_upper ? -1.0 : 1.0) * exp(log_density - place->log_tail);
    return RFADE_OK;
}

/* Of g = sqrt(-ln t): (g_target - g) over g' = -slope / (2 g). */
static double newton_step(const struct rfade_tail_search *search,
                          const struct rfade_tail_place *place)
{
    const double root = sqrt(-place->log_tail);
    return 2.0 * root * (root - sqrt(-search->log_tail)) / place->slope;
}

enum rfade_status rfade_outage_quantile(const struct rfade_model *model, double parameter,
                                        double shadowing_db, double lower, double upper,
                                        double *x_db)
{
    *x_db = NAN;
    if (!(lower >= 0.0 && upper >= 0.0) ||
        !(fabs(lower + upper - 1.0) <= RFADE_TAIL_SUM_TOLERANCE)) {
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
    const struct distribution of = {model, parameter, shadowing_db};
    const struct rfade_tail_search search = {.look_at = look_at,
                                             .step = newton_step,
                                             .context = &of,
                                             .log_tail = log(is_upper ? upper : lower),
                                             .is_upper = is_upper,
                                             .limit_db = RFADE_OUTAGE_LEVEL_LIMIT_DB,
                                             .good_enough = good_enough,
                                             .forward_tolerance = forward_tolerance};
    if (isinf(search.log_tail)) {
        *x_db = is_upper ? INFINITY : -INFINITY;
        return RFADE_OK;
    }
    const double end_log_tail = is_upper ? end.log_upper : end.log_lower;
    return end_log_tail > search.log_tail ? RFADE_DOMAIN : rfade_tail_search(&search, x_db);
}
