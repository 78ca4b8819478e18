/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file verdict.h  Whether segments meet a target outage, how sure that is, and what would
 * settle those where the drives at hand do not tell. Pure computation.
 *
 * A verdict is about one segment: of the segments that truly fail the target, at most
 * 1 - confidence are called met, and the other way round. All of a route's verdicts are right
 * together less often; rfade_verdicts_together says which of them hold jointly.
 */
#ifndef ROUTEFADE_ANALYSE_VERDICT_H
#define ROUTEFADE_ANALYSE_VERDICT_H

#include <stdbool.h>
#include <stddef.h>

#include "analyse/bounds.h"

enum rfade_verdict {
    RFADE_NOT_JUDGED, /**< nothing was predicted that could be held against the target */
    RFADE_MEETS,      /**< the upper bound of the outage is at or below the target */
    RFADE_FAILS,      /**< the lower bound is above it */
    RFADE_UNDECIDED   /**< the target lies between the bounds */
};

/** "meets", "fails", "undecided", "not judged". */
const char *rfade_verdict_name(enum rfade_verdict verdict);

/** What would settle an undecided segment if its estimate stayed where it is. */
struct rfade_judgement {
    enum rfade_verdict verdict;
    double p_meets; /**< one-sided p-value of "the outage is above the target" */
    double more_m;  /**< travel beyond that at hand; NaN: not undecided, or none is enough */
    double more_passes;           /**< the same in whole passes like those at hand */
    double calibration_needed_db; /**< where the calibration keeps it undecided: uncertainty
                                       below which it would not; NaN elsewhere */
    bool calibration_is_enough;   /**< that alone, without further passes */
};

/**
 * Judges one segment. The distance of a bound from the estimate, in ln(odds), shrinks with the
 * square root of travel, but for the calibration's part.
 * @param bounds      with one-sided bounds of `confidence`; NaN outage: not judged
 * @param travel_m    of all passes together
 * @param target      outage in (0, 1)
 */
struct rfade_judgement rfade_judge(const struct rfade_outage_bounds *bounds, double confidence,
                                   double target, double travel_m, double passes);

/**
 * Which segments meet the target with a joint confidence: the probability that any of them
 * does not is at most 1 - confidence, however they depend on each other, as by a shared
 * calibration [Holm, "A simple sequentially rejective multiple test procedure", Scandinavian
 * Journal of Statistics 6, 1979].
 * @param p         p-values "above the target" [count]; NaN: not judged, no part of the family
 * @param[out] meets  [count]
 * @return RFADE_OK | RFADE_NO_MEMORY
 */
enum rfade_status rfade_verdicts_together(const double *p, size_t count, double confidence,
                                          bool *meets);

#endif
