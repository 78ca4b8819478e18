/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file fit_segments.h  Pools traversals by segment, channel and campaign, and fits them. */
#ifndef ROUTEFADE_ANALYSE_FIT_SEGMENTS_H
#define ROUTEFADE_ANALYSE_FIT_SEGMENTS_H

#include "analyse/settings.h"
#include "survey/survey.h"

/**
 * Fits each segment whose traversals, or whose settings, changed since it was last fitted,
 * and drops the results of segments that have no traversal left. Call inside a transaction.
 * @param[out] fitted  how many segments were fitted anew
 * @param[out] kept    how many stand as they were
 */
enum rfade_status rfade_fit_segments(struct rfade_survey *survey,
                                     const struct rfade_analysis_settings *settings,
                                     int64_t *fitted, int64_t *kept, struct rfade_error *error);

#endif
