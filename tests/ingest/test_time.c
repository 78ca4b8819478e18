/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <stdbool.h>
#include <stdio.h>
#include <string.h>

#include "ingest/time.h"
#include "ingest/time_text.h"

static const char *read_by(const struct rfade_time_format *format, const char *text,
                           int64_t *time_us)
{
    struct rfade_time_reader reader = {.format = format};
    return rfade_time_read(&reader, text, strlen(text), time_us);
}

/* RFC 3339, 5.8, and seconds of the epoch from Python 3.11 datetime. */
static void iso8601_forms_are_read(void **state)
{
    (void)state;
    static const struct rfade_time_format format = {.form = RFADE_TIME_ISO8601};
    static const struct {
        const char *text;
        int64_t time_us;
    } cases[] = {
        {"1985-04-12T23:20:50.52Z", INT64_C(482196050520000)},
        {"1996-12-19T16:39:57-08:00", INT64_C(851042397000000)},
        {"1990-12-31T23:59:60Z", INT64_C(662688000000000)},
        {"1990-12-31T15:59:60-08:00", INT64_C(662688000000000)},
        {"2026-01-15T20:15:00", INT64_C(1768508100000000)},
        {"2026-01-15 20:15:00", INT64_C(1768508100000000)},
        {"2026-01-15 20:15:00 UTC", INT64_C(1768508100000000)},
        {"2026-01-15T20:15Z", INT64_C(1768508100000000)},
        {"20260115T201500Z", INT64_C(1768508100000000)},
        {"20260115T2015Z", INT64_C(1768508100000000)},
        {"[2026-01-15T20:15:00]", INT64_C(1768508100000000)},
        {" 2026-01-15T20:15:00 ", INT64_C(1768508100000000)},
        {"2026-01-15T21:15:00+01", INT64_C(1768508100000000)},
        {"2026-01-15T21:15:00+0100", INT64_C(1768508100000000)},
        {"2026-01-15T20:15:00,25Z", INT64_C(1768508100250000)},
        {"2026-01-15T20:15:00.123456789Z", INT64_C(1768508100123457)},
        {"2026-01-15T20:15:00.9999996Z", INT64_C(1768508101000000)},
        {"2026-01-14T24:00:00Z", INT64_C(1768435200000000)},
        {"2024-02-29T00:00:00Z", INT64_C(1709164800000000)},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        int64_t time_us = 0;
        const char *reason = read_by(&format, cases[i].text, &time_us);
        if (reason || time_us != cases[i].time_us)
            fail_msg("%s: %s, %lld", cases[i].text, reason ? reason : "", (long long)time_us);
    }
}

static void iso8601_that_is_none_is_refused(void **state)
{
    (void)state;
    static const struct rfade_time_format format = {.form = RFADE_TIME_ISO8601};
    static const char *const texts[] = {
        "",
        "2026-01-15",
        "2026-1-15T20:15:00Z",
        "2026-02-29T20:15:00Z",
        "2025-13-01T00:00:00Z",
        "2026-00-10T00:00:00Z",
        "2026-04-31T00:00:00Z",
        "2026-01-15T25:00:00Z",
        "2026-01-15T24:00:01Z",
        "2026-01-15T20:60:00Z",
        "2026-01-15T20:15:61Z",
        "2026-01-15T20:15:00.Z",
        "2026-01-15T20:15:00+1",
        "2026-01-15T20:15:00+99:00",
        "2026-01-15T20:15:00ZZ",
        "2026-01-15X20:15:00",
        "15.01.2026 20:15:00",
        "20:15:00", /* and no date elsewhere */
        "[2026-01-15T20:15:00",
        "1979-12-31T23:59:59Z",
        "2200-01-01T00:00:00Z",
        "1768508100",
    };
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++) {
        int64_t time_us = 7;
        if (!read_by(&format, texts[i], &time_us))
            fail_msg("'%s' was read", texts[i]);
        assert_int_equal(time_us, 0);
    }
}

/* POSIX: 1000000000 is 2001-09-09T01:46:40Z; the others shift its decimal point. */
static void epochs_are_read_to_the_microsecond(void **state)
{
    (void)state;
    static const struct {
        enum rfade_time_form form;
        int digits;
        char sign;
        const char *text;
        int64_t time_us;
    } cases[] = {
        {RFADE_TIME_EPOCH, 0, '.', "1000000000", INT64_C(1000000000000000)},
        {RFADE_TIME_EPOCH, 0, '.', "1768508107.3062914", INT64_C(1768508107306291)},
        {RFADE_TIME_EPOCH, 0, '.', "1768508107.3062915", INT64_C(1768508107306292)},
        {RFADE_TIME_EPOCH, 0, ',', "1000000000,5", INT64_C(1000000000500000)},
        {RFADE_TIME_EPOCH, 0, '.', "1.0000000005e9", INT64_C(1000000000500000)},
        {RFADE_TIME_EPOCH, 3, '.', "1000000000123", INT64_C(1000000000123000)},
        {RFADE_TIME_EPOCH, 3, '.', "1000000000123.4567", INT64_C(1000000000123457)},
        {RFADE_TIME_EPOCH, 6, '.', "1000000000123456", INT64_C(1000000000123456)},
        {RFADE_TIME_EPOCH, 9, '.', "1000000000123456789", INT64_C(1000000000123457)},
        {RFADE_TIME_AUTO, 0, '.', "1000000000.25", INT64_C(1000000000250000)},
        {RFADE_TIME_AUTO, 0, '.', "1000000000250", INT64_C(1000000000250000)},
        {RFADE_TIME_AUTO, 0, '.', "1000000000250000", INT64_C(1000000000250000)},
        {RFADE_TIME_AUTO, 0, '.', "1000000000250000000", INT64_C(1000000000250000)},
        {RFADE_TIME_AUTO, 0, '.', "315532800", INT64_C(315532800000000)},
        {RFADE_TIME_AUTO, 0, '.', "2001-09-09T01:46:40.25Z", INT64_C(1000000000250000)},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_time_format format = {.form = cases[i].form,
                                           .epoch_digits = cases[i].digits,
                                           .decimal_sign = cases[i].sign};
        int64_t time_us = 0;
        const char *reason = read_by(&format, cases[i].text, &time_us);
        if (reason || time_us != cases[i].time_us)
            fail_msg("%s: %s, %lld", cases[i].text, reason ? reason : "", (long long)time_us);
    }
}

static void epochs_out_of_range_are_refused(void **state)
{
    (void)state;
    static const struct {
        int digits;
        const char *text;
    } cases[] = {{0, "0"},           {0, "315532799.999999"}, {0, "7258118400"},
                 {0, "-1000000000"}, {0, "1768508103128"}, /* milliseconds taken for seconds */
                 {3, "1768508107"},                        /* seconds taken for milliseconds */
                 {0, "1e18"},        {0, "1e4000"},           {0, "12:00:00"},
                 {0, "time"}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_time_format format = {
            .form = RFADE_TIME_EPOCH, .epoch_digits = cases[i].digits, .decimal_sign = '.'};
        int64_t time_us = 0;
        if (!read_by(&format, cases[i].text, &time_us))
            fail_msg("'%s' was read", cases[i].text);
    }
}

static void an_epoch_counts_from_its_origin(void **state)
{
    (void)state;
    struct rfade_time_format format = {.form = RFADE_TIME_EPOCH,
                                       .epoch_digits = 3,
                                       .decimal_sign = '.',
                                       .origin_us = INT64_C(1768508100000000)};
    int64_t time_us = 0;
    assert_null(read_by(&format, "1250", &time_us));
    assert_int_equal(time_us, INT64_C(1768508101250000));
}

static void patterns_are_read(void **state)
{
    (void)state;
    static const struct {
        const char *pattern;
        const char *text;
        int64_t time_us;
    } cases[] = {
        {"%d.%m.%Y %H:%M:%S", "15.01.2026 20:15:00", INT64_C(1768508100000000)},
        {"%d.%m.%Y %H:%M:%S", "15.1.2026   20:15:00,25", INT64_C(1768508100250000)},
        {"%m/%d/%Y %I:%M:%S %p", "01/15/2026 08:15:00 PM", INT64_C(1768508100000000)},
        {"%m/%d/%Y %I:%M:%S %p", "01/15/2026 12:00:00 am", INT64_C(1768435200000000)},
        {"%d-%b-%y %T", "15-JAN-26 20:15:00", INT64_C(1768508100000000)},
        {"%Y%j%H%M%S", "2026015201500", INT64_C(1768508100000000)},
        {"%F %T%z", "2026-01-15 21:15:00+0100", INT64_C(1768508100000000)},
        {"%F %H:%M:%S.%f", "2026-01-15 20:15:00.250", INT64_C(1768508100250000)},
        {"log %F at %H h", "log 2026-01-15 at 00 h", INT64_C(1768435200000000)},
        {"%F %H%%", "2026-01-15 00%", INT64_C(1768435200000000)},
        {"%d.%m.%y %H:%M", "12.04.85 23:20", INT64_C(482196000000000)},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_time_format format = {.form = RFADE_TIME_PATTERN};
        (void)snprintf(format.pattern, sizeof format.pattern, "%s", cases[i].pattern);
        assert_null(rfade_time_pattern_check(format.pattern));
        int64_t time_us = 0;
        const char *reason = read_by(&format, cases[i].text, &time_us);
        if (reason || time_us != cases[i].time_us)
            fail_msg("%s: %s, %lld", cases[i].text, reason ? reason : "", (long long)time_us);
    }
}

static void texts_off_the_pattern_are_refused(void **state)
{
    (void)state;
    static const struct {
        const char *pattern;
        const char *text;
    } cases[] = {{"%d.%m.%Y %H:%M:%S", "31.02.2026 00:00:00"},
                 {"%d.%m.%Y %H:%M:%S", "15.01.2026"},
                 {"%d.%m.%Y %H:%M:%S", "15.01.2026 20:15:00 x"},
                 {"%d.%m.%Y %H:%M:%S", "2026-01-15 20:15:00"},
                 {"%F %I:%M %p", "2026-01-15 13:00 PM"},
                 {"%F %I:%M %p", "2026-01-15 11:00"},
                 {"%Y-%j %H", "2026-366 00"},
                 {"%d-%b-%Y %H", "15-Foo-2026 00"},
                 {"%F %H:%M%z", "2026-01-15 00:00 Berlin"}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_time_format format = {.form = RFADE_TIME_PATTERN};
        (void)snprintf(format.pattern, sizeof format.pattern, "%s", cases[i].pattern);
        int64_t time_us = 0;
        if (!read_by(&format, cases[i].text, &time_us))
            fail_msg("'%s' was read", cases[i].text);
    }
}

static void patterns_that_make_no_time_are_refused(void **state)
{
    (void)state;
    static const char *const patterns[] = {"%d.%m.%Y", "%H:%M %q",    "%H %",
                                           "%I:%M",    "%m-%d %H",    "%Y %H",
                                           "%H %p",    "%Y %j %d %H", "time"};
    for (size_t i = 0; i < sizeof patterns / sizeof patterns[0]; i++)
        if (!rfade_time_pattern_check(patterns[i]))
            fail_msg("'%s' was taken", patterns[i]);
    assert_null(rfade_time_pattern_check("%H:%M:%S"));
}

/* A log over midnight with times of day alone, forwards and backwards. */
static void a_time_of_day_passes_midnight(void **state)
{
    (void)state;
    struct rfade_time_format format = {
        .form = RFADE_TIME_ISO8601, .has_date = true, .date_days = 20468}; /* 2026-01-15 */
    struct rfade_time_reader reader = {.format = &format};
    static const struct {
        const char *text;
        int64_t time_us;
    } rows[] = {
        {"23:59:59.5", INT64_C(1768521599500000)},
        {"00:00:00.5", INT64_C(1768521600500000)},
        {"00:00:00.4", INT64_C(1768521600400000)}, /* a little disorder is no midnight */
        {"23:59:59.9", INT64_C(1768521599900000)},
        {"00:00:01", INT64_C(1768521601000000)}};
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        int64_t time_us = 0;
        assert_null(rfade_time_read(&reader, rows[i].text, strlen(rows[i].text), &time_us));
        assert_int_equal(time_us, rows[i].time_us);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(iso8601_forms_are_read),
        cmocka_unit_test(iso8601_that_is_none_is_refused),
        cmocka_unit_test(epochs_are_read_to_the_microsecond),
        cmocka_unit_test(epochs_out_of_range_are_refused),
        cmocka_unit_test(an_epoch_counts_from_its_origin),
        cmocka_unit_test(patterns_are_read),
        cmocka_unit_test(texts_off_the_pattern_are_refused),
        cmocka_unit_test(patterns_that_make_no_time_are_refused),
        cmocka_unit_test(a_time_of_day_passes_midnight),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
