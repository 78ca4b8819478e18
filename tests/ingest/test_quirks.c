/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One small log for each quirk of real loggers; quirks/README.md says how they are written. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <inttypes.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "ingest/collect.h"
#include "ingest/walk.h"

#define FOLDER ROUTEFADE_TEST_DIR "/ingest/quirks/"

/* 2026-01-15T20:15:00Z, by Python 3.11 datetime. */
static const int64_t start_us = INT64_C(1768508100000000);

/* What is expected stands in NAME.expected, the map in NAME.ini. */
static const struct quirk {
    const char *name;
    const char *log;
} quirks[] = {
    /* layout */
    {"no_header", "no_header.csv"},
    {"more_values_than_names", "more_values_than_names.txt"},
    {"sep_line", "sep_line.csv"},
    {"one_blank", "one_blank.txt"},
    {"runs_of_blanks", "runs_of_blanks.txt"},
    {"row_shortened", "row_shortened.txt"},
    {"mixed_line_ends", "mixed_line_ends.csv"},
    {"names_of_all_kinds", "names_of_all_kinds.csv"},
    {"byte_order_mark", "byte_order_mark.csv"},
    {"fences_and_comments", "fences_and_comments.csv"},
    {"last_line_cut_off", "last_line_cut_off.csv"},
    {"workbook", "workbook.csv"},
    {"archive", "archive.csv"},
    {"picture", "picture.csv"},
    {"single_run", "single_run.csv"},
    {"same_run_again", "same_run_again.csv"},
    {"merged_copy", "merged_copy.csv"},
    /* time */
    {"epoch_s", "epoch_s.csv"},
    {"epoch_ms", "epoch_ms.csv"},
    {"epoch_us", "epoch_us.csv"},
    {"seconds_and_nanoseconds", "seconds_and_nanoseconds.csv"},
    {"iso_forms", "iso_forms.csv"},
    {"bracketed_time", "bracketed_time.log"},
    {"time_of_day", "time_of_day_plough-2_20260115.csv"},
    {"no_time_at_all", "no_time_at_all.csv"},
    {"whole_seconds", "whole_seconds.csv"},
    {"backward_step", "backward_step.csv"},
    {"descending", "descending.csv"},
    {"several_sessions", "several_sessions.csv"},
    {"clock_not_set", "clock_not_set.csv"},
    {"clock_jump", "clock_jump.csv"},
    {"two_clocks", "two_clocks.csv"},
    {"two_clocks_apart", "two_clocks_apart.csv"},
    {"two_clocks_told", "two_clocks_told.csv"},
    {"hour_twice", "hour_twice.csv"},
    {"hour_left_out", "hour_left_out.csv"},
    /* positions */
    {"utm_positions", "utm_positions.csv"},
    {"local_metres", "local_metres.csv"},
    {"distance_only", "distance_only.csv"},
    {"position_in_file_name", "sensor03_12.5_-30.0.mbd"},
    {"held_positions", "held_positions.csv"},
    {"no_fix", "no_fix.csv"},
    {"corrupted_digits", "corrupted_digits.csv"},
    {"positions_nmea", "positions_nmea.txt"},
    {"positions_gpx", "positions_gpx.gz"},
    /* damage */
    {"garbage_bytes", "garbage_bytes.csv"},
    {"shifted_columns", "shifted_columns.csv"},
    /* levels */
    {"sentinels", "sentinels.csv"},
    {"steps", "steps.csv"},
    {"sample_and_hold", "sample_and_hold.csv"},
    {"levels_above_zero", "levels_above_zero.csv"},
    {"hopped_frequencies", "hopped_frequencies.csv"},
    {"several_receivers", "several_receivers.csv"},
    {"lost_packets", "lost_packets.csv"},
    {"noise_beside_level", "noise_beside_level.csv"},
    /* JSON */
    {"json_texts_for_numbers", "json_texts_for_numbers.json"},
    {"json_nested", "json_nested.json"},
    {"json_lines", "json_lines.json"},
};

enum { QUIRKS = sizeof quirks / sizeof quirks[0], MOST_WORDS = 8, LINE_SIZE = 256 };

/* The log at hand, and how much of what came out of it was expected so far. */
static struct collected got;
static const char *at_hand;
static size_t readings;
static size_t numbers;
static size_t fixes;
static size_t refusals;

static double number(const char *text)
{
    char *end = NULL;
    double value = strcmp(text, "-") == 0 ? NAN : strtod(text, &end);
    if (end && *end)
        fail_msg("%s.expected: no number: %s", at_hand, text);
    return value;
}

static int32_t hundredths(const char *text)
{
    double value = number(text);
    return isnan(value) ? RFADE_NO_VALUE_CDB : (int32_t)lround(100 * value);
}

static void expect_reading(char *words[MOST_WORDS])
{
    const struct collected_reading *reading = &got.readings[readings++];
    if (readings > got.reading_count)
        fail_msg("%s: reading %zu did not come", at_hand, readings);
    int64_t time_us = start_us + llround(1e6 * number(words[1]));
    if (reading->time_us != time_us || strcmp(reading->vehicle, words[2]) != 0 ||
        strcmp(reading->channel, words[3]) != 0 || reading->level_cdb != hundredths(words[4]) ||
        reading->snr_cdb != hundredths(words[5]))
        fail_msg("%s: reading %zu: at %" PRId64 " us after what is expected, %s %s %d %d",
                 at_hand, readings, reading->time_us - time_us, reading->vehicle,
                 reading->channel, reading->level_cdb, reading->snr_cdb);
}

static void expect_fix(char *words[MOST_WORDS])
{
    const struct rfade_ingest_fix *fix = &got.fixes[fixes++];
    double speed_m_s = number(words[4]);
    if (fixes > got.fix_count)
        fail_msg("%s: fix %zu did not come", at_hand, fixes);
    int64_t time_us = start_us + llround(1e6 * number(words[1]));
    bool speed_fits =
        isnan(speed_m_s) ? isnan(fix->speed_m_s) : fabs(fix->speed_m_s - speed_m_s) < 1e-6;
    if (fix->time_us != time_us || fabs(fix->latitude_deg - number(words[2])) > 1e-6 ||
        fabs(fix->longitude_deg - number(words[3])) > 1e-6 || !speed_fits)
        fail_msg("%s: fix %zu: at %" PRId64 " us after what is expected, %.9f %.9f %g", at_hand,
                 fixes, fix->time_us - time_us, fix->latitude_deg, fix->longitude_deg,
                 fix->speed_m_s);
}

static void expect_refusal(const char *line, const char *reason)
{
    const struct collected_refusal *refusal = &got.refusals[refusals++];
    if (refusals > got.refusal_count)
        fail_msg("%s: line %s was not refused", at_hand, line);
    if (refusal->line != (size_t)number(line) || !strstr(refusal->reason, reason))
        fail_msg("%s: line %zu was refused: %s", at_hand, refusal->line, refusal->reason);
}

static void expect_numbers(char *words[MOST_WORDS])
{
    for (size_t i = 1; i < MOST_WORDS && words[i]; i++, numbers++)
        if (numbers >= got.reading_count || !got.readings[numbers].numbered ||
            got.readings[numbers].sequence != (int64_t)number(words[i]))
            fail_msg("%s: reading %zu has not number %s", at_hand, numbers + 1, words[i]);
}

/* What follows a line's first words, up to its end. */
static const char *rest_of(const char *line, size_t words)
{
    for (; words > 0; words--) {
        line += strcspn(line, " ");
        line += strspn(line, " ");
    }
    return line;
}

static void expect(const char *line)
{
    char copy[LINE_SIZE];
    char *words[MOST_WORDS + 1] = {NULL};
    char *rest = copy;
    (void)snprintf(copy, sizeof copy, "%s", line);
    for (size_t i = 0; i < MOST_WORDS && *rest; i++) {
        words[i] = rest;
        rest += strcspn(rest, " ");
        if (*rest)
            *rest++ = '\0';
    }
    bool whole = words[0] && strcmp(words[0], "whole") == 0;
    if (whole != (got.status != RFADE_OK))
        fail_msg("%s: %s", at_hand, got.status == RFADE_OK ? "was taken" : got.error.what);
    if (whole && (got.status != RFADE_INPUT || !strstr(got.error.what, rest_of(line, 1)) ||
                  got.error.remedy[0] == '\0'))
        fail_msg("%s: %s", at_hand, got.error.what);
    if (strcmp(words[0], "reading") == 0)
        expect_reading(words);
    else if (strcmp(words[0], "fix") == 0)
        expect_fix(words);
    else if (strcmp(words[0], "refused") == 0)
        expect_refusal(words[1], rest_of(line, 2));
    else if (strcmp(words[0], "numbers") == 0)
        expect_numbers(words);
    else if (strcmp(words[0], "no_reading") == 0)
        assert_int_equal(got.summary.no_reading, (size_t)number(words[1]));
    else if (!whole && strcmp(words[0], "unnamed") != 0)
        fail_msg("%s.expected: %s", at_hand, line);
}

/* Reads the log; its first expected line may say that it names its vehicle itself. */
static void read_log(const struct quirk *quirk, bool named)
{
    char path[512];
    struct rfade_column_map *map = NULL;
    struct rfade_error error;
    const struct rfade_ingest_names names = {.vehicle = "test"};
    (void)snprintf(path, sizeof path, "%s%s.ini", FOLDER, quirk->name);
    if (access(path, F_OK) == 0 && rfade_column_map_read(path, &map, &error) != RFADE_OK)
        fail_msg("%s.ini, line %zu: %s", quirk->name, error.line, error.what);
    const struct rfade_column_map *const maps[1] = {map};
    (void)snprintf(path, sizeof path, "%s%s", FOLDER, quirk->log);
    collect_file(&got, path, maps, map ? 1 : 0, named ? NULL : &names);
    rfade_column_map_destroy(map);
    readings = numbers = fixes = refusals = 0;
}

static void check_quirk(const struct quirk *quirk)
{
    char path[512];
    char line[LINE_SIZE];
    bool any = false;
    at_hand = quirk->name;
    (void)snprintf(path, sizeof path, "%s%s.expected", FOLDER, quirk->name);
    FILE *file = fopen(path, "rbe");
    if (!file)
        fail_msg("there is no %s", path);
    while (file && fgets(line, sizeof line, file)) {
        line[strcspn(line, "\n")] = '\0';
        if (!any)
            read_log(quirk, strcmp(line, "unnamed") == 0);
        any = true;
        expect(line);
    }
    if (file)
        (void)fclose(file);
    assert_true(any);
    bool all = readings == got.reading_count && fixes == got.fix_count &&
               refusals == got.refusal_count;
    if (got.status == RFADE_OK && !all)
        fail_msg("%s: %zu readings, %zu fixes, %zu refusals came; the first refusal: %s",
                 at_hand, got.reading_count, got.fix_count, got.refusal_count,
                 got.refusals[0].reason);
}

static void every_quirk_comes_out_as_expected(void **state)
{
    (void)state;
    for (size_t i = 0; i < QUIRKS; i++)
        check_quirk(&quirks[i]);
}

/* No log lies there that nobody reads. */
static void every_log_is_in_the_list(void **state)
{
    (void)state;
    struct rfade_path_list list = {0};
    struct rfade_error error;
    size_t expected = 0;
    size_t others = 0;
    assert_int_equal(rfade_path_list_add(&list, FOLDER, &error), RFADE_OK);
    for (size_t i = 0; i < list.count; i++) {
        const char *dot = strrchr(list.paths[i], '.');
        expected += dot && strcmp(dot, ".expected") == 0;
        others += !dot || (strcmp(dot, ".expected") != 0 && strcmp(dot, ".ini") != 0);
    }
    rfade_path_list_clear(&list);
    assert_int_equal(expected, QUIRKS);
    assert_int_equal(others, QUIRKS + 1); /* and README.md */
}

/* By which the survey knows it: the same run under another name is the same file. */
static void a_file_is_known_by_its_bytes(void **state)
{
    (void)state;
    struct rfade_log_source *sources[3] = {NULL};
    static const char *const paths[3] = {FOLDER "single_run.csv", FOLDER "same_run_again.csv",
                                         FOLDER "merged_copy.csv"};
    for (size_t i = 0; i < 3; i++)
        assert_int_equal(rfade_log_source_open(paths[i], &sources[i], NULL), RFADE_OK);
    const unsigned char *first = rfade_log_source_sha256(sources[0]);
    assert_memory_equal(first, rfade_log_source_sha256(sources[1]), RFADE_SHA256_SIZE);
    assert_memory_not_equal(first, rfade_log_source_sha256(sources[2]), RFADE_SHA256_SIZE);
    for (size_t i = 0; i < 3; i++)
        rfade_log_source_close(sources[i]);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_quirk_comes_out_as_expected),
        cmocka_unit_test(every_log_is_in_the_list),
        cmocka_unit_test(a_file_is_known_by_its_bytes),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
