/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file test_bins.c  Fits on tallies: readings' own bounds, window, robustness. */
#include <gsl/gsl_randist.h>
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>

#include <cmocka.h>

#include "estimate/generate.h"
#include "routefade/estimate.h"

static const struct rfade_estimate_settings PLAIN = {.confidence = 0.95};

static int32_t to_cdb(double level_db, int32_t grid_cdb)
{
    return grid_cdb * (int32_t)lround(100.0 * level_db / (double)grid_cdb);
}

/*
 * Fading of one K under a local mean of 4 dB spread, reported in 1 dB steps by a receiver
 * with a floor that 10 % fall below. Its readings about their local means.
 */
static struct rfade_tally *tally_under_shadowing(unsigned long seed, double k, double floor_db,
                                                 bool own_bounds)
{
    gsl_rng *generator = generator_create(seed);
    struct rfade_tally *tally = NULL;
    assert_int_equal(rfade_tally_create(&tally), RFADE_OK);
    for (int i = 0; i < 20000; i++) {
        double local_mean_db = gsl_ran_gaussian(generator, 4.0);
        double reported_db = quantise_db(draw_rice_db(generator, k) + local_mean_db, 1.0);
        struct rfade_tally_key key = {.step_cdb = 100, .kind = RFADE_INTERVAL};
        key.centre_cdb = to_cdb(reported_db - local_mean_db, 10);
        if (reported_db <= floor_db) {
            double bound_db = floor_db + 0.5 - (own_bounds ? local_mean_db : 0.0);
            key = (struct rfade_tally_key){.kind = RFADE_BELOW,
                                           .centre_cdb = to_cdb(bound_db, 10)};
        }
        assert_int_equal(rfade_tally_add(tally, &key, 100, 1), RFADE_OK);
    }
    gsl_rng_free(generator);
    return tally;
}

static struct rfade_fit fit_tally(struct rfade_tally *tally, enum rfade_model_id id)
{
    struct rfade_fit fit;
    struct rfade_bin *bins = NULL;
    size_t bin_count = 0;
    assert_int_equal(rfade_bins_from_tally(tally, &bins, &bin_count), RFADE_OK);
    assert_int_equal(rfade_fit_bins(rfade_model(id), bins, bin_count, &PLAIN, &fit), RFADE_OK);
    free(bins);
    rfade_tally_destroy(tally);
    return fit;
}

static void own_bounds_give_k_back(void **state)
{
    (void)state;
    const double k[] = {1.0, 10.0};
    const double floor_db[] = {-9.0, -6.0}; /* about 10 % of the readings lie below */
    const double wrong_below[] = {0.9, 7.0};
    for (int i = 0; i < 2; i++) {
        struct rfade_fit own =
            fit_tally(tally_under_shadowing(11, k[i], floor_db[i], true), RFADE_RICE);
        struct rfade_fit common =
            fit_tally(tally_under_shadowing(11, k[i], floor_db[i], false), RFADE_RICE);
        double error = sqrt(own.covariance[1][1]);
        assert_true(fabs(own.parameter - k[i]) < 3.0 * error);
        assert_true(error < 0.05 * k[i]);
        assert_true(fabs(own.mean_power_db) < 0.1);
        /* One bound for all at the mean floor is how it must not be done. */
        assert_true(common.parameter < wrong_below[i]);
    }
}

/* The window took a share away: V/(1 - n) is reported, and n says nothing about the fit. */
static void narrowing_is_taken_back(void **state)
{
    (void)state;
    const double share = 0.1;
    struct rfade_estimate_settings settings = PLAIN;
    struct rfade_tally *tally = tally_under_shadowing(12, 3.0, -100.0, true);
    struct rfade_bin *bins = NULL;
    size_t bin_count = 0;
    struct rfade_estimate raw;
    struct rfade_estimate corrected;
    assert_int_equal(rfade_bins_from_tally(tally, &bins, &bin_count), RFADE_OK);
    assert_int_equal(rfade_estimate_bins(bins, bin_count, &PLAIN, &raw), RFADE_OK);
    settings.narrowing = share;
    assert_int_equal(rfade_estimate_bins(bins, bin_count, &settings, &corrected), RFADE_OK);
    for (int i = RFADE_RICE; i <= RFADE_NAKAGAMI; i++) {
        const struct rfade_model *model = rfade_model((enum rfade_model_id)i);
        const struct rfade_fit *before = &raw.fits[i];
        const struct rfade_fit *after = &corrected.fits[i];
        const double pairs[3][2] = {{before->parameter, after->parameter},
                                    {before->parameter_low, after->parameter_low},
                                    {before->parameter_high, after->parameter_high}};
        for (int j = 0; j < 3; j++) {
            double narrow = model->normalised_variance(pairs[j][0]);
            double wide = model->normalised_variance(pairs[j][1]);
            assert_true(fabs(wide * (1.0 - share) / narrow - 1.0) < 1e-9);
        }
        assert_true(after->log_likelihood == before->log_likelihood);
        assert_true(after->mean_power_db == before->mean_power_db);
    }
    free(bins);
    rfade_tally_destroy(tally);
}

static void tallies_without_fading_readings_are_refused(void **state)
{
    (void)state;
    struct rfade_tally *tally = NULL;
    struct rfade_bin *bins = NULL;
    size_t bin_count = 0;
    const struct rfade_tally_key key = {.step_cdb = 100, .kind = RFADE_INTERVAL};
    const struct rfade_tally_key other = {.step_cdb = 100, .centre_cdb = 500};
    assert_int_equal(rfade_tally_create(&tally), RFADE_OK);
    assert_int_equal(rfade_bins_from_tally(tally, &bins, &bin_count), RFADE_NO_DATA);
    assert_null(bins);
    assert_int_equal(rfade_tally_add(tally, &key, 0, 7), RFADE_OK); /* stood all the time */
    assert_int_equal(rfade_bins_from_tally(tally, &bins, &bin_count), RFADE_NO_DATA);
    assert_int_equal(rfade_tally_add(tally, &key, 10, 1), RFADE_OK);
    assert_int_equal(rfade_tally_add(tally, &other, -3, 1), RFADE_OK);
    assert_int_equal(rfade_bins_from_tally(tally, &bins, &bin_count), RFADE_DOMAIN);
    assert_null(bins);
    rfade_tally_destroy(tally);
}

static void bins_are_read_from_a_tally(void **state)
{
    (void)state;
    struct rfade_tally *tally = NULL;
    struct rfade_bin *bins = NULL;
    size_t bin_count = 0;
    const struct rfade_tally_key keys[] = {
        {.step_cdb = 100, .centre_cdb = -250},
        {.step_cdb = 100, .centre_cdb = -250, .window_class = 3},
        {.kind = RFADE_BELOW, .centre_cdb = -1250},
        {.kind = RFADE_ABOVE, .centre_cdb = 700}};
    assert_int_equal(rfade_tally_create(&tally), RFADE_OK);
    for (size_t i = 0; i < 4; i++) {
        assert_int_equal(rfade_tally_add(tally, &keys[i], 250, 1), RFADE_OK);
    }
    assert_int_equal(rfade_bins_from_tally(tally, &bins, &bin_count), RFADE_OK);
    assert_int_equal(bin_count, 3);
    assert_true(isinf(bins[0].low_db) && bins[0].high_db == -12.5 && bins[0].weight == 1.0);
    assert_true(isinf(bins[1].high_db) && bins[1].low_db == 7.0 && bins[1].weight == 1.0);
    assert_true(bins[2].low_db == -3.0 && bins[2].high_db == -2.0 && bins[2].weight == 2.0);
    free(bins);
    rfade_tally_destroy(tally);
}

static void bins_that_are_none_are_refused(void **state)
{
    (void)state;
    struct rfade_estimate result;
    struct rfade_fit fit;
    struct rfade_estimate_settings narrowed = PLAIN;
    const struct rfade_bin good = {-1.0, 1.0, 5.0};
    const struct rfade_bin wrong[] = {{1.0, -1.0, 1.0},           {0.0, 1.0, 0.0},
                                      {0.0, 1.0, -1.0},           {NAN, 1.0, 1.0},
                                      {-INFINITY, INFINITY, 1.0}, {0.0, 1.0, INFINITY}};
    for (size_t i = 0; i < sizeof wrong / sizeof *wrong; i++) {
        const struct rfade_bin bins[] = {good, wrong[i]};
        assert_int_equal(rfade_estimate_bins(bins, 2, &PLAIN, &result), RFADE_DOMAIN);
        assert_int_equal(rfade_fit_bins(rfade_model(RFADE_RICE), bins, 2, &PLAIN, &fit),
                         RFADE_DOMAIN);
        assert_true(isnan(fit.parameter) && isnan(fit.log_likelihood));
    }
    narrowed.narrowing = 1.0;
    assert_int_equal(rfade_estimate_bins(&good, 1, &narrowed, &result), RFADE_DOMAIN);
    assert_int_equal(rfade_estimate_bins(&good, 0, &PLAIN, &result), RFADE_NO_DATA);
    assert_int_equal(rfade_estimate_bins(&good, 1, &PLAIN, &result), RFADE_NO_DATA);
    assert_int_equal(rfade_fit_bins(rfade_model(RFADE_RICE), &good, 1, &PLAIN, &fit),
                     RFADE_NO_DATA);
    assert_true(isnan(fit.mean_power_low_db) && isnan(fit.parameter));
}

/* A level of any kind, wild ones included. */
static double draw_anything_db(gsl_rng *generator, int kind, double parameter)
{
    switch (kind) {
    case 0:
        return draw_rice_db(generator, parameter);
    case 1:
        return draw_nakagami_db(generator, fmax(parameter, 0.05));
    case 2:
        return gsl_ran_gaussian(generator, 15.0);
    default:
        return gsl_rng_uniform(generator) < 0.1 ? 30.0 : 0.0;
    }
}

static void assert_sound(const struct rfade_estimate *estimate)
{
    for (size_t i = 0; i < estimate->fit_count; i++) {
        const struct rfade_fit *fit = &estimate->fits[i];
        assert_true(isfinite(fit->log_likelihood));
        assert_true(fit->mean_power_low_db <= fit->mean_power_db);
        assert_true(fit->mean_power_db <= fit->mean_power_high_db);
        if (fit->model != RFADE_RAYLEIGH) {
            assert_true(fit->parameter_low <= fit->parameter);
            assert_true(fit->parameter <= fit->parameter_high);
        }
        if (fit->model == RFADE_RICE || fit->model == RFADE_NAKAGAMI) {
            /* Both contain Rayleigh. */
            double rayleigh = estimate->fits[RFADE_RAYLEIGH].log_likelihood;
            assert_true(fit->log_likelihood >= rayleigh - 1e-9 * (1.0 + fabs(rayleigh)));
        }
    }
}

static void every_sample_is_fitted(void **state)
{
    (void)state;
    const double steps_db[] = {0.0, 0.1, 1.0, 3.0};
    gsl_rng *generator = generator_create(13);
    double levels_dbm[150];
    for (int trial = 0; trial < 400; trial++) {
        size_t count = 1 + (size_t)exp(5.0 * gsl_rng_uniform(generator));
        double parameter = exp(12.0 * gsl_rng_uniform(generator) - 3.0);
        double step_db = steps_db[trial % 4];
        struct rfade_column_settings settings = {step_db, trial % 3 == 0 ? -5.0 : NAN,
                                                 trial % 5 == 0 ? 3.0 : NAN, trial % 2 == 0,
                                                 0.95};
        struct rfade_column_estimate result;
        size_t between = 0;
        for (size_t i = 0; i < count; i++) {
            double level_db = draw_anything_db(generator, trial % 7 % 4, parameter);
            levels_dbm[i] = step_db > 0.0 ? quantise_db(level_db, step_db) : level_db;
            bool clipped =
                levels_dbm[i] <= settings.floor_dbm || levels_dbm[i] >= settings.ceiling_dbm;
            between += clipped ? 0 : 1;
        }
        enum rfade_status status = rfade_estimate_column(levels_dbm, count, &settings, &result);
        assert_int_equal(status, between < RFADE_FIT_READINGS_MIN ? RFADE_NO_DATA : RFADE_OK);
        assert_sound(&result.estimate);
    }
    gsl_rng_free(generator);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(own_bounds_give_k_back),
        cmocka_unit_test(narrowing_is_taken_back),
        cmocka_unit_test(tallies_without_fading_readings_are_refused),
        cmocka_unit_test(bins_are_read_from_a_tally),
        cmocka_unit_test(bins_that_are_none_are_refused),
        cmocka_unit_test(every_sample_is_fitted),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
