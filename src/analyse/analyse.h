/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file analyse.h  The nightly work: from the readings in a survey to fits by segment.
 *
 * Every result carries the fingerprint of what it was made from, so that a run makes again
 * exactly what changed, and what it leaves is the same as if everything were made again.
 */
#ifndef ROUTEFADE_ANALYSE_ANALYSE_H
#define ROUTEFADE_ANALYSE_ANALYSE_H

#include <stdbool.h>

#include "analyse/settings.h"
#include "survey/survey.h"

struct rfade_analysis_summary {
    bool nothing_new;     /**< neither the survey nor the settings changed since the last run */
    int64_t streams_made; /**< vehicle, channel, campaign and outing along a route */
    int64_t streams_kept;
    int64_t segments_fitted;
    int64_t segments_kept;
};

/**
 * Brings all results up to date, in one transaction: in whole, or not at all.
 * @param all  make everything again
 * @return RFADE_OK | RFADE_NO_DATA (no readings, or no route) | RFADE_INPUT (a channel
 *         without its carrier) | RFADE_STORAGE | RFADE_NO_MEMORY
 */
enum rfade_status rfade_analyse(struct rfade_survey *survey,
                                const struct rfade_analysis_settings *settings, bool all,
                                struct rfade_analysis_summary *summary,
                                struct rfade_error *error);

#endif
