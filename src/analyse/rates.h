/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file rates.h  Error rates and margins of segments: what the fitted fading does to a link
 * along the local mean that was driven.
 */
#ifndef ROUTEFADE_ANALYSE_RATES_H
#define ROUTEFADE_ANALYSE_RATES_H

#include "analyse/results.h"
#include "routefade/error_rate.h"

/** Between the fading and the decision. */
struct rfade_reception {
    int branches; /**< alike and fading independently */
    enum rfade_combining combining;
    double confidence; /**< of intervals, two-sided */
};

/** A probability along one segment; NaN where nothing was fitted. */
struct rfade_segment_rate {
    double value;
    double low; /**< confidence interval */
    double high;
};

/**
 * Probabilities of the preferred model along each segment's local mean. The interval combines,
 * in the logarithm, the ends of the parameter's interval and of the mean level's [Zou and
 * Donner 2008, eq. 4].
 * @param reference_dbm  [rows] the level at which Es/N0 is 0 dB; NaN: unknown, the row's rates
 *                       are NaN
 * @param targets        [count]: which probabilities; their values are ignored
 * @param interval_count how many of them, the first ones, get an interval; at least 1
 * @param[out] rates     [rows][count]
 */
enum rfade_status rfade_results_rates(struct rfade_segment_results *results,
                                      const struct rfade_reception *reception,
                                      const double *reference_dbm,
                                      const struct rfade_target *targets, size_t count,
                                      size_t interval_count, struct rfade_segment_rate *rates,
                                      struct rfade_error *error);

/** A bit error rate without a model, and what readings beyond the receiver's ends leave open.
 */
struct rfade_observed_rate {
    double bit; /**< NaN where the bounds lie apart by more than the ratio below */
    double bit_low;
    double bit_high;
};

/** As far as bounds may lie apart for one number to stand for both. */
#define RFADE_OBSERVED_RATE_RATIO_MAX 1.1

/**
 * Bit error rates averaged over the SNR that was observed on each segment: no model of the
 * fading comes in. Logged SNR where there is one all along, else level. A reading below the
 * receiver's floor stands for any rate from that at the floor up to 1/2, one above its ceiling
 * for any from that at the ceiling down to 0.
 * @param reference_dbm  as above
 * @param modulations    [count]
 * @param[out] rates     [rows][count]; NaN where nothing was observed
 */
enum rfade_status
rfade_results_rates_observed(struct rfade_segment_results *results, const double *reference_dbm,
                             const struct rfade_modulation *const *modulations, size_t count,
                             struct rfade_observed_rate *rates, struct rfade_error *error);

/** What a segment has to spare (or, negative, lacks), dB; NaN where nothing was fitted. */
struct rfade_segment_margin {
    double required_db; /**< dB of the mean power along the segment over the reference, at which
                             the target is just met */
    double margin_db;
    double low_db; /**< confidence interval of the margin */
    double high_db;
};

/**
 * By how many dB the level could fall on each segment, its fading as it is, before a target is
 * missed. Solved on the mean along the segment and checked forward.
 * @param reference_dbm  [rows] as above
 * @param target         with the value to be met
 * @param[out] margins   [rows]
 */
enum rfade_status rfade_results_margins(struct rfade_segment_results *results,
                                        const struct rfade_reception *reception,
                                        const double *reference_dbm,
                                        const struct rfade_target *target,
                                        struct rfade_segment_margin *margins,
                                        struct rfade_error *error);

#endif
