/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file timing.h  How often a segment's signal fades and for how long: predicted, observed. */
#ifndef ROUTEFADE_ANALYSE_TIMING_H
#define ROUTEFADE_ANALYSE_TIMING_H

#include "analyse/results.h"
#include "routefade/separate.h"

/** What the traversals of one row of `fading` have seen, added up. */
struct rfade_segment_crossings {
    struct rfade_crossings crossings;
    struct rfade_sampling_sums sampling;
    double step_db; /**< the coarsest of its traces */
};

/** Reads them back; the row must come from this survey. */
enum rfade_status rfade_result_crossings(struct rfade_survey *survey,
                                         const struct rfade_segment_result *row,
                                         struct rfade_segment_crossings *seen,
                                         struct rfade_error *error);

/** Why observed crossings of a level say little. */
enum rfade_visibility {
    RFADE_VISIBLE,
    RFADE_HIDDEN_BY_SAMPLING,  /**< the row's sampling label isn't `resolved` */
    RFADE_HIDDEN_BY_CENSORING, /**< floor or ceiling hides where the level is crossed */
    RFADE_HIDDEN_BY_STEP,      /**< rounding moves the rate by more than 5 % */
    RFADE_HIDDEN_BY_SPACING    /**< readings miss more than 5 % of the fades */
};

/** Fixed lower-case word: "sampling", "censored", "step", "spacing"; NULL for visible. */
const char *rfade_visibility_reason(enum rfade_visibility visibility);

/** One level of one row. NaN where there is nothing to say. */
struct rfade_level_timing {
    const struct rfade_model *model; /**< the prediction's: rfade_timing_fit; NULL: none */
    double predicted_per_m;          /**< crossings, with the ray across the road */
    double predicted_fade_m;
    double ray_factor; /**< by how much more often the ray, from where the log says that it
                            may have come, makes the level be crossed; fades are as much
                            shorter */
    int64_t crossings; /**< seen */
    double observed_per_m;
    double observed_fade_m;
    double longest_fade_m;
    double longest_fade_s; /**< as driven, standing left out; may be another fade's */
    enum rfade_visibility visibility;
};

/** Mean speed while the vehicles moved, m/s; NaN if none did. */
double rfade_crossings_speed_m_s(const struct rfade_segment_crossings *seen);

/**
 * The fit that fade timing is predicted from: the preferred one, but Rice in place of Nakagami
 * as long as its weight is 0.05 or more. How fast a signal moves does not follow from its
 * distribution: Nakagami's rate stands for m like clusters of scatter without a ray [Yacoub,
 * Bautista and Guedes 1999], and for a steady signal is the root of 2 times that of a ray with
 * scatter, though both have about the same distribution. NULL if there is none; borrowed.
 */
const struct rfade_stored_fit *rfade_timing_fit(const struct rfade_segment_result *row);

/** @param level  index into rfade_crossing_levels_cdb */
enum rfade_status rfade_result_timing(const struct rfade_segment_result *row,
                                      const struct rfade_segment_crossings *seen, int level,
                                      struct rfade_level_timing *timing,
                                      struct rfade_error *error);

#endif
