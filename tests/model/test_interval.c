/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Probabilities of level intervals and their slopes. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <math.h>

#include "routefade/model.h"
#include "support/reference_table.h"

struct example {
    enum rfade_model_id id;
    double parameter;
};

static const struct example examples[] = {
    {RFADE_RAYLEIGH, 0.0}, {RFADE_RICE, 0.0},      {RFADE_RICE, 1e-4},
    {RFADE_RICE, 0.7},     {RFADE_RICE, 12.0},     {RFADE_RICE, 5e3},
    {RFADE_NAKAGAMI, 0.5}, {RFADE_NAKAGAMI, 2.0},  {RFADE_NAKAGAMI, 45.0},
    {RFADE_NAKAGAMI, 8e3}, {RFADE_LOGNORMAL, 0.2}, {RFADE_LOGNORMAL, 6.0},
};
enum { EXAMPLE_COUNT = sizeof examples / sizeof examples[0] };

static struct rfade_log_gradient interval(const struct example *example, double low_db,
                                          double high_db)
{
    struct rfade_log_gradient result;
    assert_int_equal(
        rfade_model(example->id)->log_interval(example->parameter, low_db, high_db, &result),
        RFADE_OK);
    return result;
}

/*
 * Widths from 1e-4 to 40 dB and censored halves, anywhere from -100 to 30 dB. An error in
 * ln p is one relative in p; of deep tails it may grow with the exponent.
 */
static void interval_matches_random_points(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "interval_random.tsv");
    while (reference_next(&table)) {
        const struct rfade_model *model = rfade_model_by_name(reference_text(&table, "model"));
        assert_non_null(model);
        const struct example example = {model->id, reference_number(&table, "parameter")};
        const struct rfade_log_gradient result = interval(
            &example, reference_number(&table, "low_db"), reference_number(&table, "high_db"));
        const double expected = reference_number(&table, "ln_p");
        reference_assert_column(&table, "ln_p", result.value,
                                fabs(expected) < 1.0 ? 1e-12 : 1e-12 / fmin(-expected, 700.0));
        reference_assert_column(&table, "d_mean_db", result.d_mean_db, 1e-12);
        reference_assert_column(&table, "d_parameter", result.d_parameter, 1e-12);
    }
    assert_int_equal(table.row_count, 500);
}

/* Halves and whole: p(low, middle) + p(middle, high) = p(low, high), through every method. */
static void parts_add_up_to_the_whole(void **state)
{
    (void)state;
    for (size_t i = 0; i < EXAMPLE_COUNT; i++) {
        for (int width_step = 0; 1e-3 * pow(1.9, width_step) < 120.0; width_step++) {
            const double width_db = 1e-3 * pow(1.9, width_step);
            for (int low_step = 0; - 70.0 + low_step * 3.3 < 15.0; low_step++) {
                const double low_db = -70.0 + low_step * 3.3;
                const double high_db = low_db + width_db;
                const double middle_db = low_db + 0.4 * width_db;
                const double whole = interval(&examples[i], low_db, high_db).value;
                const double sum =
                    exp(interval(&examples[i], low_db, middle_db).value - whole) +
                    exp(interval(&examples[i], middle_db, high_db).value - whole);
                /* where the ends lie is known to a rounding of middle_db */
                assert_true(fabs(sum - 1.0) < 2e-12 + 1e-15 * fabs(whole));
            }
        }
    }
}

/* Steepest is the density of Rice half way up to the steady amplitude, 6 dB down. */
static void rice_intervals_across_the_steepest_level_add_up(void **state)
{
    (void)state;
    for (int k_step = 0; k_step < 12; k_step++) {
        const struct example example = {RFADE_RICE, 3.0 * pow(1.6, k_step)};
        for (int low_step = 0; low_step < 24; low_step++) {
            const double low_db = -46.0 + 1.7 * low_step;
            for (int width_step = 0; width_step < 16; width_step++) {
                const double high_db = low_db + 6.0 + 2.3 * width_step;
                const double middle_db = 0.5 * (low_db + high_db);
                const double whole = interval(&example, low_db, high_db).value;
                const double sum = exp(interval(&example, low_db, middle_db).value - whole) +
                                   exp(interval(&example, middle_db, high_db).value - whole);
                assert_true(fabs(sum - 1.0) < 3e-13 + 1e-15 * fabs(whole));
            }
        }
    }
}

/* P -> (1+K) exp(-K) y deep down, so d ln P/dK -> 1/(1+K) - 1 = -K/(1+K). */
static void rice_slope_is_right_in_the_deepest_fades(void **state)
{
    (void)state;
    const double ks[] = {1e-6, 0.1, 0.49, 0.51, 4.0, 105.0, 3e3, 1e5};
    for (size_t i = 0; i < sizeof ks / sizeof ks[0]; i++) {
        const struct example example = {RFADE_RICE, ks[i]};
        const double expected = -ks[i] / (1.0 + ks[i]);
        const double slope = interval(&example, -INFINITY, -300.0).d_parameter;
        assert_true(fabs(slope / expected - 1.0) < 1e-14);
    }
}

/* Everything below and everything above is all there is, with slopes that cancel. */
static void censored_halves_are_the_tails(void **state)
{
    (void)state;
    for (size_t i = 0; i < EXAMPLE_COUNT; i++) {
        for (int x_step = 0; - 60.0 + x_step * 0.71 < 15.0; x_step++) {
            const double x_db = -60.0 + x_step * 0.71;
            struct rfade_tails tails;
            const struct rfade_log_gradient below = interval(&examples[i], -INFINITY, x_db);
            const struct rfade_log_gradient above = interval(&examples[i], x_db, INFINITY);
            assert_int_equal(
                rfade_model(examples[i].id)->tails(examples[i].parameter, x_db, &tails),
                RFADE_OK);
            assert_true(fabs(below.value - tails.log_lower) <= 1e-12 * fabs(below.value));
            assert_true(fabs(above.value - tails.log_upper) <= 1e-12 * fabs(above.value));
            const double mean_sum =
                tails.lower * below.d_mean_db + tails.upper * above.d_mean_db;
            assert_true(fabs(mean_sum) <= 1e-12 * fabs(tails.lower * below.d_mean_db));
        }
        const struct rfade_log_gradient all = interval(&examples[i], -INFINITY, INFINITY);
        assert_true(all.value == 0.0 && all.d_mean_db == 0.0 && all.d_parameter == 0.0);
    }
}

/* Five-point difference of the logarithm in a parameter that is scaled by (1 + step). */
static double parameter_difference(const struct example *example, double low_db, double high_db,
                                   double step)
{
    const int places[] = {-2, -1, 1, 2};
    const double weights[] = {1.0, -8.0, 8.0, -1.0};
    double sum = 0.0;
    for (size_t i = 0; i < 4; i++) {
        const struct example moved = {example->id,
                                      example->parameter * (1.0 + places[i] * step)};
        sum += weights[i] * interval(&moved, low_db, high_db).value;
    }
    return sum / (12.0 * step * example->parameter);
}

static double mean_difference(const struct example *example, double low_db, double high_db,
                              double step_db)
{
    const int places[] = {-2, -1, 1, 2};
    const double weights[] = {1.0, -8.0, 8.0, -1.0};
    double sum = 0.0;
    for (size_t i = 0; i < 4; i++) {
        const double shift = places[i] * step_db; /* a higher mean is a lower relative level */
        sum += weights[i] * interval(example, low_db - shift, high_db - shift).value;
    }
    return sum / (12.0 * step_db);
}

static void slopes_match_differences(void **state)
{
    (void)state;
    const double widths_db[] = {0.1, 1.0, 6.0, 20.0, 60.0};
    for (size_t i = 0; i < EXAMPLE_COUNT; i++) {
        const double steadiness =
            1.0 + (examples[i].id == RFADE_LOGNORMAL
                       ? 40.0 / (examples[i].parameter * examples[i].parameter)
                       : examples[i].parameter);
        for (size_t w = 0; w < sizeof widths_db / sizeof widths_db[0]; w++) {
            for (int low_step = 0; - 25.0 + low_step * 1.3 < 8.0; low_step++) {
                const double low_db = -25.0 + low_step * 1.3;
                const double high_db = low_db + widths_db[w];
                const struct rfade_log_gradient slopes =
                    interval(&examples[i], low_db, high_db);
                const double step_db = 2e-3 / sqrt(steadiness);
                const double scale = fabs(slopes.d_mean_db) + 0.1;
                assert_true(fabs(slopes.d_mean_db -
                                 mean_difference(&examples[i], low_db, high_db, step_db)) <
                            1e-6 * scale);
                if (examples[i].parameter > 0.01) {
                    const double difference =
                        parameter_difference(&examples[i], low_db, high_db, 1e-3);
                    assert_true(fabs(slopes.d_parameter - difference) <
                                1e-6 * (fabs(difference) + 1.0 / examples[i].parameter));
                }
            }
        }
    }
}

/*
 * At K = 0 the score of K vanishes, and next to it is K times the second derivative: from
 * the series of I0, ln density = ln y - y + K^2 (y^2/4 (-1) + y - 1/2) + O(K^3), so the slope
 * in K at a level is 2 K (-y^2/4 + y - 1/2).
 */
static void rice_slope_is_right_at_and_near_zero(void **state)
{
    (void)state;
    for (int x_step = 0; - 30.0 + x_step * 1.7 < 10.0; x_step++) {
        const double x_db = -30.0 + x_step * 1.7;
        const double y = pow(10.0, 0.1 * x_db);
        const double k = 1e-9;
        const struct example near_zero = {RFADE_RICE, k};
        const struct example zero = {RFADE_RICE, 0.0};
        assert_true(interval(&zero, x_db - 0.05, x_db + 0.05).d_parameter == 0.0);
        assert_true(interval(&zero, -INFINITY, x_db).d_parameter == 0.0);
        struct rfade_log_gradient density;
        assert_int_equal(rfade_model(RFADE_RICE)->log_density(k, x_db, &density), RFADE_OK);
        const double expected = 2.0 * k * (y - 0.25 * y * y - 0.5);
        assert_true(fabs(density.d_parameter - expected) < 1e-7 * k * (1.0 + y * y));
        const double narrow = interval(&near_zero, x_db - 1e-4, x_db + 1e-4).d_parameter;
        assert_true(fabs(narrow - expected) < 1e-7 * k * (1.0 + y * y));
    }
}

/* K = 0 and m = 1 are Rayleigh for intervals too, the mean's slope included. */
static void special_cases_are_rayleigh(void **state)
{
    (void)state;
    const struct example rayleigh = {RFADE_RAYLEIGH, 0.0};
    const struct example others[] = {{RFADE_RICE, 0.0}, {RFADE_NAKAGAMI, 1.0}};
    for (int low_step = 0; - 90.0 + low_step * 2.3 < 20.0; low_step++) {
        const double low_db = -90.0 + low_step * 2.3;
        for (int width_step = 0; 1e-3 * pow(2.5, width_step) < 90.0; width_step++) {
            const double width_db = 1e-3 * pow(2.5, width_step);
            const struct rfade_log_gradient expected =
                interval(&rayleigh, low_db, low_db + width_db);
            for (size_t i = 0; i < 2; i++) {
                const struct rfade_log_gradient actual =
                    interval(&others[i], low_db, low_db + width_db);
                assert_true(fabs(actual.value - expected.value) <
                            1e-12 + 1e-14 * fabs(expected.value));
                assert_true(fabs(actual.d_mean_db - expected.d_mean_db) <
                            1e-12 * (1.0 + fabs(expected.d_mean_db)));
            }
        }
    }
}

static void prepared_parameter_gives_the_same_digits(void **state)
{
    (void)state;
    for (size_t i = 0; i < EXAMPLE_COUNT; i++) {
        const struct rfade_model *model = rfade_model(examples[i].id);
        struct rfade_prepared prepared;
        assert_int_equal(model->prepare(examples[i].parameter, &prepared), RFADE_OK);
        for (int step = 0; step < 40; step++) {
            const double low_db = -40.0 + 1.3 * step;
            const double high_db = low_db + 0.1 * pow(1.2, step);
            const struct rfade_log_gradient expected = interval(&examples[i], low_db, high_db);
            struct rfade_log_gradient result;
            assert_int_equal(model->log_interval_of(&prepared, low_db, high_db, &result),
                             RFADE_OK);
            assert_memory_equal(&result, &expected, sizeof result);
            struct rfade_log_gradient density, density_of;
            assert_int_equal(model->log_density(examples[i].parameter, low_db, &density),
                             RFADE_OK);
            assert_int_equal(model->log_density_of(&prepared, low_db, &density_of), RFADE_OK);
            assert_memory_equal(&density_of, &density, sizeof density);
        }
    }
    struct rfade_prepared prepared;
    struct rfade_log_gradient result;
    assert_int_equal(rfade_model(RFADE_RICE)->prepare(-1.0, &prepared), RFADE_DOMAIN);
    assert_int_equal(rfade_model(RFADE_RICE)->log_interval_of(&prepared, 0.0, 1.0, &result),
                     RFADE_DOMAIN);
    assert_true(isnan(result.value));
    assert_int_equal(rfade_model(RFADE_RICE)->log_density_of(&prepared, 0.0, &result),
                     RFADE_DOMAIN);
    assert_true(isnan(result.value));
}

static void assert_refused(enum rfade_model_id id, double parameter, double low_db,
                           double high_db)
{
    struct rfade_log_gradient result = {0.0, 0.0, 0.0};
    assert_int_equal(rfade_model(id)->log_interval(parameter, low_db, high_db, &result),
                     RFADE_DOMAIN);
    assert_true(isnan(result.value) && isnan(result.d_mean_db) && isnan(result.d_parameter));
}

static void outside_the_domain_is_refused(void **state)
{
    (void)state;
    for (int id = 0; id < RFADE_MODEL_COUNT; id++) {
        const enum rfade_model_id model = (enum rfade_model_id)id;
        assert_refused(model, 1.0, 1.0, 1.0);
        assert_refused(model, 1.0, 1.0, 0.0);
        assert_refused(model, 1.0, NAN, 0.0);
        assert_refused(model, 1.0, 0.0, NAN);
        assert_refused(model, 1.0, -3001.0, 0.0);
        assert_refused(model, 1.0, INFINITY, INFINITY);
    }
    assert_refused(RFADE_RICE, -1.0, 0.0, 1.0);
    assert_refused(RFADE_NAKAGAMI, 0.05, 0.0, 1.0);
    assert_refused(RFADE_LOGNORMAL, 0.0, 0.0, 1.0);
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(interval_matches_random_points),
        cmocka_unit_test(parts_add_up_to_the_whole),
        cmocka_unit_test(rice_intervals_across_the_steepest_level_add_up),
        cmocka_unit_test(rice_slope_is_right_in_the_deepest_fades),
        cmocka_unit_test(censored_halves_are_the_tails),
        cmocka_unit_test(slopes_match_differences),
        cmocka_unit_test(rice_slope_is_right_at_and_near_zero),
        cmocka_unit_test(special_cases_are_rayleigh),
        cmocka_unit_test(prepared_parameter_gives_the_same_digits),
        cmocka_unit_test(outside_the_domain_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
