/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>

#include "cli/outage_route.h"
#include "cli/segment_rows.h"
#include "cli/threshold.h"

struct outage_options {
    struct rfade_segment_options segments;
    struct rfade_threshold_options threshold;
    bool whole_route;
};

static const struct outage_options defaults = {.segments = RFADE_SEGMENT_DEFAULTS,
                                               .threshold = RFADE_THRESHOLD_DEFAULTS};

static const struct rfade_option options[] = {
    RFADE_THRESHOLD_OPTION_LINES(struct outage_options),
    {"whole-route", NULL, RFADE_OPTION_FLAG, offsetof(struct outage_options, whole_route), 0, 0,
     NULL, "one row a route, channel and campaign, over all its segments"},
    RFADE_SEGMENT_OPTION_LINES(struct outage_options)};

struct answer {
    struct rfade_stretch_outage outage;
    struct rfade_observed observed;
};

static enum rfade_status answer_rows(struct rfade_segment_results *results,
                                     const struct rfade_threshold_asked *threshold,
                                     double confidence, struct answer *answers,
                                     struct rfade_error *error)
{
    for (size_t i = 0; i < results->count; i++) {
        struct rfade_threshold here = {NAN, NAN};
        enum rfade_status status =
            rfade_threshold_here(&results->rows[i], threshold, &here, error);
        if (status == RFADE_OK)
            status = rfade_result_outage(&results->rows[i], &here, confidence,
                                         &answers[i].outage, &answers[i].observed, error);
        if (status != RFADE_OK)
            return status;
    }
    return RFADE_OK;
}

/* What the rows are made from. */
struct page {
    const struct rfade_threshold_asked *threshold;
    const struct answer *answers;
};

static void own_values(const void *context, const struct rfade_segment_result *row,
                       size_t index, struct rfade_value *own)
{
    const struct page *page = context;
    const struct answer *answer = &page->answers[index];
    own[0] = rfade_value_number(page->threshold->value);
    own[1] = rfade_value_number(answer->outage.outage);
    own[2] = rfade_value_number(answer->outage.low);
    own[3] = rfade_value_number(answer->outage.high);
    own[4] = rfade_value_number(answer->outage.next_low);
    own[5] = rfade_value_number(answer->outage.next_high);
    own[6] = rfade_value_number(answer->observed.fraction);
    own[7] = rfade_value_number(answer->observed.low);
    own[8] = rfade_value_number(answer->observed.high);
    rfade_threshold_noise_values(page->threshold, row, &own[9]);
    own[11] = rfade_value_text(row->sampling);
    own[12] = rfade_value_integer(row->passes);
}

/* By the interval's better end, so that a bad guess from few readings is not first. Where
 * nothing was predicted, what was observed speaks for itself. */
static double badness_of(const void *context, const struct rfade_segment_result *row,
                         size_t index, bool by_estimate)
{
    (void)row;
    const struct page *page = context;
    const struct rfade_stretch_outage *predicted = &page->answers[index].outage;
    const struct rfade_observed *observed = &page->answers[index].observed;
    double badness = by_estimate ? predicted->outage : predicted->low;
    if (!isnan(badness))
        return badness;
    return by_estimate ? observed->fraction : observed->low;
}

static enum rfade_status print_rows(const struct rfade_run *run,
                                    const struct rfade_segment_options *order,
                                    const struct rfade_segment_results *results,
                                    const struct page *page, struct rfade_error *error)
{
    const struct rfade_column columns[] = {
        {page->threshold->column, RFADE_COLUMN_NUMBER, 1, false, true},
        {"outage", RFADE_COLUMN_PROBABILITY, 3, true, false},
        {"outage_low", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"outage_high", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"next_low", RFADE_COLUMN_PROBABILITY, 2, false, false},
        {"next_high", RFADE_COLUMN_PROBABILITY, 2, false, false},
        {"observed", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"observed_low", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"observed_high", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"noise_dbm", RFADE_COLUMN_NUMBER, 1, false, false},
        {"noise", RFADE_COLUMN_TEXT, 0, false, false},
        {"sampling", RFADE_COLUMN_TEXT, 0, false, false},
        {"passes", RFADE_COLUMN_INTEGER, 0, false, false},
    };
    const struct rfade_segment_table table = {
        columns, sizeof columns / sizeof columns[0], own_values, badness_of, page, 1};
    return rfade_segment_print(run, &table, order, results, error);
}

static enum rfade_status show_outage(const struct rfade_run *run,
                                     const struct outage_options *asked,
                                     const struct rfade_threshold_asked *threshold,
                                     struct rfade_segment_results *results,
                                     struct rfade_error *error)
{
    struct answer *answers = calloc(results->count + 1, sizeof *answers);
    if (!answers)
        return rfade_error_no_memory(error);
    const struct page page = {threshold, answers};
    enum rfade_status status =
        answer_rows(results, threshold, rfade_analysis_defaults().confidence, answers, error);
    if (status == RFADE_OK)
        status = print_rows(run, &asked->segments, results, &page, error);
    free(answers);
    return status;
}

static enum rfade_status run_outage(struct rfade_run *run, struct rfade_error *error)
{
    const struct outage_options *asked = run->options;
    struct rfade_threshold_asked threshold = {"threshold_dbm", NAN};
    enum rfade_status status =
        rfade_threshold_choose(&rfade_command_outage, &asked->threshold, &threshold, error);
    if (status == RFADE_OK && asked->whole_route && asked->segments.worst > 0)
        status = rfade_usage(error, &rfade_command_outage,
                             "--worst ranks segments: it can't go with --whole-route");
    if (status != RFADE_OK)
        return status;
    struct rfade_segment_results results;
    status = rfade_segment_read(run, &rfade_command_outage, &asked->segments, &results, error);
    if (status == RFADE_OK)
        status = asked->whole_route ? rfade_outage_whole_route(run, &results, &threshold, error)
                                    : show_outage(run, asked, &threshold, &results, error);
    if (status == RFADE_OK)
        rfade_segment_note_passes(run, &results);
    rfade_results_clear(&results);
    return status;
}

const struct rfade_command rfade_command_outage = {
    .name = "outage",
    .summary = "show how often each segment is below a threshold: predicted and observed",
    .details =
        "outage is the probability of being below the threshold on this stretch, with the 95 % "
        "confidence interval of that probability. next_low and next_high are the 95 % "
        "prediction interval of the fraction that one more pass observes. observed is the "
        "fraction of the travel that was below; its bounds differ where a quantisation step or "
        "a censored reading straddles the threshold. A threshold in SNR is a level above "
        "the noise; `noise` says where that comes from: listed (by `routefade noise`), logged "
        "(level less logged SNR), channel (its noise floor) or thermal (290 K, bandwidth and "
        "noise figure). Logged SNR, where there is one all along, is what observed counts. "
        "With --whole-route, outage is the mean over the segments by their length, its "
        "interval takes their errors as independent and the calibration as common to all; "
        "observed covers the same segments. lognormal_outage is what fast fading over a "
        "lognormal local mean gives, its median and spread (local_mean_dbm, local_sigma_db) "
        "those along the route: where it differs, the local mean is not lognormal. A "
        "predicted outage is no safety case.",
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_outage,
};
