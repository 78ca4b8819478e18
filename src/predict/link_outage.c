/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Outage of combined branches over a lognormal local mean: trapezoidal sums as in outage.c, of
 * the narrower distribution's density times the tail of the other.
 */
#include <gsl/gsl_math.h>
#include <math.h>
#include <stdbool.h>
#include <stddef.h>

#include "model/model.h"
#include "predict/branches.h"
#include "predict/log_sum.h"
#include "predict/snr_law.h"
#include "routefade/predict.h"
#include "special/tails.h"

static const double negligible_exponent = 40.0;

/* Of the normal distribution: beyond, its density is 0. */
static const double normal_end = 40.0;

/* Step over the narrower distribution's spread: short, since deep tails are wanted. */
static const double shadowing_step_max = 0.25;
static const double law_step_share = 0.6;

/* The law's density at its upper end: below the range of doubles. */
static const double law_depth = 800.0;

enum { TERMS_MAX = 10000000 };

static double tail_of(const struct rfade_tails *tails, bool is_upper)
{
    return is_upper ? tails->log_upper : tails->log_lower;
}

/* Sum over the law of its mass times the shadowing's tail. */
static enum rfade_status over_law(struct rfade_snr_law *law, double x, bool is_upper,
                                  double *log_tail)
{
    const double sigma = law->link.shadowing_db * RFADE_LN_PER_DB;
    struct rfade_log_sum sum = rfade_log_sum_empty();
    double log_before = INFINITY;
    for (size_t i = 0; i < TERMS_MAX; i++) {
        struct rfade_snr_node node;
        struct rfade_tails tails;
        const enum rfade_status status = rfade_snr_law_node(law, i, &node);
        if (status != RFADE_OK) {
            return status;
        }
        const double y = rfade_snr_law_place(law, i);
        (void)rfade_normal_tails((x - y) / sigma, &tails);
        const double log_term = node.log_mass + tail_of(&tails, is_upper);
        rfade_log_sum_add(&sum, log_term);
        const double log_rest = is_upper ? log_term : node.log_mass;
        if (node.log_mass < log_before &&
            log_rest - log(law->step) < rfade_log_sum_log(&sum) - negligible_exponent) {
            *log_tail = rfade_log_sum_log(&sum);
            return RFADE_OK;
        }
        log_before = node.log_mass;
    }
    return RFADE_NO_CONVERGENCE;
}

/* Sum over the shadowing of its mass times the law's tail, from the side where that is least.
 */
static enum rfade_status over_shadowing(const struct rfade_link *link, double step, double x,
                                        bool is_upper, double *log_tail)
{
    const double sigma = link->shadowing_db * RFADE_LN_PER_DB;
    const double sign = is_upper ? -1.0 : 1.0;
    struct rfade_log_sum sum = rfade_log_sum_empty();
    const int terms = (int)(2.0 * normal_end / step);
    for (int i = 0; i < terms; i++) {
        const double z = normal_end - i * step;
        struct rfade_tails tails;
        const double level = x - sign * sigma * z;
        const enum rfade_status status =
            rfade_branches_tails(link, level * RFADE_DB_PER_NEPER_OF_POWER, &tails);
        if (status != RFADE_OK) {
            return status;
        }
        rfade_log_sum_add(&sum, tail_of(&tails, is_upper) - 0.5 * z * z);
        if (z < -1.0 && -0.5 * z * z < rfade_log_sum_log(&sum) - negligible_exponent) {
            break;
        }
    }
    *log_tail = rfade_log_sum_log(&sum) + log(step) - 0.5 * log(2.0 * M_PI);
    return RFADE_OK;
}

static enum rfade_status one_tail(const struct rfade_link *link, double x, bool is_upper,
                                  double *log_tail)
{
    const double sigma = link->shadowing_db * RFADE_LN_PER_DB;
    struct rfade_snr_law law;
    rfade_snr_law_init(
        &law, link, fmin(shadowing_step_max * sigma, law_step_share * rfade_snr_law_step(link)),
        law_depth);
    enum rfade_status status;
    if (sigma * shadowing_step_max < law.step * (1.0 + 1e-12)) {
        status = over_shadowing(link, shadowing_step_max, x, is_upper, log_tail);
    } else {
        status = over_law(&law, x, is_upper, log_tail);
    }
    rfade_snr_law_clear(&law);
    return status;
}

/* x over the median local mean, nepers. The tail that proves the large one is not kept. */
static enum rfade_status composite(const struct rfade_link *link, double x,
                                   struct rfade_tails *tails)
{
    bool is_upper = x > rfade_link_log_gain(link);
    for (int attempt = 0; attempt < 2; attempt++) {
        double log_tail = NAN;
        const enum rfade_status status = one_tail(link, x, is_upper, &log_tail);
        if (status != RFADE_OK) {
            return status;
        }
        if (log_tail <= -M_LN2 || attempt == 1) {
            *tails = rfade_tails_from(exp(log_tail), log_tail, is_upper);
            return RFADE_OK;
        }
        is_upper = !is_upper;
    }
    return RFADE_NO_CONVERGENCE;
}

static enum rfade_status steady_tails(const struct rfade_link *link, double x_db,
                                      struct rfade_tails *tails)
{
    x_db -= rfade_link_log_gain(link) * RFADE_DB_PER_NEPER_OF_POWER;
    if (link->shadowing_db > 0.0) {
        return rfade_normal_tails(x_db / link->shadowing_db, tails);
    }
    /* a steady SNR at the threshold is not below it */
    *tails = x_db > 0.0 ? (struct rfade_tails){1.0, 0.0, 0.0, -INFINITY}
                        : (struct rfade_tails){0.0, 1.0, -INFINITY, 0.0};
    return RFADE_OK;
}

enum rfade_status rfade_link_outage(const struct rfade_link *link, double threshold_db,
                                    struct rfade_tails *tails)
{
    *tails = rfade_tails_nan();
    const enum rfade_status status = rfade_link_check(link);
    if (status != RFADE_OK || !(fabs(threshold_db) <= RFADE_SNR_LIMIT_DB) ||
        !(fabs(link->mean_snr_db) <= RFADE_SNR_LIMIT_DB)) {
        return RFADE_DOMAIN;
    }
    const double x_db = threshold_db - link->mean_snr_db - rfade_link_median_db(link);
    if (link->model == NULL) {
        return steady_tails(link, x_db, tails);
    }
    if (link->branches == 1) {
        return rfade_outage(link->model, link->parameter, link->shadowing_db, x_db, tails);
    }
    if (link->shadowing_db == 0.0) {
        return rfade_branches_tails(link, x_db, tails);
    }
    return composite(link, rfade_log_ratio(x_db), tails);
}
