/* SPDX-License-Identifier: GPL-3.0-or-later */
/* JSON logs: a value a line, an array, or records further inside. Logs are made up here. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ingest/collect.h"
#include "ingest/json_path.h"

/* 2026-01-15T20:15:00Z, by Python 3.11 datetime. */
static const int64_t start_us = INT64_C(1768508100000000);

static struct collected got;

#define MAP                                                                                    \
    "[file]\nformat = json\n[time]\ncolumn = rx.time\n[level 868]\ncolumn = rx.rssi\n"         \
    "snr_column = $.rx.\"s n r\"\n"
#define RECORD_0 "{\"rx\":{\"time\":1768508100.123456,\"rssi\":\"-80.25\",\"s n r\":7}}"
#define RECORD_1 "{\"rx\":{\"time\":\"1768508101\",\"rssi\":-81,\"s n r\":null},\"tx\":[1,{}]}"

static void the_forms_say_the_same(void **state)
{
    (void)state;
    static const char *const logs[] = {
        RECORD_0 "\n" RECORD_1 "\n",
        RECORD_0 "\r\n\r\n" RECORD_1,
        RECORD_0 RECORD_1,
        "[" RECORD_0 "," RECORD_1 "]",
        "[\n    " RECORD_0 ", \n    " RECORD_1 "\n]\n",
        "\xEF\xBB\xBF \n[[],{\"a\":\"]\\\"\"}," RECORD_0 "," RECORD_1 "]",
        ("{\"rx\":\n{\"time\":1768508100.123456,\n\"rssi\":\"-80.25\",\"s n "
         "r\":7}}\n" RECORD_1),
    };
    for (size_t i = 0; i < sizeof logs / sizeof logs[0]; i++) {
        collect_text(&got, MAP, logs[i]);
        if (got.status != RFADE_OK || got.reading_count != 2 || got.refusal_count != 0)
            fail_msg("log %zu: %s%s", i, got.error.what, got.refusals[0].reason);
        assert_int_equal(got.readings[0].time_us, start_us + 123456);
        assert_int_equal(got.readings[0].level_cdb, -8025);
        assert_int_equal(got.readings[0].snr_cdb, 700);
        assert_string_equal(got.readings[0].channel, "868");
        assert_int_equal(got.readings[1].time_us, start_us + 1000000);
        assert_int_equal(got.readings[1].level_cdb, -8100);
        assert_int_equal(got.readings[1].snr_cdb, RFADE_NO_VALUE_CDB);
    }
}

static void records_stand_where_the_map_says(void **state)
{
    (void)state;
    static const char map[] = "[file]\nformat = json\nrecords = $.runs[*].\"the packets\"[*]\n"
                              "[time]\ncolumn = $[0]\n[level]\ncolumn = $[1]\n";
    static const char log[] =
        "{\"made\":{\"the packets\":[[0,0]]},\"runs\":[{\"place\":3,\"the packets\":"
        "[[1768508100,-80],[1768508101,-81]],\"others\":[[1,1]]},\n7,{\"the packets\":"
        "[[1768508102,-82]]}],\"runs2\":[{\"the packets\":[[1,2]]}]}";
    collect_text(&got, map, log);
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.refusal_count, 0);
    assert_int_equal(got.reading_count, 3);
    assert_int_equal(got.readings[2].time_us, start_us + 2000000);
    assert_int_equal(got.readings[2].level_cdb, -8200);
    assert_int_equal(got.summary.lines, 2);
    collect_text(&got,
                 "[file]\nformat = json\nrecords = $.runs[2].\"the packets\"[0]\n"
                 "[time]\ncolumn = $[0]\n[level]\ncolumn = $[1]\n",
                 log);
    assert_int_equal(got.reading_count, 1);
    assert_int_equal(got.readings[0].level_cdb, -8200);
}

/* A packet that was sent and not received is a record without its receive part. */
static void a_lost_packet_is_no_reading(void **state)
{
    (void)state;
    collect_text(&got, MAP "[sequence]\ncolumn = rx.n\n",
                 "[{\"rx\":{\"time\":1768508100,\"rssi\":-80,\"n\":6}},{\"tx\":{\"gain\":3}},"
                 "{\"rx\":{\"time\":1768508104,\"rssi\":-84,\"n\":\"8\"}}]");
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.refusal_count, 0);
    assert_int_equal(got.reading_count, 2);
    assert_int_equal(got.summary.rows, 3);
    assert_int_equal(got.readings[1].sequence, 8);
}

static void names_that_say_what_they_hold_need_no_map(void **state)
{
    (void)state;
    collect_text(&got, NULL,
                 "{\"note\":\"cold start\"}\n"
                 "{\"Time\":\"2026-01-15T20:15:00Z\",\"lat\":54.1,\"lon\":-2.3,\"rssi "
                 "[dBm]\":-87.5,\"channel\":\"007\"}\n"
                 "{\"Time\":\"2026-01-15T20:15:01Z\",\"lat\":54.1001,\"lon\":-2.3,\"rssi "
                 "[dBm]\":-88,\"channel\":7}\n");
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.reading_count, 2);
    assert_int_equal(got.fix_count, 2);
    assert_int_equal(got.refusal_count, 0);
    assert_string_equal(got.readings[0].channel, "007");
    assert_string_equal(got.readings[1].channel, "7");
    assert_int_equal(got.readings[1].level_cdb, -8800);
    collect_text(&got, NULL, "{\"a\":1,\"b\":2}");
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.remedy, "--columns"));
}

static void records_of_no_use_are_refused_alone(void **state)
{
    (void)state;
    static const struct {
        const char *record;
        const char *reason;
    } cases[] = {
        {"{\"rx\":{\"time\":1768508100,\"rssi\":true}}", "level 'true' is not a number"},
        {"{\"rx\":{\"time\":1768508100,\"rssi\":[-80]}}", "level '[-80]' is not a number"},
        {"{\"rx\":{\"time\":1768508100,\"rssi\":-999}}", "out of range"},
        {"{\"rx\":{\"rssi\":-80}}", "time '' is empty"},
        {"{\"rx\":{\"time\":1768508100 \"rssi\":-80}}", "not valid JSON"},
        {"{\"rx\":{\"time\":1768508100,\"rssi\":-80,}}", "not valid JSON"},
        {"{\"rx\":{\"time\":1768508100,\"rssi\":-8\x01}}", "not valid JSON"},
        {"nonsense", "not valid JSON"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        char text[512];
        (void)snprintf(text, sizeof text, "%s\n%s\n%s\n", RECORD_0, cases[i].record, RECORD_1);
        collect_text(&got, MAP, text);
        assert_one_refusal(&got, 2, cases[i].reason);
        assert_string_equal(got.refusals[0].text, cases[i].record);
        assert_int_equal(got.reading_count, 2);
        (void)snprintf(text, sizeof text, "[\n%s,\n%s,%s]\n", RECORD_0, cases[i].record,
                       RECORD_1);
        collect_text(&got, MAP, text);
        assert_one_refusal(&got, 3, cases[i].reason);
        assert_int_equal(got.reading_count, 2);
    }
}

/* Where each line is a value of its own, damage to brackets and quotes ends with the line.
 */
static void a_damaged_line_does_not_take_others_along(void **state)
{
    (void)state;
    static const char *const lines[] = {"{\"rx\":{\"time\":1768508100,\"rssi\":-80}",
                                        "{\"rx\":{\"time\":1768508100,\"rssi",
                                        "\"rx\":{\"time\":1768508100]", "}", "{\"rx\":[}"};
    for (size_t i = 0; i < sizeof lines / sizeof lines[0]; i++) {
        char text[512];
        (void)snprintf(text, sizeof text, "%s\n%s\n%s\n%s\n", RECORD_0, lines[i], RECORD_1,
                       RECORD_0);
        collect_text(&got, MAP, text);
        if (got.reading_count != 3 || got.refusal_count == 0)
            fail_msg("line %zu: %zu readings, %zu refused", i, got.reading_count,
                     got.refusal_count);
        assert_int_equal(got.refusals[0].line, 2);
        assert_int_equal(got.status, RFADE_OK);
    }
}

static void a_file_cut_short_keeps_what_it_has(void **state)
{
    (void)state;
    collect_text(&got, MAP, "[" RECORD_0 ",\n{\"rx\":{\"time\":17685");
    assert_one_refusal(&got, 2, "stops before");
    assert_string_equal(got.refusals[0].text, "{\"rx\":{\"time\":17685");
    assert_int_equal(got.reading_count, 1);
    collect_text(&got, MAP, "[" RECORD_0 ",\n");
    assert_one_refusal(&got, 2, "stops before");
    collect_text(&got, MAP, RECORD_0 "\n{\"rx\":{\"time\":17685");
    assert_one_refusal(&got, 2, "stops before");
}

static void damage_that_cannot_be_skipped_refuses_the_file(void **state)
{
    (void)state;
    static const struct {
        const char *log;
        const char *what;
        size_t line;
    } cases[] = {
        {"[" RECORD_0 ",\n{\"rx\":{\"time\":1]}}," RECORD_1 "]", "closing bracket", 2},
        {"[" RECORD_0 ",\n{\"rx\":{\"time:1}},\n" RECORD_1 "]", "string that does not end", 2},
        {"[" RECORD_0 "]]", "closing bracket", 1},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        collect_text(&got, MAP, cases[i].log);
        assert_int_equal(got.status, RFADE_INPUT);
        if (!strstr(got.error.what, cases[i].what) || got.error.line != cases[i].line)
            fail_msg("line %zu: %s", got.error.line, got.error.what);
    }
}

static void a_map_that_does_not_fit_says_so(void **state)
{
    (void)state;
    static const struct {
        const char *map;
        const char *what;
    } cases[] = {
        {MAP, "no record has a time"},
        {"[file]\nformat = json\nrecords = $.packets[*]\n[time]\ncolumn = "
         "t\n[level]\ncolumn = "
         "l\n",
         "no record has a time"},
        {"[time]\ncolumn = t\n[level]\ncolumn = l\n", "does not say enough"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        collect_text(&got, cases[i].map, "[{\"t\":1768508100,\"l\":-80}]");
        assert_int_equal(got.status, RFADE_INPUT);
        if (!strstr(got.error.what, cases[i].what))
            fail_msg("case %zu: %s", i, got.error.what);
        assert_int_equal(got.reading_count, 0);
    }
}

static void a_record_too_long_or_too_deep_is_no_danger(void **state)
{
    (void)state;
    enum { LENGTH = 300000 };
    char *text = malloc(LENGTH + 512);
    assert_non_null(text);
    size_t used = (size_t)sprintf(text, "[" RECORD_0 ",{\"x\":\"");
    memset(text + used, 'x', LENGTH);
    (void)sprintf(text + used + LENGTH, "\"}," RECORD_1 "]");
    collect_text(&got, MAP, text);
    assert_one_refusal(&got, 1, "longer than");
    assert_int_equal(got.reading_count, 2);
    memset(text + used, '[', LENGTH);
    collect_text(&got, MAP, text); /* inside a string they are text */
    assert_int_equal(got.status, RFADE_OK);
    memset(text, '[', LENGTH);
    text[LENGTH] = '\0';
    collect_text(&got, MAP, text);
    assert_int_equal(got.status, RFADE_INPUT);
    free(text);
}

/* An array on one line, over many blocks: memory does not depend on its size. */
static void records_over_block_borders_are_whole(void **state)
{
    (void)state;
    enum { ROWS = 20000 };
    char *text = malloc(64 + ROWS * 64);
    assert_non_null(text);
    size_t used = (size_t)sprintf(text, "[");
    for (int i = 0; i < ROWS; i++)
        used += (size_t)sprintf(text + used, "%s{\"time\":%d,\"rssi\":%d}", i ? "," : "",
                                1768508100 + i, -60 - i % 41);
    (void)sprintf(text + used, "]");
    collect_text(&got, NULL, text);
    free(text);
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.reading_count, ROWS);
    assert_int_equal(got.refusal_count, 0);
    assert_int_equal(got.summary.last_us - got.summary.first_us, INT64_C(1000000) * (ROWS - 1));
}

static void paths_of_records_are_checked(void **state)
{
    (void)state;
    static const char *const good[] = {"$", "$[*]", "$[0]", "$.a", "$.a.b[*][3].\"c d\"[*]"};
    static const char *const bad[] = {"",
                                      "a",
                                      "$.",
                                      "$a",
                                      "$[",
                                      "$[]",
                                      "$[x]",
                                      "$[-1]",
                                      "$[*",
                                      "$.\"a",
                                      "$..a",
                                      "$[*]a",
                                      "$.a.b.c.d.e.f.g.h.i.j.k.l.m.n.o.p.q",
                                      "$[99999999999]"};
    static const char *const values[] = {"$.a[#-1]", "$[3].b", "$.\"a b\".c"};
    struct rfade_json_path path;
    for (size_t i = 0; i < sizeof values / sizeof values[0]; i++)
        assert_true(rfade_json_path_is_value(values[i]));
    assert_false(rfade_json_path_is_value("$[*]"));
    assert_false(rfade_json_path_is_value("$.a["));
    assert_false(rfade_json_path_read("$[#-1]", &path));
    for (size_t i = 0; i < sizeof good / sizeof good[0]; i++)
        assert_true(rfade_json_path_read(good[i], &path));
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++)
        if (rfade_json_path_read(bad[i], &path))
            fail_msg("taken for a path: %s", bad[i]);
    assert_true(rfade_json_path_read("$.ab[*]", &path));
    assert_int_equal(path.count, 2);
    assert_memory_equal(path.steps[0].name, "ab", 2);
    assert_true(path.steps[1].index == RFADE_ANY_INDEX);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_forms_say_the_same),
        cmocka_unit_test(records_stand_where_the_map_says),
        cmocka_unit_test(a_lost_packet_is_no_reading),
        cmocka_unit_test(names_that_say_what_they_hold_need_no_map),
        cmocka_unit_test(records_of_no_use_are_refused_alone),
        cmocka_unit_test(a_damaged_line_does_not_take_others_along),
        cmocka_unit_test(a_file_cut_short_keeps_what_it_has),
        cmocka_unit_test(damage_that_cannot_be_skipped_refuses_the_file),
        cmocka_unit_test(a_map_that_does_not_fit_says_so),
        cmocka_unit_test(a_record_too_long_or_too_deep_is_no_danger),
        cmocka_unit_test(records_over_block_borders_are_whole),
        cmocka_unit_test(paths_of_records_are_checked),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
