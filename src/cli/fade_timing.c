/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>

#include "analyse/timing.h"
#include "cli/segment_rows.h"

struct fade_timing_options {
    struct rfade_segment_options segments;
    struct rfade_numbers below_db;
    double speed_kmh;
};

static const struct fade_timing_options defaults = {.segments = RFADE_SEGMENT_DEFAULTS,
                                                    .speed_kmh = NAN};

static const struct rfade_option options[] = {
    {"below-local-mean-db", "X", RFADE_OPTION_NUMBERS,
     offsetof(struct fade_timing_options, below_db), -5, 30, NULL,
     "levels, dB below the local mean: of -5, 0, 3, 5, 10, 15, 20, 25, 30; default "
     "0,5,10,15,20"},
    {"speed-kmh", "V", RFADE_OPTION_NUMBER, offsetof(struct fade_timing_options, speed_kmh),
     0.1, 2000, NULL, "speed for what is per second; default: as driven, standing left out"},
    RFADE_SEGMENT_OPTION_LINES(struct fade_timing_options)};

static const struct rfade_column own_columns[] = {
    {"below_local_mean_db", RFADE_COLUMN_NUMBER, 0, false, false},
    {"timing_model", RFADE_COLUMN_TEXT, 0, false, false},
    {"predicted_per_m", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"observed_per_m", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"crossings", RFADE_COLUMN_INTEGER, 0, false, false},
    {"visible", RFADE_COLUMN_TEXT, 0, false, false},
    {"hidden_by", RFADE_COLUMN_TEXT, 0, false, false},
    {"ray_factor", RFADE_COLUMN_NUMBER, 2, false, false},
    {"predicted_fade_m", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"observed_fade_m", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"longest_fade_m", RFADE_COLUMN_NUMBER, 2, false, false},
    {"speed_kmh", RFADE_COLUMN_NUMBER, 1, false, false},
    {"predicted_per_s", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"observed_per_s", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"predicted_fade_s", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"observed_fade_s", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"longest_fade_s", RFADE_COLUMN_NUMBER, 3, false, false},
};

/* Which of the counted levels to show, in the order asked for. */
struct levels {
    int index[RFADE_CROSSING_LEVELS];
    size_t count;
};

static int level_index(double below_db)
{
    for (int i = 0; i < RFADE_CROSSING_LEVELS; i++)
        if (below_db * 100.0 == -(double)rfade_crossing_levels_cdb[i])
            return i;
    return -1;
}

static bool has_level(const struct levels *levels, int index)
{
    for (size_t i = 0; i < levels->count; i++)
        if (levels->index[i] == index)
            return true;
    return false;
}

static enum rfade_status choose_levels(const struct rfade_numbers *asked, struct levels *levels,
                                       struct rfade_error *error)
{
    static const double usual_db[] = {0, 5, 10, 15, 20};
    const double *items = asked->count > 0 ? asked->items : usual_db;
    size_t count = asked->count > 0 ? asked->count : sizeof usual_db / sizeof usual_db[0];
    *levels = (struct levels){.count = 0};
    for (size_t i = 0; i < count; i++) {
        int index = level_index(items[i]);
        if (index < 0)
            return rfade_usage(error, &rfade_command_fade_timing,
                               "crossings are not counted %g dB below the local mean: "
                               "--below-local-mean-db takes -5, 0, 3, 5, 10, 15, 20, 25, 30",
                               items[i]);
        if (!has_level(levels, index))
            levels->index[levels->count++] = index;
    }
    return RFADE_OK;
}

/* All levels of one segment. */
struct answer {
    struct rfade_level_timing levels[RFADE_CROSSING_LEVELS];
    double speed_m_s;
};

static enum rfade_status answer_rows(struct rfade_survey *survey,
                                     const struct rfade_segment_results *results,
                                     const struct levels *levels, double speed_kmh,
                                     struct answer *answers, struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; i < results->count && status == RFADE_OK; i++) {
        struct rfade_segment_crossings seen;
        status = rfade_result_crossings(survey, &results->rows[i], &seen, error);
        for (size_t j = 0; j < levels->count && status == RFADE_OK; j++)
            status = rfade_result_timing(&results->rows[i], &seen, levels->index[j],
                                         &answers[i].levels[j], error);
        answers[i].speed_m_s =
            isnan(speed_kmh) ? rfade_crossings_speed_m_s(&seen) : speed_kmh / 3.6;
    }
    return status;
}

/* What the rows are made of: row number `index` is a level of a segment. */
struct shown {
    const struct answer *answers;
    const struct levels *levels;
};

static void own_values(const void *context, const struct rfade_segment_result *row,
                       size_t index, struct rfade_value *own)
{
    (void)row;
    const struct shown *shown = context;
    const struct levels *levels = shown->levels;
    const struct answer *answer = &shown->answers[index / levels->count];
    const size_t level = index % levels->count;
    const struct rfade_level_timing *timing = &answer->levels[level];
    const char *reason = rfade_visibility_reason(timing->visibility);
    double speed_m_s = answer->speed_m_s;
    own[0] = rfade_value_number(0.0 - rfade_crossing_levels_cdb[levels->index[level]] / 100.0);
    own[1] = rfade_value_text(timing->model ? timing->model->name : NULL);
    own[2] = rfade_value_number(timing->predicted_per_m);
    own[3] = rfade_value_number(timing->observed_per_m);
    own[4] = rfade_value_integer(timing->crossings);
    own[5] = rfade_value_text(reason ? "no" : "yes");
    own[6] = rfade_value_text(reason);
    own[7] = rfade_value_number(timing->ray_factor);
    own[8] = rfade_value_number(timing->predicted_fade_m);
    own[9] = rfade_value_number(timing->observed_fade_m);
    own[10] = rfade_value_number(timing->longest_fade_m);
    own[11] = rfade_value_number(3.6 * speed_m_s);
    own[12] = rfade_value_number(timing->predicted_per_m * speed_m_s);
    own[13] = rfade_value_number(timing->observed_per_m * speed_m_s);
    own[14] = rfade_value_number(timing->predicted_fade_m / speed_m_s);
    own[15] = rfade_value_number(timing->observed_fade_m / speed_m_s);
    own[16] = rfade_value_number(timing->longest_fade_s);
}

/* By how often the first level asked for is crossed; where that wasn't visible, by what is
 * predicted. */
static double badness_of(const void *context, const struct rfade_segment_result *row,
                         size_t index, bool by_estimate)
{
    (void)row;
    const struct shown *shown = context;
    const struct rfade_level_timing *first = &shown->answers[index].levels[0];
    bool predicted = by_estimate || first->visibility != RFADE_VISIBLE;
    return predicted ? first->predicted_per_m : first->observed_per_m;
}

/* A ray with a Doppler shift of its own makes fades that the formula does not know. */
static void note_ray(const struct rfade_run *run, const struct answer *answers, size_t count,
                     const struct levels *levels)
{
    static const double worth_a_note = 1.2;
    double greatest = 0.0;
    for (size_t i = 0; i < count; i++)
        for (size_t level = 0; level < levels->count; level++)
            greatest = fmax(greatest, answers[i].levels[level].ray_factor);
    if (greatest > worth_a_note && !run->common->quiet)
        (void)fprintf(run->notes,
                      "the direct ray's own Doppler shift makes fades up to %.1f times as "
                      "frequent, and as much shorter, as predicted: see ray_factor\n",
                      greatest);
}

static enum rfade_status show_timing(const struct rfade_run *run,
                                     const struct fade_timing_options *asked,
                                     const struct levels *levels, struct rfade_survey *survey,
                                     const struct rfade_segment_results *results,
                                     struct rfade_error *error)
{
    struct answer *answers = calloc(results->count + 1, sizeof *answers);
    if (!answers)
        return rfade_error_no_memory(error);
    const struct shown shown = {answers, levels};
    const struct rfade_segment_table table = {
        .columns = own_columns,
        .column_count = sizeof own_columns / sizeof own_columns[0],
        .values = own_values,
        .badness = badness_of,
        .context = &shown,
        .lines = levels->count,
    };
    enum rfade_status status =
        answer_rows(survey, results, levels, asked->speed_kmh, answers, error);
    if (status == RFADE_OK)
        status = rfade_segment_print(run, &table, &asked->segments, results, error);
    if (status == RFADE_OK)
        note_ray(run, answers, results->count, levels);
    free(answers);
    return status;
}

static enum rfade_status run_fade_timing(struct rfade_run *run, struct rfade_error *error)
{
    const struct fade_timing_options *asked = run->options;
    struct levels levels;
    enum rfade_status status = choose_levels(&asked->below_db, &levels, error);
    if (status != RFADE_OK)
        return status;
    struct rfade_segment_results results;
    struct rfade_survey *survey = NULL;
    status =
        rfade_segment_read(run, &rfade_command_fade_timing, &asked->segments, &results, error);
    if (status == RFADE_OK)
        status = rfade_survey_open(run->common->survey, RFADE_SURVEY_READ, &survey, error);
    if (status == RFADE_OK)
        status = show_timing(run, asked, &levels, survey, &results, error);
    rfade_survey_close(survey);
    rfade_results_clear(&results);
    return status;
}

const struct rfade_command rfade_command_fade_timing = {
    .name = "fade-timing",
    .summary = "show how often the signal fades and for how long: predicted and observed",
    .details =
        "Crossings, downward, of levels below the local mean, under isotropic scatter and a "
        "direct ray across the road; beside them what the log shows. timing_model is the "
        "chosen model, but Rice in place of Nakagami where it fits about as well: how fast a "
        "signal moves does not follow from its distribution, and Nakagami's rate is for "
        "scatter without a ray. "
        "ray_factor is by how much more often a level is crossed, and fades are shorter, "
        "with the ray from where the log says that it may have come. visible says whether "
        "observed rates are right to 5 %; hidden_by says why not: sampling (see fading), "
        "censored (floor or ceiling), step (rounding), spacing (fades pass between readings). "
        "One segment's rate may be off by more: by chance, as crossings are few, and by half a "
        "quantisation step of the level. The longest fade is the part of it in one segment, as "
        "driven, standing left out; readings more than a wavelength apart end it. --worst "
        "ranks "
        "by the rate of the first level: observed where that is visible, else predicted.",
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_fade_timing,
};
