/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * The mean SNR that meets a target. Probabilities fall with the SNR; ln(-ln p) is close to a
 * straight line against dB without fading and gently bent with it, so Brent's method finds the
 * root in a few steps (R. P. Brent, Algorithms for Minimization without Derivatives, 1973).
 */
#include <gsl/gsl_errno.h>
#include <gsl/gsl_math.h>
#include <gsl/gsl_roots.h>
#include <math.h>

#include "model/model.h"
#include "predict/average.h"
#include "predict/branches.h"

static const double forward_tolerance = 1e-9;
enum { STEPS_MAX = 200 };

struct search {
    struct rfade_link link;
    const struct rfade_target *target;
    struct rfade_average average; /* of an error rate */
    enum rfade_status status;     /* of the evaluation that failed */
};

/* ln of the probability that is to be met, at a mean SNR. */
static double log_probability(struct search *search, double mean_snr_db)
{
    struct rfade_tails tails;
    struct rfade_error_rate rate;
    enum rfade_status status;
    double log_value = NAN;
    search->link.mean_snr_db = mean_snr_db;
    if (search->target->kind == RFADE_TARGET_OUTAGE) {
        status = rfade_link_outage(&search->link, search->target->threshold_db, &tails);
        log_value = tails.log_lower;
    } else {
        status = rfade_average_at(&search->average, mean_snr_db, &rate);
        log_value =
            search->target->kind == RFADE_TARGET_SYMBOL ? rate.log_symbol : rate.log_bit;
        if (search->target->kind == RFADE_TARGET_PACKET_INDEPENDENT) {
            log_value = rfade_packet_rate(search->target->packet_bits, &rate).log_bit;
        }
    }
    if (status != RFADE_OK && search->status == RFADE_OK) {
        search->status = status;
    }
    return log_value;
}

/* ln(-ln p), kept finite at p = 1 and p = 0. */
static double scale(double log_probability_value)
{
    return log(fmin(fmax(-log_probability_value, 1e-300), 1e300));
}

static double excess(double mean_snr_db, void *context)
{
    struct search *search = context;
    return scale(log(search->target->value)) - scale(log_probability(search, mean_snr_db));
}

/* Ends about the root, outward from 10 dB; RFADE_DOMAIN if there is none. */
static enum rfade_status bracket(struct search *search, double *low_db, double *high_db)
{
    const double start_db = 10.0;
    const double sign = excess(start_db, search) > 0.0 ? 1.0 : -1.0;
    double near_db = start_db;
    double reach_db = 10.0;
    for (;;) {
        const double far_db =
            fmax(fmin(start_db + sign * reach_db, RFADE_SNR_LIMIT_DB), -RFADE_SNR_LIMIT_DB);
        reach_db *= 2.0;
        const double value = excess(far_db, search) * sign;
        if (search->status != RFADE_OK) {
            return search->status;
        }
        if (value < 0.0) {
            *low_db = fmin(near_db, far_db);
            *high_db = fmax(near_db, far_db);
            return RFADE_OK;
        }
        if (fabs(far_db) >= RFADE_SNR_LIMIT_DB) {
            return RFADE_DOMAIN;
        }
        near_db = far_db;
    }
}

static enum rfade_status solve(struct search *search, double *mean_snr_db)
{
    double low_db;
    double high_db;
    gsl_function function = {excess, search};
    const enum rfade_status status = bracket(search, &low_db, &high_db);
    if (status != RFADE_OK) {
        return status;
    }
    gsl_root_fsolver *solver = gsl_root_fsolver_alloc(gsl_root_fsolver_brent);
    if (solver == NULL) {
        return RFADE_NO_MEMORY;
    }
    int result = gsl_root_fsolver_set(solver, &function, low_db, high_db);
    for (int i = 0; i < STEPS_MAX && result == GSL_SUCCESS; i++) {
        result = gsl_root_fsolver_iterate(solver);
        if (gsl_root_test_interval(gsl_root_fsolver_x_lower(solver),
                                   gsl_root_fsolver_x_upper(solver), 1e-12,
                                   1e-14) == GSL_SUCCESS) {
            break;
        }
    }
    const double root_db = gsl_root_fsolver_root(solver);
    gsl_root_fsolver_free(solver);
    const double error = log_probability(search, root_db) - log(search->target->value);
    if (search->status != RFADE_OK) {
        return search->status;
    }
    if (!(fabs(error) <= forward_tolerance)) {
        return RFADE_NO_CONVERGENCE;
    }
    *mean_snr_db = root_db;
    return RFADE_OK;
}

static enum rfade_status search_init(struct search *search, const struct rfade_link *link,
                                     const struct rfade_target *target)
{
    struct rfade_averaged what = {target->modulation, target->kind != RFADE_TARGET_SYMBOL, 0.0};
    *search = (struct search){.link = *link, .target = target, .status = RFADE_OK};
    if (!(target->value > 0.0 && target->value < 1.0)) {
        return RFADE_DOMAIN;
    }
    switch (target->kind) {
    case RFADE_TARGET_OUTAGE:
        return fabs(target->threshold_db) <= RFADE_SNR_LIMIT_DB ? rfade_link_check(link)
                                                                : RFADE_DOMAIN;
    case RFADE_TARGET_PACKET_INDEPENDENT:
    case RFADE_TARGET_PACKET_BLOCK:
        if (!(target->packet_bits >= 1.0 && target->packet_bits <= RFADE_PACKET_BITS_MAX)) {
            return RFADE_DOMAIN;
        }
        what.packet_bits =
            target->kind == RFADE_TARGET_PACKET_BLOCK ? target->packet_bits : 0.0;
        break;
    case RFADE_TARGET_BIT:
    case RFADE_TARGET_SYMBOL:
        break;
    default:
        return RFADE_DOMAIN;
    }
    return rfade_average_init(&search->average, link, &what);
}

enum rfade_status rfade_required_snr(const struct rfade_link *link,
                                     const struct rfade_target *target, double *mean_snr_db)
{
    struct search search;
    *mean_snr_db = NAN;
    enum rfade_status status = search_init(&search, link, target);
    if (status == RFADE_OK && target->kind == RFADE_TARGET_OUTAGE && link->model == NULL &&
        link->shadowing_db == 0.0) {
        /* a step: met from the threshold on */
        *mean_snr_db =
            target->threshold_db - rfade_link_log_gain(link) * RFADE_DB_PER_NEPER_OF_POWER;
        return RFADE_OK;
    }
    if (status == RFADE_OK) {
        status = solve(&search, mean_snr_db);
    }
    rfade_average_clear(&search.average);
    return status;
}

enum rfade_status rfade_fading_penalty(const struct rfade_link *link,
                                       const struct rfade_target *target, double *penalty_db)
{
    const struct rfade_link unfaded = {.branches = 1, .combining = RFADE_MAXIMAL_RATIO};
    double faded_db;
    double unfaded_db;
    *penalty_db = NAN;
    enum rfade_status status = rfade_required_snr(link, target, &faded_db);
    if (status == RFADE_OK) {
        status = rfade_required_snr(&unfaded, target, &unfaded_db);
    }
    if (status == RFADE_OK) {
        *penalty_db = faded_db - unfaded_db;
    }
    return status;
}

enum rfade_status rfade_diversity_order(const struct rfade_link *link, double *order)
{
    *order = NAN;
    const enum rfade_status status = rfade_link_check(link);
    if (status == RFADE_OK) {
        *order = link->model == NULL ? INFINITY : (double)link->branches;
        if (link->model != NULL && link->model->id == RFADE_NAKAGAMI) {
            *order *= link->parameter;
        }
    }
    return status;
}
