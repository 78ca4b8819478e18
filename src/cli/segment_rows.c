/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/segment_rows.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const struct rfade_column first_columns[] = {
    {"route", RFADE_COLUMN_TEXT, 0, false, true},
    {"segment", RFADE_COLUMN_INTEGER, 0, false, false},
    {"from_m", RFADE_COLUMN_NUMBER, 0, false, false},
    {"to_m", RFADE_COLUMN_NUMBER, 0, false, false},
    {"channel", RFADE_COLUMN_TEXT, 0, false, true},
    {"campaign", RFADE_COLUMN_TEXT, 0, false, true},
    {"readings", RFADE_COLUMN_INTEGER, 0, false, false},
    {"effective_count", RFADE_COLUMN_NUMBER, 0, false, false},
    {"mean_power_dbm", RFADE_COLUMN_NUMBER, 1, false, false},
    {"model", RFADE_COLUMN_TEXT, 0, false, false},
};

enum { FIRST_COLUMNS = sizeof first_columns / sizeof first_columns[0] };

static void first_values(const struct rfade_segment_result *row, struct rfade_value *values)
{
    const struct rfade_stored_fit *fit = rfade_result_preferred(row);
    values[0] = rfade_value_text(row->route);
    values[1] = rfade_value_integer(row->segment);
    values[2] = rfade_value_number(row->from_m);
    values[3] = rfade_value_number(row->to_m);
    values[4] = rfade_value_text(row->channel);
    values[5] = rfade_value_text(row->campaign);
    values[6] = rfade_value_integer(row->readings);
    values[7] = rfade_value_number(row->effective_count);
    values[8] = rfade_value_number(row->mean_power_dbm);
    values[9] = rfade_value_text(fit && fit->model ? fit->model->name : NULL);
}

struct rfade_value rfade_parameter_value(const struct rfade_model *model, double parameter)
{
    return model->parameter_name && parameter >= model->parameter_max
               ? rfade_value_limit(parameter)
               : rfade_value_number(parameter);
}

static enum rfade_status check_options(const struct rfade_command *command,
                                       const struct rfade_segment_options *options,
                                       struct rfade_error *error)
{
    if (options->from_m >= options->to_m)
        return rfade_usage(error, command, "--from-m must lie below --to-m");
    if (options->by_estimate && options->worst == 0)
        return rfade_usage(error, command, "--by-estimate needs --worst");
    return RFADE_OK;
}

enum rfade_status rfade_segment_read(const struct rfade_run *run,
                                     const struct rfade_command *command,
                                     const struct rfade_segment_options *options,
                                     struct rfade_segment_results *results,
                                     struct rfade_error *error)
{
    *results = (struct rfade_segment_results){NULL, 0, NULL, 0};
    const struct rfade_segment_filter filter = {
        .route = options->route,
        .channel = options->channel,
        .campaign = options->campaign,
        .segment = options->segment,
        .from_m = options->from_m,
        .to_m = options->to_m,
    };
    struct rfade_survey *survey = NULL;
    bool current = false;
    enum rfade_status status = check_options(command, options, error);
    if (status == RFADE_OK)
        status = rfade_survey_open(run->common->survey, RFADE_SURVEY_READ, &survey, error);
    if (status == RFADE_OK)
        status = rfade_results_current(survey, &current, error);
    if (status == RFADE_OK)
        status = rfade_results_read(survey, &filter, results, error);
    rfade_survey_close(survey);
    /* Results that are older than the survey are still shown, but not without a word. */
    if (status == RFADE_OK && !current && !run->common->quiet)
        (void)fputs("the survey changed since the last fit: run `routefade fit`\n", run->notes);
    return status;
}

void rfade_segment_note_passes(const struct rfade_run *run,
                               const struct rfade_segment_results *results)
{
    size_t once = 0;
    for (size_t i = 0; i < results->count; i++)
        once += results->rows[i].passes == 1;
    if (once > 0 && !run->common->quiet)
        (void)fprintf(run->notes,
                      "%zu of %zu segments had one pass: intervals there hold for the "
                      "conditions of that pass alone\n",
                      once, results->count);
}

/* A row's place in the output. */
struct rank {
    size_t row;
    double badness;
};

static int compare_ranks(const void *left, const void *right)
{
    const struct rank *a = left, *b = right;
    bool a_known = !isnan(a->badness), b_known = !isnan(b->badness);
    if (a_known != b_known)
        return a_known ? -1 : 1;
    if (a_known && a->badness != b->badness)
        return a->badness > b->badness ? -1 : 1;
    return (a->row > b->row) - (a->row < b->row); /* ties stay along the route */
}

/* Orders rows, if that was asked for; says how many of them to show. */
static size_t order_rows(const struct rfade_segment_table *table,
                         const struct rfade_segment_options *options,
                         const struct rfade_segment_results *results, struct rank *ranks)
{
    for (size_t i = 0; i < results->count; i++)
        ranks[i] = (struct rank){i, NAN};
    if (options->worst == 0 || results->count == 0)
        return results->count;
    for (size_t i = 0; i < results->count; i++)
        ranks[i].badness =
            table->badness(table->context, &results->rows[i], i, options->by_estimate);
    qsort(ranks, results->count, sizeof *ranks, compare_ranks);
    return (uint64_t)options->worst < results->count ? (size_t)options->worst : results->count;
}

static enum rfade_status print_lines(struct rfade_rows *rows,
                                     const struct rfade_segment_table *table,
                                     const struct rfade_segment_result *row, size_t place,
                                     struct rfade_error *error)
{
    struct rfade_value values[FIRST_COLUMNS + RFADE_SEGMENT_OWN_COLUMNS];
    size_t lines = table->lines ? table->lines : 1;
    enum rfade_status status = RFADE_OK;
    first_values(row, values);
    for (size_t i = 0; i < lines && status == RFADE_OK; i++) {
        table->values(table->context, row, place * lines + i, values + FIRST_COLUMNS);
        status = rfade_rows_row(rows, values, error);
    }
    return status;
}

enum rfade_status rfade_segment_print(const struct rfade_run *run,
                                      const struct rfade_segment_table *table,
                                      const struct rfade_segment_options *options,
                                      const struct rfade_segment_results *results,
                                      struct rfade_error *error)
{
    struct rfade_column columns[FIRST_COLUMNS + RFADE_SEGMENT_OWN_COLUMNS];
    memcpy(columns, first_columns, sizeof first_columns);
    memcpy(columns + FIRST_COLUMNS, table->columns,
           table->column_count * sizeof *table->columns);
    struct rank *ranks = malloc((results->count + 1) * sizeof *ranks);
    if (!ranks)
        return rfade_error_no_memory(error);
    size_t count = order_rows(table, options, results, ranks);
    struct rfade_rows *rows = NULL;
    enum rfade_status status =
        rfade_rows_begin(run->common->format, run->output, NULL, columns,
                         FIRST_COLUMNS + table->column_count, &rows, error);
    for (size_t i = 0; i < count && status == RFADE_OK; i++)
        status = print_lines(rows, table, &results->rows[ranks[i].row], ranks[i].row, error);
    if (status == RFADE_OK)
        status = rfade_rows_end(rows, error);
    rfade_rows_destroy(rows);
    free(ranks);
    return status;
}
