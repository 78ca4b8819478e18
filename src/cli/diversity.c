/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <inttypes.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "analyse/diversity.h"
#include "cli/segment_rows.h"
#include "cli/threshold.h"

struct diversity_options {
    struct rfade_segment_options segments;
    struct rfade_threshold_options threshold;
    const char *with;
};

static const struct diversity_options defaults = {.segments = RFADE_SEGMENT_DEFAULTS,
                                                  .threshold = RFADE_THRESHOLD_DEFAULTS};

static const struct rfade_option options[] = {
    {"with", "NAME", RFADE_OPTION_TEXT, offsetof(struct diversity_options, with), 0, 0, NULL,
     "the channel of the second antenna; --channel names the first"},
    RFADE_THRESHOLD_OPTION_LINES(struct diversity_options),
    RFADE_SEGMENT_OPTION_LINES(struct diversity_options)};

/* What all rows share. */
struct shown {
    const struct rfade_threshold_asked *threshold;
    const struct rfade_diversity *answers;
    const struct rfade_diversity_row *pairs;
};

enum { THRESHOLD_COLUMN = 1 };
static const struct rfade_column own_columns[] = {
    {"with", RFADE_COLUMN_TEXT, 0, false, true},
    {"threshold", RFADE_COLUMN_NUMBER, 1, false, true}, /* named by what was asked */
    {"pairs", RFADE_COLUMN_INTEGER, 0, false, false},
    {"below_first", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"below_second", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"below_both", RFADE_COLUMN_PROBABILITY, 3, true, false},
    {"below_both_low", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"below_both_high", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"independent_both", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"power_correlation", RFADE_COLUMN_NUMBER, 2, true, false},
    {"power_correlation_low", RFADE_COLUMN_NUMBER, 2, false, false},
    {"power_correlation_high", RFADE_COLUMN_NUMBER, 2, false, false},
    {"envelope_correlation", RFADE_COLUMN_NUMBER, 2, false, false},
    {"gain_10_percent_db", RFADE_COLUMN_NUMBER, 1, false, false},
    {"independent_10_percent_db", RFADE_COLUMN_NUMBER, 1, false, false},
    {"gain_1_percent_db", RFADE_COLUMN_NUMBER, 1, false, false},
    {"independent_1_percent_db", RFADE_COLUMN_NUMBER, 1, false, false},
};
enum { OWN_COLUMNS = sizeof own_columns / sizeof own_columns[0] };

static void own_values(const void *context, const struct rfade_segment_result *row,
                       size_t index, struct rfade_value *own)
{
    (void)row;
    const struct shown *shown = context;
    const struct rfade_diversity *answer = &shown->answers[index];
    own[0] = rfade_value_text(shown->pairs[index].branch[1]->channel);
    own[1] = rfade_value_number(shown->threshold->value);
    own[2] = rfade_value_integer(answer->pairs);
    own[3] = rfade_value_number(answer->below[0]);
    own[4] = rfade_value_number(answer->below[1]);
    own[5] = rfade_value_number(answer->both_below);
    own[6] = rfade_value_number(answer->both_below_low);
    own[7] = rfade_value_number(answer->both_below_high);
    own[8] = rfade_value_number(answer->both_below_independent);
    own[9] = rfade_value_number(answer->power_correlation);
    own[10] = rfade_value_number(answer->power_correlation_low);
    own[11] = rfade_value_number(answer->power_correlation_high);
    own[12] = rfade_value_number(answer->envelope_correlation);
    own[13] = rfade_value_number(answer->gain_db[0]);
    own[14] = rfade_value_number(answer->gain_independent_db[0]);
    own[15] = rfade_value_number(answer->gain_db[1]);
    own[16] = rfade_value_number(answer->gain_independent_db[1]);
}

static enum rfade_status check_options(const struct diversity_options *asked,
                                       struct rfade_error *error)
{
    if (!asked->segments.channel || !asked->with)
        return rfade_usage(error, &rfade_command_diversity,
                           "--channel and --with name the channels of the two antennas");
    if (strcmp(asked->segments.channel, asked->with) == 0)
        return rfade_usage(error, &rfade_command_diversity,
                           "--channel and --with name the same channel");
    return RFADE_OK;
}

/* The order of results of one channel. */
static int compare_places(const struct rfade_segment_result *a,
                          const struct rfade_segment_result *b)
{
    int order = strcmp(a->route, b->route);
    if (order == 0)
        order = (a->segment > b->segment) - (a->segment < b->segment);
    return order != 0 ? order : strcmp(a->campaign, b->campaign);
}

/* Both channels on the scale of the threshold. */
static enum rfade_status shift_levels(const struct rfade_threshold_asked *threshold,
                                      struct rfade_diversity_row *pair,
                                      struct rfade_error *error)
{
    for (int b = 0; b < 2; b++) {
        struct rfade_threshold here = {NAN, NAN};
        enum rfade_status status =
            rfade_threshold_here(pair->branch[b], threshold, &here, error);
        if (status != RFADE_OK)
            return status;
        pair->shift_cdb[b] = (int32_t)lround(100.0 * (threshold->value - here.level_dbm));
    }
    return RFADE_OK;
}

/* Rows of the first channel that the second has, too: they are moved to the front. */
static enum rfade_status match_rows(struct rfade_segment_results *first,
                                    const struct rfade_segment_results *second,
                                    const struct rfade_threshold_asked *threshold,
                                    struct rfade_diversity_row *pairs, size_t *count,
                                    struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    *count = 0;
    for (size_t i = 0, j = 0; i < first->count && status == RFADE_OK; i++) {
        while (j < second->count && compare_places(&second->rows[j], &first->rows[i]) < 0)
            j++;
        if (j == second->count || compare_places(&second->rows[j], &first->rows[i]) > 0)
            continue;
        struct rfade_segment_result swapped = first->rows[*count];
        first->rows[*count] = first->rows[i];
        first->rows[i] = swapped;
        pairs[*count].branch[0] = &first->rows[*count];
        pairs[*count].branch[1] = &second->rows[j];
        status = shift_levels(threshold, &pairs[(*count)++], error);
    }
    if (status == RFADE_OK && *count == 0)
        return rfade_error_set(error, RFADE_NO_DATA, "see `routefade fading`",
                               "no segment has results on both channels in one campaign");
    return status;
}

static enum rfade_status evaluate_rows(const struct rfade_diversity_row *pairs, size_t count,
                                       double threshold_db, struct rfade_diversity *answers,
                                       struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    double confidence = rfade_analysis_defaults().confidence;
    for (size_t i = 0; i < count && status == RFADE_OK; i++)
        status =
            rfade_diversity_evaluate(&pairs[i], threshold_db, confidence, &answers[i], error);
    return status;
}

static double badness_of(const void *context, const struct rfade_segment_result *row,
                         size_t index, bool by_estimate)
{
    (void)row;
    const struct rfade_diversity *answer = &((const struct shown *)context)->answers[index];
    return by_estimate ? answer->both_below : answer->both_below_low;
}

static enum rfade_status print_rows(const struct rfade_run *run, const struct shown *shown,
                                    const struct rfade_segment_options *order,
                                    const struct rfade_segment_results *first, size_t count,
                                    struct rfade_error *error)
{
    struct rfade_column columns[OWN_COLUMNS];
    memcpy(columns, own_columns, sizeof own_columns);
    columns[THRESHOLD_COLUMN].name = shown->threshold->column;
    const struct rfade_segment_table table = {.columns = columns,
                                              .column_count = OWN_COLUMNS,
                                              .values = own_values,
                                              .badness = badness_of,
                                              .context = shown};
    const struct rfade_segment_results paired = {.rows = first->rows, .count = count};
    return rfade_segment_print(run, &table, order, &paired, error);
}

static void note_unpaired(const struct rfade_run *run, const struct rfade_diversity *answers,
                          size_t count)
{
    size_t unpaired = 0;
    for (size_t i = 0; i < count; i++)
        unpaired += answers[i].pairs == 0;
    if (unpaired > 0 && !run->common->quiet)
        (void)fprintf(run->notes,
                      "on %zu of %zu segments no readings of the two channels lie close enough "
                      "in time and place to be paired\n",
                      unpaired, count);
}

static enum rfade_status show_diversity(const struct rfade_run *run,
                                        const struct diversity_options *asked,
                                        const struct rfade_threshold_asked *threshold,
                                        struct rfade_segment_results *first,
                                        const struct rfade_segment_results *second,
                                        struct rfade_error *error)
{
    struct rfade_diversity_row *pairs = calloc(first->count + 1, sizeof *pairs);
    struct rfade_diversity *answers = calloc(first->count + 1, sizeof *answers);
    const char *const channels[2] = {asked->segments.channel, asked->with};
    const struct rfade_analysis_settings settings = rfade_analysis_defaults();
    struct rfade_survey *survey = NULL;
    size_t count = 0;
    enum rfade_status status = RFADE_NO_MEMORY;
    if (pairs && answers)
        status = match_rows(first, second, threshold, pairs, &count, error);
    else
        (void)rfade_error_no_memory(error);
    if (status == RFADE_OK)
        status = rfade_survey_open(run->common->survey, RFADE_SURVEY_READ, &survey, error);
    if (status == RFADE_OK)
        status = rfade_diversity_pair(survey, &settings, channels,
                                      (int32_t)lround(100.0 * threshold->value), pairs, count,
                                      error);
    rfade_survey_close(survey);
    if (status == RFADE_OK)
        status = evaluate_rows(pairs, count, threshold->value, answers, error);
    const struct shown shown = {threshold, answers, pairs};
    if (status == RFADE_OK)
        status = print_rows(run, &shown, &asked->segments, first, count, error);
    if (status == RFADE_OK)
        note_unpaired(run, answers, count);
    for (size_t i = 0; i < count; i++)
        rfade_paired_total_clear(&pairs[i].total);
    free(pairs);
    free(answers);
    return status;
}

static enum rfade_status run_diversity(struct rfade_run *run, struct rfade_error *error)
{
    const struct diversity_options *asked = run->options;
    struct rfade_threshold_asked threshold = {"threshold_dbm", NAN};
    struct rfade_segment_results first = {.count = 0}, second = {.count = 0};
    struct rfade_segment_options other = asked->segments;
    enum rfade_status status = check_options(asked, error);
    if (status == RFADE_OK)
        status = rfade_threshold_choose(&rfade_command_diversity, &asked->threshold, &threshold,
                                        error);
    if (status == RFADE_OK)
        status =
            rfade_segment_read(run, &rfade_command_diversity, &asked->segments, &first, error);
    other.channel = asked->with;
    if (status == RFADE_OK)
        status = rfade_segment_read(run, &rfade_command_diversity, &other, &second, error);
    if (status == RFADE_OK)
        status = show_diversity(run, asked, &threshold, &first, &second, error);
    rfade_results_clear(&first);
    rfade_results_clear(&second);
    return status;
}

const struct rfade_command rfade_command_diversity = {
    .name = "diversity",
    .summary = "compare two antennas that were both logged: joint outage, correlation, gain",
    .details =
        "Readings of one vehicle on two channels are paired where they lie within half a "
        "reading's interval and a twentieth of a wavelength of each other. below_first, "
        "below_second and below_both are shares of the travel below the threshold. "
        "independent_both is what the fitted models give for both at once if the fast fading "
        "of "
        "the two were independent, over the local means as driven. Correlations are of the "
        "fast fading, as power (and, beside it, as envelope). The gain is how many dB higher a "
        "level the stronger of the two exceeds in 90 % or 99 % of the travel than the better "
        "single antenna does: selection combining; shown where at least ten independent places "
        "(half a wavelength each) lie below. Intervals are of 95 %, from blocks of travel.",
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_diversity,
};
