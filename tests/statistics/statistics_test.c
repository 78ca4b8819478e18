/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file statistics_test.c  Short form: intervals hold the truth on simulated segments, ray
 * across and along the road; a standstill changes nothing. The full form is full.c.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>

#include "statistics/count.h"

enum { SEGMENTS = 60 };

/* Four standard errors of a share of 95 % below it: with 60 segments, 84 %. */
static void assert_held(const struct count *count, int measure)
{
    const struct share *share = &count->coverage[measure].share;
    double error = sqrt(0.95 * 0.05 / (double)share->trials);
    assert_true(share->trials >= SEGMENTS / 2);
    assert_true((double)share->hits / (double)share->trials >= 0.95 - 4.0 * error);
}

static void check_cell(const struct circumstances *circumstances)
{
    static const int measures[] = {MEASURE_K,          MEASURE_LOCAL_MEAN, MEASURE_OUTAGE,
                                   MEASURE_OUTAGE + 1, MEASURE_NEXT,       MEASURE_NEXT + 1};
    struct count count;
    assert_true(count_segments(circumstances, SEGMENTS, 1, &count));
    assert_int_equal(count.failed, 0);
    for (size_t i = 0; i < sizeof measures / sizeof measures[0]; i++) {
        assert_held(&count, measures[i]);
    }
    double median = count_median_k(&count);
    assert_true(fabs(median / fmax(circumstances->k, 1.0) -
                     circumstances->k / fmax(circumstances->k, 1.0)) < 0.3);
    count_clear(&count);
}

static void intervals_hold_with_the_ray_across_the_road(void **state)
{
    (void)state;
    struct circumstances across = usual_circumstances;
    across.k = 4.0;
    check_cell(&across);
}

static void intervals_hold_with_the_ray_along_the_road(void **state)
{
    (void)state;
    struct circumstances along = usual_circumstances;
    along.k = 4.0;
    along.ray_angle_deg = 0.0;
    check_cell(&along);
}

static void intervals_hold_without_a_ray(void **state)
{
    (void)state;
    struct circumstances rayleigh = usual_circumstances;
    rayleigh.k = 0.0;
    check_cell(&rayleigh);
}

/* 30 s at 100 readings a second: 3,000 rows that say one thing. */
static void a_standstill_changes_nothing(void **state)
{
    (void)state;
    struct circumstances standing = usual_circumstances;
    standing.k = 4.0;
    standing.spacing_wavelengths = 10.0 / 100.0 / 0.656; /* 10 m/s, 100 readings a second */
    struct circumstances moving = standing;
    standing.standstill_s = 30.0;
    for (uint64_t seed = 1; seed <= 5; seed++) {
        struct outcome with, without;
        assert_true(segment_run(&standing, seed, &with));
        assert_true(segment_run(&moving, seed, &without));
        for (int i = 0; i < MEASURE_SAME; i++) {
            const struct interval *one = &with.intervals[i], *other = &without.intervals[i];
            double tenth = 0.1 * (other->high - other->low);
            if (isnan(other->estimate)) {
                continue;
            }
            assert_true(fabs(one->estimate - other->estimate) < tenth);
            assert_true(fabs(one->low - other->low) < tenth);
            assert_true(fabs(one->high - other->high) < tenth);
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(intervals_hold_with_the_ray_across_the_road),
        cmocka_unit_test(intervals_hold_with_the_ray_along_the_road),
        cmocka_unit_test(intervals_hold_without_a_ray),
        cmocka_unit_test(a_standstill_changes_nothing),
    };
    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
