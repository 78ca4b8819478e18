/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file levels.h  A law for the levels of a segment whose fast fading could not be seen. */
#ifndef ROUTEFADE_ANALYSE_LEVELS_H
#define ROUTEFADE_ANALYSE_LEVELS_H

#include "routefade/estimate.h"

/**
 * Fits the lognormal law to levels: local mean and fast fading together, which too few
 * readings in a window don't tell apart. Its location is the mean of the levels in dBm. It has
 * no interval and no goodness, since the local mean correlates the readings over longer than a
 * segment's few can tell.
 * @param[out] estimate  with this fit alone, which is preferred
 * @return as rfade_fit_bins; fit_count is 0 on failure
 */
enum rfade_status rfade_fit_levels(const struct rfade_tally *levels,
                                   struct rfade_estimate *estimate);

#endif
