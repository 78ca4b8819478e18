/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "cli/segment_rows.h"

struct fading_options {
    struct rfade_segment_options segments;
};

static const struct fading_options defaults = {.segments = RFADE_SEGMENT_DEFAULTS};

static const struct rfade_option options[] = {
    RFADE_SEGMENT_OPTION_LINES(struct fading_options)};

static const struct rfade_column own_columns[] = {
    {"sampling", RFADE_COLUMN_TEXT, 0, false, false},
    {"passes", RFADE_COLUMN_INTEGER, 0, false, false},
    {"k", RFADE_COLUMN_NUMBER, 2, true, false},
    {"k_low", RFADE_COLUMN_NUMBER, 2, false, false},
    {"k_high", RFADE_COLUMN_NUMBER, 2, false, false},
    {"m", RFADE_COLUMN_NUMBER, 2, true, false},
    {"m_low", RFADE_COLUMN_NUMBER, 2, false, false},
    {"m_high", RFADE_COLUMN_NUMBER, 2, false, false},
    {"local_mean_dbm", RFADE_COLUMN_NUMBER, 1, false, false},
    {"local_sigma_db", RFADE_COLUMN_NUMBER, 1, true, false},
    {"local_sigma_low_db", RFADE_COLUMN_NUMBER, 1, false, false},
    {"local_sigma_high_db", RFADE_COLUMN_NUMBER, 1, false, false},
    {"weight", RFADE_COLUMN_PROBABILITY, 2, false, false},
    {"goodness_p", RFADE_COLUMN_PROBABILITY, 2, false, false},
};

/* The parameter of a model with its interval; missing where it was not resolved. */
static void parameter_values(const struct rfade_segment_result *row, enum rfade_model_id model,
                             struct rfade_value *values)
{
    const struct rfade_stored_fit *fit = rfade_result_fit(row, model);
    for (int i = 0; i < 3; i++)
        values[i] = rfade_value_missing();
    if (!fit || !rfade_result_resolved(row))
        return;
    values[0] = rfade_parameter_value(fit->model, fit->parameter);
    values[1] = rfade_parameter_value(fit->model, fit->parameter_low);
    values[2] = rfade_parameter_value(fit->model, fit->parameter_high);
}

static void own_values(const void *context, const struct rfade_segment_result *row,
                       size_t index, struct rfade_value *own)
{
    (void)context;
    (void)index;
    const struct rfade_stored_fit *fit = rfade_result_preferred(row);
    bool resolved = fit && rfade_result_resolved(row);
    own[0] = rfade_value_text(row->sampling);
    own[1] = rfade_value_integer(row->passes);
    parameter_values(row, RFADE_RICE, own + 2);
    parameter_values(row, RFADE_NAKAGAMI, own + 5);
    own[8] = rfade_value_number(row->local_mean_dbm);
    own[9] = rfade_value_number(row->local_sigma_db);
    own[10] = rfade_value_number(row->local_sigma_low_db);
    own[11] = rfade_value_number(row->local_sigma_high_db);
    own[12] = resolved ? rfade_value_number(fit->weight) : rfade_value_missing();
    own[13] = resolved ? rfade_value_number(fit->goodness_p) : rfade_value_missing();
}

/* The deeper the fading the worse: a small K. */
static double badness_of(const void *context, const struct rfade_segment_result *row,
                         size_t index, bool by_estimate)
{
    (void)context;
    (void)index;
    const struct rfade_stored_fit *rice = rfade_result_fit(row, RFADE_RICE);
    if (!rice || !rfade_result_resolved(row))
        return NAN;
    return by_estimate ? -rice->parameter : -rice->parameter_high;
}

static const struct rfade_segment_table table = {
    .columns = own_columns,
    .column_count = sizeof own_columns / sizeof own_columns[0],
    .values = own_values,
    .badness = badness_of,
};

static enum rfade_status run_fading(struct rfade_run *run, struct rfade_error *error)
{
    const struct fading_options *asked = run->options;
    struct rfade_segment_results results;
    enum rfade_status status =
        rfade_segment_read(run, &rfade_command_fading, &asked->segments, &results, error);
    if (status == RFADE_OK)
        status = rfade_segment_print(run, &table, &asked->segments, &results, error);
    rfade_results_clear(&results);
    return status;
}

const struct rfade_command rfade_command_fading = {
    .name = "fading",
    .summary = "show how each segment fades: local mean, K, m, intervals, chosen model",
    .details =
        "The sampling column says whether the fast fading could be seen: resolved; inseparable "
        "(the local mean moves within its window); undersampled; averaged (by the receiver); "
        "held (rows repeat an older level); stationary. K and m are shown where it is "
        "resolved. Intervals are of 95 %. weight and goodness_p belong to the chosen model.",
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_fading,
};
