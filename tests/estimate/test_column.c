/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file test_column.c  Columns of levels: steps, clipping, correlation, refusals. */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>

#include <cmocka.h>

#include "estimate/generate.h"
#include "routefade/estimate.h"

enum { READINGS = 3000 };

static const struct rfade_column_settings PLAIN = {NAN, NAN, NAN, true, 0.95};
static const double LN10 = 2.302585092994046;

static double found_step_db(double first_dbm, double step_db, int every)
{
    struct rfade_column_estimate result;
    double levels_dbm[200];
    for (int i = 0; i < 200; i++) {
        levels_dbm[i] = first_dbm + step_db * (double)((i * every * 7) % 23 * every);
    }
    assert_int_equal(rfade_estimate_column(levels_dbm, 200, &PLAIN, &result), RFADE_OK);
    return result.step_db;
}

static void steps_are_found(void **state)
{
    (void)state;
    assert_true(found_step_db(-90.0, 1.0, 1) == 1.0);
    assert_true(found_step_db(-90.5, 1.0, 1) == 1.0); /* counted from an offset */
    assert_true(found_step_db(-90.0, 0.5, 1) == 0.5);
    assert_true(found_step_db(-90.3, 0.1, 1) == 0.1);
    assert_true(found_step_db(-90.25, 0.25, 1) == 0.25);
    assert_true(found_step_db(-90.0, 2.0, 1) == 2.0);
    assert_true(found_step_db(-90.01, 0.01, 1) == 0.01);
    assert_true(found_step_db(-90.0, 1.0, 2) == 2.0);
    assert_true(found_step_db(-90.0, LN10 / 10.0, 1) == 0.0); /* on no decimal grid */
}

static void given_step_is_kept(void **state)
{
    (void)state;
    const double some_dbm[] = {-90, -92, -88, -94, -90, -88};
    double levels_dbm[60];
    for (int i = 0; i < 60; i++) {
        levels_dbm[i] = some_dbm[i % 6];
    }
    struct rfade_column_settings settings = PLAIN;
    struct rfade_column_estimate found;
    struct rfade_column_estimate given;
    assert_int_equal(rfade_estimate_column(levels_dbm, 60, &PLAIN, &found), RFADE_OK);
    settings.step_db = 1.0;
    assert_int_equal(rfade_estimate_column(levels_dbm, 60, &settings, &given), RFADE_OK);
    assert_true(found.step_db == 2.0 && given.step_db == 1.0);
    /* Intervals half as wide are about half as likely, each. */
    double difference =
        found.estimate.fits[0].log_likelihood - given.estimate.fits[0].log_likelihood;
    assert_true(fabs(difference - 60.0 * log(2.0)) < 1.0);
}

/* Six levels that are all even may be chance; the step is then no coarser than 1 dB. */
static void few_changes_make_no_coarse_step(void **state)
{
    (void)state;
    const double levels_dbm[] = {-90, -92, -88, -94, -90, -88};
    assert_true(rfade_find_step_db(levels_dbm, 6) == 1.0);
    assert_true(rfade_find_step_db(levels_dbm, 1) == 1.0);
}

/*
 * Rayleigh power is exponential; readings above a ceiling c all count as c and the estimate
 * is total power over the number seen below it [Epstein and Sobel 1953, eq. 3].
 */
static void ceiling_gives_the_censored_exponential_estimate(void **state)
{
    (void)state;
    gsl_rng *generator = generator_create(1);
    double *levels_dbm = malloc(READINGS * sizeof *levels_dbm);
    struct rfade_column_settings settings = {0.0, NAN, 1.0, true, 0.95};
    struct rfade_column_estimate result;
    const double ceiling = pow(10.0, 0.1);
    double total = 0.0;
    double jacobian = 0.0;
    size_t seen = 0;
    assert_non_null(levels_dbm);
    for (size_t i = 0; i < READINGS; i++) {
        double level_dbm = fmin(draw_rice_db(generator, 0.0), 1.0);
        double power = pow(10.0, level_dbm / 10.0);
        levels_dbm[i] = level_dbm;
        total += fmin(power, ceiling);
        seen += level_dbm < 1.0 ? 1 : 0;
        jacobian += level_dbm < 1.0 ? log(power * LN10 / 10.0) : 0.0;
    }
    double mean = total / (double)seen;
    double likelihood = jacobian - (double)seen * (log(mean) + 1.0);
    assert_int_equal(rfade_estimate_column(levels_dbm, READINGS, &settings, &result), RFADE_OK);
    const struct rfade_fit *fit = &result.estimate.fits[0];
    assert_int_equal(result.above_ceiling, READINGS - seen);
    assert_int_equal(result.below_floor, 0);
    assert_true(fabs(fit->mean_power_db - 10.0 * log10(mean)) < 1e-8);
    assert_true(fabs(fit->log_likelihood - likelihood) < 1e-8 * fabs(likelihood));
    free(levels_dbm);
    gsl_rng_free(generator);
}

static void aic_and_weights_of_independent_readings(void **state)
{
    (void)state;
    gsl_rng *generator = generator_create(2);
    double levels_dbm[400];
    struct rfade_column_estimate result;
    double weights = 0.0;
    for (int i = 0; i < 400; i++) {
        levels_dbm[i] = quantise_db(draw_rice_db(generator, 2.0) - 80.0, 1.0);
    }
    assert_int_equal(rfade_estimate_column(levels_dbm, 400, &PLAIN, &result), RFADE_OK);
    const struct rfade_estimate *estimate = &result.estimate;
    assert_true(estimate->count == 400.0 && estimate->effective_count == 400.0);
    assert_int_equal(estimate->fit_count, 3);
    for (size_t i = 0; i < 3; i++) {
        const struct rfade_fit *fit = &estimate->fits[i];
        double parameters = i == 0 ? 1.0 : 2.0;
        assert_true(fabs(fit->aic - 2.0 * (parameters - fit->log_likelihood)) < 1e-9);
        double odds = exp(0.5 * (estimate->fits[0].aic - fit->aic));
        assert_true(fabs(fit->weight / estimate->fits[0].weight - odds) < 1e-9 * odds);
        weights += fit->weight;
    }
    assert_true(fabs(weights - 1.0) < 1e-12);
    assert_int_equal(estimate->preferred, RFADE_RICE);
    gsl_rng_free(generator);
}

/* Each reading told ten times over: there are a tenth as many, whatever the parameter. */
static void repeated_readings_are_counted_once(void **state)
{
    (void)state;
    gsl_rng *generator = generator_create(3);
    double *once_dbm = malloc(READINGS * sizeof *once_dbm);
    double *repeated_dbm = malloc((size_t)10 * READINGS * sizeof *repeated_dbm);
    struct rfade_column_settings settings = PLAIN;
    struct rfade_column_estimate once;
    struct rfade_column_estimate repeated;
    assert_non_null(once_dbm);
    assert_non_null(repeated_dbm);
    for (size_t i = 0; i < READINGS; i++) {
        once_dbm[i] = quantise_db(draw_rice_db(generator, 3.0), 0.5);
        for (size_t j = 0; j < 10; j++) {
            repeated_dbm[10 * i + j] = once_dbm[i];
        }
    }
    assert_int_equal(rfade_estimate_column(once_dbm, READINGS, &settings, &once), RFADE_OK);
    settings.independent = false;
    assert_int_equal(
        rfade_estimate_column(repeated_dbm, (size_t)10 * READINGS, &settings, &repeated),
        RFADE_OK);
    const struct rfade_fit *alone = &once.estimate.fits[RFADE_RICE];
    const struct rfade_fit *together = &repeated.estimate.fits[RFADE_RICE];
    double widening = (together->parameter_high - together->parameter_low) /
                      (alone->parameter_high - alone->parameter_low);
    assert_true(fabs(together->parameter - alone->parameter) < 1e-6 * alone->parameter);
    assert_true(fabs(log(repeated.estimate.effective_count / READINGS)) < log(1.5));
    assert_true(fabs(log(together->parameter_design_effect / 10.0)) < log(1.5));
    assert_true(fabs(log(widening)) < log(1.3));
    assert_true(together->goodness_p > 0.001);
    assert_int_equal(repeated.estimate.preferred, RFADE_RICE);
    free(once_dbm);
    free(repeated_dbm);
    gsl_rng_free(generator);
}

static void assert_unresolved(const double *levels_dbm, size_t count, double step_db)
{
    struct rfade_column_settings settings = PLAIN;
    struct rfade_column_estimate result;
    settings.step_db = step_db;
    assert_int_equal(rfade_estimate_column(levels_dbm, count, &settings, &result), RFADE_OK);
    for (int i = RFADE_RICE; i <= RFADE_NAKAGAMI; i++) {
        const struct rfade_fit *fit = &result.estimate.fits[i];
        assert_true(fit->at_upper_boundary);
        assert_false(fit->at_lower_boundary);
        assert_true(fit->parameter_low > 1.0 && fit->parameter_low < fit->parameter);
        assert_true(fit->parameter_high == rfade_model(fit->model)->parameter_max);
    }
    assert_true(result.estimate.preferred != RFADE_RAYLEIGH);
}

static void fading_within_a_step_is_at_the_upper_end(void **state)
{
    (void)state;
    const double one_dbm[] = {-90, -90, -90, -90, -90, -90, -90, -90};
    const double two_dbm[] = {-90, -91, -91, -90, -91, -91, -90, -91};
    assert_unresolved(one_dbm, 8, 1.0);
    assert_unresolved(two_dbm, 8, 1.0);
    assert_unresolved(one_dbm, 8, 0.0);
}

static void assert_refused(const double *levels_dbm, size_t count,
                           struct rfade_column_settings settings, enum rfade_status expected)
{
    struct rfade_column_estimate result;
    assert_int_equal(rfade_estimate_column(levels_dbm, count, &settings, &result), expected);
    assert_int_equal(result.estimate.fit_count, 0);
    assert_true(isnan(result.estimate.mean_power_db));
}

/* Readings at the floor don't count: they say little about the shape of the fading. */
static void too_few_readings_are_refused(void **state)
{
    (void)state;
    const double levels_dbm[] = {-90, -91, -93, -91, -88, -95, -90, -89, -100, -100};
    const struct rfade_column_settings floored = {1, -100, NAN, true, 0.95};
    struct rfade_column_estimate result;
    for (size_t count = 1; count < 8; count++) {
        assert_refused(levels_dbm, count, PLAIN, RFADE_NO_DATA);
        assert_refused(levels_dbm + 10 - count, count, floored, RFADE_NO_DATA);
    }
    assert_int_equal(rfade_estimate_column(levels_dbm, 8, &PLAIN, &result), RFADE_OK);
    assert_int_equal(rfade_estimate_column(levels_dbm, 10, &floored, &result), RFADE_OK);
    assert_refused(levels_dbm + 1, 9, floored, RFADE_NO_DATA);
}

static void what_cannot_be_fitted_is_refused(void **state)
{
    (void)state;
    const double levels_dbm[] = {-90, -91, -93, -91, -90, -91, -93, -91};
    const double broken_dbm[] = {-90, NAN, -93, -91};
    const double endless_dbm[] = {-90, -INFINITY, -93, -91};
    assert_refused(levels_dbm, 0, PLAIN, RFADE_NO_DATA);
    assert_refused(broken_dbm, 4, PLAIN, RFADE_DOMAIN);
    assert_refused(endless_dbm, 4, PLAIN, RFADE_DOMAIN);
    assert_refused(levels_dbm, 8, (struct rfade_column_settings){NAN, -85, NAN, true, 0.95},
                   RFADE_NO_DATA);
    assert_refused(levels_dbm, 8, (struct rfade_column_settings){NAN, NAN, -95, true, 0.95},
                   RFADE_NO_DATA);
    assert_refused(levels_dbm, 8, (struct rfade_column_settings){NAN, -90, -90, true, 0.95},
                   RFADE_DOMAIN);
    assert_refused(levels_dbm, 8, (struct rfade_column_settings){-1, NAN, NAN, true, 0.95},
                   RFADE_DOMAIN);
    assert_refused(levels_dbm, 8, (struct rfade_column_settings){NAN, NAN, NAN, true, 1.0},
                   RFADE_DOMAIN);
    assert_refused(levels_dbm, 8, (struct rfade_column_settings){NAN, NAN, NAN, true, 0.0},
                   RFADE_DOMAIN);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(steps_are_found),
        cmocka_unit_test(given_step_is_kept),
        cmocka_unit_test(few_changes_make_no_coarse_step),
        cmocka_unit_test(ceiling_gives_the_censored_exponential_estimate),
        cmocka_unit_test(aic_and_weights_of_independent_readings),
        cmocka_unit_test(repeated_readings_are_counted_once),
        cmocka_unit_test(fading_within_a_step_is_at_the_upper_end),
        cmocka_unit_test(too_few_readings_are_refused),
        cmocka_unit_test(what_cannot_be_fitted_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
