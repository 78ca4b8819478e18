/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file blocks_private.h  The numbers of a rfade_blocks in a fixed order. */
#ifndef ROUTEFADE_TALLY_BLOCKS_PRIVATE_H
#define ROUTEFADE_TALLY_BLOCKS_PRIVATE_H

#include "routefade/tally.h"

enum { RFADE_BLOCKS_NUMBERS = 1 + RFADE_COARSE_BINS * (2 + 3 * RFADE_COARSE_BINS) };

/** blocks, total, square, same, next, second, each in memory order. index < the count above. */
int64_t *rfade_blocks_number(struct rfade_blocks *blocks, size_t index);

#endif
