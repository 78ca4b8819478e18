/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * The sum of gamma distributed SNRs is gamma distributed, that of Rice distributed ones
 * (powers) noncentral chi-square with two degrees of freedom a branch; the greatest of them has
 * the branch's distribution function to the power of their number (Simon and Alouini 2005,
 * chapter 9).
 */
#include "predict/branches.h"

#include <gsl/gsl_math.h>
#include <math.h>
#include <stddef.h>

#include "model/model.h"
#include "routefade/predict.h"
#include "special/gamma_tails.h"
#include "special/marcum_order.h"
#include "special/tails.h"

static const double shadowing_max_db = 30.0;

enum rfade_status rfade_link_check(const struct rfade_link *link)
{
    struct rfade_tails probe;
    if (link->branches < 1 || link->branches > RFADE_BRANCHES_MAX ||
        (link->combining != RFADE_MAXIMAL_RATIO && link->combining != RFADE_SELECTION) ||
        !(link->shadowing_db >= 0.0 && link->shadowing_db <= shadowing_max_db)) {
        return RFADE_DOMAIN;
    }
    if (link->model == NULL) {
        return RFADE_OK;
    }
    if (link->model->id == RFADE_LOGNORMAL ||
        (link->model->parameter_name != NULL &&
         !(link->parameter >= link->model->parameter_min &&
           link->parameter <= link->model->parameter_max))) {
        return RFADE_DOMAIN;
    }
    return link->model->tails(link->parameter, 0.0, &probe);
}

/* Shape of the gamma law of the sum. */
static double sum_shape(const struct rfade_link *link)
{
    return link->model->id == RFADE_NAKAGAMI ? link->branches * link->parameter
                                             : link->branches;
}

static bool is_rice(const struct rfade_link *link)
{
    return link->model->id == RFADE_RICE && link->parameter > 0.0;
}

/* Of the sum of Rice branches: a, b and b - a of Marcum's function. */
struct rice_point {
    double a;
    double b;
    double offset;
};

static struct rice_point rice_point(const struct rfade_link *link, double log_y)
{
    const double k = link->parameter;
    struct rice_point point;
    point.a = sqrt(2.0 * link->branches * k);
    point.b = sqrt(2.0 * link->branches * (1.0 + k) * exp(log_y));
    point.offset =
        2.0 * link->branches * fma(k, expm1(log_y), exp(log_y)) / (point.a + point.b);
    return point;
}

/* Of the sum over its mean. */
static double log_mean_ratio(const struct rfade_link *link, double x_db)
{
    return rfade_log_ratio(x_db) - log(link->branches);
}

static struct rfade_tails sum_tails(const struct rfade_link *link, double x_db)
{
    const double log_y = log_mean_ratio(link, x_db);
    if (!is_rice(link) || isinf(x_db)) {
        return rfade_gamma_tails_at(sum_shape(link), log_y);
    }
    const struct rice_point point = rice_point(link, log_y);
    return rfade_marcum_order_tails(link->branches, point.a, point.b, point.offset);
}

static double sum_log_density(const struct rfade_link *link, double x_db)
{
    const double log_y = log_mean_ratio(link, x_db);
    if (is_rice(link)) {
        const struct rice_point point = rice_point(link, log_y);
        return rfade_marcum_order_log_density(link->branches, point.a, point.b, point.offset);
    }
    const double shape = sum_shape(link);
    return 0.5 * log(shape / (2.0 * M_PI)) - rfade_log_gamma_star(shape) -
           shape * rfade_exp_excess(log_y);
}

/* Of the greatest: lower^branches. */
static struct rfade_tails greatest_tails(const struct rfade_tails *one, int branches)
{
    struct rfade_tails tails;
    tails.log_lower = branches * one->log_lower;
    tails.lower = exp(tails.log_lower);
    tails.upper = -expm1(tails.log_lower);
    tails.log_upper = tails.upper > 1e-290 ? log(tails.upper) : one->log_upper + log(branches);
    return tails;
}

enum rfade_status rfade_branches_tails(const struct rfade_link *link, double x_db,
                                       struct rfade_tails *tails)
{
    if (link->branches > 1 && link->combining == RFADE_MAXIMAL_RATIO) {
        if (!rfade_level_valid(x_db)) {
            *tails = rfade_tails_nan();
            return RFADE_DOMAIN;
        }
        *tails = sum_tails(link, x_db);
        return RFADE_OK;
    }
    const enum rfade_status status = link->model->tails(link->parameter, x_db, tails);
    if (status == RFADE_OK && link->branches > 1) {
        *tails = greatest_tails(tails, link->branches);
    }
    return status;
}

double rfade_branches_log_density(const struct rfade_link *link, double x_db)
{
    if (!rfade_level_valid(x_db) || isinf(x_db)) {
        return -INFINITY;
    }
    if (link->branches > 1 && link->combining == RFADE_MAXIMAL_RATIO) {
        return sum_log_density(link, x_db);
    }
    struct rfade_log_gradient density;
    struct rfade_tails tails = {0.0, 0.0, 0.0, 0.0};
    (void)link->model->log_density(link->parameter, x_db, &density);
    if (link->branches > 1) {
        (void)link->model->tails(link->parameter, x_db, &tails);
    }
    /* per dB to per neper */
    return density.value + log(RFADE_DB_PER_NEPER_OF_POWER) + log(link->branches) +
           (link->branches - 1) * tails.log_lower;
}

double rfade_branches_spread(const struct rfade_link *link)
{
    const int added = link->combining == RFADE_MAXIMAL_RATIO ? link->branches : 1;
    return fmin(sqrt(link->model->normalised_variance(link->parameter) / added), 1.0);
}

double rfade_link_median_db(const struct rfade_link *link)
{
    return -rfade_lognormal_mean_over_median_db(link->shadowing_db);
}

double rfade_link_log_gain(const struct rfade_link *link)
{
    return link->combining == RFADE_MAXIMAL_RATIO ? log(link->branches) : 0.0;
}
