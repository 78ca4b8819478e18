/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <inttypes.h>

#include "analyse/analyse.h"
#include "analyse/results.h"
#include "cli/command.h"
#include "cli/found.h"

struct fit_options {
    bool all;
    double window_wavelengths;
    double gap_s;
    double fix_gap_s;
    double noise_margin_db;
};

static const struct fit_options defaults = {
    .all = false, .window_wavelengths = 40, .gap_s = 30, .fix_gap_s = 30, .noise_margin_db = 0};

static const struct rfade_option options[] = {
    {"all", NULL, RFADE_OPTION_FLAG, offsetof(struct fit_options, all), 0, 0, NULL,
     "make everything again, not only what changed"},
    {"window-wavelengths", "W", RFADE_OPTION_NUMBER,
     offsetof(struct fit_options, window_wavelengths), 5, 1000, NULL,
     "window of travel of the local mean, in wavelengths (40)"},
    {"gap-s", "T", RFADE_OPTION_NUMBER, offsetof(struct fit_options, gap_s), 0.001, 86400, NULL,
     "a longer gap between readings ends a trace, in seconds (30)"},
    {"fix-gap-s", "T", RFADE_OPTION_NUMBER, offsetof(struct fit_options, fix_gap_s), 0.001,
     86400, NULL,
     "readings in a longer gap between positions, as in a tunnel, stay without a place (30)"},
    {"noise-margin-db", "DB", RFADE_OPTION_NUMBER,
     offsetof(struct fit_options, noise_margin_db), 0, 40, NULL,
     "the levels include the noise: take it off where the channel's noise is known, and count "
     "levels less than this above it as below it, for instance 3 (0: levels are of the signal "
     "alone)"},
};

static const struct rfade_column columns[] = {
    {"streams_made", RFADE_COLUMN_INTEGER, 0, false, false},
    {"streams_kept", RFADE_COLUMN_INTEGER, 0, false, false},
    {"segments_fitted", RFADE_COLUMN_INTEGER, 0, false, false},
    {"segments_kept", RFADE_COLUMN_INTEGER, 0, false, false},
};
enum { COLUMNS = sizeof columns / sizeof columns[0] };

static enum rfade_status print_summary(const struct rfade_run *run,
                                       const struct rfade_analysis_summary *summary,
                                       struct rfade_error *error)
{
    const struct rfade_value values[COLUMNS] = {rfade_value_integer(summary->streams_made),
                                                rfade_value_integer(summary->streams_kept),
                                                rfade_value_integer(summary->segments_fitted),
                                                rfade_value_integer(summary->segments_kept)};
    return rfade_rows_single(run->common->format, run->output, columns, COLUMNS, values, error);
}

/* Counting goes through all readings: only after a run that made something. */
static enum rfade_status tell_unused(const struct rfade_run *run, struct rfade_survey *survey,
                                     struct rfade_error *error)
{
    int64_t count = 0;
    if (run->common->quiet)
        return RFADE_OK;
    enum rfade_status status = rfade_readings_without_level(survey, &count, error);
    if (status == RFADE_OK && count > 0)
        (void)fprintf(run->notes, "%" PRId64 " readings carry SNR alone and were not used\n",
                      count);
    return status;
}

static enum rfade_status run_fit(struct rfade_run *run, struct rfade_error *error)
{
    const struct fit_options *asked = run->options;
    struct rfade_analysis_settings settings = rfade_analysis_defaults();
    settings.window_wavelengths = asked->window_wavelengths;
    settings.gap_s = asked->gap_s;
    settings.fix_gap_s = asked->fix_gap_s;
    settings.noise_margin_db = asked->noise_margin_db;
    struct rfade_survey *survey = NULL;
    struct rfade_analysis_summary summary;
    enum rfade_status status =
        rfade_survey_open(run->common->survey, RFADE_SURVEY_WRITE, &survey, error);
    if (status == RFADE_OK)
        status = rfade_analyse(survey, &settings, asked->all, &summary, error);
    if (status == RFADE_OK && !summary.nothing_new)
        status = tell_unused(run, survey, error);
    if (status == RFADE_OK && !summary.nothing_new && !run->common->quiet)
        status = rfade_note_gaps(survey, run->notes, error);
    rfade_survey_close(survey);
    if (status == RFADE_OK && summary.nothing_new && !run->common->quiet)
        (void)fputs("nothing new since the last fit\n", run->notes);
    return status == RFADE_OK ? print_summary(run, &summary, error) : status;
}

const struct rfade_command rfade_command_fit = {
    .name = "fit",
    .summary = "separate, tally and fit whatever is new since the last fit",
    .details = "A stream is what one vehicle logged of one channel on one outing, along one "
               "route. What was made from unchanged readings, positions, descriptions and "
               "settings is kept; the result is the same as that of --all.",
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_fit,
};
