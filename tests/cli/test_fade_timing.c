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

#include "fixture.h"
#include "program.h"

#define ROWS(...) JSON_OF("fade-timing", __VA_ARGS__)

/* Readings 0.05 wavelengths apart on the first channel, and 0.15 on a second drive's. */
static int setup(void **state)
{
    if (fixture_setup(state) != 0)
        return -1;
    const struct fixture *fixture = *state;
    char log[128];
    (void)snprintf(log, sizeof log, "%s/fine.csv", fixture->folder);
    DONE("simulate", "--length-m", "2200", "--rate-hz", "305", "--speed-kmh", "36",
         "--carrier-hz", "457e6", "--decorrelation-m", "300", "--seed", "5", "--vehicle",
         "plough-2", "--channel", "fine", "--output", log);
    DONE("import", log, "--survey", fixture->survey);
    (void)snprintf(log, sizeof log, "%s/coarse.csv", fixture->folder);
    DONE("simulate", "--length-m", "2200", "--rate-hz", "100", "--speed-kmh", "36",
         "--carrier-hz", "457e6", "--decorrelation-m", "300", "--seed", "6", "--k", "8",
         "--stretch-m", "5000", "--ray-angle-deg", "0", "--vehicle", "plough-2", "--channel",
         "coarse", "--start", "2027-01-13T20:00:00Z", "--output", log);
    DONE("import", log, "--survey", fixture->survey);
    DONE("channel", "fine", "--carrier-hz", "457e6", "--survey", fixture->survey);
    DONE("channel", "coarse", "--carrier-hz", "457e6", "--survey", fixture->survey);
    DONE("route", "fen", "--from-vehicle", "plough-2", "--segment-m", "110", "--survey",
         fixture->survey);
    DONE("fit", "--survey", fixture->survey);
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
        const double crossings = number_of(row, "crossings");
        if (number_of(row, "below_local_mean_db") != below_db)
            continue;
        sum.crossings += crossings;
        sum.predicted +=
            number_of(row, "predicted_per_m") *
            (crossings > 0.0 ? crossings / number_of(row, "observed_per_m") : 110.0);
        sum.longest_m = fmax(sum.longest_m, number_of(row, "longest_fade_m"));
        sum.visible += strcmp(text_of(row, "visible"), "yes") == 0;
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
    assert_true(number_of(deep, "below_local_mean_db") == 20.0);
    assert_string_equal(text_of(deep, "visible"), "no");
    assert_string_equal(text_of(deep, "hidden_by"), "spacing");
    assert_string_equal(text_of(deep, "channel"), "coarse");
    assert_string_equal(text_of(deep, "timing_model"), "rice");
    /* the ray comes along the road */
    assert_true(number_at(rows, 1, "ray_factor") > 1.5);
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
    assert_true(fabs(number_of(a, "speed_kmh") / 36.0 - 1.0) < 0.02);
    assert_true(number_of(b, "speed_kmh") == 72.0);
    assert_true(number_of(a, "predicted_per_m") == number_of(b, "predicted_per_m"));
    assert_true(fabs(number_of(b, "predicted_per_s") / number_of(b, "predicted_per_m") - 20.0) <
                1e-9);
    assert_true(fabs(number_of(b, "observed_fade_m") / number_of(b, "observed_fade_s") - 20.0) <
                1e-9);
    assert_true(number_of(a, "longest_fade_s") == number_of(b, "longest_fade_s"));
    assert_true(fabs(number_of(a, "longest_fade_s") * 10.0 / number_of(a, "longest_fade_m") -
                     1.0) < 0.1);
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
        assert_true(number_at(rows, i - 1, "observed_per_m") >=
                    number_at(rows, i, "observed_per_m"));
    json_decref(rows);
}

static void what_was_not_counted_is_refused(void **state)
{
    const struct fixture *fixture = *state;
    REFUSED(2, "7 dB below the local mean", "fade-timing", "--survey", fixture->survey,
            "--below-local-mean-db", "7");
    REFUSED(2, "--speed-kmh", "fade-timing", "--survey", fixture->survey, "--speed-kmh", "0");
    REFUSED(1, "no channel 'absent'", "fade-timing", "--survey", fixture->survey, "--channel",
            "absent");
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
    return cmocka_run_group_tests(tests, setup, fixture_teardown);
}
