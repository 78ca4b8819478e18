/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file estimate.h  The estimate with classes that its caller chose. */
#ifndef ROUTEFADE_ESTIMATE_ESTIMATE_H
#define ROUTEFADE_ESTIMATE_ESTIMATE_H

#include "estimate/classes.h"

/** No fits, all figures NaN. */
void rfade_estimate_blank(struct rfade_estimate *result);

/**
 * As rfade_estimate_bins.
 * @param edges_db  upper edges of the classes that settings->blocks counts by; NULL: the
 *                  coarse bins of a tally
 */
enum rfade_status rfade_estimate_classes(const struct rfade_bin *bins, size_t bin_count,
                                         const struct rfade_estimate_settings *settings,
                                         const double *edges_db, struct rfade_estimate *result);

#endif
