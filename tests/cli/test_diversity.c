/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Two antennas of one vehicle, from the drive to the table. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <jansson.h>
#include <math.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "fixture.h"
#include "program.h"

static void write_map(const char *path)
{
    FILE *map = fopen(path, "w");
    assert_non_null(map);
    assert_true(fputs("[file]\nseparator = blanks\nheader = no\ncomment = #\n"
                      "[time]\ncolumn = 1\nformat = epoch_ms\n"
                      "[position]\nlatitude_column = 2\nlongitude_column = 3\n"
                      "[speed]\ncolumn = 4\nunit = km/h\n"
                      "[vehicle]\nname = spreader-1\n"
                      "[level roof]\ncolumn = 5\n[level mast]\ncolumn = 6\n",
                      map) >= 0);
    assert_int_equal(fclose(map), 0);
}

/* Two channels that fade by themselves, 3 dB apart. */
static int setup(void **state)
{
    if (fixture_setup(state) != 0)
        return -1;
    const struct fixture *fixture = *state;
    char log[128], map[128];
    (void)snprintf(log, sizeof log, "%s/both.txt", fixture->folder);
    (void)snprintf(map, sizeof map, "%s/both.ini", fixture->folder);
    write_map(map);
    DONE("simulate", "--layout", "blanks", "--length-m", "2000", "--rate-hz", "100",
         "--speed-kmh", "36", "--carrier-hz", "457e6", "--decorrelation-m", "300",
         "--shadowing-db", "2", "--mean-level-dbm", "-85", "--channel", "roof",
         "--second-channel", "mast", "--second-mean-level-dbm", "-88", "--seed", "3",
         "--output", log);
    DONE("import", "--columns", map, log, "--survey", fixture->survey);
    DONE("channel", "roof", "--carrier-hz", "457e6", "--noise-floor-dbm", "-110", "--survey",
         fixture->survey);
    DONE("channel", "mast", "--carrier-hz", "457e6", "--noise-floor-dbm", "-113", "--survey",
         fixture->survey);
    DONE("route", "fen", "--from-vehicle", "spreader-1", "--segment-m", "500", "--survey",
         fixture->survey);
    DONE("fit", "--survey", fixture->survey);
    return 0;
}

#define ROWS(...) JSON_OF("diversity", __VA_ARGS__)

/* 2 km of two branches that fade by themselves: what independence gives lies in the interval
 * of what was observed, and the gain is near. */
static void independent_branches_are_seen_as_such(void **state)
{
    const struct fixture *fixture = *state;
    json_t *rows = ROWS("--survey", fixture->survey, "--channel", "roof", "--with", "mast",
                        "--threshold-dbm", "-95");
    assert_true(json_array_size(rows) >= 4);
    for (size_t i = 0; i < 4; i++) {
        const json_t *row = json_array_get(rows, i);
        assert_true(number_of(row, "pairs") > 4900.0);
        assert_true(number_of(row, "below_first") > 0.01);
        assert_true(number_of(row, "below_both") < number_of(row, "below_first"));
        assert_true(number_of(row, "below_both_low") <
                    1.3 * number_of(row, "independent_both"));
        assert_true(number_of(row, "below_both_high") >
                    0.77 * number_of(row, "independent_both"));
        assert_true(fabs(number_of(row, "power_correlation")) < 0.1);
        assert_true(number_of(row, "power_correlation_low") < 0.05);
        assert_true(number_of(row, "power_correlation_high") > -0.05);
        assert_true(fabs(number_of(row, "gain_10_percent_db") -
                         number_of(row, "independent_10_percent_db")) < 1.0);
        assert_true(fabs(number_of(row, "gain_1_percent_db") -
                         number_of(row, "independent_1_percent_db")) < 2.5);
    }
    assert_string_equal(text_at(rows, 0, "with"), "mast");
    json_decref(rows);
}

/* SNR takes each channel's own noise: the second's is 3 dB lower. */
static void snr_puts_both_on_one_scale(void **state)
{
    const struct fixture *fixture = *state;
    json_t *level = ROWS("--survey", fixture->survey, "--channel", "roof", "--with", "mast",
                         "--threshold-dbm", "-95", "--segment", "2");
    json_t *snr = ROWS("--survey", fixture->survey, "--channel", "roof", "--with", "mast",
                       "--threshold-db", "15", "--segment", "2");
    const json_t *a = json_array_get(level, 0), *b = json_array_get(snr, 0);
    assert_true(number_of(b, "threshold_db") == 15.0);
    assert_true(number_of(a, "below_first") == number_of(b, "below_first"));
    assert_true(number_of(a, "below_second") > 1.5 * number_of(b, "below_second"));
    json_decref(level);
    json_decref(snr);
}

/* Nobody's branches change by being looked at from the other side. */
static void branches_can_be_exchanged(void **state)
{
    const struct fixture *fixture = *state;
    json_t *there = ROWS("--survey", fixture->survey, "--channel", "roof", "--with", "mast",
                         "--threshold-dbm", "-95", "--worst", "1");
    json_t *back = ROWS("--survey", fixture->survey, "--channel", "mast", "--with", "roof",
                        "--threshold-dbm", "-95", "--worst", "1");
    const json_t *a = json_array_get(there, 0), *b = json_array_get(back, 0);
    assert_int_equal(json_array_size(there), 1);
    assert_true(number_of(a, "segment") == number_of(b, "segment"));
    assert_true(number_of(a, "below_first") == number_of(b, "below_second"));
    assert_true(fabs(number_of(a, "power_correlation") - number_of(b, "power_correlation")) <
                1e-12);
    assert_true(number_of(a, "below_both_low") == number_of(b, "below_both_low"));
    json_decref(there);
    json_decref(back);
}

static void what_makes_no_pair_is_refused(void **state)
{
    const struct fixture *fixture = *state;
    REFUSED(2, "--with", "diversity", "--survey", fixture->survey, "--channel", "roof",
            "--threshold-dbm", "-95");
    REFUSED(2, "same channel", "diversity", "--survey", fixture->survey, "--channel", "roof",
            "--with", "roof", "--threshold-dbm", "-95");
    REFUSED(2, "exactly one of", "diversity", "--survey", fixture->survey, "--channel", "roof",
            "--with", "mast");
    REFUSED(1, "no channel 'absent'", "diversity", "--survey", fixture->survey, "--channel",
            "roof", "--with", "absent", "--threshold-dbm", "-95");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(independent_branches_are_seen_as_such),
        cmocka_unit_test(snr_puts_both_on_one_scale),
        cmocka_unit_test(branches_can_be_exchanged),
        cmocka_unit_test(what_makes_no_pair_is_refused),
    };
    return cmocka_run_group_tests(tests, setup, fixture_teardown);
}
