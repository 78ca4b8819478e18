/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file test_recovery.c  Parameters come back from independent draws without bias and as
 * sharply as the Cramer-Rao bound allows; tests keep their error rates. Short form.
 *
 * Bounds: standard deviation of the parameter from one reading, mean power unknown too. For
 * Nakagami 1/sqrt(psi'(m) - 1/m); for Rice from the Fisher information by quadrature
 * (mpmath 1.2.1, 25 digits).
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>

#include <cmocka.h>

#include "estimate/generate.h"
#include "routefade/estimate.h"

enum { READINGS = 1000, TRIALS = 100 };

static const struct rfade_estimate_settings PLAIN = {.confidence = 0.95};

struct cell {
    enum rfade_model_id model;
    double parameter;
    double deviation_of_one; /* Cramer-Rao, one reading */
};

static const struct cell CELLS[] = {
    {RFADE_RICE, 1.0, 4.626669329},     {RFADE_RICE, 3.0, 6.430833019},
    {RFADE_RICE, 10.0, 15.97384115},    {RFADE_NAKAGAMI, 0.6, 0.7125531528},
    {RFADE_NAKAGAMI, 1.0, 1.245209258}, {RFADE_NAKAGAMI, 2.0, 2.626725926},
    {RFADE_NAKAGAMI, 5.0, 6.848197824},
};

static double draw_db(gsl_rng *generator, const struct cell *cell)
{
    return cell->model == RFADE_RICE ? draw_rice_db(generator, cell->parameter)
                                     : draw_nakagami_db(generator, cell->parameter);
}

/*
 * Returns in how many trials the interval held the truth.
 * With 100 trials a root mean square error has a standard deviation of 7 %, a mean one of
 * a tenth of a standard error, and a share of 95 % one of 2.2 %: limits at 3.5 of them.
 */
static int assert_cell(gsl_rng *generator, const struct cell *cell)
{
    double bound = cell->deviation_of_one / sqrt(READINGS);
    double sum = 0.0;
    double squares = 0.0;
    int covered = 0;
    for (int trial = 0; trial < TRIALS; trial++) {
        struct rfade_bin bins[READINGS];
        struct rfade_fit fit;
        for (int i = 0; i < READINGS; i++) {
            double level_db = draw_db(generator, cell);
            bins[i] = (struct rfade_bin){level_db, level_db, 1.0};
        }
        assert_int_equal(rfade_fit_bins(rfade_model(cell->model), bins, READINGS, &PLAIN, &fit),
                         RFADE_OK);
        double error = (fit.parameter - cell->parameter) / bound;
        sum += error;
        squares += error * error;
        covered +=
            fit.parameter_low <= cell->parameter && cell->parameter <= fit.parameter_high;
    }
    double bias = sum / TRIALS;
    double rmse = sqrt(squares / TRIALS);
    if (fabs(bias) > 0.35 || rmse < 0.75 || rmse > 1.25 || covered < 87) {
        fail_msg("%s %g: bias %g and RMSE %g of the bound, covered %d of %d",
                 rfade_model(cell->model)->name, cell->parameter, bias, rmse, covered, TRIALS);
    }
    return covered;
}

static void estimates_meet_the_cramer_rao_bound(void **state)
{
    (void)state;
    gsl_rng *generator = generator_create(21);
    const int cells = sizeof CELLS / sizeof *CELLS;
    int covered = 0;
    for (int i = 0; i < cells; i++) {
        covered += assert_cell(generator, &CELLS[i]);
    }
    /* 95 % of 700, within 3.5 standard deviations of 5.8 */
    assert_in_range(covered, 645, 685);
    gsl_rng_free(generator);
}

/* Rates of wrong rejection at 5 %, within 3.5 standard deviations of 300 trials. */
static void tests_keep_their_error_rate(void **state)
{
    (void)state;
    enum { REPEATS = 300, SAMPLE = 500 };
    gsl_rng *generator = generator_create(22);
    const struct rfade_column_settings settings = {1.0, NAN, NAN, true, 0.95};
    int misfits[3] = {0, 0, 0};
    int rice = 0;
    int between = 0;
    for (int repeat = 0; repeat < REPEATS; repeat++) {
        double levels_dbm[SAMPLE];
        struct rfade_column_estimate result;
        for (int i = 0; i < SAMPLE; i++) {
            levels_dbm[i] = quantise_db(draw_rice_db(generator, 0.0), 1.0);
        }
        assert_int_equal(rfade_estimate_column(levels_dbm, SAMPLE, &settings, &result),
                         RFADE_OK);
        for (int i = 0; i < 3; i++) {
            misfits[i] += result.estimate.fits[i].goodness_p < 0.05 ? 1 : 0;
        }
        const struct rfade_fit *fits = result.estimate.fits;
        double ratio =
            2.0 * (fits[RFADE_RICE].log_likelihood - fits[RFADE_RAYLEIGH].log_likelihood);
        /* Half chi-square of one degree: 5 % lie above 2.7055 [AMS 55, table 26.8, Q = 0.1]. */
        assert_true(result.estimate.preferred != RFADE_RICE || ratio > 2.7055);
        between += ratio > 2.0 && ratio < 2.7 ? 1 : 0; /* where AIC alone would take Rice */
        rice += result.estimate.preferred == RFADE_RICE ? 1 : 0;
    }
    for (int i = 0; i < 3; i++) {
        assert_in_range(misfits[i], 3, 28);
    }
    assert_in_range(rice, 1, 28);
    assert_true(between > 0);
    gsl_rng_free(generator);
}

/* And reject what is wrong. */
static void wrong_models_are_found_out(void **state)
{
    (void)state;
    gsl_rng *generator = generator_create(23);
    const struct rfade_column_settings settings = {1.0, NAN, NAN, true, 0.95};
    double *levels_dbm = malloc(5000 * sizeof *levels_dbm);
    struct rfade_column_estimate result;
    assert_non_null(levels_dbm);
    for (int i = 0; i < 5000; i++) {
        levels_dbm[i] = quantise_db(draw_rice_db(generator, 4.0), 1.0);
    }
    assert_int_equal(rfade_estimate_column(levels_dbm, 5000, &settings, &result), RFADE_OK);
    assert_true(result.estimate.fits[RFADE_RAYLEIGH].goodness_p < 1e-6);
    assert_true(result.estimate.fits[RFADE_NAKAGAMI].goodness_p < 1e-3);
    assert_true(result.estimate.fits[RFADE_RICE].goodness_p > 1e-3);
    assert_int_equal(result.estimate.preferred, RFADE_RICE);
    free(levels_dbm);
    gsl_rng_free(generator);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(estimates_meet_the_cramer_rao_bound),
        cmocka_unit_test(tests_keep_their_error_rate),
        cmocka_unit_test(wrong_models_are_found_out),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
