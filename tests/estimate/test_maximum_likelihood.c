/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file test_maximum_likelihood.c  Fits against maximum likelihood by scipy and mpmath
 * (tests/reference/mle.tsv, mle_censored.tsv; their heads say how they were made).
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>

#include "estimate/samples.h"
#include "routefade/estimate.h"

static const double LN10 = 2.302585092994046;

/* Columns of mle.tsv and mle_censored.tsv. */
enum { FILE_NAME, COUNT };
enum { EXACT_MODEL = 2, EXACT_PARAMETER, EXACT_OMEGA, EXACT_LIKELIHOOD };
enum { EXACT_PARAMETER_ERROR = 8, EXACT_OMEGA_ERROR, EXACT_MOMENT };
enum { CENSORED_BELOW = 2, CENSORED_MODEL, CENSORED_PARAMETER, CENSORED_MEAN };
enum { CENSORED_LIKELIHOOD = 6, CENSORED_PARAMETER_ERROR = 9, CENSORED_MEAN_ERROR };

static void assert_close(const char *what, const struct reference_row *row, double value,
                         double expected, double tolerance)
{
    if (!(fabs(value - expected) <= tolerance)) {
        fail_msg("%s %s %s: %.15g, expected %.15g within %g", row->field[FILE_NAME],
                 row->field[2], what, value, expected, tolerance);
    }
}

static const struct rfade_fit *fit_of(const struct rfade_estimate *estimate, const char *model)
{
    for (size_t i = 0; i < estimate->fit_count; i++) {
        if (strcmp(rfade_model(estimate->fits[i].model)->name, model) == 0) {
            return &estimate->fits[i];
        }
    }
    fail_msg("no fit of %s", model);
    return NULL;
}

/* A standard error from the observed information; the inverse of one element at K = 0. */
static double standard_error(const struct rfade_fit *fit, int which)
{
    return sqrt(fit->covariance[which][which]);
}

static void assert_parameter(const struct reference_row *row, const struct rfade_fit *fit,
                             double expected, double expected_error)
{
    if (isnan(expected)) {
        assert_true(isnan(fit->parameter));
    } else if (expected == 0.0) {
        assert_true(fit->parameter == 0.0);
        assert_true(fit->at_lower_boundary);
        assert_true(fit->parameter_low == 0.0);
        assert_true(fit->parameter_high > 0.0);
    } else {
        assert_close("parameter", row, fit->parameter, expected, 1e-6 * expected);
        /* Of hundreds of distinct readings the curvature is taken from fewer bins. */
        double share = reference_number(row, COUNT) < 300.0 ? 1e-6 : 5e-3;
        assert_close("standard error", row, standard_error(fit, 1), expected_error,
                     share * expected_error);
        assert_false(fit->at_lower_boundary);
        assert_false(fit->at_upper_boundary);
        assert_true(fit->parameter_low < expected && expected < fit->parameter_high);
    }
}

/* The likelihood of dB levels is that of amplitudes with dr/d(dB) = r ln(10)/20. */
static double jacobian(const double *amplitudes, size_t count)
{
    double sum = 0.0;
    for (size_t i = 0; i < count; i++) {
        sum += log(amplitudes[i] * LN10 / 20.0);
    }
    return sum;
}

static struct rfade_estimate estimate_amplitudes(const double *amplitudes, size_t count)
{
    const struct rfade_column_settings settings = {0.0, NAN, NAN, true, 0.95};
    struct rfade_column_estimate result;
    double *levels_dbm = malloc(count * sizeof *levels_dbm);
    assert_non_null(levels_dbm);
    for (size_t i = 0; i < count; i++) {
        levels_dbm[i] = 20.0 * log10(amplitudes[i]);
    }
    assert_int_equal(rfade_estimate_column(levels_dbm, count, &settings, &result), RFADE_OK);
    free(levels_dbm);
    return result.estimate;
}

static void fits_of_amplitudes_match_the_reference(void **state)
{
    (void)state;
    size_t rows = 0;
    struct reference_row *table = reference_read("mle.tsv", &rows);
    assert_int_equal(rows, 18);
    for (size_t i = 0; i < rows; i++) {
        const struct reference_row *row = &table[i];
        size_t count = 0;
        double *amplitudes = sample_read(row->field[FILE_NAME], &count);
        struct rfade_estimate estimate = estimate_amplitudes(amplitudes, count);
        const struct rfade_fit *fit = fit_of(&estimate, row->field[EXACT_MODEL]);
        double likelihood =
            reference_number(row, EXACT_LIKELIHOOD) + jacobian(amplitudes, count);

        assert_int_equal(count, (size_t)reference_number(row, COUNT));
        assert_parameter(row, fit, reference_number(row, EXACT_PARAMETER),
                         reference_number(row, EXACT_PARAMETER_ERROR));
        assert_close("mean power", row, fit->mean_power_db,
                     10.0 * log10(reference_number(row, EXACT_OMEGA)), 1e-6);
        /* The reference prints 12 digits. */
        assert_close("likelihood", row, fit->log_likelihood, likelihood,
                     1e-8 * fabs(likelihood));
        assert_true(fit->log_likelihood >= likelihood - 1e-11 * fabs(likelihood));
        free(amplitudes);
    }
    free(table);
}

static void fits_of_censored_steps_match_the_reference(void **state)
{
    (void)state;
    const struct rfade_column_settings settings = {NAN, -101.0, NAN, true, 0.95};
    size_t rows = 0;
    struct reference_row *table = reference_read("mle_censored.tsv", &rows);
    assert_int_equal(rows, 18);
    for (size_t i = 0; i < rows; i++) {
        const struct reference_row *row = &table[i];
        struct rfade_column_estimate result;
        size_t count = 0;
        double *levels_dbm = sample_read(row->field[FILE_NAME], &count);
        double likelihood = reference_number(row, CENSORED_LIKELIHOOD);
        double mean_error = reference_number(row, CENSORED_MEAN_ERROR);

        assert_int_equal(rfade_estimate_column(levels_dbm, count, &settings, &result),
                         RFADE_OK);
        const struct rfade_fit *fit = fit_of(&result.estimate, row->field[CENSORED_MODEL]);
        assert_true(result.step_db == 1.0);
        assert_int_equal(result.below_floor, (size_t)reference_number(row, CENSORED_BELOW));
        assert_int_equal(result.above_ceiling, 0);
        assert_parameter(row, fit, reference_number(row, CENSORED_PARAMETER),
                         reference_number(row, CENSORED_PARAMETER_ERROR));
        assert_close("mean power", row, fit->mean_power_db,
                     reference_number(row, CENSORED_MEAN), 1e-6);
        if (!isnan(mean_error)) {
            assert_close("standard error of the mean", row, standard_error(fit, 0), mean_error,
                         1e-6 * mean_error);
        }
        assert_close("likelihood", row, fit->log_likelihood, likelihood,
                     1e-8 * fabs(likelihood));
        assert_true(fit->log_likelihood >= likelihood - 1e-11 * fabs(likelihood));
        free(levels_dbm);
    }
    free(table);
}

static void moments_match_the_reference(void **state)
{
    (void)state;
    size_t rows = 0;
    struct reference_row *table = reference_read("mle.tsv", &rows);
    for (size_t i = 0; i < rows; i++) {
        const struct reference_row *row = &table[i];
        double expected = reference_number(row, EXACT_MOMENT);
        size_t count = 0;
        double *amplitudes = sample_read(row->field[FILE_NAME], &count);
        struct rfade_estimate estimate = estimate_amplitudes(amplitudes, count);
        if (strcmp(row->field[EXACT_MODEL], "rice") == 0) {
            assert_close("moment K", row, estimate.moment_k, expected, 1e-9 * expected);
        } else if (strcmp(row->field[EXACT_MODEL], "nakagami") == 0) {
            assert_close("moment m", row, estimate.moment_m, expected, 1e-9 * expected);
            assert_close("mean power", row, estimate.mean_power_db,
                         10.0 * log10(reference_number(row, EXACT_OMEGA)), 1e-9);
        }
        free(amplitudes);
    }
    free(table);
}

static int switch_handler_off(void **state)
{
    (void)state;
    gsl_set_error_handler_off();
    return 0;
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(fits_of_amplitudes_match_the_reference),
        cmocka_unit_test(fits_of_censored_steps_match_the_reference),
        cmocka_unit_test(moments_match_the_reference),
    };
    return cmocka_run_group_tests(tests, switch_handler_off, NULL);
}
