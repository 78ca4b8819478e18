/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Outage of fast fading over a lognormal local mean. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <math.h>
#include <string.h>

#include "routefade/predict.h"
#include "support/reference_table.h"

static const double outage_accuracy = 1e-10;

static struct rfade_tails outage(enum rfade_model_id id, double parameter, double shadowing_db,
                                 double x_db)
{
    struct rfade_tails tails;
    assert_int_equal(rfade_outage(rfade_model(id), parameter, shadowing_db, x_db, &tails),
                     RFADE_OK);
    return tails;
}

static void composite_matches_reference(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "composite_open.tsv");
    while (reference_next(&table)) {
        const bool is_rice = strcmp(reference_text(&table, "fading"), "Rice") == 0;
        const struct rfade_tails tails =
            outage(is_rice ? RFADE_RICE : RFADE_RAYLEIGH,
                   is_rice ? reference_number(&table, "par") : 0.0,
                   reference_number(&table, "sigma_dB"), reference_number(&table, "x_dB"));
        reference_assert_column(&table, "outage", tails.lower, outage_accuracy);
        reference_assert_column(&table, "coverage", tails.upper, outage_accuracy);
    }
    assert_int_equal(table.row_count, 108);
}

/* K to 1e4, m from 0.1 to 1e4, sigma 0.1 to 30 dB, five spreads either way and beyond. */
static void composite_matches_random_points(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "outage_random.tsv");
    while (reference_next(&table)) {
        const struct rfade_model *model = rfade_model_by_name(reference_text(&table, "model"));
        assert_non_null(model);
        const struct rfade_tails tails =
            outage(model->id, reference_number(&table, "parameter"),
                   reference_number(&table, "shadowing_db"), reference_number(&table, "x_db"));
        reference_assert_column(&table, "outage", tails.lower, outage_accuracy);
        reference_assert_column(&table, "coverage", tails.upper, outage_accuracy);
        assert_true(fabs(exp(tails.log_lower) / tails.lower - 1.0) < 1e-12 ||
                    tails.lower < 1e-300);
    }
    assert_int_equal(table.row_count, 120);
}

/* Deep outages of Rice fading: from a deep fade, a deep local mean, or both. */
static void both_sides_of_a_valley_count(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "valley_random.tsv");
    while (reference_next(&table)) {
        const struct rfade_tails tails =
            outage(RFADE_RICE, reference_number(&table, "parameter"),
                   reference_number(&table, "shadowing_db"), reference_number(&table, "x_db"));
        reference_assert_column(&table, "outage", tails.lower, outage_accuracy);
    }
    assert_int_equal(table.row_count, 30);
}

/* Without shadowing it is the model itself; with next to none, next to it. */
static void no_shadowing_is_the_limit(void **state)
{
    (void)state;
    for (int x_step = 0; - 40.0 + x_step * 3.7 < 10.0; x_step++) {
        const double x_db = -40.0 + x_step * 3.7;
        struct rfade_tails expected;
        assert_int_equal(rfade_model(RFADE_RICE)->tails(4.0, x_db, &expected), RFADE_OK);
        const struct rfade_tails none = outage(RFADE_RICE, 4.0, 0.0, x_db);
        assert_memory_equal(&none, &expected, sizeof none);
        const struct rfade_tails little = outage(RFADE_RICE, 4.0, 1e-7, x_db);
        assert_true(fabs(little.log_lower / expected.log_lower - 1.0) < 1e-11);
        assert_true(fabs(little.log_upper / expected.log_upper - 1.0) < 1e-11);
    }
}

/* With no fading to speak of it is the normal distribution of the local mean. */
static void steady_signal_is_the_other_limit(void **state)
{
    (void)state;
    for (int x_step = 0; - 25.0 + x_step * 3.1 < 25.0; x_step++) {
        const double x_db = -25.0 + x_step * 3.1;
        struct rfade_tails expected;
        assert_int_equal(rfade_normal_tails(x_db / 6.0, &expected), RFADE_OK);
        const struct rfade_tails tails = outage(RFADE_NAKAGAMI, 1e4, 6.0, x_db);
        /* fading of 0.043 dB in 6 dB */
        assert_true(fabs(tails.log_lower / expected.log_lower - 1.0) < 2e-3);
        assert_true(fabs(tails.log_upper / expected.log_upper - 1.0) < 2e-3);
    }
}

/* The integral changes its variable where shadowing and fading are as wide as each other. */
static void outage_is_continuous_where_the_variable_changes(void **state)
{
    (void)state;
    const double m = 7.0;
    const double at_db = 10.0 / log(10.0) / sqrt(m);
    for (int x_step = 0; - 60.0 + x_step * 4.1 < 15.0; x_step++) {
        const double x_db = -60.0 + x_step * 4.1;
        const struct rfade_tails low = outage(RFADE_NAKAGAMI, m, at_db * (1.0 - 1e-15), x_db);
        const struct rfade_tails high = outage(RFADE_NAKAGAMI, m, at_db * (1.0 + 1e-15), x_db);
        assert_true(fabs(low.lower / high.lower - 1.0) < 1e-12);
        assert_true(fabs(low.upper / high.upper - 1.0) < 1e-12);
    }
}

static void outage_is_monotone(void **state)
{
    (void)state;
    struct rfade_tails before = {0.0, 1.0, -INFINITY, 0.0};
    for (int x_step = 0; - 60.0 + x_step * 0.5 < 40.0; x_step++) {
        const double x_db = -60.0 + x_step * 0.5;
        const struct rfade_tails tails = outage(RFADE_RICE, 2.0, 8.0, x_db);
        assert_true(tails.log_lower > before.log_lower);
        assert_true(tails.log_upper < before.log_upper);
        before = tails;
    }
}

/*
 * A Rayleigh tail at 900 dB above the mean, exp(-1e90), is out of reach of any logarithm's
 * rounding; without fading against it the local mean decides: ln Q near -(x/sigma)^2/2.
 */
static void vanishing_tails_are_zero(void **state)
{
    (void)state;
    const struct rfade_tails tails = outage(RFADE_RAYLEIGH, 0.0, 1.5, 900.0);
    assert_true(tails.lower == 1.0 && tails.upper == 0.0);
    const double expected = -0.5 * (900.0 / 1.5) * (900.0 / 1.5);
    assert_true(tails.log_upper > 1.1 * expected && tails.log_upper < 0.9 * expected);
}

/* ln(10)/20 sigma^2, the mean of exp of a normal variable: 4.1446531... dB at 6 dB. */
static void lognormal_mean_lies_above_its_median(void **state)
{
    (void)state;
    assert_true(fabs(rfade_lognormal_mean_over_median_db(6.0) - 4.1446531673892822) < 1e-14);
    assert_true(rfade_lognormal_mean_over_median_db(0.0) == 0.0);
}

static void assert_refused(const struct rfade_model *model, double parameter,
                           double shadowing_db, double x_db)
{
    struct rfade_tails tails = {0.0, 0.0, 0.0, 0.0};
    assert_int_equal(rfade_outage(model, parameter, shadowing_db, x_db, &tails), RFADE_DOMAIN);
    assert_true(isnan(tails.lower) && isnan(tails.upper) && isnan(tails.log_lower) &&
                isnan(tails.log_upper));
}

static void outside_the_domain_is_refused(void **state)
{
    (void)state;
    const struct rfade_model *rice = rfade_model(RFADE_RICE);
    assert_refused(NULL, 1.0, 6.0, 0.0);
    assert_refused(rfade_model(RFADE_LOGNORMAL), 1.0, 6.0, 0.0);
    assert_refused(rice, -1.0, 6.0, 0.0);
    assert_refused(rice, NAN, 6.0, 0.0);
    assert_refused(rice, 1.0, -0.1, 0.0);
    assert_refused(rice, 1.0, 30.1, 0.0);
    assert_refused(rice, 1.0, NAN, 0.0);
    assert_refused(rice, 1.0, 6.0, NAN);
    assert_refused(rice, 1.0, 6.0, 1001.0);
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(composite_matches_reference),
        cmocka_unit_test(composite_matches_random_points),
        cmocka_unit_test(both_sides_of_a_valley_count),
        cmocka_unit_test(no_shadowing_is_the_limit),
        cmocka_unit_test(steady_signal_is_the_other_limit),
        cmocka_unit_test(outage_is_continuous_where_the_variable_changes),
        cmocka_unit_test(outage_is_monotone),
        cmocka_unit_test(vanishing_tails_are_zero),
        cmocka_unit_test(lognormal_mean_lies_above_its_median),
        cmocka_unit_test(outside_the_domain_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
