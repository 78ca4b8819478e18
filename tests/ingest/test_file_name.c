/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What file names say, and how clocks are compared. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ingest/clock.h"
#include "ingest/collect.h"
#include "ingest/file_name.h"

static struct collected got;

static void names_are_taken_apart(void **state)
{
    (void)state;
    static const struct {
        const char *pattern;
        const char *name;
        enum rfade_name_part part;
        const char *text; /* NULL: no match */
    } cases[] = {
        {"log.csv", "log.csv", RFADE_PART_VEHICLE, ""},
        {"log.csv", "log.csv.gz", RFADE_PART_VEHICLE, NULL},
        {"*", "", RFADE_PART_VEHICLE, ""},
        {"*.csv*", "night.csv.gz", RFADE_PART_VEHICLE, ""},
        {"night-??.csv", "night-7.csv", RFADE_PART_VEHICLE, NULL},
        {"night-?-{vehicle}.csv", "night-3-plough.csv", RFADE_PART_VEHICLE, "plough"},
        {"{vehicle}.csv", ".csv", RFADE_PART_VEHICLE, NULL},
        /* as few characters as will do, but a date must be one */
        {"{vehicle}-*", "a-b-c", RFADE_PART_VEHICLE, "a"},
        {"{vehicle}-{date}.csv", "a-b-2026-01-15.csv", RFADE_PART_VEHICLE, "a-b"},
        {"{vehicle}-{date}.csv", "a-b-2026-01-15.csv", RFADE_PART_DATE, "2026-01-15"},
        {"{date}*", "20260115T2015.csv", RFADE_PART_DATE, "20260115"},
        {"{date}*", "2026_01_15.csv", RFADE_PART_DATE, "2026_01_15"},
        {"{date}*", "20260230T2015.csv", RFADE_PART_DATE, NULL},
        {"{date}*", "2026-01.15.csv", RFADE_PART_DATE, NULL},
        {"{channel}_{x}_{y}.mbd", "03_-12.5_4.mbd", RFADE_PART_X, "-12.5"},
        {"{channel}_{x}_{y}.mbd", "a_b_1_2.mbd", RFADE_PART_CHANNEL, "a_b"},
        {"{latitude}N{longitude}E", "54.1N-2.3E", RFADE_PART_LONGITUDE, "-2.3"},
        {"{x},{y}", "left,right", RFADE_PART_X, NULL},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_name_parts parts;
        assert_null(rfade_name_pattern_check(cases[i].pattern));
        bool matched = rfade_name_match(cases[i].pattern, cases[i].name, &parts);
        if (matched != (cases[i].text != NULL) ||
            (matched && strcmp(parts.texts[cases[i].part], cases[i].text) != 0))
            fail_msg("%s for %s: '%s'", cases[i].pattern, cases[i].name,
                     matched ? parts.texts[cases[i].part] : "no match");
    }
}

/* Stars that could match in more ways than there is time for. */
static void a_hard_name_ends_soon(void **state)
{
    (void)state;
    char name[256] = {0};
    struct rfade_name_parts parts;
    memset(name, 'a', sizeof name - 1);
    assert_false(rfade_name_match("*a*a*a*a*a*a*a*a*a*a*a*a*b", name, &parts));
    assert_false(rfade_name_match("{vehicle}{channel}{campaign}{x}{y}*b", name, &parts));
}

#define PATTERN_MAP(vehicle)                                                                   \
    "[file]\nname = " vehicle "\n[time]\ncolumn = time\n[level]\ncolumn = rssi\n"

/* Maps that differ by the names of their files alone. */
static void a_name_chooses_the_map(void **state)
{
    (void)state;
    static const char log[] = "time,rssi\n1768508100,-80\n";
    struct rfade_column_map *maps[2] = {good_map(PATTERN_MAP("plough-{vehicle}.csv")),
                                        good_map(PATTERN_MAP("spreader-{vehicle}.csv"))};
    const struct rfade_column_map *const both[2] = {maps[0], maps[1]};
    collect_file(&got, write_log("spreader-7.csv", log, strlen(log)), both, 2, NULL);
    assert_int_equal(got.status, RFADE_OK);
    assert_string_equal(got.readings[0].vehicle, "7");
    struct rfade_ingest_names names = {.vehicle = "other"};
    collect_file(&got, write_log("plough-7.csv", log, strlen(log)), both, 2, &names);
    assert_string_equal(got.readings[0].vehicle, "other"); /* given: wins */
    collect_file(&got, write_log("lorry.csv", log, strlen(log)), both, 2, NULL);
    assert_int_equal(got.status, RFADE_INPUT); /* by the built-in map, without a vehicle */
    assert_non_null(strstr(got.error.remedy, "--vehicle"));
    static const char other[] = "a,b\n1768508100,-80\n";
    collect_file(&got, write_log("lorry.csv", other, strlen(other)), both, 1, NULL);
    assert_non_null(strstr(got.error.what, "the file's name is not like 'plough-{vehicle}"));
    rfade_column_map_destroy(maps[0]);
    rfade_column_map_destroy(maps[1]);
}

static void a_place_off_the_earth_is_refused(void **state)
{
    (void)state;
    static const char log[] = "time,rssi\n1768508100,-80\n";
    struct rfade_column_map *map = good_map(PATTERN_MAP("{latitude}_{longitude}.csv"));
    const struct rfade_column_map *const maps[1] = {map};
    struct rfade_ingest_names names = {.vehicle = "test"};
    collect_file(&got, write_log("54.1_-2.3.csv", log, strlen(log)), maps, 1, &names);
    assert_int_equal(got.status, RFADE_OK);
    assert_true(got.fix_count == 1 && got.fixes[0].latitude_deg == 54.1);
    collect_file(&got, write_log("94.1_-2.3.csv", log, strlen(log)), maps, 1, &names);
    assert_int_equal(got.status, RFADE_OK); /* the built-in map has no place */
    assert_int_equal(got.fix_count, 0);
    rfade_column_map_destroy(map);
}

/* A clock 40 s slow that runs away by 50 parts in a million; rows every 0.1 s, fixes every
 * second, told 0.05 s late. */
static void the_clocks_distance_is_found(void **state)
{
    (void)state;
    enum { ROWS = 400000 };
    int64_t offset_us = 0;
    struct rfade_clock *clock = rfade_clock_create();
    assert_non_null(clock);
    assert_non_null(strstr(rfade_clock_offset(clock, &offset_us), "no GNSS time"));
    for (int64_t i = 0; i < ROWS; i++) {
        int64_t time_us = 100000 * i;
        int64_t gnss_us = (time_us - 50000) / 1000000 * 1000000;
        rfade_clock_add(clock, time_us + time_us / 20000 - 40000000, gnss_us);
    }
    assert_null(rfade_clock_offset(clock, &offset_us));
    /* Half of it is gone in the middle: 20,000 s by 50e-6 are 1 s; a row comes up to 0.1 s
     * after its fix. */
    assert_true(llabs(offset_us - 39000000) <= 100000);
    rfade_clock_destroy(clock);
}

static void a_clock_that_was_set_is_refused(void **state)
{
    (void)state;
    int64_t offset_us = 1;
    struct rfade_clock *clock = rfade_clock_create();
    assert_non_null(clock);
    for (int64_t i = 0; i < 100; i++)
        rfade_clock_add(clock, 1000000 * i + (i < 85 ? 0 : 3000000), 1000000 * i);
    assert_non_null(strstr(rfade_clock_offset(clock, &offset_us), "was set"));
    assert_int_equal(offset_us, 0);
    rfade_clock_destroy(clock);
}

static void too_many_rows_of_one_second_are_refused(void **state)
{
    (void)state;
    static const char map[] = "[time]\ncolumn = time\nspread = yes\n[level]\ncolumn = rssi\n";
    enum { ROWS = 4096 };
    char *text = malloc(64 + ROWS * 20);
    assert_non_null(text);
    size_t used = (size_t)sprintf(text, "time,rssi\n");
    for (int i = 0; i < ROWS; i++)
        used += (size_t)sprintf(text + used, "1768508100,-80\n");
    collect_text(&got, map, text);
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.reading_count, ROWS);
    assert_int_equal(got.readings[1].time_us - got.readings[0].time_us, 1000000 / ROWS);
    (void)sprintf(text + used, "1768508100,-80\n");
    collect_text(&got, map, text);
    free(text);
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.what, "4096"));
    assert_int_equal(got.error.line, ROWS + 2);
}

/* With the clock's offset, and a time that has a fraction, and a row that is refused. */
static void spread_goes_with_an_offset(void **state)
{
    (void)state;
    collect_text(&got,
                 "[time]\ncolumn = time\nspread = yes\noffset_s = 0.125\n[level]\n"
                 "column = rssi\n",
                 "time,rssi\n1768508100,-80\n1768508100,loud\n1768508100,-81\n1768508100.5,"
                 "-82\n1768508101,-83\n");
    static const int64_t after_us[] = {125000, 791666, 625000, 1125000};
    assert_int_equal(got.reading_count, 4);
    for (size_t i = 0; i < 4; i++)
        assert_int_equal(got.readings[i].time_us - INT64_C(1768508100000000), after_us[i]);
    assert_one_refusal(&got, 3, "loud");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(names_are_taken_apart),
        cmocka_unit_test(a_hard_name_ends_soon),
        cmocka_unit_test(a_name_chooses_the_map),
        cmocka_unit_test(a_place_off_the_earth_is_refused),
        cmocka_unit_test(the_clocks_distance_is_found),
        cmocka_unit_test(a_clock_that_was_set_is_refused),
        cmocka_unit_test(too_many_rows_of_one_second_are_refused),
        cmocka_unit_test(spread_goes_with_an_offset),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
