/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Marcum's Q, the incomplete gamma function and the normal distribution, tail by tail. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <float.h>
#include <gsl/gsl_errno.h>
#include <math.h>

#include "routefade/special.h"
#include "special/gamma_tails.h"
#include "special/marcum.h"
#include "special/tails.h"
#include "support/reference_table.h"

static const double tail_accuracy = 1e-12;

/* Below 1e-300 in value the logarithms carry the answer. */
static void check_tails(const struct reference_table *table, const struct rfade_tails *tails,
                        const char *const columns[4])
{
    reference_assert_column(table, columns[0], tails->lower, tail_accuracy);
    reference_assert_column(table, columns[1], tails->upper, tail_accuracy);
    reference_assert_column(table, columns[2], tails->log_lower, tail_accuracy);
    reference_assert_column(table, columns[3], tails->log_upper, tail_accuracy);
}

static void check_marcum(const char *file_name, size_t rows)
{
    static const char *const columns[4] = {"P", "Q1", "lnP", "lnQ1"};
    struct reference_table table;
    reference_open(&table, file_name);
    while (reference_next(&table)) {
        struct rfade_tails tails;
        assert_int_equal(rfade_marcum_tails(reference_number(&table, "a"),
                                            reference_number(&table, "b"), &tails),
                         RFADE_OK);
        check_tails(&table, &tails, columns);
    }
    assert_int_equal(table.row_count, rows);
}

static void marcum_matches_reference(void **state)
{
    (void)state;
    check_marcum("marcum_q_open.tsv", 150);
}

static void marcum_matches_random_points(void **state)
{
    (void)state;
    check_marcum("marcum_random.tsv", 300);
}

static void gamma_matches_random_points(void **state)
{
    (void)state;
    static const char *const columns[4] = {"P", "Q", "lnP", "lnQ"};
    struct reference_table table;
    reference_open(&table, "gamma_random.tsv");
    while (reference_next(&table)) {
        struct rfade_tails tails;
        assert_int_equal(rfade_gamma_tails(reference_number(&table, "shape"),
                                           reference_number(&table, "x"), &tails),
                         RFADE_OK);
        check_tails(&table, &tails, columns);
    }
    assert_int_equal(table.row_count, 300);
}

static void assert_tails(const struct rfade_tails *tails, double lower, double upper,
                         double log_lower, double log_upper)
{
    assert_true(tails->lower == lower);
    assert_true(tails->upper == upper);
    assert_true(tails->log_lower == log_lower);
    assert_true(tails->log_upper == log_upper);
}

static void assert_refused(enum rfade_status status, const struct rfade_tails *tails)
{
    assert_int_equal(status, RFADE_DOMAIN);
    assert_true(isnan(tails->lower) && isnan(tails->upper));
    assert_true(isnan(tails->log_lower) && isnan(tails->log_upper));
}

static void ends_of_the_range_are_exact(void **state)
{
    (void)state;
    struct rfade_tails tails;
    assert_int_equal(rfade_marcum_tails(3.0, 0.0, &tails), RFADE_OK);
    assert_tails(&tails, 0.0, 1.0, -INFINITY, 0.0);
    assert_int_equal(rfade_marcum_tails(3.0, INFINITY, &tails), RFADE_OK);
    assert_tails(&tails, 1.0, 0.0, 0.0, -INFINITY);
    assert_int_equal(rfade_gamma_tails(3.0, 0.0, &tails), RFADE_OK);
    assert_tails(&tails, 0.0, 1.0, -INFINITY, 0.0);
    assert_int_equal(rfade_gamma_tails(3.0, INFINITY, &tails), RFADE_OK);
    assert_tails(&tails, 1.0, 0.0, 0.0, -INFINITY);
    assert_int_equal(rfade_normal_tails(-INFINITY, &tails), RFADE_OK);
    assert_tails(&tails, 0.0, 1.0, -INFINITY, 0.0);
    assert_int_equal(rfade_normal_tails(INFINITY, &tails), RFADE_OK);
    assert_tails(&tails, 1.0, 0.0, 0.0, -INFINITY);
    assert_int_equal(rfade_normal_tails(0.0, &tails), RFADE_OK);
    assert_true(tails.lower == 0.5 && tails.upper == 0.5);
}

static void outside_the_domain_is_refused(void **state)
{
    (void)state;
    struct rfade_tails tails;
    assert_refused(rfade_marcum_tails(-1.0, 1.0, &tails), &tails);
    assert_refused(rfade_marcum_tails(1.0, -DBL_MIN, &tails), &tails);
    assert_refused(rfade_marcum_tails(NAN, 1.0, &tails), &tails);
    assert_refused(rfade_marcum_tails(1.0, NAN, &tails), &tails);
    assert_refused(rfade_marcum_tails(INFINITY, 1.0, &tails), &tails);
    assert_refused(rfade_marcum_tails(2e8, 1.0, &tails), &tails);
    assert_refused(rfade_gamma_tails(0.05, 1.0, &tails), &tails);
    assert_refused(rfade_gamma_tails(2e6, 1.0, &tails), &tails);
    assert_refused(rfade_gamma_tails(1.0, -DBL_MIN, &tails), &tails);
    assert_refused(rfade_gamma_tails(NAN, 1.0, &tails), &tails);
    assert_refused(rfade_gamma_tails(1.0, NAN, &tails), &tails);
    assert_refused(rfade_normal_tails(NAN, &tails), &tails);
}

/* ln P1(a, b) -> 2 ln b - ln 2 - a^2/2 and ln P(s, x) -> s ln x - ln Gamma(s+1) at 0. */
static void logarithms_reach_below_the_range_of_doubles(void **state)
{
    (void)state;
    struct rfade_tails tails;
    const double denormal = 5e-324;
    assert_int_equal(rfade_marcum_tails(2.0, denormal, &tails), RFADE_OK);
    assert_true(tails.lower == 0.0 && tails.upper == 1.0);
    assert_true(fabs(tails.log_lower / (2.0 * log(denormal) - log(2.0) - 2.0) - 1.0) < 1e-14);
    assert_int_equal(rfade_marcum_tails(0.0, denormal, &tails), RFADE_OK);
    assert_true(fabs(tails.log_lower / (2.0 * log(denormal) - log(2.0)) - 1.0) < 1e-14);
    assert_int_equal(rfade_gamma_tails(3.0, denormal, &tails), RFADE_OK);
    assert_true(fabs(tails.log_lower / (3.0 * log(denormal) - log(6.0)) - 1.0) < 1e-14);
    assert_int_equal(rfade_marcum_tails(1.0, 1e100, &tails), RFADE_OK);
    assert_true(tails.upper == 0.0 && fabs(tails.log_upper / -0.5e200 - 1.0) < 1e-14);
}

/* Q1(a, a) = (1 + exp(-a^2) I0(a^2))/2 [Schwartz, Bennett and Stein 1966, appendix A]: both
 * sides of the median, where the computed tail changes. */
static void tails_are_continuous_where_the_side_changes(void **state)
{
    (void)state;
    for (int a_step = 0; 1e-3 * pow(1.7, a_step) < 1e3; a_step++) {
        const double a = 1e-3 * pow(1.7, a_step);
        const double b = sqrt(a * a + 1.2); /* the switch in marcum.c */
        for (int i = -2; i <= 2; i++) {
            const double offset = 1.2 / (a + b) * (1.0 + i * 1e-15);
            const struct rfade_tails low = rfade_marcum_tails_at(a, b, offset * (1.0 - 1e-15));
            const struct rfade_tails high = rfade_marcum_tails_at(a, b, offset * (1.0 + 1e-15));
            assert_true(fabs(low.lower - high.lower) < 1e-14);
            assert_true(fabs(low.log_upper - high.log_upper) < 3e-14);
        }
    }
    for (int shape_step = 0; 0.1 * pow(1.7, shape_step) < 1e6; shape_step++) {
        const double shape = 0.1 * pow(1.7, shape_step);
        const double at = fmax(shape, 1.0); /* the switch in gamma_tails.c */
        struct rfade_tails low;
        struct rfade_tails high;
        assert_int_equal(rfade_gamma_tails(shape, at * (1.0 - 1e-15), &low), RFADE_OK);
        assert_int_equal(rfade_gamma_tails(shape, at * (1.0 + 2e-15), &high), RFADE_OK);
        /* the density of ln x at the mean is near sqrt(shape / 2 pi) */
        const double moved = 3e-15 * (1.0 + sqrt(shape));
        assert_true(fabs(low.lower - high.lower) < moved + 2e-15);
        assert_true(fabs(low.log_upper - high.log_upper) < 60.0 * (moved + 2e-15));
    }
}

/* The lower tail changes from the series to quadrature at shape 30. */
static void gamma_is_continuous_where_the_series_ends(void **state)
{
    (void)state;
    for (int log_step = 0; - 20.0 + log_step * 0.3 < 0.0; log_step++) {
        const double log_ratio = -20.0 + log_step * 0.3;
        const double step = 30.0 * 4.0 * DBL_EPSILON;
        const struct rfade_gamma_scaled low = rfade_gamma_scaled(30.0 - step, log_ratio);
        const struct rfade_gamma_scaled high = rfade_gamma_scaled(30.0 + step, log_ratio);
        const double low_log = low.tail.exponent + low.tail.log_factor;
        const double high_log = high.tail.exponent + high.tail.log_factor;
        assert_true(fabs(low_log / high_log - 1.0) < 1e-14);
        assert_true(fabs(low.slope / high.slope - 1.0) < 1e-13);
    }
}

static void tails_are_monotone(void **state)
{
    (void)state;
    struct rfade_tails before = {0.0, 1.0, -INFINITY, 0.0};
    for (int b_step = 0; 0.01 + b_step * 0.01 < 60.0; b_step++) {
        const double b = 0.01 + b_step * 0.01;
        struct rfade_tails tails;
        assert_int_equal(rfade_marcum_tails(20.0, b, &tails), RFADE_OK);
        assert_true(tails.log_lower > before.log_lower || tails.lower == 1.0);
        assert_true(tails.log_upper < before.log_upper || tails.upper == 1.0);
        before = tails;
    }
    before = (struct rfade_tails){0.0, 1.0, -INFINITY, 0.0};
    for (int x_step = 0; 0.01 * pow(1.002, x_step) < 200.0; x_step++) {
        const double x = 0.01 * pow(1.002, x_step);
        struct rfade_tails tails;
        assert_int_equal(rfade_gamma_tails(12.5, x, &tails), RFADE_OK);
        assert_true(tails.log_lower > before.log_lower || tails.lower == 1.0);
        assert_true(tails.log_upper < before.log_upper || tails.upper == 1.0);
        before = tails;
    }
}

/* mpmath 1.2.1, 40 digits: exp(-x^2/2) of the doubles nearest to these. */
static void half_square_keeps_its_digits(void **state)
{
    (void)state;
    const double values[][2] = {
        {0.1, 0.9950124791926823128},       {1.7, 0.23574607655586354858},
        {10.3, 9.1801379509591616524e-24},  {37.219, 1.5700892913396165983e-301},
        {37.4, 1.8328429210730634544e-304},
    };
    for (size_t i = 0; i < sizeof values / sizeof values[0]; i++) {
        assert_true(fabs(rfade_exp_half_square(values[i][0]) / values[i][1] - 1.0) < 5e-16);
    }
    assert_true(rfade_exp_half_square(1e200) == 0.0);
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(marcum_matches_reference),
        cmocka_unit_test(marcum_matches_random_points),
        cmocka_unit_test(gamma_matches_random_points),
        cmocka_unit_test(ends_of_the_range_are_exact),
        cmocka_unit_test(outside_the_domain_is_refused),
        cmocka_unit_test(logarithms_reach_below_the_range_of_doubles),
        cmocka_unit_test(tails_are_continuous_where_the_side_changes),
        cmocka_unit_test(gamma_is_continuous_where_the_series_ends),
        cmocka_unit_test(tails_are_monotone),
        cmocka_unit_test(half_square_keeps_its_digits),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
