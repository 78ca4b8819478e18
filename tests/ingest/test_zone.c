/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Changes of the clocks: Directive 2000/84/EC (01:00 UTC on the last Sundays of March and
 * October: 2026-03-29 and 2026-10-25), U.S. Energy Policy Act of 2005, section 110 (02:00
 * local on the second Sunday of March and the first of November: 2026-03-08, 2026-11-01).
 * Seconds of the epoch from Python 3.11 zoneinfo with tzdata 2025b.
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <stdbool.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#include "ingest/calendar.h"
#include "ingest/time.h"
#include "ingest/zone.h"
#include "ingest/zone_rule.h"

static struct rfade_zone *zone(const char *name)
{
    struct rfade_zone *made = NULL;
    struct rfade_error error;
    if (rfade_zone_create(name, &made, &error) != RFADE_OK)
        fail_msg("%s: %s", name, error.what);
    return made;
}

static int64_t local(int year, int month, int day, int hour, int minute, int second)
{
    return ((rfade_calendar_days(year, month, day) * 24 + hour) * 60 + minute) * 60 + second;
}

static void local_times_become_utc(void **state)
{
    (void)state;
    static const struct {
        const char *name;
        int year, month, day, hour, minute, second;
        int64_t time_s;
    } cases[] = {
        {"Europe/Berlin", 2026, 3, 29, 1, 59, 59, 1774745999},
        {"Europe/Berlin", 2026, 3, 29, 3, 0, 0, 1774746000},
        {"America/New_York", 2026, 3, 8, 3, 0, 0, 1772953200},
        {"Australia/Lord_Howe", 2026, 1, 1, 12, 0, 0, 1767229200}, /* half an hour of summer */
        {"Australia/Lord_Howe", 2026, 7, 1, 12, 0, 0, 1782869400},
        {"Asia/Kathmandu", 2026, 1, 1, 12, 0, 0, 1767248100},
        {"Africa/Casablanca", 2026, 3, 1, 12, 0, 0, 1772366400}, /* by table: Ramadan */
        {"America/Nuuk", 2026, 7, 1, 12, 0, 0, 1782910800},
        {"America/Sao_Paulo", 2018, 12, 1, 12, 0, 0, 1543672800},
        {"Europe/London", 1995, 7, 1, 12, 0, 0, 804596400},
        {"Europe/Berlin", 2100, 7, 1, 12, 0, 0, 4118119200}, /* by rule, beyond the table */
        {"Europe/Berlin", 2100, 3, 28, 1, 59, 59, 4109878799},
        {"Europe/Berlin", 2100, 12, 1, 12, 0, 0, 4131342000},
        {"Australia/Sydney", 2150, 1, 1, 12, 0, 0, 5680285200},
        {"Asia/Jerusalem", 2120, 6, 1, 12, 0, 0, 4746675600},
        {"UTC", 2026, 1, 15, 20, 15, 0, 1768508100},
        {"+01:00", 2026, 1, 15, 21, 15, 0, 1768508100},
        {"-0330", 2026, 1, 15, 16, 45, 0, 1768508100},
        {"+5", 2026, 1, 16, 1, 15, 0, 1768508100},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_zone *made = zone(cases[i].name);
        int64_t times_s[2] = {0, 0};
        struct rfade_zone_span spans[2];
        int64_t local_s = local(cases[i].year, cases[i].month, cases[i].day, cases[i].hour,
                                cases[i].minute, cases[i].second);
        assert_int_equal(rfade_zone_times(made, local_s, times_s, spans), 1);
        assert_int_equal(times_s[0], cases[i].time_s);
        rfade_zone_destroy(made);
    }
}

static void a_repeated_hour_has_two_times(void **state)
{
    (void)state;
    static const struct {
        const char *name;
        int year, month, day, hour, minute;
        int64_t earlier_s, later_s;
    } cases[] = {
        {"Europe/Berlin", 2026, 10, 25, 2, 30, 1792888200, 1792891800},
        {"America/New_York", 2026, 11, 1, 1, 30, 1793511000, 1793514600},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_zone *made = zone(cases[i].name);
        int64_t times_s[2] = {0, 0};
        struct rfade_zone_span spans[2];
        int64_t local_s = local(cases[i].year, cases[i].month, cases[i].day, cases[i].hour,
                                cases[i].minute, 0);
        assert_int_equal(rfade_zone_times(made, local_s, times_s, spans), 2);
        assert_int_equal(times_s[0], cases[i].earlier_s);
        assert_int_equal(times_s[1], cases[i].later_s);
        rfade_zone_destroy(made);
    }
}

static void a_skipped_hour_has_no_time(void **state)
{
    (void)state;
    static const struct {
        const char *name;
        int year, month, day, hour, minute;
    } cases[] = {{"Europe/Berlin", 2026, 3, 29, 2, 0},
                 {"Europe/Berlin", 2026, 3, 29, 2, 59},
                 {"Europe/Berlin", 2100, 3, 28, 2, 30},
                 {"America/St_Johns", 2006, 4, 2, 0, 2}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_zone *made = zone(cases[i].name);
        int64_t times_s[2];
        struct rfade_zone_span spans[2];
        int64_t local_s = local(cases[i].year, cases[i].month, cases[i].day, cases[i].hour,
                                cases[i].minute, 0);
        assert_int_equal(rfade_zone_times(made, local_s, times_s, spans), 0);
        rfade_zone_destroy(made);
    }
}

/* Rows through an autumn change, in the order of the file. */
static void check_rows(const char *const *texts, const int64_t *times_s, size_t count)
{
    struct rfade_zone *made = zone("Europe/Berlin");
    struct rfade_time_format format = {.form = RFADE_TIME_ISO8601, .zone = made};
    struct rfade_time_reader reader = {.format = &format};
    for (size_t i = 0; i < count; i++) {
        int64_t time_us = 0;
        assert_null(rfade_time_read(&reader, texts[i], strlen(texts[i]), &time_us));
        if (time_us != times_s[i] * 1000000)
            fail_msg("row %zu, %s: %lld", i, texts[i], (long long)time_us);
    }
    rfade_zone_destroy(made);
}

static void a_rising_log_passes_the_repeated_hour(void **state)
{
    (void)state;
    static const char *const texts[] = {"2026-10-25T02:00:00", "2026-10-25T02:30:00",
                                        "2026-10-25T02:59:59", "2026-10-25T02:00:00",
                                        "2026-10-25T01:59:59", "2026-10-25T02:59:59",
                                        "2026-10-25T03:00:00"};
    /* The fifth is out of order: it says 01:59:59 and can only mean summer time. */
    static const int64_t times_s[] = {1792886400, 1792888200, 1792889999, 1792890000,
                                      1792886399, 1792889999, 1792893600};
    check_rows(texts, times_s, 4);
    check_rows(texts, times_s, 7);
}

static void a_falling_log_passes_the_repeated_hour(void **state)
{
    (void)state;
    static const char *const texts[] = {"2026-10-25T03:00:01", "2026-10-25T03:00:00",
                                        "2026-10-25T02:59:59", "2026-10-25T02:30:00",
                                        "2026-10-25T02:00:00", "2026-10-25T02:59:59",
                                        "2026-10-25T02:30:00", "2026-10-25T01:59:59"};
    static const int64_t times_s[] = {1792893601, 1792893600, 1792893599, 1792891800,
                                      1792890000, 1792889999, 1792888200, 1792886399};
    check_rows(texts, times_s, 8);
}

static void a_skipped_hour_is_refused_by_the_reader(void **state)
{
    (void)state;
    struct rfade_zone *made = zone("Europe/Berlin");
    struct rfade_time_format format = {.form = RFADE_TIME_ISO8601, .zone = made};
    struct rfade_time_reader reader = {.format = &format};
    int64_t time_us = 0;
    assert_null(rfade_time_read(&reader, "2026-03-29T01:59:59", 19, &time_us));
    assert_non_null(rfade_time_read(&reader, "2026-03-29T02:30:00", 19, &time_us));
    assert_null(rfade_time_read(&reader, "2026-03-29T02:30:00Z", 20, &time_us));
    rfade_zone_destroy(made);
}

/* The process's own zone must have no say. */
static void the_machine_has_no_say(void **state)
{
    (void)state;
    /* NOLINTNEXTLINE(concurrency-mt-unsafe): the test has one thread */
    assert_int_equal(setenv("TZ", "Asia/Tokyo", 1), 0);
    tzset();
    struct rfade_zone *made = zone("Europe/Berlin");
    int64_t times_s[2];
    struct rfade_zone_span spans[2];
    assert_int_equal(rfade_zone_times(made, local(2026, 3, 29, 3, 0, 0), times_s, spans), 1);
    assert_int_equal(times_s[0], 1774746000);
    rfade_zone_destroy(made);
}

static void zones_that_are_none_are_refused(void **state)
{
    (void)state;
    static const char *const names[] = {"",
                                        "Europe",
                                        "Europe/Nowhere",
                                        "../passwd",
                                        "/etc/passwd",
                                        "Europe/../../../etc/passwd",
                                        "Europe/../Europe/Berlin",
                                        "+24:00",
                                        "+1:00",
                                        "+01:60",
                                        "right/Europe/Berlin",
                                        "CEST",
                                        "zone.tab",
                                        "Europe/Berlin\n",
                                        "+"};
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++) {
        struct rfade_zone *made = NULL;
        struct rfade_error error;
        if (rfade_zone_create(names[i], &made, &error) != RFADE_INPUT)
            fail_msg("'%s' was taken", names[i]);
        assert_null(made);
        assert_true(strlen(error.remedy) > 0);
    }
}

static void rules_that_are_none_are_refused(void **state)
{
    (void)state;
    static const char *const texts[] = {"",
                                        "CE-1",
                                        "CET",
                                        "CET-25",
                                        "CET-1CEST",
                                        "CET-1CEST,M3.5.0",
                                        "CET-1CEST,M13.5.0,M10.5.0",
                                        "CET-1CEST,M3.6.0,M10.5.0",
                                        "CET-1CEST,J0,J200",
                                        "CET-1CEST,M3.5.0,M10.5.0x"};
    struct rfade_zone_rule rule;
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++)
        if (rfade_zone_rule_read(texts[i], &rule))
            fail_msg("'%s' was taken", texts[i]);
    assert_true(rfade_zone_rule_read("<+1030>-10:30<+11>-11,M10.1.0,M4.1.0", &rule));
    assert_int_equal(rule.standard_s, 37800);
    assert_int_equal(rule.summer_s, 39600);
}

/* IEEE Std 1003.1-2017, 8.3: Jn never counts 29 February, n does. Day 60 is 1 March by the
 * first, and 29 February or 1 March, counted from 0 as 59 and 60, by the second. */
static void days_of_the_year_are_counted(void **state)
{
    (void)state;
    struct rfade_zone_rule rule;
    assert_true(rfade_zone_rule_read("AAA0BBB,J60/0,J300/0", &rule));
    assert_int_equal(rfade_zone_rule_span(&rule, local(2024, 3, 1, 0, 0, 0)).from_s,
                     local(2024, 3, 1, 0, 0, 0));
    assert_int_equal(rfade_zone_rule_span(&rule, local(2025, 3, 1, 0, 0, 0)).from_s,
                     local(2025, 3, 1, 0, 0, 0));
    assert_true(rfade_zone_rule_read("AAA0BBB,59/0,300/0", &rule));
    assert_int_equal(rfade_zone_rule_span(&rule, local(2024, 3, 1, 0, 0, 0)).from_s,
                     local(2024, 2, 29, 0, 0, 0));
    assert_int_equal(rfade_zone_rule_span(&rule, local(2025, 3, 1, 0, 0, 0)).from_s,
                     local(2025, 3, 1, 0, 0, 0));
}

static void damaged_zone_files_are_refused(void **state)
{
    (void)state;
    static const unsigned char cut[] = "TZif2";
    unsigned char counts[88] = "TZif2";
    for (size_t i = 0; i < 5; i++)
        counts[44 + i] = counts[i];
    memset(counts + 64, 0xFF, 24); /* counts that no file could hold */
    struct rfade_zone *made = NULL;
    assert_int_equal(rfade_zone_from_tzif(cut, sizeof cut, &made, NULL), RFADE_INPUT);
    assert_int_equal(rfade_zone_from_tzif(counts, sizeof counts, &made, NULL), RFADE_INPUT);
    memset(counts + 64, 0, 24); /* no type of local time at all */
    assert_int_equal(rfade_zone_from_tzif(counts, sizeof counts, &made, NULL), RFADE_INPUT);
    assert_null(made);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(local_times_become_utc),
        cmocka_unit_test(a_repeated_hour_has_two_times),
        cmocka_unit_test(a_skipped_hour_has_no_time),
        cmocka_unit_test(a_rising_log_passes_the_repeated_hour),
        cmocka_unit_test(a_falling_log_passes_the_repeated_hour),
        cmocka_unit_test(a_skipped_hour_is_refused_by_the_reader),
        cmocka_unit_test(the_machine_has_no_say),
        cmocka_unit_test(zones_that_are_none_are_refused),
        cmocka_unit_test(rules_that_are_none_are_refused),
        cmocka_unit_test(days_of_the_year_are_counted),
        cmocka_unit_test(damaged_zone_files_are_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
