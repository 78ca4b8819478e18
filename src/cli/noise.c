/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdlib.h>

#include "cli/command.h"
#include "cli/noise_list.h"

static const struct rfade_column columns[] = {
    {"route", RFADE_COLUMN_TEXT, 0, false, false},
    {"channel", RFADE_COLUMN_TEXT, 0, false, false},
    {"from_m", RFADE_COLUMN_NUMBER, 0, false, false},
    {"to_m", RFADE_COLUMN_NUMBER, 0, false, false},
    {"noise_dbm", RFADE_COLUMN_NUMBER, 1, false, false},
};
enum { COLUMNS = sizeof columns / sizeof columns[0] };

static enum rfade_status show_noise(const struct rfade_run *run, struct rfade_survey *survey,
                                    struct rfade_error *error)
{
    struct rfade_noise *stretches = NULL;
    struct rfade_rows *rows = NULL;
    size_t count = 0;
    enum rfade_status status = rfade_survey_noise(survey, &stretches, &count, error);
    if (status == RFADE_OK)
        status = rfade_rows_begin(run->common->format, run->output, NULL, columns, COLUMNS,
                                  &rows, error);
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        const struct rfade_value values[COLUMNS] = {
            rfade_value_text(stretches[i].route), rfade_value_text(stretches[i].channel),
            rfade_value_number(stretches[i].from_m), rfade_value_number(stretches[i].to_m),
            rfade_value_number(stretches[i].noise_dbm)};
        status = rfade_rows_row(rows, values, error);
    }
    if (status == RFADE_OK)
        status = rfade_rows_end(rows, error);
    rfade_rows_destroy(rows);
    free(stretches);
    return status;
}

static enum rfade_status list_noise(struct rfade_survey *survey, const char *path,
                                    const struct rfade_noise_line *lines, size_t count,
                                    struct rfade_error *error)
{
    struct rfade_noise *stretches = calloc(count, sizeof *stretches);
    size_t refused = count;
    if (!stretches)
        return rfade_error_no_memory(error);
    for (size_t i = 0; i < count; i++)
        stretches[i] = lines[i].noise;
    enum rfade_status status =
        rfade_survey_noise_list(survey, stretches, count, &refused, error);
    if (status != RFADE_OK && refused < count)
        rfade_error_at(error, path, lines[refused].number);
    free(stretches);
    return status;
}

static enum rfade_status run_noise(struct rfade_run *run, struct rfade_error *error)
{
    const char *path = run->arguments.count ? run->arguments.items[0] : NULL;
    struct rfade_noise_line *lines = NULL;
    struct rfade_survey *survey = NULL;
    size_t count = 0;
    enum rfade_status status = RFADE_OK;
    if (path)
        status = rfade_noise_list_read(path, &lines, &count, error);
    if (status == RFADE_OK)
        status = rfade_survey_open(
            run->common->survey, path ? RFADE_SURVEY_WRITE : RFADE_SURVEY_READ, &survey, error);
    if (status == RFADE_OK)
        status = path ? list_noise(survey, path, lines, count, error)
                      : show_noise(run, survey, error);
    rfade_survey_close(survey);
    free(lines);
    return status;
}

const struct rfade_command rfade_command_noise = {
    .name = "noise",
    .arguments = "[FILE]",
    .summary = "list noise that was measured along a route; without a file, show it",
    .details = "FILE is CSV with a header that names route, channel, from_m, to_m (metres of "
               "chainage) and noise_dbm (noise power in the channel's bandwidth). It replaces "
               "what was listed before for the routes and channels in it. Thresholds in SNR "
               "count from listed noise first, then from noise that was logged, then from the "
               "channel's: a segment takes the list's where that covers at least half of it.",
    .arguments_max = 1,
    .run = run_noise,
};
