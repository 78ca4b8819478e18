/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file bins.h  Bins: checks, moments and a shorter form for speed. */
#ifndef ROUTEFADE_ESTIMATE_BINS_H
#define ROUTEFADE_ESTIMATE_BINS_H

#include <stdbool.h>

#include "routefade/estimate.h"

struct rfade_bin_moments {
    double readings;
    double uncensored;
    double mean_power_db;
    double mean_of_db;
    double normalised_variance;
    double step_min_db; /**< narrowest interval, 0 if there is a reading without */
};

/**
 * Power of a bin over that of a reference level; of a reading censored below, half its
 * bound's: near 0 the density of a fading signal's power is flat.
 */
double rfade_bin_power(const struct rfade_bin *bin, double reference_db);

/** RFADE_DOMAIN for a bin that isn't one; RFADE_NO_DATA if too few are uncensored for a fit. */
enum rfade_status rfade_bins_moments(const struct rfade_bin *bins, size_t bin_count,
                                     struct rfade_bin_moments *moments);

/**
 * The same readings in fewer bins, in ascending order of place: bins of one kind, width and
 * class whose places differ by little against the spread are gathered at their mean. A fit
 * of the shorter form is a first approximation; its curvature serves for the whole.
 * @param edges_db  of classes that are given; NULL: there are none yet
 * @param[out] shorter  free() it; as many as the bins if there is nothing to gain
 */
enum rfade_status rfade_bins_shorten(const struct rfade_bin *bins, size_t bin_count,
                                     const struct rfade_bin_moments *moments,
                                     const double *edges_db, struct rfade_bin **shorter,
                                     size_t *shorter_count);

#endif
