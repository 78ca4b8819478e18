/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file tally_private.h  What the files of this layer share about a tally. */
#ifndef ROUTEFADE_TALLY_PRIVATE_H
#define ROUTEFADE_TALLY_PRIVATE_H

#include <stdbool.h>

#include "routefade/tally.h"

struct rfade_tally {
    struct rfade_tally_cell *cells; /* in key order, no cell of zero weight and readings */
    size_t count;
    size_t capacity;
    int64_t weight; /* sums over the cells */
    int64_t readings;
};

/** Below, at or above 0 by (step, kind, centre, class). */
int rfade_tally_key_compare(const struct rfade_tally_key *a, const struct rfade_tally_key *b);

bool rfade_tally_key_valid(const struct rfade_tally_key *key);

#endif
