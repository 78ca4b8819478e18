/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file test_pass_spread.c  What passes differ by, held against passes drawn with GSL: the
 * mean and another pass lie within the deviations' reach as often as was asked.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_cdf.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>

#include "analyse/pass_spread.h"

enum { TRIALS = 1000, PASSES_MAX = 12 };

static const double confidence = 0.95;
static const double fading_db = 0.4;

/* A pass of 100 m at one level. */
static void add_pass(struct rfade_pass_levels *levels, int64_t start_us, double level_dbm,
                     int64_t travel_mm)
{
    struct rfade_tally *tally = NULL;
    struct rfade_tally_key key = {1, RFADE_INTERVAL, (int32_t)lround(100.0 * level_dbm), 0};
    assert_int_equal(rfade_tally_create(&tally), RFADE_OK);
    assert_int_equal(rfade_tally_add(tally, &key, travel_mm, 1), RFADE_OK);
    assert_int_equal(rfade_pass_levels_add(levels, 1, start_us, tally), RFADE_OK);
    rfade_tally_destroy(tally);
}

/* How often the mean, and the next pass, lie within reach; mean reach over its best. */
struct held {
    double mean;
    double next;
    double width;
};

static struct held draw(int passes, double apart_db)
{
    gsl_rng *random = gsl_rng_alloc(gsl_rng_mt19937);
    double one_db = hypot(apart_db, fading_db), quantile = gsl_cdf_ugaussian_Pinv(0.975);
    struct held held = {0.0, 0.0, 0.0};
    for (int i = 0; i < TRIALS; i++) {
        struct rfade_pass_levels levels = {NULL, 0};
        double mean_db = 0.0;
        for (int j = 0; j < passes; j++) {
            double level_db = gsl_ran_gaussian(random, one_db);
            add_pass(&levels, j, level_db, 100000);
            mean_db += level_db / passes;
        }
        struct rfade_pass_spread spread =
            rfade_find_pass_spread(&levels, fading_db, confidence);
        double next_db = gsl_ran_gaussian(random, one_db);
        double reach_db = hypot(hypot(spread.mean_db, spread.next_db), fading_db);
        held.mean += fabs(mean_db) <= quantile * spread.mean_db;
        held.next += fabs(next_db - mean_db) <= quantile * reach_db;
        held.width += spread.mean_db / (one_db / sqrt(passes));
        rfade_pass_levels_clear(&levels);
    }
    gsl_rng_free(random);
    return (struct held){held.mean / TRIALS, held.next / TRIALS, held.width / TRIALS};
}

/* The bands leave 0.95 four standard errors and what the prior is off by. */
static void passes_that_differ_are_held(void **state)
{
    (void)state;
    const int passes[] = {2, 3, 6, PASSES_MAX};
    const double apart_db[] = {1.0, 2.0, 3.0};
    for (size_t i = 0; i < sizeof passes / sizeof passes[0]; i++) {
        for (size_t j = 0; j < sizeof apart_db / sizeof apart_db[0]; j++) {
            struct held held = draw(passes[i], apart_db[j]);
            assert_true(held.mean > 0.87);
            assert_true(held.next > 0.87);
        }
    }
}

static void passes_that_are_alike_are_held_and_more(void **state)
{
    (void)state;
    struct held three = draw(3, 0.0), many = draw(PASSES_MAX, 0.0);
    assert_true(three.mean > 0.93 && three.next > 0.93);
    assert_true(many.mean > 0.93 && many.next > 0.93);
    /* Many know that fading is all there is. */
    assert_true(three.width > many.width);
    assert_true(many.width < 1.1);
}

static void one_pass_says_nothing_of_others(void **state)
{
    (void)state;
    struct rfade_pass_levels levels = {NULL, 0};
    add_pass(&levels, 0, -90.0, 100000);
    add_pass(&levels, 0, -80.0, 100000); /* two pieces of one pass */
    struct rfade_pass_spread spread = rfade_find_pass_spread(&levels, fading_db, confidence);
    assert_int_equal(levels.count, 1);
    assert_true(fabs(spread.mean_db - fading_db) < 1e-12);
    assert_true(isnan(spread.next_db));
    rfade_pass_levels_clear(&levels);
}

/* A pass over an end of the segment has another level for that alone. */
static void short_passes_are_left_out(void **state)
{
    (void)state;
    struct rfade_pass_levels levels = {NULL, 0};
    add_pass(&levels, 0, -90.0, 100000);
    add_pass(&levels, 1, -90.1, 100000);
    add_pass(&levels, 2, -70.0, 50000);
    struct rfade_pass_spread with = rfade_find_pass_spread(&levels, fading_db, confidence);
    levels.passes[2].sum_mm_db = -110.0 * levels.passes[2].travel_mm;
    struct rfade_pass_spread other = rfade_find_pass_spread(&levels, fading_db, confidence);
    assert_true(with.next_db == other.next_db && with.mean_db == other.mean_db);
    rfade_pass_levels_clear(&levels);
}

static void passes_far_apart_reach_far(void **state)
{
    (void)state;
    struct rfade_pass_levels levels = {NULL, 0};
    for (int i = 0; i < PASSES_MAX; i++) {
        add_pass(&levels, i, i % 2 == 0 ? -120.0 : -60.0, 100000);
    }
    struct rfade_pass_spread spread = rfade_find_pass_spread(&levels, 1e-3, confidence);
    /* Sample deviation 30 sqrt(12/11), t quantile for 13 degrees of freedom 2.160 [AMS 55,
     * table 26.10] over the normal one, and the prior's 2 of 13. */
    double expected_db = sqrt((2.0 * 4.0 + 11.0 * 900.0 * 12.0 / 11.0) / 13.0) * 2.160 / 1.960;
    assert_true(fabs(spread.next_db / expected_db - 1.0) < 1e-3);
    rfade_pass_levels_clear(&levels);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(passes_that_differ_are_held),
        cmocka_unit_test(passes_that_are_alike_are_held_and_more),
        cmocka_unit_test(one_pass_says_nothing_of_others),
        cmocka_unit_test(short_passes_are_left_out),
        cmocka_unit_test(passes_far_apart_reach_far),
    };
    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
