/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/channel.h"

#include <math.h>
#include <stdlib.h>

#include "cli/command.h"

static const struct rfade_channel defaults = {
    .carrier_hz = NAN,
    .bandwidth_hz = NAN,
    .symbol_rate_hz = NAN,
    .noise_figure_db = NAN,
    .noise_floor_dbm = NAN,
    .step_db = NAN,
    .floor_dbm = NAN,
    .ceiling_dbm = NAN,
};

#define TARGET(member) offsetof(struct rfade_channel, member)

static const struct rfade_option options[] = {
    {"carrier-hz", "HZ", RFADE_OPTION_NUMBER, TARGET(carrier_hz), 1e5, 3e11, NULL,
     "carrier frequency; without it no wavelength and no fading"},
    {"bandwidth-hz", "HZ", RFADE_OPTION_NUMBER, TARGET(bandwidth_hz), 1e-3, 1e11, NULL,
     "bandwidth of the receiver"},
    {"symbol-rate-hz", "HZ", RFADE_OPTION_NUMBER, TARGET(symbol_rate_hz), 1e-3, 1e11, NULL,
     "symbols a second"},
    {"noise-figure-db", "DB", RFADE_OPTION_NUMBER, TARGET(noise_figure_db), 0, 100, NULL,
     "noise figure of the receiving chain"},
    {"noise-floor-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(noise_floor_dbm), -250, 100, NULL,
     "noise power in the bandwidth, where it is known better than by the noise figure"},
    {"step-db", "DB", RFADE_OPTION_NUMBER, TARGET(step_db), 0.01, 20, NULL,
     "the receiver's quantisation step; if not told it is found in the data"},
    {"floor-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(floor_dbm), -250, 100, NULL,
     "lowest level that the receiver reports"},
    {"ceiling-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(ceiling_dbm), -250, 100, NULL,
     "highest level that the receiver reports"},
};
enum { OPTIONS = sizeof options / sizeof options[0] };

static const struct rfade_column columns[] = {
    {"channel", RFADE_COLUMN_TEXT, 0, false, false},
    {"carrier_hz", RFADE_COLUMN_NUMBER, 0, false, false},
    {"bandwidth_hz", RFADE_COLUMN_NUMBER, 0, false, false},
    {"symbol_rate_hz", RFADE_COLUMN_NUMBER, 0, false, false},
    {"noise_figure_db", RFADE_COLUMN_NUMBER, 1, false, false},
    {"noise_floor_dbm", RFADE_COLUMN_NUMBER, 1, false, false},
    {"step_db", RFADE_COLUMN_NUMBER, 2, false, false},
    {"floor_dbm", RFADE_COLUMN_NUMBER, 1, false, false},
    {"ceiling_dbm", RFADE_COLUMN_NUMBER, 1, false, false},
};
enum { COLUMNS = sizeof columns / sizeof columns[0] };

static enum rfade_status write_channels(const struct rfade_run *run,
                                        const struct rfade_channel *channels, size_t count,
                                        struct rfade_error *error)
{
    struct rfade_rows *rows = NULL;
    enum rfade_status status = rfade_rows_begin(run->common->format, run->output, NULL, columns,
                                                COLUMNS, &rows, error);
    for (size_t i = 0; status == RFADE_OK && i < count; i++) {
        const struct rfade_channel *channel = &channels[i];
        const struct rfade_value values[COLUMNS] = {
            rfade_value_text(channel->name),
            rfade_value_number(channel->carrier_hz),
            rfade_value_number(channel->bandwidth_hz),
            rfade_value_number(channel->symbol_rate_hz),
            rfade_value_number(channel->noise_figure_db),
            rfade_value_number(channel->noise_floor_dbm),
            rfade_value_number(channel->step_db),
            rfade_value_number(channel->floor_dbm),
            rfade_value_number(channel->ceiling_dbm),
        };
        status = rfade_rows_row(rows, values, error);
    }
    if (status == RFADE_OK)
        status = rfade_rows_end(rows, error);
    rfade_rows_destroy(rows);
    return status;
}

static enum rfade_status list_channels(const struct rfade_run *run, struct rfade_survey *survey,
                                       struct rfade_error *error)
{
    struct rfade_channel *channels = NULL;
    size_t count = 0;
    enum rfade_status status = rfade_survey_channels(survey, &channels, &count, error);
    if (status == RFADE_OK)
        status = write_channels(run, channels, count, error);
    free(channels);
    return status;
}

static enum rfade_status show_channel(const struct rfade_run *run, struct rfade_survey *survey,
                                      const char *name, struct rfade_error *error)
{
    struct rfade_channel channel;
    enum rfade_status status = rfade_survey_channel(survey, name, &channel, error);
    return status == RFADE_OK ? write_channels(run, &channel, 1, error) : status;
}

static bool anything_told(const struct rfade_channel *told)
{
    const double values[] = {told->carrier_hz,      told->bandwidth_hz,    told->symbol_rate_hz,
                             told->noise_figure_db, told->noise_floor_dbm, told->step_db,
                             told->floor_dbm,       told->ceiling_dbm};
    for (size_t i = 0; i < sizeof values / sizeof values[0]; i++)
        if (!isnan(values[i]))
            return true;
    return false;
}

static enum rfade_status run_channel(struct rfade_run *run, struct rfade_error *error)
{
    const struct rfade_channel *told = run->options;
    const char *name = run->arguments.count ? run->arguments.items[0] : NULL;
    bool telling = anything_told(told);
    struct rfade_survey *survey = NULL;
    if (telling && !name)
        return rfade_usage(error, &rfade_command_channel,
                           "whose description is that? give NAME");
    enum rfade_status status = rfade_survey_open(
        run->common->survey, telling ? RFADE_SURVEY_CREATE : RFADE_SURVEY_READ, &survey, error);
    if (status != RFADE_OK)
        return status;
    if (telling)
        status = rfade_survey_channel_set(survey, name, told, error);
    else if (name)
        status = show_channel(run, survey, name, error);
    else
        status = list_channels(run, survey, error);
    rfade_survey_close(survey);
    return status;
}

const struct rfade_command rfade_command_channel = {
    .name = "channel",
    .arguments = "[NAME]",
    .summary = "describe a radio channel; without options, list them",
    .details = "What is not told keeps what was told before.",
    .arguments_max = 1,
    .options = options,
    .option_count = OPTIONS,
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_channel,
};
