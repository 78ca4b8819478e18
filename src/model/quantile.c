/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Quantiles by Newton's method on the small tail t, kept inside a bracket. The unknown is
 * the level in dB; what is driven to zero is nearly straight in it: ln t below (a power law
 * in power) and ln(-ln t) above (an exponential law).
 */
#include <float.h>

#include "model/model.h"
#include "model/tail_search.h"

struct distribution {
    const struct rfade_model *model;
    double parameter;
};

static enum rfade_status look_at(const struct rfade_tail_search *search, double x_db,
                                 struct rfade_tail_place *place)
{
    const struct distribution *of = search->context;
    struct rfade_tails tails;
    struct rfade_log_gradient density;
    enum rfade_status status = of->model->tails(of->parameter, x_db, &tails);
    if (status == RFADE_OK) {
        status = of->model->log_density(of->parameter, x_db, &density);
    }
    if (status != RFADE_OK) {
        return status;
    }
    place->log_tail = search->is_upper ? tails.log_upper : tails.log_lower;
    place->slope = (search->is_upper ? -1.0 : 1.0) * exp(density.value - place->log_tail);
    return RFADE_OK;
}

static double newton_step(const struct rfade_tail_search *search,
                          const struct rfade_tail_place *place)
{
    if (!search->is_upper) {
        return -(place->log_tail - search->log_tail) / place->slope;
    }
    /* d ln(-ln t)/dx = slope / ln t */
    return -log(place->log_tail / search->log_tail) * place->log_tail / place->slope;
}

enum rfade_status rfade_quantile_by_newton(const struct rfade_model *model, double parameter,
                                           double lower, double upper, double *x_db)
{
    *x_db = NAN;
    if (!(lower >= 0.0 && upper >= 0.0) ||
        !(fabs(lower + upper - 1.0) <= RFADE_TAIL_SUM_TOLERANCE)) {
        return RFADE_DOMAIN;
    }
    const bool is_upper = upper < lower;
    const struct distribution of = {model, parameter};
    const struct rfade_tail_search search = {.look_at = look_at,
                                             .step = newton_step,
                                             .context = &of,
                                             .log_tail = log(is_upper ? upper : lower),
                                             .is_upper = is_upper,
                                             .limit_db = RFADE_LEVEL_LIMIT_DB,
                                             .good_enough = DBL_EPSILON,
                                             .forward_tolerance = 1e-11};
    struct rfade_tail_place end = {NAN, NAN};
    enum rfade_status status =
        look_at(&search, is_upper ? search.limit_db : -search.limit_db, &end);
    if (status != RFADE_OK) {
        return status;
    }
    if (isinf(search.log_tail)) {
        *x_db = is_upper ? INFINITY : -INFINITY;
        return RFADE_OK;
    }
    return end.log_tail > search.log_tail ? RFADE_DOMAIN : rfade_tail_search(&search, x_db);
}
