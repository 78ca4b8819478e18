/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Levels of given probabilities, density and mean of fast fading over a lognormal local mean.
 */
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

/* A table's probabilities have 17 digits: of a level that is as much as they are of its slope,
 * and more than 1e-10 dB nowhere here. */
static const double level_accuracy_db = 1e-9;

static double quantile(const struct rfade_model *model, double parameter, double shadowing_db,
                       double lower, double upper)
{
    double x_db = NAN;
    assert_int_equal(rfade_outage_quantile(model, parameter, shadowing_db, lower, upper, &x_db),
                     RFADE_OK);
    return x_db;
}

static void assert_level(const struct reference_table *table, double x_db, double expected_db)
{
    if (!(fabs(x_db - expected_db) <= level_accuracy_db))
        fail_msg("%s:%zu: %.17g dB, not %.17g", table->file_name, table->line, x_db,
                 expected_db);
}

/* The levels of the published table from its probabilities. */
static void quantile_inverts_the_composite_table(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "composite_open.tsv");
    while (reference_next(&table)) {
        const bool is_rice = strcmp(reference_text(&table, "fading"), "Rice") == 0;
        const double x_db =
            quantile(rfade_model(is_rice ? RFADE_RICE : RFADE_RAYLEIGH),
                     is_rice ? reference_number(&table, "par") : 0.0,
                     reference_number(&table, "sigma_dB"), reference_number(&table, "outage"),
                     reference_number(&table, "coverage"));
        assert_level(&table, x_db, reference_number(&table, "x_dB"));
    }
    assert_int_equal(table.row_count, 108);
}

/* Solved in mpmath, tails down to 1e-30: level, outage there, and density. */
static void quantile_and_density_match_random_points(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "quantile_random.tsv");
    while (reference_next(&table)) {
        const struct rfade_model *model = rfade_model_by_name(reference_text(&table, "model"));
        const double parameter = reference_number(&table, "parameter");
        const double shadowing_db = reference_number(&table, "shadowing_db");
        const double lower = reference_number(&table, "lower");
        const double upper = reference_number(&table, "upper");
        const double expected_db = reference_number(&table, "x_db");
        assert_level(&table, quantile(model, parameter, shadowing_db, lower, upper),
                     expected_db);
        struct rfade_tails tails;
        double log_density = NAN;
        assert_int_equal(rfade_outage(model, parameter, shadowing_db, expected_db, &tails),
                         RFADE_OK);
        reference_assert_column(&table, "lower", tails.lower, outage_accuracy);
        reference_assert_column(&table, "upper", tails.upper, outage_accuracy);
        assert_int_equal(
            rfade_outage_log_density(model, parameter, shadowing_db, expected_db, &log_density),
            RFADE_OK);
        const double density_error = log_density - reference_number(&table, "ln_density");
        assert_true(fabs(density_error) <= outage_accuracy);
    }
    assert_int_equal(table.row_count, 60);
}

/* From the deepest level that is taken to the highest, in a strong direct ray's valley too. */
static void quantile_is_the_outage_backwards(void **state)
{
    (void)state;
    static const double sigmas_db[] = {0.01, 1.0, 5.0, 30.0};
    static const double ks[] = {0.0, 3.0, 80.0};
    const struct rfade_model *rice = rfade_model(RFADE_RICE);
    for (size_t s = 0; s < 4; s++) {
        for (size_t k = 0; k < 3; k++) {
            double before_db = -INFINITY;
            for (double log_odds = -400.0; log_odds < 401.0; log_odds += 16.0) {
                const double small = exp(-fabs(log_odds)) / (1.0 + exp(-fabs(log_odds)));
                const double lower = log_odds < 0 ? small : 1.0 - small;
                const double upper = log_odds < 0 ? 1.0 - small : small;
                double x_db = NAN;
                struct rfade_tails tails;
                if (rfade_outage_quantile(rice, ks[k], sigmas_db[s], lower, upper, &x_db) ==
                    RFADE_DOMAIN) {
                    /* deeper than 1000 dB below the median, and said so */
                    assert_true(log_odds < 0 && isnan(x_db));
                    (void)rfade_outage(rice, ks[k], sigmas_db[s], -1000.0, &tails);
                    assert_true(tails.lower > small);
                    continue;
                }
                (void)rfade_outage(rice, ks[k], sigmas_db[s], x_db, &tails);
                const double tail = log_odds < 0 ? tails.lower : tails.upper;
                assert_true(fabs(tail / small - 1.0) <= outage_accuracy);
                assert_true(x_db > before_db);
                before_db = x_db;
            }
            assert_true(before_db > 0.0);
        }
    }
}

/* Without shadowing it is the model's own; next to none, next to it. */
static void no_shadowing_is_the_limit(void **state)
{
    (void)state;
    const struct rfade_model *nakagami = rfade_model(RFADE_NAKAGAMI);
    double expected_db = NAN, log_density = NAN;
    struct rfade_log_gradient gradient;
    assert_int_equal(nakagami->quantile(2.5, 1e-3, 0.999, &expected_db), RFADE_OK);
    assert_true(quantile(nakagami, 2.5, 0.0, 1e-3, 0.999) == expected_db);
    assert_true(fabs(quantile(nakagami, 2.5, 1e-6, 1e-3, 0.999) - expected_db) < 1e-9);
    assert_int_equal(nakagami->log_density(2.5, -7.0, &gradient), RFADE_OK);
    assert_int_equal(rfade_outage_log_density(nakagami, 2.5, 0.0, -7.0, &log_density),
                     RFADE_OK);
    assert_true(log_density == gradient.value);
    assert_int_equal(rfade_outage_log_density(nakagami, 2.5, 1e-6, -7.0, &log_density),
                     RFADE_OK);
    assert_true(fabs(log_density - gradient.value) < 1e-9);
}

static void probabilities_of_nothing_and_all_are_infinitely_far(void **state)
{
    (void)state;
    const struct rfade_model *rayleigh = rfade_model(RFADE_RAYLEIGH);
    assert_true(quantile(rayleigh, 0.0, 6.0, 0.0, 1.0) == -INFINITY);
    assert_true(quantile(rayleigh, 0.0, 6.0, 1.0, 0.0) == INFINITY);
}

/*
 * The mean power is the integral of 10^(x/10) times the density: by the trapezoidal rule over
 * all that matters, whose error vanishes faster than any power of the step.
 */
static void mean_is_that_of_the_density(void **state)
{
    (void)state;
    static const double sigma_db = 6.0, step_db = 0.25;
    double mean = 0.0, all = 0.0;
    for (int i = -600; i <= 400; i++) {
        double log_density = NAN;
        const double x_db = step_db * i;
        assert_int_equal(rfade_outage_log_density(rfade_model(RFADE_RICE), 3.0, sigma_db, x_db,
                                                  &log_density),
                         RFADE_OK);
        all += step_db * exp(log_density);
        mean += step_db * exp(log_density) * pow(10.0, x_db / 10.0);
    }
    assert_true(fabs(all - 1.0) < 1e-11);
    assert_true(fabs(10.0 * log10(mean) - rfade_lognormal_mean_over_median_db(sigma_db)) <
                1e-10);
}

static void assert_refused(const struct rfade_model *model, double parameter,
                           double shadowing_db, double lower, double upper)
{
    double x_db = 0.0;
    assert_int_equal(rfade_outage_quantile(model, parameter, shadowing_db, lower, upper, &x_db),
                     RFADE_DOMAIN);
    assert_true(isnan(x_db));
}

static void outside_the_domain_is_refused(void **state)
{
    (void)state;
    const struct rfade_model *rice = rfade_model(RFADE_RICE);
    assert_refused(NULL, 1.0, 6.0, 0.1, 0.9);
    assert_refused(rfade_model(RFADE_LOGNORMAL), 1.0, 6.0, 0.1, 0.9);
    assert_refused(rfade_model(RFADE_LOGNORMAL), 1.0, 0.0, 0.1, 0.9);
    assert_refused(rice, -1.0, 6.0, 0.1, 0.9);
    assert_refused(rice, -1.0, 6.0, 0.0, 1.0);
    assert_refused(rice, 1.0, -1.0, 0.1, 0.9);
    assert_refused(rice, 1.0, 31.0, 0.1, 0.9);
    assert_refused(rice, 1.0, NAN, 0.1, 0.9);
    assert_refused(rice, 1.0, 6.0, 0.1, 0.8);
    assert_refused(rice, 1.0, 6.0, -0.1, 1.1);
    assert_refused(rice, 1.0, 6.0, NAN, 0.9);
    /* Rayleigh's power law reaches 1e-250 at 2500 dB below */
    assert_refused(rfade_model(RFADE_RAYLEIGH), 0.0, 1.0, 1e-250, 1.0);
    double log_density = 0.0;
    assert_int_equal(rfade_outage_log_density(rice, 1.0, 6.0, INFINITY, &log_density),
                     RFADE_DOMAIN);
    assert_true(isnan(log_density));
    assert_int_equal(rfade_outage_log_density(NULL, 1.0, 6.0, 0.0, &log_density), RFADE_DOMAIN);
    assert_int_equal(rfade_outage_log_density(rice, 1.0, 6.0, NAN, &log_density), RFADE_DOMAIN);
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(quantile_inverts_the_composite_table),
        cmocka_unit_test(quantile_and_density_match_random_points),
        cmocka_unit_test(quantile_is_the_outage_backwards),
        cmocka_unit_test(no_shadowing_is_the_limit),
        cmocka_unit_test(probabilities_of_nothing_and_all_are_infinitely_far),
        cmocka_unit_test(mean_is_that_of_the_density),
        cmocka_unit_test(outside_the_domain_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
