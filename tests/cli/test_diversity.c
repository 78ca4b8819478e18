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

#include "program.h"

struct fixture {
    char folder[64];
    char survey[96];
};

static void assert_runs(const char *const *arguments)
{
    struct program program = {0};
    program_run(&program, arguments);
    assert_string_equal(program.errors, "");
    assert_int_equal(program.status, 0);
    program_clear(&program);
}

#define RUNS(...) assert_runs((const char *const[]){__VA_ARGS__, NULL})

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
    struct fixture *fixture = calloc(1, sizeof *fixture);
    char log[128], map[128];
    (void)snprintf(fixture->folder, sizeof fixture->folder, "%s", folder_create());
    (void)snprintf(fixture->survey, sizeof fixture->survey, "%s/night.routefade",
                   fixture->folder);
    (void)snprintf(log, sizeof log, "%s/both.txt", fixture->folder);
    (void)snprintf(map, sizeof map, "%s/both.ini", fixture->folder);
    write_map(map);
    RUNS("simulate", "--layout", "blanks", "--length-m", "2000", "--rate-hz", "100",
         "--speed-kmh", "36", "--carrier-hz", "457e6", "--decorrelation-m", "300",
         "--shadowing-db", "2", "--mean-level-dbm", "-85", "--channel", "roof",
         "--second-channel", "mast", "--second-mean-level-dbm", "-88", "--seed", "3",
         "--output", log);
    RUNS("import", "--columns", map, log, "--survey", fixture->survey);
    RUNS("channel", "roof", "--carrier-hz", "457e6", "--noise-floor-dbm", "-110", "--survey",
         fixture->survey);
    RUNS("channel", "mast", "--carrier-hz", "457e6", "--noise-floor-dbm", "-113", "--survey",
         fixture->survey);
    RUNS("route", "fen", "--from-vehicle", "spreader-1", "--segment-m", "500", "--survey",
         fixture->survey);
    RUNS("fit", "--survey", fixture->survey);
    *state = fixture;
    return 0;
}

static int teardown(void **state)
{
    struct fixture *fixture = *state;
    folder_remove(fixture->folder);
    free(fixture);
    return 0;
}

static json_t *rows_of(const char *const *arguments)
{
    struct program program = {0};
    program_run(&program, arguments);
    assert_string_equal(program.errors, "");
    assert_int_equal(program.status, 0);
    json_t *rows = json_loads(program.output, 0, NULL);
    assert_non_null(rows);
    program_clear(&program);
    return rows;
}

#define ROWS(...)                                                                              \
    rows_of(                                                                                   \
        (const char *const[]){"diversity", "--quiet", "--format", "json", __VA_ARGS__, NULL})

static double number(const json_t *row, const char *name)
{
    const json_t *value = json_object_get(row, name);
    return json_is_number(value) ? json_number_value(value) : NAN;
}

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
        assert_true(number(row, "pairs") > 4900.0);
        assert_true(number(row, "below_first") > 0.01);
        assert_true(number(row, "below_both") < number(row, "below_first"));
        assert_true(number(row, "below_both_low") < 1.3 * number(row, "independent_both"));
        assert_true(number(row, "below_both_high") > 0.77 * number(row, "independent_both"));
        assert_true(fabs(number(row, "power_correlation")) < 0.1);
        assert_true(number(row, "power_correlation_low") < 0.05);
        assert_true(number(row, "power_correlation_high") > -0.05);
        assert_true(fabs(number(row, "gain_10_percent_db") -
                         number(row, "independent_10_percent_db")) < 1.0);
        assert_true(fabs(number(row, "gain_1_percent_db") -
                         number(row, "independent_1_percent_db")) < 2.5);
    }
    assert_string_equal(json_string_value(json_object_get(json_array_get(rows, 0), "with")),
                        "mast");
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
    assert_true(number(b, "threshold_db") == 15.0);
    assert_true(number(a, "below_first") == number(b, "below_first"));
    assert_true(number(a, "below_second") > 1.5 * number(b, "below_second"));
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
    assert_true(number(a, "segment") == number(b, "segment"));
    assert_true(number(a, "below_first") == number(b, "below_second"));
    assert_true(fabs(number(a, "power_correlation") - number(b, "power_correlation")) < 1e-12);
    assert_true(number(a, "below_both_low") == number(b, "below_both_low"));
    json_decref(there);
    json_decref(back);
}

static void refuses(const char *const *arguments, int status, const char *word)
{
    struct program program = {0};
    program_run(&program, arguments);
    assert_int_equal(program.status, status);
    assert_non_null(strstr(program.errors, word));
    assert_string_equal(program.output, "");
    program_clear(&program);
}

static void what_makes_no_pair_is_refused(void **state)
{
    const struct fixture *fixture = *state;
    refuses((const char *const[]){"diversity", "--survey", fixture->survey, "--channel", "roof",
                                  "--threshold-dbm", "-95", NULL},
            2, "--with");
    refuses((const char *const[]){"diversity", "--survey", fixture->survey, "--channel", "roof",
                                  "--with", "roof", "--threshold-dbm", "-95", NULL},
            2, "same channel");
    refuses((const char *const[]){"diversity", "--survey", fixture->survey, "--channel", "roof",
                                  "--with", "mast", NULL},
            2, "exactly one of");
    refuses((const char *const[]){"diversity", "--survey", fixture->survey, "--channel", "roof",
                                  "--with", "absent", "--threshold-dbm", "-95", NULL},
            1, "no channel 'absent'");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(independent_branches_are_seen_as_such),
        cmocka_unit_test(snr_puts_both_on_one_scale),
        cmocka_unit_test(branches_can_be_exchanged),
        cmocka_unit_test(what_makes_no_pair_is_refused),
    };
    return cmocka_run_group_tests(tests, setup, teardown);
}
