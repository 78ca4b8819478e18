/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file rate_grid.h  Rates at equally spaced logarithms of the SNR, kept once they are known.
 */
#ifndef ROUTEFADE_PREDICT_RATE_GRID_H
#define ROUTEFADE_PREDICT_RATE_GRID_H

#include "routefade/error_rate.h"

struct rfade_rate_grid {
    double step;                    /**< nepers: index i is at i step */
    long reach;                     /**< indices from -reach to reach are kept */
    struct rfade_error_rate *rates; /**< owned; a bit rate of -1: not known yet */
};

/** Nothing is allocated yet. */
void rfade_rate_grid_init(struct rfade_rate_grid *grid, double step);

void rfade_rate_grid_clear(struct rfade_rate_grid *grid);

/** The place of an index, to look at and to fill; NULL beyond the reach or without memory. */
struct rfade_error_rate *rfade_rate_grid_place(struct rfade_rate_grid *grid, long index);

#endif
