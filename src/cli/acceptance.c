/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/acceptance.h"

#include <math.h>
#include <stdlib.h>

struct acceptance_options {
    struct rfade_segment_options segments;
    struct rfade_threshold_options threshold;
    double target_outage;
    double confidence;
    bool by_segment;
};

static const struct acceptance_options defaults = {.segments = RFADE_SEGMENT_DEFAULTS,
                                                   .threshold = RFADE_THRESHOLD_DEFAULTS,
                                                   .target_outage = NAN,
                                                   .confidence = 0.90};

static const struct rfade_option options[] = {
    {"target-outage", "P", RFADE_OPTION_NUMBER,
     offsetof(struct acceptance_options, target_outage), 1e-12, 0.999, NULL,
     "outage that no segment may exceed, for instance 0.01"},
    RFADE_THRESHOLD_OPTION_LINES(struct acceptance_options),
    {"confidence", "C", RFADE_OPTION_NUMBER, offsetof(struct acceptance_options, confidence),
     0.51, 0.9999, NULL, "one-sided confidence of a verdict, default 0.90"},
    {"segments", NULL, RFADE_OPTION_FLAG, offsetof(struct acceptance_options, by_segment), 0, 0,
     NULL, "one row a segment, with what would settle it"},
    RFADE_SEGMENT_OPTION_LINES(struct acceptance_options)};

const struct rfade_segment_acceptance *
rfade_acceptance_segments(const struct rfade_acceptance_page *page, size_t index)
{
    return &page->segments[page->groups->groups[index].rows - page->groups->rows];
}

static enum rfade_status judge_group(struct rfade_acceptance_page *page, size_t index,
                                     struct rfade_error *error)
{
    const struct rfade_route_group *group = &page->groups->groups[index];
    struct rfade_segment_acceptance *segments =
        &page->segments[group->rows - page->groups->rows];
    struct rfade_threshold *here = malloc(group->count * sizeof *here);
    enum rfade_status status = here ? RFADE_OK : rfade_error_no_memory(error);
    for (size_t i = 0; i < group->count && status == RFADE_OK; i++)
        status = rfade_threshold_here(group->rows[i], page->threshold, &here[i], error);
    if (status == RFADE_OK)
        status = rfade_acceptance(group, here, &page->target, segments, &page->lengths[index],
                                  error);
    free(here);
    return status;
}

/* Rows, and for people the same in words. */
static enum rfade_status print(const struct rfade_run *run,
                               const struct acceptance_options *asked,
                               const struct rfade_acceptance_page *page,
                               struct rfade_error *error)
{
    if (asked->by_segment)
        return rfade_acceptance_rows(run, page, &asked->segments, error);
    enum rfade_status status = rfade_acceptance_routes(run, page, error);
    if (status != RFADE_OK || run->common->format != &rfade_rows_table)
        return status;
    rfade_acceptance_words(run->output, page);
    return rfade_stream_flush(run->output, NULL, error);
}

static enum rfade_status show(const struct rfade_run *run,
                              const struct acceptance_options *asked,
                              const struct rfade_threshold_asked *threshold,
                              struct rfade_segment_results *results, struct rfade_error *error)
{
    struct rfade_route_groups groups;
    if (rfade_route_groups_make(results, &groups) != RFADE_OK)
        return rfade_error_no_memory(error);
    struct rfade_acceptance_page page = {
        .threshold = threshold,
        .target = {asked->target_outage, asked->confidence},
        .results = results,
        .groups = &groups,
        .segments = calloc(results->count + 1, sizeof *page.segments),
        .lengths = calloc(groups.count + 1, sizeof *page.lengths),
    };
    enum rfade_status status =
        page.segments && page.lengths ? RFADE_OK : rfade_error_no_memory(error);
    for (size_t i = 0; i < groups.count && status == RFADE_OK; i++)
        status = judge_group(&page, i, error);
    if (status == RFADE_OK)
        status = print(run, asked, &page, error);
    free(page.segments);
    free(page.lengths);
    rfade_route_groups_clear(&groups);
    return status;
}

static enum rfade_status check_options(const struct acceptance_options *asked,
                                       struct rfade_error *error)
{
    if (isnan(asked->target_outage))
        return rfade_usage(error, &rfade_command_acceptance, "give a --target-outage");
    if (asked->segments.worst > 0 && !asked->by_segment)
        return rfade_usage(error, &rfade_command_acceptance,
                           "--worst ranks segments: it needs --segments");
    return RFADE_OK;
}

static enum rfade_status run_acceptance(struct rfade_run *run, struct rfade_error *error)
{
    const struct acceptance_options *asked = run->options;
    struct rfade_threshold_asked threshold = {"threshold_dbm", NAN};
    enum rfade_status status = check_options(asked, error);
    if (status == RFADE_OK)
        status = rfade_threshold_choose(&rfade_command_acceptance, &asked->threshold,
                                        &threshold, error);
    if (status != RFADE_OK)
        return status;
    struct rfade_segment_results results;
    status =
        rfade_segment_read(run, &rfade_command_acceptance, &asked->segments, &results, error);
    if (status == RFADE_OK)
        status = show(run, asked, &threshold, &results, error);
    rfade_results_clear(&results);
    return status;
}

const struct rfade_command rfade_command_acceptance = {
    .name = "acceptance",
    .summary = "say how much of a route meets a target outage, and how sure that is",
    .details =
        "A segment meets the target where the upper end of the one-sided confidence bound of "
        "its outage is at or below the target, and fails it where the lower end is above; else "
        "it is undecided. The confidence is that of each segment's own verdict: of the "
        "segments "
        "that truly fail, at most one in ten is called met at 0.90. Bounds are wider than "
        "those of "
        "`outage`, by what simulated drives showed to be missing. Of many verdicts some are "
        "wrong: meets_together_m is the length whose segments all meet the target with that "
        "confidence jointly (Holm's procedure). Segments that were driven too sparsely, or "
        "whose receiver held or averaged its level, are not judged: there is only what was "
        "observed. more_m and more_passes say how much more travel would settle an undecided "
        "segment if its estimate stayed where it is: what fading leaves uncertain shrinks with "
        "the square root of travel, the calibration of the receiving chain does not, and "
        "calibration_needed_db is the uncertainty below which it would be settled. Passes at "
        "other times differ by more than this. A target that is met here is met by a predicted "
        "outage, which is no safety case: local rules and a licensed engineer decide.",
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_acceptance,
};
