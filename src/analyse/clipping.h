/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file clipping.h  Floor and ceiling of a receiver, found where readings pile up. */
#ifndef ROUTEFADE_ANALYSE_CLIPPING_H
#define ROUTEFADE_ANALYSE_CLIPPING_H

#include <stddef.h>

#include "routefade/separate.h"
#include "survey/read.h"

/** Levels at which readings pile up, as logged; RFADE_NO_FLOOR_CDB, RFADE_NO_CEILING_CDB. */
struct rfade_clipping {
    int32_t floor_cdb;
    int32_t ceiling_cdb;
};

/**
 * A receiver that clips reports its lowest (highest) level for all that lies beyond. What a
 * distribution without clipping would have there follows from the next four levels: counts
 * of levels in dB under Rayleigh, Rice, Nakagami and lognormal fading are log-concave, so
 * that towards the tail they fall at least as fast as they do before it. With a the count of
 * the next two levels, b that of the two after, r = sqrt(a/b), at most a r^2/(1 + r) are
 * expected. It is a pile-up if
 * - at least 20 readings have the extreme level, in at least 10 runs, the longest run (the
 *   vehicle may have stood there) not counted;
 * - they are more than twice those expected, and by more than 4 standard errors of count and
 *   expectation together, each run counted as one observation;
 * - at least 5 other levels were read: a level that hardly moves is no pile-up.
 * @param readings  [count] with levels, in time order
 */
struct rfade_clipping rfade_find_clipping(const struct rfade_survey_reading *readings,
                                          size_t count, int32_t step_cdb);

#endif
