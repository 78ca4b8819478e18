/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file errors_test.c  Short form: tests at 5 % refuse what is true about as often, and what
 * isn't nearly always. The full form is errors_full.c.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>

#include "statistics/count.h"
#include "statistics/power.h"

enum { SEGMENTS = 150, SAMPLES = 400 };

/* Within 3.5 standard deviations of trials at 5 %. */
static void assert_five_percent(const struct share *share, int64_t trials_min)
{
    double trials = (double)share->trials;
    double share_seen = (double)share->hits / trials;
    assert_true(share->trials >= trials_min);
    if (fabs(share_seen - 0.05) > 3.5 * sqrt(0.05 * 0.95 / trials)) {
        fail_msg("refused %g of %g", (double)share->hits, trials);
    }
}

static void segments_are_refused_one_in_twenty(void **state)
{
    (void)state;
    struct share goodness = {0, 0}, rice = {0, 0};
    static const double spacings_wavelengths[] = {0.05, 0.15};
    for (int i = 0; i < 2; i++) {
        struct circumstances it = usual_circumstances;
        it.spacing_wavelengths = spacings_wavelengths[i];
        struct count count;
        assert_true(count_segments(&it, SEGMENTS, 5001, &count));
        assert_int_equal(count.failed, 0);
        goodness.hits += count.goodness.hits;
        goodness.trials += count.goodness.trials;
        rice.hits += count.rice.hits;
        rice.trials += count.rice.trials;
        count_clear(&count);
    }
    assert_five_percent(&goodness, SEGMENTS);
    assert_five_percent(&rice, SEGMENTS);
}

static struct share refused(enum population population, int effective, int repeats)
{
    const struct power_cell cell = {population, effective, repeats};
    struct share share;
    assert_true(power_run(&cell, 41, SAMPLES, &share));
    assert_int_equal(share.trials, SAMPLES);
    return share;
}

static void rice_columns_are_refused_one_in_twenty(void **state)
{
    (void)state;
    struct share independent = refused(POPULATION_RICE, 1000, 1);
    struct share repeated = refused(POPULATION_RICE, 1000, 3);
    assert_five_percent(&independent, SAMPLES);
    assert_five_percent(&repeated, SAMPLES);
}

static void other_columns_are_found_out(void **state)
{
    (void)state;
    const int most = 95 * SAMPLES / 100;
    assert_true(refused(POPULATION_LOGNORMAL, 1000, 1).hits >= most);
    assert_true(refused(POPULATION_LOGNORMAL, 1000, 3).hits >= most);
    assert_true(refused(POPULATION_TWO, 1000, 1).hits >= most);
    assert_true(refused(POPULATION_TWO, 1000, 3).hits >= most);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(segments_are_refused_one_in_twenty),
        cmocka_unit_test(rice_columns_are_refused_one_in_twenty),
        cmocka_unit_test(other_columns_are_found_out),
    };
    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
