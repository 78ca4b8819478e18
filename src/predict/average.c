/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * From the inside out: a rate at a steady SNR; its mean over fast fading, by the moment
 * generating function (maximal-ratio combining) or over the density of the combined SNR (all
 * else); the mean of that over the lognormal local mean, which is common to the branches. The
 * two outer ones are trapezoidal sums from the upper end of a distribution downward: rates rise
 * that way to a limit, so that what is left can be bounded, however many peaks the terms may
 * have.
 *
 * The sum over the shadowing may lie on any grid of ln SNR, so it lies on a fixed one: means
 * over fast fading serve for every mean SNR, as do steady rates for every local mean.
 */
#include "predict/average.h"

#include <gsl/gsl_math.h>
#include <math.h>

#include "model/model.h"
#include "predict/branches.h"
#include "predict/log_sum.h"

/* Sums end where all that is left is this far below them, in nepers. */
static const double negligible_exponent = 40.0;
static const double negligible = 4e-18;

/* Linear sums are not trusted below: their terms leave the range of doubles. */
static const double linear_range = 1e-280;

/* Of the normal distribution: what lies above is below 1e-16. */
static const double normal_end = 8.5;

/* Width of the strip about the real axis of ln SNR in which rates are benign is pi/2. */
static const double analytic_step = M_PI * M_PI / 36.0;

/* Step over the spread of a bell-shaped integrand that leaves 1e-14 of it. */
static const double bell_step = 0.78;

/* Nothing above 1e-300 comes from further out in the normal distribution. */
static const double normal_reach = 37.0;

/* A fixed grid finer than so many nepers does not pay. */
static const double grid_step_min = 0.01;

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

struct rfade_error_rate rfade_packet_rate(double bits, const struct rfade_error_rate *rate)
{
    const double error = -expm1(bits * log1p(-rate->bit));
    const double log_error = error > 1e-300 ? log(error) : rate->log_bit + log(bits);
    return (struct rfade_error_rate){error, error, log_error, log_error};
}

static struct rfade_error_rate steady(const struct rfade_average *average, double log_snr)
{
    const struct rfade_averaged *what = &average->what;
    const struct rfade_error_rate rate =
        rfade_error_rate_at(what->modulation, exp(log_snr), what->bits_only);
    return what->packet_bits > 0.0 ? rfade_packet_rate(what->packet_bits, &rate) : rate;
}

/* The local mean of one branch, and its place on the fixed grid if it has one. */
struct local_mean {
    double log_snr;
    bool on_grid;
    long index; /* in steps of the sum over the shadowing */
};

static struct rfade_error_rate steady_at_node(struct rfade_average *average,
                                              const struct local_mean *mean, size_t node)
{
    const struct rfade_snr_law *law = &average->law;
    if (!mean->on_grid) {
        return steady(average, mean->log_snr + rfade_snr_law_place(law, node));
    }
    const long ratio = lround(average->faded.step / law->step);
    const long index = mean->index * ratio + law->first - (long)node;
    struct rfade_error_rate *kept = rfade_rate_grid_place(&average->steady, index);
    if (kept == NULL) {
        return steady(average, (double)index * law->step);
    }
    if (kept->bit < 0.0) {
        *kept = steady(average, (double)index * law->step);
    }
    return *kept;
}

static enum rfade_status over_law_in_logarithms(struct rfade_average *average,
                                                const struct local_mean *mean,
                                                struct rfade_error_rate *rate)
{
    struct log_sums sums = no_sums;
    struct rfade_snr_node node;
    double log_before = INFINITY;
    for (size_t i = 0; i < TERMS_MAX; i++) {
        const enum rfade_status status = rfade_snr_law_node(&average->law, i, &node);
        if (status != RFADE_OK) {
            return status;
        }
        const struct rfade_error_rate here = steady_at_node(average, mean, i);
        add_rate(&sums, node.log_mass, &here);
        /* below the peak the density falls at least as the square root of the SNR */
        if (node.log_mass < log_before &&
            is_negligible(&sums, node.log_mass - log(average->law.step))) {
            *rate = rate_of(&sums);
            return RFADE_OK;
        }
        log_before = node.log_mass;
    }
    return RFADE_NO_CONVERGENCE;
}

static enum rfade_status over_law(struct rfade_average *average, const struct local_mean *mean,
                                  struct rfade_error_rate *rate)
{
    double bit = 0.0;
    double symbol = 0.0;
    struct rfade_snr_node node = {INFINITY, INFINITY};
    double before;
    size_t i = 0;
    do {
        before = node.mass;
        const enum rfade_status status = rfade_snr_law_node(&average->law, i, &node);
        if (status != RFADE_OK) {
            return status;
        }
        const struct rfade_error_rate here = steady_at_node(average, mean, i);
        bit += node.mass * here.bit;
        symbol += node.mass * here.symbol;
        i++;
    } while (i < TERMS_MAX && (node.mass > before ||
                               node.mass > negligible * average->law.step * fmin(bit, symbol)));
    if (!(fmin(bit, symbol) > linear_range)) {
        return over_law_in_logarithms(average, mean, rate);
    }
    *rate = (struct rfade_error_rate){bit, symbol, log(bit), log(symbol)};
    return RFADE_OK;
}

static enum rfade_status over_fading(struct rfade_average *average,
                                     const struct local_mean *mean,
                                     struct rfade_error_rate *rate)
{
    if (average->link.model == NULL) {
        *rate = steady(average, mean->log_snr + rfade_link_log_gain(&average->link));
        return RFADE_OK;
    }
    if (average->by_law) {
        return over_law(average, mean, rate);
    }
    struct rfade_mgf mgf = average->mgf;
    mgf.scale *= exp(mean->log_snr);
    *rate = rfade_error_rate_by_mgf(average->what.modulation, &mgf, average->what.bits_only);
    return RFADE_OK;
}

static enum rfade_status faded_at_index(struct rfade_average *average, long index,
                                        struct rfade_error_rate *rate)
{
    const struct local_mean mean = {(double)index * average->faded.step, true, index};
    struct rfade_error_rate *kept = rfade_rate_grid_place(&average->faded, index);
    if (kept == NULL) {
        return over_fading(average, &mean, rate);
    }
    if (kept->bit < 0.0) {
        struct rfade_error_rate made;
        const enum rfade_status status = over_fading(average, &mean, &made);
        if (status != RFADE_OK) {
            return status;
        }
        *kept = made;
    }
    *rate = *kept;
    return RFADE_OK;
}

static enum rfade_status over_shadowing(struct rfade_average *average, double log_median,
                                        struct rfade_error_rate *rate)
{
    const double sigma = average->link.shadowing_db * RFADE_LN_PER_DB;
    const double grid_step = average->faded.step;
    const double step = grid_step / sigma;
    const double log_factor = log(step) - 0.5 * log(2.0 * M_PI);
    const long first = lround((log_median + sigma * normal_end) / grid_step);
    struct log_sums sums = no_sums;
    for (long i = 0; i < TERMS_MAX; i++) {
        const double z = average->on_grid
                             ? ((double)(first - i) * grid_step - log_median) / sigma
                             : normal_end - (double)i * step;
        const struct local_mean mean = {log_median + sigma * z, false, 0};
        struct rfade_error_rate here;
        const enum rfade_status status = average->on_grid
                                             ? faded_at_index(average, first - i, &here)
                                             : over_fading(average, &mean, &here);
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

/*
 * Largest step in ln SNR that a steady rate allows: a packet's bends the sharper the longer it
 * is. Its mean over the law is as smooth as the law.
 */
static double rate_step(const struct rfade_averaged *what)
{
    return what->packet_bits > 1.0 ? analytic_step / fmax(1.0, log(what->packet_bits))
                                   : analytic_step;
}

/*
 * Step in ln SNR for the sum over the shadowing. Its terms are bells of curvature 1/sigma^2
 * from the normal density and at most `slope` from the rate, the slope of the rate's logarithm
 * where it equals that of the density, which is normal_reach/sigma at most; and no rate falls
 * faster than its fading allows far out.
 */
static double shadowing_step(const struct rfade_average *average, double sigma)
{
    const struct rfade_mgf *mgf = &average->mgf;
    const double steepest = average->link.model == NULL ? INFINITY : mgf->order + mgf->steady;
    const double slope = fmin(steepest, normal_reach / sigma);
    return bell_step / sqrt(1.0 / (sigma * sigma) + slope);
}

static void plan_steps(struct rfade_average *average)
{
    const double sigma = average->link.shadowing_db * RFADE_LN_PER_DB;
    const double needed = sigma > 0.0 ? shadowing_step(average, sigma) : INFINITY;
    double step = fmin(needed, rate_step(&average->what));
    average->on_grid = step >= grid_step_min;
    if (average->by_law) {
        rfade_snr_law_init(&average->law, &average->link, rate_step(&average->what),
                           negligible_exponent + 5.0);
        rfade_rate_grid_init(&average->steady, average->law.step);
        step = fmin(needed, fmax(rfade_snr_law_step(&average->link), average->law.step));
        average->on_grid = step >= average->law.step;
        if (average->on_grid) {
            step = average->law.step * floor(step / average->law.step);
        }
    }
    rfade_rate_grid_init(&average->faded, step);
}

enum rfade_status rfade_average_init(struct rfade_average *average,
                                     const struct rfade_link *link,
                                     const struct rfade_averaged *what)
{
    *average = (struct rfade_average){.what = *what};
    if (what->modulation == NULL) {
        return RFADE_DOMAIN;
    }
    const enum rfade_status status = rfade_link_check(link);
    if (status != RFADE_OK) {
        return status;
    }
    average->link = *link;
    average->by_law =
        link->model != NULL &&
        (what->packet_bits > 0.0 || (link->combining == RFADE_SELECTION && link->branches > 1));
    if (link->model != NULL) {
        average->mgf = rfade_mgf_of(link->model, link->parameter, link->branches);
    }
    plan_steps(average);
    return RFADE_OK;
}

void rfade_average_clear(struct rfade_average *average)
{
    rfade_snr_law_clear(&average->law);
    rfade_rate_grid_clear(&average->steady);
    rfade_rate_grid_clear(&average->faded);
}

enum rfade_status rfade_average_change(struct rfade_average *average,
                                       const struct rfade_modulation *modulation)
{
    if (modulation == NULL) {
        return RFADE_DOMAIN;
    }
    average->what.modulation = modulation;
    rfade_rate_grid_clear(&average->steady);
    rfade_rate_grid_clear(&average->faded);
    return RFADE_OK;
}

enum rfade_status rfade_average_at(struct rfade_average *average, double mean_snr_db,
                                   struct rfade_error_rate *rate)
{
    *rate = rfade_error_rate_nan();
    if (!(fabs(mean_snr_db) <= RFADE_SNR_LIMIT_DB)) {
        return RFADE_DOMAIN;
    }
    if (average->link.shadowing_db == 0.0) {
        const struct local_mean mean = {rfade_log_ratio(mean_snr_db), false, 0};
        return over_fading(average, &mean, rate);
    }
    return over_shadowing(
        average, rfade_log_ratio(mean_snr_db + rfade_link_median_db(&average->link)), rate);
}
