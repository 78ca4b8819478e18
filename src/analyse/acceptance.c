/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/acceptance.h"

#include <math.h>
#include <stdlib.h>

/*
 * On simulated drives bounds in ratio of the normal quantiles give a tenth of wrong verdicts
 * where a tenth is meant, but more where one pass of a strong direct ray is held against a deep
 * threshold: 15 % at K = 10 and 10 dB below the mean. With this it is a tenth there, too.
 */
static const double WIDENING = 1.25;

static double widened(double all, double calibration)
{
    return hypot(WIDENING * rfade_own_distance(all, calibration), calibration);
}

void rfade_acceptance_widen(struct rfade_outage_bounds *bounds)
{
    bounds->below = widened(bounds->below, bounds->calibration_below);
    bounds->above = widened(bounds->above, bounds->calibration_above);
}

static enum rfade_status judge_row(struct rfade_segment_result *row,
                                   const struct rfade_threshold *threshold,
                                   const struct rfade_acceptance_target *target,
                                   struct rfade_segment_acceptance *segment,
                                   struct rfade_error *error)
{
    enum rfade_status status =
        rfade_result_bounds(row, threshold, target->confidence, &segment->bounds, error);
    rfade_acceptance_widen(&segment->bounds);
    struct rfade_outage_bounds judged = segment->bounds;
    if (!rfade_result_resolved(row))
        judged.outage = NAN;
    segment->judgement = rfade_judge(&judged, target->confidence, target->outage, row->travel_m,
                                     (double)row->passes);
    return status;
}

/* Which of them hold jointly. */
static enum rfade_status judge_together(size_t count, double confidence,
                                        struct rfade_segment_acceptance *segments,
                                        struct rfade_error *error)
{
    double *p = malloc((count + 1) * sizeof *p);
    bool *meets = malloc((count + 1) * sizeof *meets);
    enum rfade_status status = RFADE_NO_MEMORY;
    if (p && meets) {
        for (size_t i = 0; i < count; i++)
            p[i] = segments[i].judgement.p_meets;
        status = rfade_verdicts_together(p, count, confidence, meets);
        for (size_t i = 0; i < count && status == RFADE_OK; i++)
            segments[i].meets_together = meets[i];
    }
    free(p);
    free(meets);
    return status == RFADE_OK ? status : rfade_error_no_memory(error);
}

static void add_length(const struct rfade_segment_result *row,
                       const struct rfade_segment_acceptance *segment,
                       struct rfade_acceptance_lengths *lengths)
{
    double length_m = row->to_m - row->from_m;
    double *const sums[] = {
        [RFADE_NOT_JUDGED] = &lengths->not_judged_m,
        [RFADE_MEETS] = &lengths->meets_m,
        [RFADE_FAILS] = &lengths->fails_m,
        [RFADE_UNDECIDED] = &lengths->undecided_m,
    };
    *sums[segment->judgement.verdict] += length_m;
    if (segment->meets_together)
        lengths->meets_together_m += length_m;
}

enum rfade_status rfade_acceptance(const struct rfade_route_group *group,
                                   const struct rfade_threshold *thresholds,
                                   const struct rfade_acceptance_target *target,
                                   struct rfade_segment_acceptance *segments,
                                   struct rfade_acceptance_lengths *lengths,
                                   struct rfade_error *error)
{
    double seen_m = 0.0;
    *lengths = (struct rfade_acceptance_lengths){.length_m = 0.0};
    for (size_t i = 0; i < group->count; i++) {
        segments[i].meets_together = false;
        enum rfade_status status =
            judge_row(group->rows[i], &thresholds[i], target, &segments[i], error);
        if (status != RFADE_OK)
            return status;
    }
    enum rfade_status status =
        judge_together(group->count, target->confidence, segments, error);
    if (status != RFADE_OK)
        return status;
    for (size_t i = 0; i < group->count; i++) {
        seen_m += group->rows[i]->to_m - group->rows[i]->from_m;
        add_length(group->rows[i], &segments[i], lengths);
    }
    lengths->length_m = group->span ? group->span->length_m : seen_m;
    lengths->unseen_m = fmax(0.0, lengths->length_m - seen_m);
    return RFADE_OK;
}
