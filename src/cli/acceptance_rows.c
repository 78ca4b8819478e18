/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>

#include "cli/acceptance.h"

/* Where the segments of the results' rows stand. */
struct ordered {
    const struct rfade_acceptance_page *page;
    size_t *places; /* by the row's place in the results */
};

static void find_places(const struct rfade_acceptance_page *page, size_t *places)
{
    for (size_t i = 0; i < page->results->count; i++)
        places[page->groups->rows[i] - page->results->rows] = i;
}

static double end(const struct rfade_outage_bounds *bounds, double distance)
{
    return rfade_from_log_odds(bounds->log_odds + distance);
}

static void own_values(const void *context, const struct rfade_segment_result *row,
                       size_t index, struct rfade_value *own)
{
    const struct ordered *ordered = context;
    const struct rfade_segment_acceptance *segment =
        &ordered->page->segments[ordered->places[index]];
    const struct rfade_outage_bounds *bounds = &segment->bounds;
    const struct rfade_judgement *judgement = &segment->judgement;
    own[0] = rfade_value_number(ordered->page->threshold->value);
    own[1] = rfade_value_number(ordered->page->target.outage);
    own[2] = rfade_value_number(bounds->outage);
    own[3] = rfade_value_number(end(bounds, -bounds->below));
    own[4] = rfade_value_number(end(bounds, bounds->above));
    own[5] = rfade_value_text(rfade_verdict_name(judgement->verdict));
    own[6] = rfade_value_text(segment->meets_together ? "yes" : "no");
    own[7] = rfade_value_number(judgement->more_m);
    own[8] = rfade_value_number(judgement->more_passes);
    own[9] = rfade_value_number(bounds->calibration_db);
    own[10] = rfade_value_number(judgement->calibration_needed_db);
    own[11] = rfade_value_number(bounds->observed.fraction);
    own[12] = rfade_value_number(bounds->observed.low);
    own[13] = rfade_value_number(bounds->observed.high);
    own[14] = rfade_value_text(row->sampling);
    own[15] = rfade_value_integer(row->passes);
    own[16] = rfade_value_number(ordered->page->target.confidence);
}

static double badness_of(const void *context, const struct rfade_segment_result *row,
                         size_t index, bool by_estimate)
{
    (void)row;
    const struct ordered *ordered = context;
    const struct rfade_outage_bounds *bounds =
        &ordered->page->segments[ordered->places[index]].bounds;
    double badness = by_estimate ? bounds->outage : end(bounds, -bounds->below);
    return isnan(badness) ? bounds->observed.fraction : badness;
}

static enum rfade_status print(const struct rfade_run *run, const struct ordered *ordered,
                               const struct rfade_segment_options *options,
                               struct rfade_error *error)
{
    const struct rfade_column columns[] = {
        {ordered->page->threshold->column, RFADE_COLUMN_NUMBER, 1, false, true},
        {"target_outage", RFADE_COLUMN_PROBABILITY, 2, false, true},
        {"outage", RFADE_COLUMN_PROBABILITY, 3, true, false},
        {"outage_low", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"outage_high", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"verdict", RFADE_COLUMN_TEXT, 0, false, false},
        {"meets_together", RFADE_COLUMN_TEXT, 0, false, false},
        {"more_m", RFADE_COLUMN_NUMBER, 0, false, false},
        {"more_passes", RFADE_COLUMN_NUMBER, 0, false, false},
        {"calibration_db", RFADE_COLUMN_NUMBER, 2, false, false},
        {"calibration_needed_db", RFADE_COLUMN_NUMBER, 2, false, false},
        {"observed", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"observed_low", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"observed_high", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"sampling", RFADE_COLUMN_TEXT, 0, false, false},
        {"passes", RFADE_COLUMN_INTEGER, 0, false, false},
        {"confidence", RFADE_COLUMN_PROBABILITY, 2, false, true},
    };
    const struct rfade_segment_table table = {
        columns, sizeof columns / sizeof columns[0], own_values, badness_of, ordered, 1};
    return rfade_segment_print(run, &table, options, ordered->page->results, error);
}

enum rfade_status rfade_acceptance_rows(const struct rfade_run *run,
                                        const struct rfade_acceptance_page *page,
                                        const struct rfade_segment_options *options,
                                        struct rfade_error *error)
{
    struct ordered ordered = {page,
                              malloc((page->results->count + 1) * sizeof *ordered.places)};
    if (!ordered.places)
        return rfade_error_no_memory(error);
    find_places(page, ordered.places);
    enum rfade_status status = print(run, &ordered, options, error);
    free(ordered.places);
    return status;
}

enum rfade_status rfade_acceptance_routes(const struct rfade_run *run,
                                          const struct rfade_acceptance_page *page,
                                          struct rfade_error *error)
{
    const struct rfade_column columns[] = {
        {"route", RFADE_COLUMN_TEXT, 0, false, true},
        {"channel", RFADE_COLUMN_TEXT, 0, false, true},
        {"campaign", RFADE_COLUMN_TEXT, 0, false, true},
        {page->threshold->column, RFADE_COLUMN_NUMBER, 1, false, true},
        {"target_outage", RFADE_COLUMN_PROBABILITY, 2, false, true},
        {"confidence", RFADE_COLUMN_PROBABILITY, 2, false, true},
        {"length_m", RFADE_COLUMN_NUMBER, 0, false, false},
        {"meets_m", RFADE_COLUMN_NUMBER, 0, false, false},
        {"fails_m", RFADE_COLUMN_NUMBER, 0, false, false},
        {"undecided_m", RFADE_COLUMN_NUMBER, 0, false, false},
        {"not_judged_m", RFADE_COLUMN_NUMBER, 0, false, false},
        {"unseen_m", RFADE_COLUMN_NUMBER, 0, false, false},
        {"meets_share", RFADE_COLUMN_PROBABILITY, 2, false, false},
        {"meets_together_m", RFADE_COLUMN_NUMBER, 0, false, false},
    };
    enum { COLUMNS = sizeof columns / sizeof columns[0] };
    struct rfade_rows *rows = NULL;
    enum rfade_status status = rfade_rows_begin(run->common->format, run->output, NULL, columns,
                                                COLUMNS, &rows, error);
    for (size_t i = 0; i < page->groups->count && status == RFADE_OK; i++) {
        const struct rfade_segment_result *first = page->groups->groups[i].rows[0];
        const struct rfade_acceptance_lengths *lengths = &page->lengths[i];
        const struct rfade_value values[COLUMNS] = {
            rfade_value_text(first->route),
            rfade_value_text(first->channel),
            rfade_value_text(first->campaign),
            rfade_value_number(page->threshold->value),
            rfade_value_number(page->target.outage),
            rfade_value_number(page->target.confidence),
            rfade_value_number(lengths->length_m),
            rfade_value_number(lengths->meets_m),
            rfade_value_number(lengths->fails_m),
            rfade_value_number(lengths->undecided_m),
            rfade_value_number(lengths->not_judged_m),
            rfade_value_number(lengths->unseen_m),
            rfade_value_number(lengths->meets_m / lengths->length_m),
            rfade_value_number(lengths->meets_together_m),
        };
        status = rfade_rows_row(rows, values, error);
    }
    if (status == RFADE_OK)
        status = rfade_rows_end(rows, error);
    rfade_rows_destroy(rows);
    return status;
}
