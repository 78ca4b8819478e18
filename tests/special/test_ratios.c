/* SPDX-License-Identifier: GPL-3.0-or-later */
/* I1/I0 and ln m - psi(m), with their slopes. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <float.h>
#include <gsl/gsl_errno.h>
#include <math.h>

#include "routefade/special.h"
#include "special/bessel.h"
#include "support/reference_table.h"

static void bessel_ratio_matches_random_points(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "ratio_random.tsv");
    while (reference_next(&table)) {
        const double z = reference_number(&table, "z");
        struct rfade_bessel_ratio ratio;
        assert_int_equal(rfade_bessel_ratio(z, &ratio), RFADE_OK);
        reference_assert_column(&table, "ratio", ratio.ratio, 2e-15);
        reference_assert_column(&table, "complement", ratio.complement, 1e-14);
        reference_assert_column(&table, "derivative", ratio.derivative, 1e-14);
        const struct rfade_bessel_pair pair = rfade_bessel_pair(z);
        reference_assert_column(&table, "complement", pair.complement, 2e-15);
    }
    assert_int_equal(table.row_count, 200);
}

static void bessel_ratio_is_continuous_where_methods_change(void **state)
{
    (void)state;
    const double switches[] = {2.0, 4.0, 8.0, 20.0, 25.0, 60.0, 1e3};
    for (size_t i = 0; i < sizeof switches / sizeof switches[0]; i++) {
        struct rfade_bessel_ratio below;
        struct rfade_bessel_ratio above;
        const double z = switches[i];
        assert_int_equal(rfade_bessel_ratio(z * (1.0 - DBL_EPSILON), &below), RFADE_OK);
        assert_int_equal(rfade_bessel_ratio(z * (1.0 + DBL_EPSILON), &above), RFADE_OK);
        assert_true(fabs(below.ratio / above.ratio - 1.0) < 4e-15);
        assert_true(fabs(below.complement / above.complement - 1.0) < 2e-14);
        assert_true(fabs(below.derivative / above.derivative - 1.0) < 2e-14);
        const struct rfade_bessel_pair low = rfade_bessel_pair(z * (1.0 - DBL_EPSILON));
        const struct rfade_bessel_pair high = rfade_bessel_pair(z * (1.0 + DBL_EPSILON));
        assert_true(fabs(low.i0_scaled / high.i0_scaled - 1.0) < 4e-15);
        assert_true(fabs(low.complement / high.complement - 1.0) < 4e-15);
        assert_true(fabs(low.half_excess / high.half_excess - 1.0) < 4e-15);
    }
}

/* r -> z/2, r' -> 1/2 and 1 - 2r/z -> z^2/8 at 0; r -> 1 at infinity (AMS 55, 9.6.10, 9.7.1).
 */
static void bessel_ratio_has_its_limits(void **state)
{
    (void)state;
    struct rfade_bessel_ratio ratio;
    assert_int_equal(rfade_bessel_ratio(0.0, &ratio), RFADE_OK);
    assert_true(ratio.ratio == 0.0 && ratio.complement == 1.0 && ratio.derivative == 0.5);
    assert_int_equal(rfade_bessel_ratio(1e-300, &ratio), RFADE_OK);
    assert_true(ratio.ratio == 0.5e-300);
    assert_int_equal(rfade_bessel_ratio(INFINITY, &ratio), RFADE_OK);
    assert_true(ratio.ratio == 1.0 && ratio.complement == 0.0 && ratio.derivative == 0.0);
    assert_true(fabs(rfade_bessel_pair(1e-5).half_excess / 1.25e-11 - 1.0) < 1e-10);
    assert_true(rfade_bessel_pair(0.0).half_excess == 0.0);
}

static void log_minus_psi_matches_random_points(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "psi_random.tsv");
    while (reference_next(&table)) {
        double value = NAN;
        double derivative = NAN;
        const double m = reference_number(&table, "m");
        assert_int_equal(rfade_log_minus_psi(m, &value, &derivative), RFADE_OK);
        reference_assert_column(&table, "value", value, 1e-14);
        reference_assert_column(&table, "derivative", derivative, 1e-14);
    }
    assert_int_equal(table.row_count, 100);
}

/* Both sides of the expansion's start, m = 10, and psi(1) = -Euler's constant (6.3.2). */
static void log_minus_psi_is_continuous_and_has_its_limits(void **state)
{
    (void)state;
    double below = NAN;
    double above = NAN;
    double slope_below = NAN;
    double slope_above = NAN;
    assert_int_equal(rfade_log_minus_psi(10.0 * (1.0 - DBL_EPSILON), &below, &slope_below),
                     RFADE_OK);
    assert_int_equal(rfade_log_minus_psi(10.0, &above, &slope_above), RFADE_OK);
    assert_true(fabs(below / above - 1.0) < 4e-15);
    assert_true(fabs(slope_below / slope_above - 1.0) < 4e-15);
    assert_int_equal(rfade_log_minus_psi(1.0, &above, NULL), RFADE_OK);
    assert_true(fabs(above - 0.57721566490153286) < 1e-15);
    assert_int_equal(rfade_log_minus_psi(1e12, &above, &slope_above), RFADE_OK);
    assert_true(fabs(above / 0.5e-12 - 1.0) < 1e-12);
    assert_true(fabs(slope_above / -0.5e-24 - 1.0) < 1e-12);
}

static void outside_the_domain_is_refused(void **state)
{
    (void)state;
    const double bad_z[] = {-1e-300, -INFINITY, NAN};
    for (size_t i = 0; i < 3; i++) {
        struct rfade_bessel_ratio ratio = {0.0, 0.0, 0.0};
        assert_int_equal(rfade_bessel_ratio(bad_z[i], &ratio), RFADE_DOMAIN);
        assert_true(isnan(ratio.ratio) && isnan(ratio.complement) && isnan(ratio.derivative));
    }
    const double bad_m[] = {0.0, 0.0999, -1.0, NAN};
    for (size_t i = 0; i < 4; i++) {
        double value = 0.0;
        double derivative = 0.0;
        assert_int_equal(rfade_log_minus_psi(bad_m[i], &value, &derivative), RFADE_DOMAIN);
        assert_true(isnan(value) && isnan(derivative));
    }
}

/* ln 19 and ln(1/(10^20 - 1)), mpmath. */
static void log_odds_by_hand(void **state)
{
    (void)state;
    assert_true(fabs(rfade_log_odds(0.95) - 2.9444389791664403) < 1e-15);
    assert_true(fabs(rfade_log_odds(1e-20) / -46.051701859880914 - 1.0) < 1e-15);
    assert_true(rfade_log_odds(0.5) == 0.0 && rfade_from_log_odds(0.0) == 0.5);
    assert_true(fabs(rfade_from_log_odds(2.9444389791664403) - 0.95) < 1e-15);
    assert_true(fabs(rfade_from_log_odds(-46.051701859880914) / 1e-20 - 1.0) < 1e-14);
    assert_true(rfade_from_log_odds(rfade_log_odds(0.0)) == 0.0);
    assert_true(rfade_from_log_odds(rfade_log_odds(1.0)) == 1.0);
    assert_true(isnan(rfade_log_odds(-0.1)) && isnan(rfade_log_odds(1.1)));
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(bessel_ratio_matches_random_points),
        cmocka_unit_test(bessel_ratio_is_continuous_where_methods_change),
        cmocka_unit_test(bessel_ratio_has_its_limits),
        cmocka_unit_test(log_minus_psi_matches_random_points),
        cmocka_unit_test(log_minus_psi_is_continuous_and_has_its_limits),
        cmocka_unit_test(outside_the_domain_is_refused),
        cmocka_unit_test(log_odds_by_hand),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
