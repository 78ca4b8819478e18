/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Tails and densities of the models against quadrature of their definitions. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <math.h>

#include "routefade/model.h"
#include "support/reference_table.h"

static const double tail_accuracy = 1e-12;

static struct rfade_tails tails_of(enum rfade_model_id id, double parameter, double x_db)
{
    struct rfade_tails tails;
    assert_int_equal(rfade_model(id)->tails(parameter, x_db, &tails), RFADE_OK);
    return tails;
}

static void check_open_table(const char *file_name, enum rfade_model_id id,
                             const char *parameter, size_t rows)
{
    struct reference_table table;
    reference_open(&table, file_name);
    while (reference_next(&table)) {
        const struct rfade_tails tails =
            tails_of(id, reference_number(&table, parameter), reference_number(&table, "x_dB"));
        reference_assert_column(&table, "cdf", tails.lower, tail_accuracy);
        reference_assert_column(&table, "ccdf", tails.upper, tail_accuracy);
        reference_assert_column(&table, "ln_cdf", tails.log_lower, tail_accuracy);
        reference_assert_column(&table, "ln_ccdf", tails.log_upper, tail_accuracy);
    }
    assert_int_equal(table.row_count, rows);
}

static void rice_cdf_matches_reference(void **state)
{
    (void)state;
    check_open_table("rice_cdf_open.tsv", RFADE_RICE, "K", 462);
}

static void nakagami_cdf_matches_reference(void **state)
{
    (void)state;
    check_open_table("nakagami_cdf_open.tsv", RFADE_NAKAGAMI, "m", 416);
}

/* K to 1e5, m from 0.1 to 1e4, sigma from 0.01 to 30 dB, -100 to 30 dB and near the mean. */
static void tails_and_density_match_random_points(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "tails_random.tsv");
    while (reference_next(&table)) {
        const struct rfade_model *model = rfade_model_by_name(reference_text(&table, "model"));
        assert_non_null(model);
        const double parameter = reference_number(&table, "parameter");
        const double x_db = reference_number(&table, "x_db");
        const struct rfade_tails tails = tails_of(model->id, parameter, x_db);
        reference_assert_column(&table, "lower", tails.lower, tail_accuracy);
        reference_assert_column(&table, "upper", tails.upper, tail_accuracy);
        reference_assert_column(&table, "ln_lower", tails.log_lower, tail_accuracy);
        reference_assert_column(&table, "ln_upper", tails.log_upper, tail_accuracy);
        struct rfade_log_gradient density;
        assert_int_equal(model->log_density(parameter, x_db, &density), RFADE_OK);
        reference_assert_column(&table, "ln_density", density.value, tail_accuracy);
    }
    assert_int_equal(table.row_count, 400);
}

/* Rice with K = 0 and Nakagami with m = 1 are Rayleigh (Nakagami 1960), by other code. */
static void special_cases_are_rayleigh(void **state)
{
    (void)state;
    for (int x_step = 0; - 100.0 + x_step * 0.37 <= 27.0; x_step++) {
        const double x_db = -100.0 + x_step * 0.37;
        const struct rfade_tails rayleigh = tails_of(RFADE_RAYLEIGH, 0.0, x_db);
        const struct rfade_tails others[] = {tails_of(RFADE_RICE, 0.0, x_db),
                                             tails_of(RFADE_RICE, 1e-9, x_db),
                                             tails_of(RFADE_NAKAGAMI, 1.0, x_db)};
        for (size_t i = 0; i < 3; i++) {
            assert_true(fabs(others[i].lower / rayleigh.lower - 1.0) < 1e-12);
            assert_true(fabs(others[i].upper / rayleigh.upper - 1.0) < 1e-12);
        }
    }
}

/* y (1+K) exp(-K) is the first term of the Rice tail: 10 dB a decade, at any K. */
static void deep_fades_follow_the_power_law(void **state)
{
    (void)state;
    const double ks[] = {0.0, 0.1, 0.7, 3.0, 20.0, 300.0, 4e3, 1e5};
    for (size_t i = 0; i < sizeof ks / sizeof ks[0]; i++) {
        const double k = ks[i];
        const struct rfade_tails tails = tails_of(RFADE_RICE, k, -2900.0);
        const double expected = -290.0 * log(10.0) + log1p(k) - k;
        assert_true(fabs(tails.log_lower / expected - 1.0) < 1e-14);
    }
}

static void tails_are_monotone(void **state)
{
    (void)state;
    const struct {
        enum rfade_model_id id;
        double parameter;
    } cases[] = {{RFADE_RAYLEIGH, 0.0},  {RFADE_RICE, 0.3},     {RFADE_RICE, 40.0},
                 {RFADE_RICE, 1e5},      {RFADE_NAKAGAMI, 0.5}, {RFADE_NAKAGAMI, 29.9},
                 {RFADE_NAKAGAMI, 30.1}, {RFADE_NAKAGAMI, 1e4}, {RFADE_LOGNORMAL, 6.0}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_tails before = {0.0, 1.0, -INFINITY, 0.0};
        for (int x_step = 0; - 20.0 + x_step * 0.01 < 20.0; x_step++) {
            const double x_db = -20.0 + x_step * 0.01;
            const struct rfade_tails tails = tails_of(cases[i].id, cases[i].parameter, x_db);
            assert_true(tails.log_lower > before.log_lower || tails.lower == 1.0);
            assert_true(tails.log_upper < before.log_upper || tails.upper == 1.0);
            before = tails;
        }
    }
}

static void infinite_levels_are_exact(void **state)
{
    (void)state;
    const double parameters[RFADE_MODEL_COUNT] = {0.0, 3.0, 2.0, 6.0};
    for (int id = 0; id < RFADE_MODEL_COUNT; id++) {
        struct rfade_tails tails = tails_of((enum rfade_model_id)id, parameters[id], -INFINITY);
        assert_true(tails.lower == 0.0 && tails.upper == 1.0);
        assert_true(tails.log_lower == -INFINITY && tails.log_upper == 0.0);
        tails = tails_of((enum rfade_model_id)id, parameters[id], INFINITY);
        assert_true(tails.lower == 1.0 && tails.upper == 0.0);
        assert_true(tails.log_lower == 0.0 && tails.log_upper == -INFINITY);
    }
}

static void assert_refused(enum rfade_model_id id, double parameter, double x_db)
{
    const struct rfade_model *model = rfade_model(id);
    struct rfade_tails tails = {0.0, 0.0, 0.0, 0.0};
    struct rfade_log_gradient density = {0.0, 0.0, 0.0};
    assert_int_equal(model->tails(parameter, x_db, &tails), RFADE_DOMAIN);
    assert_true(isnan(tails.lower) && isnan(tails.upper) && isnan(tails.log_lower) &&
                isnan(tails.log_upper));
    assert_int_equal(model->log_density(parameter, x_db, &density), RFADE_DOMAIN);
    assert_true(isnan(density.value) && isnan(density.d_mean_db) && isnan(density.d_parameter));
}

static void outside_the_domain_is_refused(void **state)
{
    (void)state;
    assert_refused(RFADE_RICE, -1e-9, 0.0);
    assert_refused(RFADE_RICE, 1.001e5, 0.0);
    assert_refused(RFADE_RICE, NAN, 0.0);
    assert_refused(RFADE_NAKAGAMI, 0.099, 0.0);
    assert_refused(RFADE_NAKAGAMI, 1.001e4, 0.0);
    assert_refused(RFADE_NAKAGAMI, NAN, 0.0);
    assert_refused(RFADE_LOGNORMAL, 0.0, 0.0);
    assert_refused(RFADE_LOGNORMAL, 101.0, 0.0);
    assert_refused(RFADE_LOGNORMAL, NAN, 0.0);
    for (int id = 0; id < RFADE_MODEL_COUNT; id++) {
        assert_refused((enum rfade_model_id)id, 1.0, NAN);
        assert_refused((enum rfade_model_id)id, 1.0, 3000.1);
        assert_refused((enum rfade_model_id)id, 1.0, -3000.1);
    }
}

static void density_of_an_infinite_level_is_refused(void **state)
{
    (void)state;
    for (int id = 0; id < RFADE_MODEL_COUNT; id++) {
        struct rfade_log_gradient density;
        const struct rfade_model *model = rfade_model((enum rfade_model_id)id);
        assert_int_equal(model->log_density(1.0, INFINITY, &density), RFADE_DOMAIN);
        assert_true(isnan(density.value));
    }
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(rice_cdf_matches_reference),
        cmocka_unit_test(nakagami_cdf_matches_reference),
        cmocka_unit_test(tails_and_density_match_random_points),
        cmocka_unit_test(special_cases_are_rayleigh),
        cmocka_unit_test(deep_fades_follow_the_power_law),
        cmocka_unit_test(tails_are_monotone),
        cmocka_unit_test(infinite_levels_are_exact),
        cmocka_unit_test(outside_the_domain_is_refused),
        cmocka_unit_test(density_of_an_infinite_level_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
