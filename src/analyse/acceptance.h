/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file acceptance.h  How much of a route meets a target outage, and with what confidence. */
#ifndef ROUTEFADE_ANALYSE_ACCEPTANCE_H
#define ROUTEFADE_ANALYSE_ACCEPTANCE_H

#include "analyse/verdict.h"
#include "analyse/whole_route.h"

/** What is asked of every segment. */
struct rfade_acceptance_target {
    double outage;     /**< in (0, 1): to be at or below it */
    double confidence; /**< one-sided, of each segment's verdict; in (0.5, 1) */
};

/** One segment. */
struct rfade_segment_acceptance {
    struct rfade_outage_bounds bounds;
    struct rfade_judgement judgement;
    bool meets_together; /**< with the same confidence for all such segments of the group */
};

/** Metres of the route; they add up to its length. */
struct rfade_acceptance_lengths {
    double length_m;
    double meets_m;
    double fails_m;
    double undecided_m;
    double not_judged_m;     /**< driven, but the sampling did not show how it fades */
    double unseen_m;         /**< never driven */
    double meets_together_m; /**< part of meets_m */
};

/**
 * Widens bounds by what simulated drives showed to be missing, for a verdict's share of errors
 * to be what it is said to be. The calibration's part stays.
 */
void rfade_acceptance_widen(struct rfade_outage_bounds *bounds);

/**
 * Judges a group's segments. Only those whose sampling is `resolved` are judged: of the others
 * there is no interval, or (`inseparable`) one that holds too seldom, up to 25 % of wrong
 * verdicts for 10 % on simulated drives; what was observed is all that can be said of them.
 * @param thresholds  [group->count], one a row
 * @param[out] segments  [group->count]
 */
enum rfade_status rfade_acceptance(const struct rfade_route_group *group,
                                   const struct rfade_threshold *thresholds,
                                   const struct rfade_acceptance_target *target,
                                   struct rfade_segment_acceptance *segments,
                                   struct rfade_acceptance_lengths *lengths,
                                   struct rfade_error *error);

#endif
