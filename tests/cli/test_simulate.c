/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "program.h"

static size_t line_count(const char *text)
{
    size_t lines = 0;
    for (const char *at = strchr(text, '\n'); at; at = strchr(at + 1, '\n'))
        lines++;
    return lines;
}

static void assert_line(const char *text, size_t line, const char *expected)
{
    for (; line > 0; line--)
        text = strchr(text, '\n') + 1;
    assert_int_equal(strncmp(text, expected, strlen(expected)), 0);
}

/* 100 m at 10 m/s with 10 readings a second are 101 readings, ends included. */
static void comma_layout_has_a_header_and_times_in_utc(void **state)
{
    (void)state;
    struct program program = {0};
    RUN(&program, "simulate", "--length-m", "100", "--rate-hz", "10", "--vehicle", "plough-2",
        "--channel", "457-main");
    assert_int_equal(program.status, 0);
    assert_string_equal(program.errors, "");
    assert_int_equal(line_count(program.output), 102);
    assert_line(program.output, 0,
                "time,latitude,longitude,speed_kmh,vehicle,channel,rssi_dbm\n");
    assert_line(program.output, 1,
                "2027-01-12T20:00:00.000Z,60.5000000,-24.5000000,36.00,plough-2,457-main,-");
    assert_line(program.output, 2, "2027-01-12T20:00:00.100Z,,,36.00,plough-2,457-main,-");
    assert_line(program.output, 101, "2027-01-12T20:00:10.000Z,60.50");
    program_clear(&program);
}

static void semicolon_layout_has_decimal_commas_and_a_zone(void **state)
{
    (void)state;
    struct program program = {0};
    RUN(&program, "simulate", "--length-m", "10", "--layout", "semicolon", "--step-db", "0.1",
        "--zone-minutes", "-210", "--start", "2027-01-12T21:00:00+01:00");
    assert_int_equal(program.status, 0);
    assert_line(program.output, 0, "local time;lat;lon;speed [km/h];rssi [dBm]\n");
    assert_line(program.output, 1,
                "12.01.2027 16:30:00,000 -0330;60,5000000;-24,5000000;36,0;-");
    for (const char *line = strchr(program.output, '\n') + 1; *line;
         line = strchr(line, '\n') + 1) {
        size_t date = strlen("12.01.2027");
        assert_true(strcspn(line + date, ".") > strcspn(line + date, "\n"));
    }
    program_clear(&program);
}

static void blanks_layout_has_two_channels_and_epoch_ms(void **state)
{
    (void)state;
    struct program program = {0};
    RUN(&program, "simulate", "--length-m", "10", "--layout", "blanks", "--channel", "a",
        "--second-channel", "b", "--second-mean-level-dbm", "-100");
    assert_int_equal(program.status, 0);
    assert_line(program.output, 0, "# epoch_ms latitude longitude speed_kmh a b\n");
    const char *line = strchr(program.output, '\n') + 1;
    double ms, latitude, longitude, speed, first, second;
    assert_int_equal(sscanf(line, "%lf %lf %lf %lf %lf %lf", &ms, &latitude, &longitude, &speed,
                            &first, &second),
                     6);
    assert_true(ms == 1799784000000.0); /* 2027-01-12T20:00:00Z by date(1) */
    assert_true(speed == 36);
    assert_true(first != second);
    program_clear(&program);
}

static void same_seed_same_digits(void **state)
{
    (void)state;
    struct program first = {0}, again = {0}, other = {0};
    RUN(&first, "simulate", "--length-m", "50", "--seed", "7", "--position-scatter-m", "5");
    RUN(&again, "simulate", "--length-m", "50", "--seed", "7", "--position-scatter-m", "5");
    RUN(&other, "simulate", "--length-m", "50", "--seed", "8", "--position-scatter-m", "5");
    assert_string_equal(first.output, again.output);
    assert_string_not_equal(first.output, other.output);
    program_clear(&first);
    program_clear(&again);
    program_clear(&other);
}

static void truth_stands_beside_the_log(void **state)
{
    (void)state;
    struct program program = {0};
    const char *folder = folder_create();
    char log[128], truth[128];
    (void)snprintf(log, sizeof log, "%s/log.csv", folder);
    (void)snprintf(truth, sizeof truth, "%s/truth.csv", folder);
    RUN(&program, "simulate", "--length-m", "300", "--k", "0,4", "--shadowing-db", "0",
        "--mean-level-dbm", "-90", "--output", log, "--truth", truth);
    assert_int_equal(program.status, 0);
    assert_string_equal(program.output, "");
    char *log_text = file_text(log), *truth_text = file_text(truth);
    assert_int_equal(line_count(log_text), line_count(truth_text));
    const char *line = strchr(truth_text, '\n') + 1;
    assert_int_equal(
        strncmp(truth_text, "time_s,distance_m,level_dbm,power_dbm,local_mean_dbm,k\r\n", 56),
        0);
    for (; *line; line = strchr(line, '\n') + 1) {
        double time_s, distance_m, level_dbm, power_dbm, local_mean_dbm, k;
        assert_int_equal(sscanf(line, "%lf,%lf,%lf,%lf,%lf,%lf", &time_s, &distance_m,
                                &level_dbm, &power_dbm, &local_mean_dbm, &k),
                         6);
        assert_true(fabs(distance_m - 10 * time_s) < 1e-6);
        assert_true(fabs(level_dbm - power_dbm) <= 0.5 + 1e-9);
        assert_true(fabs(local_mean_dbm + 90) < 1e-9);
        if (distance_m < 99 || (distance_m > 201 && distance_m < 299))
            assert_true(k == 0);
        if (distance_m > 101 && distance_m < 199)
            assert_true(k == 4);
    }
    free(log_text);
    free(truth_text);
    folder_remove(folder);
    program_clear(&program);
}

/* Along a meridian the latitude grows by 1 degree in 111.4 km at 60 degrees north. */
static void a_route_is_followed_to_its_end(void **state)
{
    (void)state;
    struct program program = {0};
    const char *folder = folder_create();
    const char *path = file_create(folder, "line.csv", "60.5,-24.5\n60.502,-24.5\n");
    RUN(&program, "simulate", "--route", path, "--rate-hz", "1");
    assert_int_equal(program.status, 0);
    assert_line(program.output, 1, "2027-01-12T20:00:00.000Z,60.5000000,-24.5000000,");
    assert_line(program.output, 2, "2027-01-12T20:00:01.000Z,60.50008");
    assert_int_equal(line_count(program.output), 24); /* 222.8 m at 10 m/s, and a header */
    program_clear(&program);
    REFUSED(2, "the route is 222.8 m long, less than --length-m 300", "simulate", "--route",
            path, "--length-m", "300");
    REFUSED(1, "there is no such file", "simulate", "--route", "nothing.csv");
    folder_remove(folder);
}

static void a_file_that_is_there_is_never_overwritten(void **state)
{
    (void)state;
    const char *folder = folder_create();
    const char *path = file_create(folder, "survey", "precious");
    REFUSED(1, "survey: can't make the file: File exists; name a file", "simulate", "--output",
            path);
    REFUSED(1, "survey: can't make the file: File exists; name a file", "simulate", "--truth",
            path);
    char *text = file_text(path);
    assert_string_equal(text, "precious");
    free(text);
    folder_remove(folder);
    REFUSED(1, "can't make the file: No such file or directory", "simulate", "--output",
            "/nonexistent/log.csv");
}

static void what_can_not_be_simulated_is_refused(void **state)
{
    (void)state;
    REFUSED(2, "can't be simulated; a drive has at most", "simulate", "--rate-hz", "1e9");
    REFUSED(2, "can't be simulated", "simulate", "--floor-dbm", "-90", "--ceiling-dbm", "-95");
    REFUSED(2, "can't be simulated", "simulate", "--standstill-at-m", "50,20");
    REFUSED(2, "--second-channel needs --layout blanks", "simulate", "--second-channel", "b");
    REFUSED(2, "settings of a second channel need --second-channel", "simulate",
            "--second-carrier-hz", "460e6");
    REFUSED(2, "option --start needs a time such as", "simulate", "--start", "tonight");
    REFUSED(2, "option --k needs a number from 0", "simulate", "--k", "-1");
    REFUSED(2, "option --seed needs a whole number from 1", "simulate", "--seed", "0");
    REFUSED(2, "option --layout needs one of comma, semicolon, blanks, not 'tabs'", "simulate",
            "--layout", "tabs");
    REFUSED(2, "option --shadowing needs one of smooth, exponential", "simulate", "--shadowing",
            "rough");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(comma_layout_has_a_header_and_times_in_utc),
        cmocka_unit_test(semicolon_layout_has_decimal_commas_and_a_zone),
        cmocka_unit_test(blanks_layout_has_two_channels_and_epoch_ms),
        cmocka_unit_test(same_seed_same_digits),
        cmocka_unit_test(truth_stands_beside_the_log),
        cmocka_unit_test(a_route_is_followed_to_its_end),
        cmocka_unit_test(a_file_that_is_there_is_never_overwritten),
        cmocka_unit_test(what_can_not_be_simulated_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
