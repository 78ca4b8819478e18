/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What becomes of the rows of a got, dirt of every kind among them. Logs are made up here. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ingest/collect.h"

/* 2026-01-15T20:15:00Z, by Python 3.11 datetime. */
static const int64_t start_us = INT64_C(1768508100000000);

#define HEADER "time,lat,lon,rssi,snr\n"
#define ROW_0 "2026-01-15T20:15:00Z,54.1,-2.3,-87.5,14.2\n"
#define ROW_1 "2026-01-15T20:15:01Z,54.1001,-2.3,-88,13\n"

static struct collected got; /* too large for comfort on the stack */

static void the_built_in_map_reads_a_plain_log(void **state)
{
    (void)state;
    collect_text(&got, NULL,
                 "Timestamp,Lat,Lng,Speed_kmh,RSSI [dBm],SNR (dB),Vehicle,Channel,Campaign\n"
                 "2026-01-15T20:15:00.250Z,54.1,-2.3,36,-87.5,14.25,0007,457-main,january\n");
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.reading_count, 1);
    assert_int_equal(got.readings[0].time_us, start_us + 250000);
    assert_string_equal(got.readings[0].vehicle, "test"); /* given: wins over the column */
    assert_string_equal(got.readings[0].channel, "457-main");
    assert_string_equal(got.readings[0].campaign, "january");
    assert_int_equal(got.readings[0].level_cdb, -8750);
    assert_int_equal(got.readings[0].snr_cdb, 1425);
    assert_int_equal(got.fix_count, 1);
    assert_true(got.fixes[0].latitude_deg == 54.1 && got.fixes[0].longitude_deg == -2.3);
    assert_true(fabs(got.fixes[0].speed_m_s - 10) < 1e-12);
    assert_int_equal(got.summary.lines, 2);
    assert_int_equal(got.summary.rows, 1);
    assert_int_equal(got.summary.first_us, start_us + 250000);
    assert_string_equal(got.summary.map_name, "the built-in column map");
}

static void names_stand_in_columns_and_stay_text(void **state)
{
    (void)state;
    collect_text(&got,
                 "[time]\ncolumn = time\n[vehicle]\ncolumn = v\n[channel]\ncolumn = c\n"
                 "[level]\ncolumn = l\n",
                 "time,v,c,l\n2026-01-15T20:15:00Z,000000000101,007,-80\n"
                 "2026-01-15T20:15:00Z,101,7,-81\n");
    assert_int_equal(got.reading_count, 2);
    assert_string_equal(got.readings[0].vehicle, "000000000101");
    assert_string_equal(got.readings[0].channel, "007");
    assert_string_equal(got.readings[0].campaign, RFADE_DEFAULT_CAMPAIGN);
    assert_string_equal(got.readings[1].vehicle, "101");
    assert_string_equal(got.readings[1].channel, "7");
}

#define NUMBERED "[time]\ncolumn = time\n[level 457]\ncolumn = a\n[sequence]\ncolumn = n\n"

static void packets_carry_their_number(void **state)
{
    (void)state;
    collect_text(&got, NUMBERED "modulus = 256\n",
                 "time,n,a\n1768508100,254,-80\n1768508101,,-81\n1768508102,256,-82\n"
                 "1768508103,1.0,-83\n1768508104,-1,-84\n");
    const bool numbered[] = {true, false, false, true, false};
    const int64_t numbers[] = {254, 0, 0, 1, 0};
    assert_int_equal(got.reading_count, 5);
    assert_int_equal(got.refusal_count, 2); /* 256 and -1; their levels are kept */
    assert_non_null(strstr(got.refusals[0].reason, "sequence number '256'"));
    for (size_t i = 0; i < 5; i++) {
        assert_int_equal(got.readings[i].numbered, numbered[i]);
        if (numbered[i])
            assert_int_equal(got.readings[i].sequence, numbers[i]);
        assert_int_equal(got.readings[i].modulus, 256);
        assert_int_equal(got.readings[i].level_cdb, -8000 - 100 * (int32_t)i);
    }
}

/* A packet that came without a level, or with one that can't be right, was not lost. */
static void numbers_without_a_level_are_told(void **state)
{
    (void)state;
    collect_text(&got, NUMBERED,
                 "time,n,a\n1768508100,7,-80\n1768508101,8,\n1768508102,9,cold\n"
                 "1768508103,10,-83\n");
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.reading_count, 4);
    assert_int_equal(got.summary.readings, 2);
    assert_one_refusal(&got, 4, "cold");
    for (int64_t i = 0; i < 4; i++) {
        assert_int_equal(got.readings[i].sequence, 7 + i);
        assert_string_equal(got.readings[i].channel, "457");
        assert_int_equal(got.readings[i].level_cdb == RFADE_NO_VALUE_CDB, i == 1 || i == 2);
    }
}

static void a_channel_that_nobody_names_has_the_default(void **state)
{
    (void)state;
    collect_text(&got, NULL, HEADER ROW_0);
    assert_string_equal(got.readings[0].channel, RFADE_DEFAULT_CHANNEL);
}

static void a_log_without_vehicle_is_refused(void **state)
{
    (void)state;
    collect_file(&got, write_log("log", HEADER ROW_0, strlen(HEADER ROW_0)), NULL, 0, NULL);
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.remedy, "--vehicle"));
}

static void separators_are_found(void **state)
{
    (void)state;
    static const char quoted[] = "\"time\",\"lat\",\"lon\",\"rssi\"\n"
                                 "\"2026-01-15T20:15:00Z\",\"54.1\",\"-2.3\",\"-87.5\"\n";
    static const char *const logs[] = {
        "time;lat;lon;rssi\n2026-01-15T20:15:00Z;54,1;-2,3;-87,5\n",
        "time\tlat\tlon\trssi\n2026-01-15T20:15:00Z\t54.1\t-2.3\t-87.5\n",
        "time|lat|lon|rssi\n2026-01-15T20:15:00Z|54.1|-2.3|-87.5\n",
        "  time lat\tlon   rssi \n 2026-01-15T20:15:00Z   54.1 \t-2.3 -87.5  \n",
        "\xEF\xBB\xBFtime;lat;lon;rssi\r\n2026-01-15T20:15:00Z;54,1;-2,3;-87,5\r\n",
        "\"sep=,\"\r\ntime,lat,lon,rssi\r\n2026-01-15T20:15:00Z,54.1,-2.3,-87.5\r\n",
        "sep=;\ntime;lat;lon;rssi\n2026-01-15T20:15:00Z;54.1;-2.3;-87.5\n",
        "# time,lat,lon,rssi\n2026-01-15T20:15:00Z,54.1,-2.3,-87.5\n",
        "time,lat,lon,rssi\r2026-01-15T20:15:00Z,54.1,-2.3,-87.5\r",
        "time,lat,lon,rssi\r\n\n2026-01-15T20:15:00Z,54.1,-2.3,-87.5\n\r\n",
        quoted,
        "time,lat,lon,rssi\n 1768508100 , 54.1 , -2.3 , -87.5 \n",
    };
    for (size_t i = 0; i < sizeof logs / sizeof logs[0]; i++) {
        collect_text(&got, NULL, logs[i]);
        if (got.status != RFADE_OK || got.reading_count != 1 || got.fix_count != 1 ||
            got.refusal_count != 0)
            fail_msg("log %zu: %s %s", i, got.error.what, got.refusals[0].reason);
        assert_int_equal(got.readings[0].time_us, start_us);
        assert_int_equal(got.readings[0].level_cdb, -8750);
        assert_true(got.fixes[0].latitude_deg == 54.1 && got.fixes[0].longitude_deg == -2.3);
    }
}

static void headers_that_do_not_say_enough_are_refused(void **state)
{
    (void)state;
    static const struct {
        const char *log;
        const char *what;
    } cases[] = {
        {"a,b,c\n1,2,3\n", "does not say enough"},
        {"time,temperature\n2026-01-15T20:15:00Z,5\n", "does not say enough"},
        {"time,lat\n2026-01-15T20:15:00Z,5\n", "does not say enough"},
        {"time,timestamp,rssi\n2026-01-15T20:15:00Z,2,-80\n", "two columns"},
        {"time,rssi,level_dbm\n2026-01-15T20:15:00Z,-81,-80\n", "two columns"},
        {"time,rssi [mW]\n2026-01-15T20:15:00Z,1e-9\n", "another unit"},
        {"2026-01-15T20:15:00Z,54.1,-2.3,-87.5\n", "does not say enough"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        collect_text(&got, NULL, cases[i].log);
        assert_int_equal(got.status, RFADE_INPUT);
        if (!strstr(got.error.what, cases[i].what))
            fail_msg("%s: %s", cases[i].log, got.error.what);
        assert_non_null(strstr(got.error.remedy, "--columns"));
    }
}

/* Every way in which one row of a log can be of no use; the rows about it stay. */
static void rows_of_no_use_are_refused_alone(void **state)
{
    (void)state;
    static const struct {
        const char *row;
        const char *reason;
    } cases[] = {
        {"yesterday,54.1,-2.3,-87.5,14.2", "time 'yesterday' is not an ISO 8601"},
        {",54.1,-2.3,-87.5,14.2", "is empty"},
        {"1970-01-01T00:00:05Z,54.1,-2.3,-87.5,14.2", "clock was not set"},
        {"2026-02-30T00:00:05Z,54.1,-2.3,-87.5,14.2", "does not exist"},
        {"2026-01-15T20:15:00Z,54.1,-2.3,loud,14.2", "level 'loud' is not a number"},
        {"2026-01-15T20:15:00Z,54.1,-2.3,-999,14.2", "out of range"},
        {"2026-01-15T20:15:00Z,54.1,-2.3,1e30,14.2", "out of range"},
        {"2026-01-15T20:15:00Z,54.1,-2.3,20.01,14.2", "out of range"},
        {"2026-01-15T20:15:00Z,54.1,-2.3,-87.5,400", "SNR '400' is out of range"},
        {"2026-01-15T20:15:00Z,54.1,-2.3,-87.5 dBm,14.2", "is not a number"},
        {"2026-01-15T20:15:00Z,54.1,-2.3", "3 values"},
        {"2026-01-15T20:15:00Z,54.1,-2.3,-87.5,14.2,7", "columns may be shifted"},
        {"2026-01-15T20:15:00Z,54.1,-2,3,-87.5,14.2", "columns may be shifted"},
        {"2026-01-15T20:15:00Z,54.1-2.3,-87.5,14.2", "4 values"},
        {"--------------------------", "1 values"},
        {"2026-01-15T20:15:00Z,\"54.1,-2.3,-87.5,14.2", "quotation mark"},
        {"2026-01-15T20:15:00Z,54.1,-2.3\r,-87.5,14.2", "carriage return"},
        {"\x80\xFF\x01,54.1,-2.3,-87.5,14.2", "is not an ISO 8601"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        char text[512];
        (void)snprintf(text, sizeof text, HEADER ROW_0 "%s\n" ROW_1, cases[i].row);
        collect_text(&got, NULL, text);
        assert_one_refusal(&got, 3, cases[i].reason);
        assert_string_equal(got.refusals[0].text, cases[i].row);
        assert_int_equal(got.reading_count, 2);
        assert_int_equal(got.fix_count, 2);
        assert_int_equal(got.summary.rows, 3);
        assert_int_equal(got.summary.lines, 4);
    }
}

static void garbage_and_nul_bytes_are_refused(void **state)
{
    (void)state;
    static const char text[] = HEADER ROW_0 "2026-01-15T20:15:00Z,54.1,-2.3,-8\0"
                                            "7,14.2\n" ROW_1;
    collect_bytes(&got, NULL, text, sizeof text - 1);
    assert_one_refusal(&got, 3, "is not a number");
    assert_int_equal(got.refusals[0].text_size, 40);
    assert_int_equal(got.reading_count, 2);
}

static void names_that_are_no_text_are_refused(void **state)
{
    (void)state;
    static const char map[] =
        "[time]\ncolumn = time\n[channel]\ncolumn = c\n[level]\ncolumn = l\n";
    static const char *const names[] = {"a\x1b[31m", "\xC3\x28", ""};
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++) {
        char text[256];
        (void)snprintf(text, sizeof text,
                       "time,c,l\n2026-01-15T20:15:00Z,%s,-80\n2026-01-15T20:15:00Z,ok,-80\n",
                       names[i]);
        collect_text(&got, map, text);
        assert_one_refusal(&got, 2, "the channel '");
        assert_null(strchr(got.refusals[0].reason, '\x1b'));
        assert_int_equal(got.reading_count, 1);
    }
    char text[400];
    char name[201] = {0};
    memset(name, 'x', sizeof name - 1);
    (void)snprintf(text, sizeof text,
                   "time,c,l\n2026-01-15T20:15:00Z,%s,-80\n2026-01-15T20:15:00Z,ok,-80\n",
                   name);
    collect_text(&got, map, text);
    assert_one_refusal(&got, 2, "too long");
}

static void a_quote_does_not_swallow_the_file(void **state)
{
    (void)state;
    collect_text(&got, NULL,
                 HEADER "2026-01-15T20:14:59Z,54.1,-2.3,-87.5,\"14\n" ROW_0 ROW_1 ROW_0 ROW_1);
    assert_one_refusal(&got, 2, "quotation mark");
    assert_int_equal(got.reading_count, 4);
}

static void a_line_longer_than_the_block_is_refused_alone(void **state)
{
    (void)state;
    enum { LENGTH = 200000 };
    char *text = malloc(LENGTH + 256);
    assert_non_null(text);
    size_t used = (size_t)sprintf(text, HEADER ROW_0);
    memset(text + used, 'x', LENGTH);
    (void)sprintf(text + used + LENGTH, "\n" ROW_1);
    collect_text(&got, NULL, text);
    free(text);
    assert_one_refusal(&got, 3, "longer than");
    assert_int_equal(got.reading_count, 2);
    assert_int_equal(got.summary.lines, 4);
}

static void lines_over_block_borders_are_whole(void **state)
{
    (void)state;
    enum { ROWS = 20000 };
    char *text = malloc(64 + ROWS * 64);
    assert_non_null(text);
    size_t used = (size_t)sprintf(text, "time,rssi\n");
    for (int i = 0; i < ROWS; i++)
        used += (size_t)sprintf(text + used, "%d,%d\n", 1768508100 + i, -60 - i % 41);
    collect_text(&got, NULL, text);
    free(text);
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.reading_count, ROWS);
    assert_int_equal(got.refusal_count, 0);
    assert_int_equal(got.summary.last_us - got.summary.first_us, INT64_C(1000000) * (ROWS - 1));
}

static void a_cut_last_line_is_refused_and_a_whole_one_kept(void **state)
{
    (void)state;
    collect_text(&got, NULL, HEADER ROW_0 "2026-01-15T20:15:01Z,54.1001,-2.3,-88,1");
    assert_one_refusal(&got, 3, "cut off");
    assert_int_equal(got.reading_count, 1);
    collect_text(&got, NULL, HEADER ROW_0 "2026-01-15T20:15:01Z,54.1001,-2.");
    assert_one_refusal(&got, 3, "3 values");
    collect_text(&got, NULL, HEADER ROW_0 "2026-01-15T20:15:01Z,54.1001,-2.3,-88,13.1");
    assert_int_equal(got.refusal_count, 0);
    assert_int_equal(got.reading_count, 2);
}

static void repeated_headers_comments_and_blank_lines_are_no_rows(void **state)
{
    (void)state;
    collect_text(&got, NULL,
                 "\n" HEADER ROW_0 "# session 2\n" HEADER "   \n" ROW_1 "\t# the end\n");
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.refusal_count, 0);
    assert_int_equal(got.reading_count, 2);
    assert_int_equal(got.summary.rows, 2);
    assert_int_equal(got.summary.lines, 8);
}

static void more_values_than_names_are_passed_over(void **state)
{
    (void)state;
    collect_text(&got,
                 "[file]\nseparator = blanks\n[time]\ncolumn = t(ms)\n[level]\n"
                 "column = rsrp(db)\n",
                 "t(ms) rsrp(db)\n1768508100000 -85 9 9 \n1768508101000 -86 9 9 \n");
    assert_int_equal(got.refusal_count, 0);
    assert_int_equal(got.reading_count, 2);
    assert_int_equal(got.readings[1].level_cdb, -8600);
}

static void a_row_shortened_by_an_empty_value_is_refused(void **state)
{
    (void)state;
    collect_text(&got,
                 "[file]\nseparator = blanks\n[time]\ncolumn = t\n[level]\ncolumn = rsrp\n"
                 "no_reading = 0\n",
                 "t cell rsrp x\n1768508100000 5C42 -85 1 \n1768508101000  0 0 \n"
                 "1768508102000 5C42 -85 1\n");
    assert_one_refusal(&got, 3, "3 values where most have 4");
    assert_int_equal(got.reading_count, 2);
}

static void ragged_rows_are_read_where_the_map_says_so(void **state)
{
    (void)state;
    static const char text[] = "time,rssi,a,b\n2026-01-15T20:15:00Z,-80,1,2\n"
                               "2026-01-15T20:15:01Z,-81,1\n2026-01-15T20:15:02Z,-82,1,2,3\n"
                               "2026-01-15T20:15:03Z\n";
    collect_text(&got, "[file]\nrows = ragged\n[time]\ncolumn = time\n[level]\ncolumn = rssi\n",
                 text);
    assert_one_refusal(&got, 5, "1 values");
    assert_int_equal(got.reading_count, 3);
    collect_text(&got, "[time]\ncolumn = time\n[level]\ncolumn = rssi\n", text);
    assert_int_equal(got.refusal_count, 3);
}

static void a_sentinel_is_no_reading_and_keeps_the_position(void **state)
{
    (void)state;
    static const char *const values[] = {"0",   "127.0", "",  "nan",  "NaN",
                                         "N/A", "null",  "-", "none", "lost"};
    for (size_t i = 0; i < sizeof values / sizeof values[0]; i++) {
        char text[256];
        (void)snprintf(text, sizeof text,
                       "time,lat,lon,rssi\n2026-01-15T20:15:00Z,54.1,-2.3,%s\n", values[i]);
        collect_text(&got,
                     "[time]\ncolumn = time\n[position]\nlatitude_column = lat\n"
                     "longitude_column = lon\n[level]\ncolumn = rssi\n"
                     "no_reading = 0, 127, lost\n",
                     text);
        assert_int_equal(got.status, RFADE_OK);
        assert_int_equal(got.reading_count, 0);
        assert_int_equal(got.refusal_count, 0);
        assert_int_equal(got.summary.no_reading, 1);
        assert_int_equal(got.fix_count, 1);
    }
}

static void an_snr_alone_is_a_reading(void **state)
{
    (void)state;
    collect_text(&got, NULL, HEADER "2026-01-15T20:15:00Z,54.1,-2.3,,14.2\n");
    assert_int_equal(got.reading_count, 1);
    assert_int_equal(got.readings[0].level_cdb, RFADE_NO_VALUE_CDB);
    assert_int_equal(got.readings[0].snr_cdb, 1420);
}

static void a_bad_position_keeps_the_reading(void **state)
{
    (void)state;
    static const struct {
        const char *position;
        size_t refused;
    } cases[] = {{"0,0", 0},     {",", 0},          {"0.000000,0.000000", 0},
                 {"nan,nan", 0}, {"91,0", 1},       {"54.1,-181", 1},
                 {"54.1,x", 1},  {"541000,-23", 1}, {"1e999,0", 1}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        char text[256];
        (void)snprintf(text, sizeof text, HEADER "2026-01-15T20:15:00Z,%s,-87.5,14.2\n",
                       cases[i].position);
        collect_text(&got, NULL, text);
        assert_int_equal(got.reading_count, 1);
        assert_int_equal(got.fix_count, 0);
        assert_int_equal(got.refusal_count, cases[i].refused);
        assert_int_equal(got.summary.no_position, 1 - cases[i].refused);
        if (cases[i].refused)
            assert_non_null(strstr(got.refusals[0].reason, "not used"));
    }
}

static void a_bad_speed_keeps_reading_and_position(void **state)
{
    (void)state;
    static const struct {
        const char *speed;
        size_t refused;
    } cases[] = {{"", 0}, {"-1", 1}, {"99999", 1}, {"fast", 1}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        char text[256];
        (void)snprintf(text, sizeof text,
                       "time,lat,lon,speed_ms,rssi\n2026-01-15T20:15:00Z,54.1,-2.3,%s,-87.5\n",
                       cases[i].speed);
        collect_text(&got, NULL, text);
        assert_int_equal(got.reading_count, 1);
        assert_int_equal(got.fix_count, 1);
        assert_true(isnan(got.fixes[0].speed_m_s));
        assert_int_equal(got.refusal_count, cases[i].refused);
    }
}

/* km/h: SI Brochure; mile 1609.344 m and nautical mile 1852 m: exact by definition. */
static void speeds_have_units(void **state)
{
    (void)state;
    static const struct {
        const char *unit;
        double m_s;
    } cases[] = {{"km/h", 10.0}, {"m/s", 36.0}, {"mph", 16.09344}, {"knots", 18.52}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        char map[512];
        (void)snprintf(map, sizeof map,
                       "[time]\ncolumn = time\n[position]\nlatitude_column = lat\n"
                       "longitude_column = lon\n[speed]\ncolumn = v\nunit = %s\n",
                       cases[i].unit);
        collect_text(&got, map, "time,lat,lon,v\n2026-01-15T20:15:00Z,54.1,-2.3,36\n");
        assert_int_equal(got.fix_count, 1);
        assert_true(fabs(got.fixes[0].speed_m_s - cases[i].m_s) < 1e-12);
    }
}

/* 0 dBW = 30 dBm, 1 mW = 0 dBm; dBuV at 50 ohm less 106.99 dB is dBm (ITU-R V.574-5, or from
 * P = U^2 / R: 1 uV gives 2e-14 W). */
static void levels_have_units_scale_and_offset(void **state)
{
    (void)state;
    static const struct {
        const char *keys;
        const char *value;
        int32_t level_cdb;
    } cases[] = {
        {"unit = dbm", "-87.254", -8725},   {"unit = dbm", "-87.255", -8726},
        {"unit = dbm", "-87.265", -8726}, /* ties to even */
        {"unit = dbw", "-117.5", -8750},    {"unit = dbuv", "20", -8699},
        {"unit = mw", "1e-9", -9000},       {"unit = w", "1e-12", -9000},
        {"unit = uw", "0.000001", -9000},   {"unit = mw", "2", 301},
        {"scale = 0.1", "-875", -8750},     {"offset = -157", "69.5", -8750},
        {"scale = -1", "87.5", -8750},      {"scale = 0.5\noffset = -110", "45", -8750},
        {"valid = 0 .. 20", "20.00", 2000},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        char map[256];
        char text[256];
        (void)snprintf(map, sizeof map, "[time]\ncolumn = t\n[level]\ncolumn = l\n%s\n",
                       cases[i].keys);
        (void)snprintf(text, sizeof text, "t,l\n2026-01-15T20:15:00Z,%s\n", cases[i].value);
        collect_text(&got, map, text);
        if (got.reading_count != 1 || got.readings[0].level_cdb != cases[i].level_cdb)
            fail_msg("%s of %s: %d", cases[i].value, cases[i].keys, got.readings[0].level_cdb);
    }
}

static void levels_out_of_the_valid_range_are_refused(void **state)
{
    (void)state;
    static const struct {
        const char *keys;
        const char *value;
        const char *reason;
    } cases[] = {{"valid = -140 .. -20", "-19.99", "out of range"},
                 {"valid = -140 .. -20", "-140.01", "out of range"},
                 {"unit = mw", "0", "above zero"},
                 {"unit = mw", "-1", "above zero"},
                 {"unit = dbm", "61", "out of range"}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        char map[256];
        char text[256];
        (void)snprintf(map, sizeof map, "[time]\ncolumn = t\n[level]\ncolumn = l\n%s\n",
                       cases[i].keys);
        (void)snprintf(text, sizeof text,
                       "t,l\n2026-01-15T20:15:00Z,%s\n2026-01-15T20:15:00Z,\n", cases[i].value);
        collect_text(&got, map, text);
        assert_one_refusal(&got, 2, cases[i].reason);
        assert_int_equal(got.reading_count, 0);
    }
}

static void several_levels_are_a_channel_each(void **state)
{
    (void)state;
    static const char map[] = "[time]\ncolumn = 1\n[file]\nheader = no\nseparator = blanks\n"
                              "[level north]\ncolumn = 2\nsnr_column = 3\n"
                              "[level south]\ncolumn = 4\n";
    collect_text(&got, map,
                 "1768508100000 -80 12 -90\n1768508101000 -81 nan nan\n"
                 "1768508102000 loud 1 -92\n1768508103000 loud 1 loud\n");
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.reading_count, 4);
    assert_string_equal(got.readings[0].channel, "north");
    assert_int_equal(got.readings[0].snr_cdb, 1200);
    assert_string_equal(got.readings[1].channel, "south");
    assert_int_equal(got.readings[1].level_cdb, -9000);
    assert_int_equal(got.readings[1].snr_cdb, RFADE_NO_VALUE_CDB);
    assert_string_equal(got.readings[2].channel, "north");
    assert_string_equal(got.readings[3].channel, "south");
    assert_int_equal(got.readings[3].level_cdb, -9200);
    assert_int_equal(got.summary.no_reading, 1);
    assert_int_equal(got.refusal_count, 2); /* one a line, whatever it held */
    assert_int_equal(got.refusals[0].line, 3);
    assert_int_equal(got.refusals[1].line, 4);
    struct rfade_column_map *made = good_map(map);
    const struct rfade_column_map *maps[] = {made};
    struct rfade_ingest_names names = {.vehicle = "v", .channel = "c"};
    collect_file(&got, write_log("log", "1768508100000 -80 12 -90\n", 25), maps, 1, &names);
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.remedy, "--channel"));
    rfade_column_map_destroy(made);
}

static void date_and_time_come_from_two_columns(void **state)
{
    (void)state;
    collect_text(&got,
                 "[file]\nseparator = semicolon\ndecimal = comma\n[time]\ncolumn = Zeit\n"
                 "date_column = Datum\nformat = pattern %d.%m.%Y %H:%M:%S\n"
                 "zone = Europe/Berlin\n[level]\ncolumn = Pegel\n",
                 "Datum;Zeit;Pegel\n15.01.2026;21:15:00,25;-87,5\n29.03.2026;02:30:00;-87,5\n");
    assert_one_refusal(&got, 3, "does not exist in the zone");
    assert_int_equal(got.readings[0].time_us, start_us + 250000);
    assert_int_equal(got.readings[0].level_cdb, -8750);
}

static void seconds_and_nanoseconds_come_from_two_columns(void **state)
{
    (void)state;
    collect_text(&got,
                 "[time]\ncolumn = s\nformat = epoch_s\nsubsecond_column = ns\n"
                 "subsecond_unit = ns\n[level]\ncolumn = l\n",
                 "s,ns,l\n1768508100,250000499,-80\n1768508100,2000000000,-80\n"
                 "1768508100,x,-80\n1768508100,-1,-80\n");
    assert_int_equal(got.reading_count, 2);
    assert_int_equal(got.readings[0].time_us, start_us + 250000);
    assert_int_equal(got.refusal_count, 2);
}

static void a_header_stands_where_the_map_says(void **state)
{
    (void)state;
    static const char *const maps[] = {
        "[file]\nskip = 2\n[time]\ncolumn = t\n[level]\ncolumn = l\n",
        "[file]\nheader = 3\n[time]\ncolumn = t\n[level]\ncolumn = l\n",
        "[file]\nheader = 4\n[time]\ncolumn = 1\n[level]\ncolumn = 2\n",
        "[file]\nskip = 3\nheader = no\n[time]\ncolumn = 1\n[level]\ncolumn = 2\n"};
    static const size_t rows[] = {2, 2, 1, 2};
    for (size_t i = 0; i < sizeof maps / sizeof maps[0]; i++) {
        collect_text(&got, maps[i],
                     "a logger\nfirmware 7,b,c\nt,l\n1768508100,-80\n1768508101,-81\n");
        assert_int_equal(got.status, RFADE_OK);
        assert_int_equal(got.reading_count, rows[i]);
        assert_int_equal(got.refusal_count, 0);
    }
}

static void columns_are_found_by_similar_names_unless_ambiguous(void **state)
{
    (void)state;
    static const char map[] = "[time]\ncolumn = Time\n[level]\ncolumn = Level (dBm)\n";
    collect_text(&got, map, "time,LEVEL\n1768508100,-80\n");
    assert_int_equal(got.reading_count, 1);
    collect_text(&got, map, "time,level,Level (dBm)\n1768508100,-80,-81\n");
    assert_int_equal(got.readings[0].level_cdb, -8100);
    collect_text(&got, map, "time,level,Level (W)\n1768508100,-80,-81\n");
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.what, "several columns"));
    collect_text(&got, map, "time,power\n1768508100,-80\n");
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.what, "'Level (dBm)'"));
    assert_non_null(strstr(got.error.remedy, "time, power"));
}

static void a_column_beyond_the_rows_refuses_the_file(void **state)
{
    (void)state;
    collect_text(&got, "[file]\nheader = no\n[time]\ncolumn = 1\n[level]\ncolumn = 5\n",
                 "1768508100,-80\n1768508101,-80\n");
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.what, "column 5"));
    collect_text(&got, "[file]\nheader = no\n[time]\ncolumn = 2\n[level]\ncolumn = 1\n",
                 "1768508100,-80\n1768508101,-80\n");
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.what, "no row has a time"));
}

static void a_file_of_which_nothing_is_of_use_is_refused(void **state)
{
    (void)state;
    collect_text(&got, NULL, HEADER "x,54.1,-2.3,-87.5,14.2\n\ny,54.1,-2.3,-87.5,14.2\n");
    assert_int_equal(got.status, RFADE_INPUT);
    assert_int_equal(got.error.line, 2);
    assert_non_null(strstr(got.error.what, "none of 2 rows"));
    assert_true(strlen(got.error.file) > 0);
    collect_text(&got, NULL, HEADER);
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.what, "no row of data"));
    collect_text(&got, NULL, "");
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.what, "empty"));
}

/* A sink that is full after some rows stops the file with its own status. */
static enum rfade_status full(void *context, const struct rfade_ingest_reading *reading,
                              struct rfade_error *error)
{
    (void)context;
    (void)reading;
    return rfade_error_set(error, RFADE_STORAGE, "free some space", "the disk is full");
}

static void the_sink_stops_the_file(void **state)
{
    (void)state;
    struct rfade_log_source *source = NULL;
    struct rfade_error error;
    struct rfade_ingest_summary summary;
    struct rfade_ingest_names names = {.vehicle = "v"};
    struct rfade_sink sink = {.reading = full};
    const char *text = "time,rssi\n1768508100,-80\n1768508101,-80\n";
    assert_int_equal(
        rfade_log_source_open(write_log("log", text, strlen(text)), &source, &error), RFADE_OK);
    assert_int_equal(rfade_ingest(source, NULL, 0, &names, &sink, &summary, &error),
                     RFADE_STORAGE);
    assert_string_equal(error.what, "the disk is full");
    rfade_log_source_close(source);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_built_in_map_reads_a_plain_log),
        cmocka_unit_test(names_stand_in_columns_and_stay_text),
        cmocka_unit_test(packets_carry_their_number),
        cmocka_unit_test(numbers_without_a_level_are_told),
        cmocka_unit_test(a_channel_that_nobody_names_has_the_default),
        cmocka_unit_test(a_log_without_vehicle_is_refused),
        cmocka_unit_test(separators_are_found),
        cmocka_unit_test(headers_that_do_not_say_enough_are_refused),
        cmocka_unit_test(rows_of_no_use_are_refused_alone),
        cmocka_unit_test(garbage_and_nul_bytes_are_refused),
        cmocka_unit_test(names_that_are_no_text_are_refused),
        cmocka_unit_test(a_quote_does_not_swallow_the_file),
        cmocka_unit_test(a_line_longer_than_the_block_is_refused_alone),
        cmocka_unit_test(lines_over_block_borders_are_whole),
        cmocka_unit_test(a_cut_last_line_is_refused_and_a_whole_one_kept),
        cmocka_unit_test(repeated_headers_comments_and_blank_lines_are_no_rows),
        cmocka_unit_test(more_values_than_names_are_passed_over),
        cmocka_unit_test(a_row_shortened_by_an_empty_value_is_refused),
        cmocka_unit_test(ragged_rows_are_read_where_the_map_says_so),
        cmocka_unit_test(a_sentinel_is_no_reading_and_keeps_the_position),
        cmocka_unit_test(an_snr_alone_is_a_reading),
        cmocka_unit_test(a_bad_position_keeps_the_reading),
        cmocka_unit_test(a_bad_speed_keeps_reading_and_position),
        cmocka_unit_test(speeds_have_units),
        cmocka_unit_test(levels_have_units_scale_and_offset),
        cmocka_unit_test(levels_out_of_the_valid_range_are_refused),
        cmocka_unit_test(several_levels_are_a_channel_each),
        cmocka_unit_test(date_and_time_come_from_two_columns),
        cmocka_unit_test(seconds_and_nanoseconds_come_from_two_columns),
        cmocka_unit_test(a_header_stands_where_the_map_says),
        cmocka_unit_test(columns_are_found_by_similar_names_unless_ambiguous),
        cmocka_unit_test(a_column_beyond_the_rows_refuses_the_file),
        cmocka_unit_test(a_file_of_which_nothing_is_of_use_is_refused),
        cmocka_unit_test(the_sink_stops_the_file),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
