/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file verdicts_test.c  Short form of verdicts.c: on simulated segments whose true outage is
 * next to the target, at most one verdict in ten is wrong.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>

#include "statistics/wrong.h"

enum { SEGMENTS = 150 };

/* A tenth, and three standard errors of it: 17 %. */
static void assert_rare(const struct share *share)
{
    double trials = (double)share->trials;
    assert_true(trials >= 0.9 * SEGMENTS);
    assert_true((double)share->hits / trials <= 0.1 + 3.0 * sqrt(0.1 * 0.9 / trials));
}

static void check_cell(double k, int passes)
{
    struct circumstances it = usual_circumstances;
    struct wrong wrong;
    it.k = k;
    it.passes = passes;
    assert_true(wrong_verdicts(&it, RFADE_RESOLVED, SEGMENTS, 1, 0.90, &wrong));
    for (int i = 0; i < THRESHOLDS; i++) {
        assert_rare(&wrong.met[i]);
        assert_rare(&wrong.failing[i]);
    }
}

static void wrong_verdicts_are_rare_without_a_ray(void **state)
{
    (void)state;
    check_cell(0.0, 1);
}

static void wrong_verdicts_are_rare_with_a_ray(void **state)
{
    (void)state;
    check_cell(4.0, 1);
}

static void wrong_verdicts_are_rare_over_three_passes(void **state)
{
    (void)state;
    check_cell(4.0, 3);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(wrong_verdicts_are_rare_without_a_ray),
        cmocka_unit_test(wrong_verdicts_are_rare_with_a_ray),
        cmocka_unit_test(wrong_verdicts_are_rare_over_three_passes),
    };
    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
