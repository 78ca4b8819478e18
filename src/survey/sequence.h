/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file sequence.h  Which of a stream's sequence numbers are missing. */
#ifndef ROUTEFADE_SURVEY_SEQUENCE_H
#define ROUTEFADE_SURVEY_SEQUENCE_H

#include <stdbool.h>
#include <stdint.h>

/** More missing numbers than this between two readings are a restart. */
enum { RFADE_MOST_LOST = 1000 };

/** The numbers of one stream so far; all 0: none. */
struct rfade_sequence {
    int64_t modulus; /**< numbers go from 0 to modulus - 1; 0: they never begin anew */
    bool begun;
    int64_t last;
    int64_t unnumbered; /**< readings without a number since the last that had one */
};

/**
 * Takes the next reading in time. A number more than RFADE_MOST_LOST on, or more than half
 * the modulus on, or one that falls without a modulus, is a restart: nothing is known of what
 * was lost. The same number again is the same packet again. Readings without a number take
 * the place of missing ones.
 * @return numbers missing before this reading; RFADE_LOST_UNKNOWN if that isn't known
 */
int32_t rfade_sequence_lost(struct rfade_sequence *sequence, bool numbered, int64_t number);

#endif
