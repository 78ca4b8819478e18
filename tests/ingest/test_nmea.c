/* SPDX-License-Identifier: GPL-3.0-or-later */
/* NMEA 0183 as positions. The sentences are made up after IEC 61162-1; their checksums and
 * the expected numbers were computed with Python. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "ingest/collect.h"
#include "ingest/nmea_sentence.h"

/* 2026-01-15T20:15:00Z, by Python 3.11 datetime. */
static const int64_t start_us = INT64_C(1768508100000000);

static struct collected got;

#define RMC_0 "$GPRMC,201500.00,A,5406.00000,N,00218.00000,W,19.438445,084.4,150126,,,A*4D\r\n"
#define RMC_1 "$GNRMC,201501.00,A,5406.00600,N,00218.00000,W,19.438445,,150126,,,A,V*08\r\n"
#define GGA_1 "$GPGGA,201501.00,5406.00600,N,00218.00000,W,1,08,0.9,545.4,M,46.9,M,,*79\r\n"
#define GGA_2 "$GNGGA,201502.00,5406.01200,N,00218.00000,W,2,08,0.9,545.4,M,46.9,M,,*62\r\n"
#define VTG_36_KMH "$GPVTG,084.4,T,077.3,M,005.5,N,036.0,K,A*2D\r\n"
#define VTG_18_KMH "$GPVTG,084.4,T,077.3,M,,N,018.0,K,A*0F\r\n"
#define GSV "$GPGSV,1,1,01,21,45,123,40*4E\r\n"

static void sentences_of_one_time_are_one_position(void **state)
{
    (void)state;
    collect_text(&got, NULL, RMC_0 VTG_36_KMH GSV GGA_1 RMC_1 VTG_36_KMH GGA_2 VTG_18_KMH);
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.refusal_count, 0);
    assert_int_equal(got.reading_count, 0);
    assert_int_equal(got.fix_count, 3);
    assert_int_equal(got.summary.lines, 8);
    assert_int_equal(got.summary.rows, 3);
    for (int i = 0; i < 3; i++) {
        assert_int_equal(got.fixes[i].time_us, start_us + 1000000 * i);
        assert_true(fabs(got.fixes[i].latitude_deg - (54.1 + 0.0001 * i)) < 1e-12);
        assert_true(fabs(got.fixes[i].longitude_deg + 2.3) < 1e-12);
    }
    assert_true(fabs(got.fixes[0].speed_m_s - 10) < 1e-6); /* RMC wins over VTG */
    assert_true(fabs(got.fixes[1].speed_m_s - 10) < 1e-6);
    assert_true(fabs(got.fixes[2].speed_m_s - 5) < 1e-12);
}

static void the_date_goes_on_from_the_latest_rmc(void **state)
{
    (void)state;
    collect_text(&got, NULL,
                 "$GLRMC,235959.50,A,5406.00000,N,00218.00000,W,,,311225,,,A*5E\n"
                 "$GLGGA,000000.50,5406.00000,N,00218.00600,W,1,08,0.9,545.4,M,46.9,M,,*67\n");
    assert_int_equal(got.fix_count, 2);
    /* 2026-01-01T00:00:00.5Z */
    assert_int_equal(got.fixes[1].time_us, INT64_C(1767225600500000));
    assert_true(isnan(got.fixes[1].speed_m_s));
    collect_text(&got, NULL, GGA_1 RMC_0);
    assert_one_refusal(&got, 1, "no date");
    assert_int_equal(got.fix_count, 1);
    collect_text(&got, "[file]\nformat = nmea\n[time]\ndate = 2026-01-15\n", GGA_1 GGA_2);
    assert_int_equal(got.fix_count, 2);
    assert_int_equal(got.fixes[0].time_us, start_us + 1000000);
}

static void no_fix_is_no_position(void **state)
{
    (void)state;
    collect_text(&got, NULL,
                 "$GPRMC,,V,,,,,,,,,,N*53\n" RMC_0 "$GPRMC,201503.00,V,,,,,,,150126,,,N*79\n"
                 "$GPGGA,201503.00,,,,,0,00,99.9,,M,,M,,*5A\n"
                 "$GPRMC,201504.00,A,5406.00000,N,00218.00000,W,0.0,,150126,,,S*7F\n"
                 "$GPGGA,201504.00,5406.00000,N,00218.00000,W,8,08,0.9,545.4,M,46.9,M,,*73\n");
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.refusal_count, 0);
    assert_int_equal(got.fix_count, 1);
    assert_int_equal(got.summary.no_position, 2);
}

static void lines_of_no_use_are_refused_alone(void **state)
{
    (void)state;
    static const struct {
        const char *line;
        const char *reason;
    } cases[] = {
        {"$GPRMC,201500.00,A,5406.00000,N,00218.00000,W,19.438445,084.4,150126,,,A*4E",
         "does not agree with its checksum"},
        {"$GPRMC,201500.00,A,5406.00001,N,00218.00000,W,19.438445,084.4,150126,,,A*4D",
         "does not agree with its checksum"},
        {"$GPGSV,1,1,01,21,45,123,41*4E", "does not agree with its checksum"},
        {"$GPRMC,201500.00,A,5406.00000,N,00218.00000,W,19.438445,084.4,150126,,,A",
         "no checksum"},
        {"$GPRMC,201500.00,A,5406.00000,N,00218.00000,W,19.438445,084.4,150126,,,A*4",
         "two hexadecimal digits"},
        {"$GPRMC,201500.00,A,5406.00000,N,00218.00000,W,19.4384", "no checksum"},
        {"$GPRMC,201504.00,A,5461.00000,N,00218.00000,W,0.0,,150126,,,A*6C", "no place"},
        {"$GPRMC,201504.00,A,5406.00000,X,00218.00000,W,0.0,,150126,,,A*7B", "no place"},
        {"$GPRMC,201504.00,A,5406.00000,N,18018.00000,W,0.0,,150126,,,A*66", "no place"},
        {"$GPRMC,251504.00,A,5406.00000,N,00218.00000,W,0.0,,150126,,,A*68", "time"},
        {"$GPRMC,201504.00,A,5406.00000,N,00218.00000,W,0.0,,310226,,,A*68", "time"},
        {"$GPRMC,2015,A,5406.00000,N,00218.00000,W,0.0,,150126,,,A*47", "time"},
        {"\x80garbage\xFF", "is no NMEA sentence"},
        {"$gprmc,1", "is no NMEA sentence"},
        {"2026-01-15,54.1,-2.3", "is no NMEA sentence"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        char text[512];
        (void)snprintf(text, sizeof text, "%s%s\r\n%s", RMC_0, cases[i].line, RMC_1);
        collect_text(&got, NULL, text);
        assert_one_refusal(&got, 2, cases[i].reason);
        assert_string_equal(got.refusals[0].text, cases[i].line);
        assert_int_equal(got.fix_count, 2);
    }
}

/* A logger's own time before the sentence; sentences run together; other lines. */
static void a_line_may_begin_with_something_else(void **state)
{
    (void)state;
    collect_text(&got, NULL,
                 "# receiver 2\n\n[20:15:03] " RMC_0
                 "!AIVDM,1,1,,A,13u?etPv2;0n:dDPwUM1U1Cb069D,"
                 "0*24\n$PMTK001,0,3*30\n1768508104.25 " RMC_1 "$GPRMC,2015" GGA_2);
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.fix_count, 3);
    assert_one_refusal(&got, 7, "breaks off");
}

static void a_jump_is_refused_like_in_any_log(void **state)
{
    (void)state;
    collect_text(&got, NULL,
                 RMC_0 RMC_1 "$BDGGA,201510.00,3306.00000,S,07018.00000,W,1,08,0.9,545.4,M,46."
                             "9,M,,*77\n" GGA_2);
    assert_one_refusal(&got, 3, "can't be reached");
    assert_int_equal(got.fix_count, 3);
}

static void vehicles_come_from_the_map(void **state)
{
    (void)state;
    collect_text(&got, "[file]\nformat = nmea\n[vehicle]\nname = spreader-7\n", RMC_0);
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.fix_count, 1);
    struct rfade_column_map *map = good_map("[file]\nformat = nmea\nname = {vehicle}-*.nmea\n");
    const struct rfade_column_map *const maps[1] = {map};
    collect_file(&got, write_log("plough-7.nmea", RMC_0, strlen(RMC_0)), maps, 1, NULL);
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.fix_count, 1);
    rfade_column_map_destroy(map);
    collect_file(&got, write_log("log", RMC_0, strlen(RMC_0)), NULL, 0, NULL);
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.remedy, "--vehicle"));
}

static void southern_and_western_angles_are_negative(void **state)
{
    (void)state;
    static const char text[] =
        "$BDGGA,201510.00,3306.00000,S,07018.00000,W,1,08,0.9,545.4,M,46.9,M,,*77";
    struct rfade_nmea_sentence sentence;
    assert_null(rfade_nmea_read(text, strlen(text), &sentence));
    assert_int_equal(sentence.type, RFADE_NMEA_GGA);
    assert_true(fabs(sentence.latitude_deg + 33.1) < 1e-12);
    assert_true(fabs(sentence.longitude_deg + 70.3) < 1e-12);
    assert_true(sentence.has_time && !sentence.has_date);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(sentences_of_one_time_are_one_position),
        cmocka_unit_test(the_date_goes_on_from_the_latest_rmc),
        cmocka_unit_test(no_fix_is_no_position),
        cmocka_unit_test(lines_of_no_use_are_refused_alone),
        cmocka_unit_test(a_line_may_begin_with_something_else),
        cmocka_unit_test(a_jump_is_refused_like_in_any_log),
        cmocka_unit_test(vehicles_come_from_the_map),
        cmocka_unit_test(southern_and_western_angles_are_negative),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
