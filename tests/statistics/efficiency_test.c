/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file efficiency_test.c  Short form: some cells of efficiency_full.c with fewer draws, and
 * the bound itself against closed forms.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>

#include "statistics/efficiency.h"

enum { DRAWS = 300 };

static void assert_near(double value, double expected, double relative)
{
    if (!(fabs(value - expected) <= relative * fabs(expected))) {
        fail_msg("%.12g, expected %.12g within %g relative", value, expected, relative);
    }
}

static struct efficiency_bound bound_of(const struct efficiency_cell *cell)
{
    struct efficiency_bound bound;
    assert_true(efficiency_bound(cell, &bound));
    return bound;
}

/*
 * Nakagami: 1/(psi'(m) - 1/m) a reading; psi'(1) = pi^2/6, psi'(2) = pi^2/6 - 1 [AMS 55,
 * 6.4.2 and 6.4.3]. The bias at m = 1 to first order, by Cox and Snell's formula for the gamma
 * law (Cordeiro and McCullagh 1991, section 5): (m psi' - m^2 psi'' - 2)/(2 (m psi' - 1)^2),
 * psi''(1) = -2 zeta(3).
 */
static void the_bound_is_that_of_closed_forms(void **state)
{
    (void)state;
    const double pi = 3.14159265358979323846, zeta_3 = 1.2020569031595942854;
    const double trigamma = pi * pi / 6.0;
    struct efficiency_cell cell = {RFADE_NAKAGAMI, 1.0, 0.0, 1};
    struct efficiency_bound bound = bound_of(&cell);
    assert_near(bound.deviation, 1.0 / sqrt(trigamma - 1.0), 1e-9);
    assert_near(bound.bias,
                (trigamma + 2.0 * zeta_3 - 2.0) / (2.0 * (trigamma - 1.0) * (trigamma - 1.0)),
                1e-6);
    cell.parameter = 2.0;
    assert_near(bound_of(&cell).deviation, 1.0 / sqrt(trigamma - 1.0 - 0.5), 1e-9);
    cell.readings = 100;
    assert_near(bound_of(&cell).deviation, 0.1 / sqrt(trigamma - 1.0 - 0.5), 1e-9);
}

/* Steps take information away, little as long as they are finer than the fading. */
static void steps_raise_the_bound(void **state)
{
    (void)state;
    struct efficiency_cell cell = {RFADE_RICE, 30.0, 0.0, 1000};
    double continuous = bound_of(&cell).deviation;
    cell.step_db = 1.0;
    double stepped = bound_of(&cell).deviation;
    assert_true(stepped > 1.01 * continuous && stepped < 1.2 * continuous);
}

/*
 * Limits at 3.5 standard errors of the simulation beyond what is promised, and about the
 * bias of theory (its next term is some hundredths of it at 1,000 readings).
 */
static void assert_efficient(enum rfade_model_id model, double parameter, double step_db)
{
    const struct efficiency_cell cell = {model, parameter, step_db, 1000};
    struct efficiency result;
    assert_true(efficiency_run(&cell, 31, DRAWS, &result));
    assert_int_equal(result.failed, 0);
    const struct efficiency_mean *ratio = &result.ratio, *bias = &result.bias;
    double theory = result.bound.bias / result.bound.deviation;
    if (ratio->value > 1.05 + 3.5 * ratio->error || ratio->value < 1.0 - 3.5 * ratio->error ||
        fabs(bias->value) > 0.1 || fabs(bias->value - theory) > 0.01 + 3.5 * bias->error) {
        fail_msg("%s %g step %g: error %g and bias %g of the bound", rfade_model(model)->name,
                 parameter, step_db, ratio->value, bias->value);
    }
    assert_true(fabs(result.plain.value - ratio->value) < 3.5 * result.plain.error);
    assert_true(result.moment.value > ratio->value);
}

static void estimates_meet_the_bound(void **state)
{
    (void)state;
    assert_efficient(RFADE_RICE, 1.0, 0.0);
    assert_efficient(RFADE_RICE, 10.0, 1.0);
    assert_efficient(RFADE_NAKAGAMI, 0.6, 0.0);
    assert_efficient(RFADE_NAKAGAMI, 5.0, 1.0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_bound_is_that_of_closed_forms),
        cmocka_unit_test(steps_raise_the_bound),
        cmocka_unit_test(estimates_meet_the_bound),
    };
    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
