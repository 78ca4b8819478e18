/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How often the signal fades and for how long, from a drive to the table. */
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
    rows_of((const char *const[]){"fade-timing", "--quiet", "--format", "json", __VA_ARGS__,   \
                                  NULL})

static double number(const json_t *row, const char *name)
{
    const json_t *value = json_object_get(row, name);
    return json_is_number(value) ? json_number_value(value) : NAN;
}

static const char *text(const json_t *row, const char *name)
{
    const char *value = json_string_value(json_object_get(row, name));
    return value ? value : "";
}

/* Readings 0.05 wavelengths apart on the first channel, and 0.15 on a second drive's. */
static int setup(void **state)
{
    struct fixture *fixture = calloc(1, sizeof *fixture);
    char log[128];
    (void)snprintf(fixture->folder, sizeof fixture->folder, "%s", folder_create());
    (void)snprintf(fixture->survey, sizeof fixture->survey, "%s/night.routefade",
                   fixture->folder);
    (void)snprintf(log, sizeof log, "%s/fine.csv", fixture->folder);
    RUNS("simulate", "--length-m", "2200", "--rate-hz", "305", "--speed-kmh", "36",
         "--carrier-hz", "457e6", "--decorrelation-m", "300", "--seed", "5", "--vehicle",
         "plough-2", "--channel", "fine", "--output", log);
    RUNS("import", log, "--survey", fixture->survey);
    (void)snprintf(log, sizeof log, "%s/coarse.csv", fixture->folder);
    RUNS("simulate", "--length-m", "2200", "--rate-hz", "100", "--speed-kmh", "36",
         "--carrier-hz", "457e6", "--decorrelation-m", "300", "--seed", "6", "--k", "8",
         "--stretch-m", "5000", "--ray-angle-deg", "0", "--vehicle", "plough-2", "--channel",
         "coarse", "--start", "2027-01-13T20:00:00Z", "--output", log);
    RUNS("import", log, "--survey", fixture->survey);
    RUNS("channel", "fine", "--carrier-hz", "457e6", "--survey", fixture->survey);
    RUNS("channel", "coarse", "--carrier-hz", "457e6", "--survey", fixture->survey);
    RUNS("route", "fen", "--from-vehicle", "plough-2", "--segment-m", "110", "--survey",
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

/* Observed and predicted crossings of one level, added up over the segments. */
struct pooled {
    double crossings;
    double predicted;
    double longest_m;
    size_t visible;
    size_t rows;
};

static struct pooled pool(const json_t *rows, double below_db)
{
    struct pooled sum = {0};
    size_t index = 0;
    const json_t *row = NULL;
    json_array_foreach(rows, index, row)
    {
        const double crossings = number(row, "crossings");
        if (number(row, "below_local_mean_db") != below_db)
            continue;
        sum.crossings += crossings;
        sum.predicted += number(row, "predicted_per_m") *
                         (crossings > 0.0 ? crossings / number(row, "observed_per_m") : 110.0);
        sum.longest_m = fmax(sum.longest_m, number(row, "longest_fade_m"));
        sum.visible += strcmp(text(row, "visible"), "yes") == 0;
        sum.rows++;
    }
    return sum;
}

static void observed_is_as_predicted_where_it_is_visible(void **state)
{
    const struct fixture *fixture = *state;
    json_t *rows = ROWS("--survey", fixture->survey, "--channel", "fine");
    const double levels_db[] = {0, 5, 10};
    for (size_t i = 0; i < 3; i++) {
        const struct pooled sum = pool(rows, levels_db[i]);
        assert_true(sum.rows >= 19 && sum.visible == sum.rows);
        assert_true(sum.crossings >= 2000);
        assert_true(fabs(sum.crossings / sum.predicted - 1.0) < 0.05);
        assert_true(sum.longest_m > 0.0);
    }
    const struct pooled deep = pool(rows, 20);
    assert_int_equal(deep.visible, 0);
    assert_true(deep.crossings < 0.8 * deep.predicted);
    json_decref(rows);
}

static void coarse_sampling_is_labelled(void **state)
{
    const struct fixture *fixture = *state;
    json_t *rows = ROWS("--survey", fixture->survey, "--channel", "coarse",
                        "--below-local-mean-db", "20,10,20", "--segment", "3");
    assert_int_equal(json_array_size(rows), 2);
    const json_t *deep = json_array_get(rows, 0);
    assert_true(number(deep, "below_local_mean_db") == 20.0);
    assert_string_equal(text(deep, "visible"), "no");
    assert_string_equal(text(deep, "hidden_by"), "spacing");
    assert_string_equal(text(deep, "channel"), "coarse");
    assert_string_equal(text(deep, "timing_model"), "rice");
    /* the ray comes along the road */
    assert_true(number(json_array_get(rows, 1), "ray_factor") > 1.5);
    json_decref(rows);
    struct program program = {0};
    program_run(&program, (const char *const[]){"fade-timing", "--survey", fixture->survey,
                                                "--channel", "coarse", NULL});
    assert_int_equal(program.status, 0);
    assert_non_null(strstr(program.errors, "the direct ray's own Doppler shift"));
    program_clear(&program);
}

/* Rates in time follow the speed that is asked for, else the one driven. */
static void seconds_follow_the_speed(void **state)
{
    const struct fixture *fixture = *state;
    json_t *driven = ROWS("--survey", fixture->survey, "--channel", "fine", "--segment", "2");
    json_t *fast = ROWS("--survey", fixture->survey, "--channel", "fine", "--segment", "2",
                        "--speed-kmh", "72");
    const json_t *a = json_array_get(driven, 0), *b = json_array_get(fast, 0);
    assert_true(fabs(number(a, "speed_kmh") / 36.0 - 1.0) < 0.02);
    assert_true(number(b, "speed_kmh") == 72.0);
    assert_true(number(a, "predicted_per_m") == number(b, "predicted_per_m"));
    assert_true(fabs(number(b, "predicted_per_s") / number(b, "predicted_per_m") - 20.0) <
                1e-9);
    assert_true(fabs(number(b, "observed_fade_m") / number(b, "observed_fade_s") - 20.0) <
                1e-9);
    assert_true(number(a, "longest_fade_s") == number(b, "longest_fade_s"));
    assert_true(fabs(number(a, "longest_fade_s") * 10.0 / number(a, "longest_fade_m") - 1.0) <
                0.1);
    json_decref(driven);
    json_decref(fast);
}

static void worst_is_crossed_most_often(void **state)
{
    const struct fixture *fixture = *state;
    json_t *rows = ROWS("--survey", fixture->survey, "--channel", "fine",
                        "--below-local-mean-db", "5", "--worst", "4");
    assert_int_equal(json_array_size(rows), 4);
    for (size_t i = 1; i < 4; i++)
        assert_true(number(json_array_get(rows, i - 1), "observed_per_m") >=
                    number(json_array_get(rows, i), "observed_per_m"));
    json_decref(rows);
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

static void what_was_not_counted_is_refused(void **state)
{
    const struct fixture *fixture = *state;
    refuses((const char *const[]){"fade-timing", "--survey", fixture->survey,
                                  "--below-local-mean-db", "7", NULL},
            2, "7 dB below the local mean");
    refuses((const char *const[]){"fade-timing", "--survey", fixture->survey, "--speed-kmh",
                                  "0", NULL},
            2, "--speed-kmh");
    refuses((const char *const[]){"fade-timing", "--survey", fixture->survey, "--channel",
                                  "absent", NULL},
            1, "no channel 'absent'");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(observed_is_as_predicted_where_it_is_visible),
        cmocka_unit_test(coarse_sampling_is_labelled),
        cmocka_unit_test(seconds_follow_the_speed),
        cmocka_unit_test(worst_is_crossed_most_often),
        cmocka_unit_test(what_was_not_counted_is_refused),
    };
    return cmocka_run_group_tests(tests, setup, teardown);
}
