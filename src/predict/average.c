/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * From the inside out: a rate at a steady SNR; its mean over fast fading, by the moment
 * generating function (maximal-ratio combining) or over the density of the combined SNR (all
 * else); the mean of that over the lognormal local mean, which is common to the branches. The
 * two outer ones are trapezoidal sums from the upper end of a distribution downward: rates rise
 * that way to a limit, so that what is left can be bounded, however many peaks the terms may
 * have.
 */
#include "predict/average.h"

#include <gsl/gsl_math.h>
#include <math.h>

#include "model/model.h"
#include "predict/branches.h"
#include "predict/log_sum.h"

/* Sums end where all that is left is this far below them, in nepers. */
static const double negligible_exponent = 40.0;

/* Of the normal distribution: what lies above is below 1e-16. */
static const double normal_end = 8.5;

/* Width of the strip about the real axis of ln SNR in which rates are benign is pi/2. */
static const double analytic_step = M_PI * M_PI / 36.0;

static const double shadowing_step_max = 0.4;

enum { TERMS_MAX = 10000000 };

struct log_sums {
    struct rfade_log_sum bit;
    struct rfade_log_sum symbol;
};

static const struct log_sums no_sums = {{-INFINITY, 0.0}, {-INFINITY, 0.0}};

static void add_rate(struct log_sums *sums, double log_weight,
                     const struct rfade_error_rate *rate)
{
    rfade_log_sum_add(&sums->bit, log_weight + rate->log_bit);
    rfade_log_sum_add(&sums->symbol, log_weight + rate->log_symbol);
}

/* Whether a probability no greater than this would not change the sums. */
static bool is_negligible(const struct log_sums *sums, double log_rest)
{
    return log_rest < rfade_log_sum_log(&sums->bit) - negligible_exponent &&
           log_rest < rfade_log_sum_log(&sums->symbol) - negligible_exponent;
}

static struct rfade_error_rate rate_of(const struct log_sums *sums)
{
    struct rfade_error_rate rate;
    rate.log_bit = rfade_log_sum_log(&sums->bit);
    rate.log_symbol = rfade_log_sum_log(&sums->symbol);
    rate.bit = exp(rate.log_bit);
    rate.symbol = exp(rate.log_symbol);
    return rate;
}

/* 1 - (1 - p)^bits */
static struct rfade_error_rate packet_rate(double bits, const struct rfade_error_rate *rate)
{
    const double error = -expm1(bits * log1p(-rate->bit));
    const double log_error = error > 1e-300 ? log(error) : rate->log_bit + log(bits);
    return (struct rfade_error_rate){error, error, log_error, log_error};
}

static struct rfade_error_rate steady(const struct rfade_average *average, double log_snr)
{
    const struct rfade_error_rate rate = rfade_error_rate_at(average->modulation, exp(log_snr));
    return average->packet_bits > 0.0 ? packet_rate(average->packet_bits, &rate) : rate;
}

static enum rfade_status over_law(struct rfade_average *average, double log_mean,
                                  struct rfade_error_rate *rate)
{
    struct log_sums sums = no_sums;
    double log_before = INFINITY;
    for (size_t i = 0; i < TERMS_MAX; i++) {
        double log_mass;
        const enum rfade_status status = rfade_snr_law_node(&average->law, i, &log_mass);
        if (status != RFADE_OK) {
            return status;
        }
        const double y = average->law.first - (double)i * average->law.step;
        const struct rfade_error_rate here = steady(average, log_mean + y);
        add_rate(&sums, log_mass, &here);
        /* below the peak the density falls at least as the square root of the SNR */
        if (log_mass < log_before && is_negligible(&sums, log_mass - log(average->law.step))) {
            *rate = rate_of(&sums);
            return RFADE_OK;
        }
        log_before = log_mass;
    }
    return RFADE_NO_CONVERGENCE;
}

static enum rfade_status over_fading(struct rfade_average *average, double log_mean,
                                     struct rfade_error_rate *rate)
{
    const struct rfade_link *link = &average->link;
    if (link->model == NULL) {
        *rate = steady(average, log_mean + rfade_link_log_gain(link));
        return RFADE_OK;
    }
    if (average->packet_bits > 0.0 ||
        (link->combining == RFADE_SELECTION && link->branches > 1)) {
        return over_law(average, log_mean, rate);
    }
    struct rfade_mgf mgf = average->mgf;
    mgf.scale *= exp(log_mean);
    *rate = rfade_error_rate_by_mgf(average->modulation, &mgf);
    return RFADE_OK;
}

/* Largest step in ln SNR that a rate allows: a packet's bends the sharper the longer it is. */
static double rate_step(const struct rfade_average *average)
{
    return analytic_step / fmax(1.0, log(average->packet_bits));
}

static enum rfade_status over_shadowing(struct rfade_average *average, double log_median,
                                        struct rfade_error_rate *rate)
{
    const double sigma = average->link.shadowing_db * RFADE_LN_PER_DB;
    const double step = fmin(shadowing_step_max, rate_step(average) / sigma);
    const double log_factor = log(step) - 0.5 * log(2.0 * M_PI);
    struct log_sums sums = no_sums;
    for (int i = 0; i < TERMS_MAX; i++) {
        const double z = normal_end - i * step;
        struct rfade_error_rate here;
        const enum rfade_status status = over_fading(average, log_median + sigma * z, &here);
        if (status != RFADE_OK) {
            return status;
        }
        add_rate(&sums, log_factor - 0.5 * z * z, &here);
        if (z < -1.0 && is_negligible(&sums, -0.5 * z * z)) {
            *rate = rate_of(&sums);
            return RFADE_OK;
        }
    }
    return RFADE_NO_CONVERGENCE;
}

enum rfade_status rfade_average_init(struct rfade_average *average,
                                     const struct rfade_link *link,
                                     const struct rfade_modulation *modulation,
                                     double packet_bits)
{
    *average = (struct rfade_average){.modulation = modulation, .packet_bits = packet_bits};
    if (modulation == NULL) {
        return RFADE_DOMAIN;
    }
    const enum rfade_status status = rfade_link_check(link);
    if (status != RFADE_OK) {
        return status;
    }
    average->link = *link;
    if (link->model != NULL) {
        average->mgf = rfade_mgf_of(link->model, link->parameter, link->branches);
        rfade_snr_law_init(&average->law, link, rate_step(average), negligible_exponent);
    }
    return RFADE_OK;
}

void rfade_average_clear(struct rfade_average *average)
{
    rfade_snr_law_clear(&average->law);
}

enum rfade_status rfade_average_at(struct rfade_average *average, double mean_snr_db,
                                   struct rfade_error_rate *rate)
{
    *rate = rfade_error_rate_nan();
    if (!(fabs(mean_snr_db) <= RFADE_SNR_LIMIT_DB)) {
        return RFADE_DOMAIN;
    }
    if (average->link.shadowing_db == 0.0) {
        return over_fading(average, rfade_log_ratio(mean_snr_db), rate);
    }
    return over_shadowing(
        average, rfade_log_ratio(mean_snr_db + rfade_link_median_db(&average->link)), rate);
}
