/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Two branches paired by hand, and against the theory of correlated Rayleigh fading. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_randist.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "analyse/diversity.h"

enum { READINGS = 40000 };

static const struct rfade_separate_settings settings = {
    .wavelength_m = 1.0, .window_wavelengths = 40.0, .block_wavelengths = 10.0};
static const struct rfade_receiver fine_receiver = {
    .step_cdb = 1, .floor_cdb = RFADE_NO_FLOOR_CDB, .ceiling_cdb = RFADE_NO_CEILING_CDB};

struct branches {
    struct rfade_track_reading first[READINGS];
    struct rfade_track_reading second[READINGS];
};

static struct rfade_branch branch_of(const struct rfade_track_reading *readings, size_t count)
{
    return (struct rfade_branch){
        .readings = readings, .count = count, .receiver = fine_receiver, .settings = settings};
}

static int32_t level_cdb(double re, double im)
{
    return (int32_t)lround(1000.0 * log10(0.5 * (re * re + im * im)) - 8000.0);
}

/* Rayleigh fading, a new independent place every half wavelength; the branches' complex gains
 * have the correlation rho, and so their powers rho^2. */
static struct branches *rayleigh_branches(double rho)
{
    struct branches *branches = calloc(1, sizeof *branches);
    gsl_rng *random = gsl_rng_alloc(gsl_rng_mt19937);
    assert_non_null(branches);
    assert_non_null(random);
    gsl_rng_set(random, 4);
    for (int i = 0; i < READINGS; i++) {
        const double re = gsl_ran_ugaussian(random), im = gsl_ran_ugaussian(random);
        const double other = sqrt(1.0 - rho * rho);
        struct rfade_track_reading reading = {.time_us = (int64_t)i * 50000,
                                              .travel_mm = (int64_t)i * 500,
                                              .level_cdb = level_cdb(re, im)};
        branches->first[i] = reading;
        reading.level_cdb = level_cdb(rho * re + other * gsl_ran_ugaussian(random),
                                      rho * im + other * gsl_ran_ugaussian(random));
        reading.time_us += 7000; /* logged a little later, at the same place */
        branches->second[i] = reading;
    }
    gsl_rng_free(random);
    return branches;
}

static struct rfade_diversity evaluate(const struct rfade_branch pair[2], int32_t threshold_cdb)
{
    struct rfade_segment_result result = {.wavelength_m = 1.0, .route = "fen", .segment = 1};
    struct rfade_diversity_row row = {.branch = {&result, &result}};
    struct rfade_pairing pairing;
    struct rfade_diversity diversity;
    struct rfade_error error = {RFADE_OK, "", 0, "", ""};
    assert_int_equal(rfade_paired_total_create(&row.total), RFADE_OK);
    assert_int_equal(rfade_pair_branches(pair, threshold_cdb, &pairing), RFADE_OK);
    for (size_t i = 0; i < pairing.count; i++)
        assert_int_equal(rfade_paired_total_add(&row.total, &pairing.runs[i]), RFADE_OK);
    assert_int_equal(
        rfade_diversity_evaluate(&row, threshold_cdb / 100.0, 0.95, &diversity, &error),
        RFADE_OK);
    rfade_pairing_clear(&pairing);
    rfade_paired_total_clear(&row.total);
    return diversity;
}

static struct rfade_diversity diversity_at(double rho, int32_t threshold_cdb)
{
    struct branches *branches = rayleigh_branches(rho);
    const struct rfade_branch pair[2] = {branch_of(branches->first, READINGS),
                                         branch_of(branches->second, READINGS)};
    const struct rfade_diversity result = evaluate(pair, threshold_cdb);
    free(branches);
    return result;
}

/* Selection of two independent Rayleigh branches: (1 - exp(-y))^2 = p [Brennan 1959]: the
 * level of 10 % is 0.38013 instead of 0.10536 of the mean power, of 1 % 0.10536, not 0.01005.
 */
static void independent_branches_gain_what_theory_says(void **state)
{
    (void)state;
    const struct rfade_diversity result = diversity_at(0.0, -9000);
    assert_int_equal(result.pairs, READINGS);
    assert_true(fabs(result.gain_db[0] - 10.0 * log10(0.380130 / 0.105361)) < 0.2);
    assert_true(fabs(result.gain_db[1] - 10.0 * log10(0.105361 / 0.010050)) < 0.4);
    const double single = 1.0 - exp(-0.1); /* 10 dB below the mean */
    assert_true(fabs(result.below[0] / single - 1.0) < 0.05);
    assert_true(fabs(result.below[1] / single - 1.0) < 0.05);
    assert_true(result.both_below_low < single * single &&
                single * single < result.both_below_high);
    assert_true(result.both_below_low > 0.7 * single * single &&
                result.both_below_high < 1.4 * single * single);
    assert_true(result.power_correlation_low < 0.0 && result.power_correlation_high > 0.0);
    assert_true(fabs(result.power_correlation) < 0.03);
    /* nothing was fitted, so nothing is predicted */
    assert_true(isnan(result.both_below_independent) && isnan(result.gain_independent_db[0]));
}

static void correlation_is_measured_with_its_interval(void **state)
{
    (void)state;
    const double rho[] = {0.5, 0.7, 0.95};
    for (size_t i = 0; i < 3; i++) {
        const struct rfade_diversity result = diversity_at(rho[i], -9000);
        const double expected = rho[i] * rho[i];
        assert_true(result.power_correlation_low < expected + 0.01);
        assert_true(result.power_correlation_high > expected - 0.01);
        assert_true(fabs(result.power_correlation - expected) < 0.03);
        assert_true(result.power_correlation_high - result.power_correlation_low < 0.06);
        /* of envelopes it is nearly that of powers [Pierce and Stein 1960] */
        assert_true(fabs(result.envelope_correlation - expected) < 0.04);
        assert_true(result.gain_db[0] < 10.0 * log10(0.380130 / 0.105361));
        assert_true(result.both_below > pow(1.0 - exp(-0.1), 2.0));
    }
}

static void equal_branches_gain_nothing(void **state)
{
    (void)state;
    struct branches *branches = rayleigh_branches(0.0);
    const struct rfade_branch pair[2] = {branch_of(branches->first, READINGS),
                                         branch_of(branches->first, READINGS)};
    const struct rfade_diversity result = evaluate(pair, -9000);
    assert_true(fabs(result.power_correlation - 1.0) < 1e-12);
    assert_true(fabs(result.gain_db[0]) < 1e-6 && fabs(result.gain_db[1]) < 1e-6);
    assert_true(result.both_below == result.below[0]);
    free(branches);
}

/* Readings that aren't near in time, or in place, don't pair. */
static void only_what_belongs_together_is_paired(void **state)
{
    (void)state;
    struct branches *branches = rayleigh_branches(0.0);
    /* one reading at the place of the first's, 24 ms after it, then 26: half of 50 are 25 */
    branches->second[0].time_us = 24000;
    const struct rfade_branch late[2] = {branch_of(branches->first, 1000),
                                         branch_of(branches->second, 2)};
    branches->second[1] = branches->second[0];
    branches->second[1].time_us += (int64_t)1e12;
    branches->second[1].travel_mm += (int64_t)1e9;
    assert_int_equal(evaluate(late, -9000).pairs, 1);
    branches->second[0].time_us = 26000;
    assert_int_equal(evaluate(late, -9000).pairs, 0);
    free(branches);
    branches = rayleigh_branches(0.0);
    for (int i = 0; i < READINGS; i++)
        branches->second[i].travel_mm += 60; /* more than a twentieth of a wavelength */
    const struct rfade_branch off[2] = {branch_of(branches->first, READINGS),
                                        branch_of(branches->second, READINGS)};
    assert_int_equal(evaluate(off, -9000).pairs, 0);
    for (int i = 0; i < READINGS; i++)
        branches->second[i].travel_mm -= 20;
    assert_int_equal(evaluate(off, -9000).pairs, READINGS);
    free(branches);
}

/* A slower log pairs as often as it reads, not as often as the faster one. */
static void the_slower_log_sets_the_pairs(void **state)
{
    (void)state;
    struct branches *branches = rayleigh_branches(0.0);
    size_t slow = 0;
    for (int i = 0; i < READINGS; i += 5)
        branches->second[slow++] = branches->second[i];
    const struct rfade_branch pair[2] = {branch_of(branches->first, READINGS),
                                         branch_of(branches->second, slow)};
    assert_int_equal(evaluate(pair, -9000).pairs, slow);
    free(branches);
}

/* Below a floor nobody knows how deep: quantiles there stay empty, shares above it don't. */
static void a_floor_hides_what_lies_below(void **state)
{
    (void)state;
    struct branches *branches = rayleigh_branches(0.0);
    for (int i = 0; i < READINGS; i++) {
        struct rfade_track_reading *both[] = {&branches->first[i], &branches->second[i]};
        for (int b = 0; b < 2; b++)
            both[b]->level_cdb = both[b]->level_cdb < -9300 ? -9300 : both[b]->level_cdb;
    }
    struct rfade_branch pair[2] = {branch_of(branches->first, READINGS),
                                   branch_of(branches->second, READINGS)};
    pair[0].receiver.floor_cdb = pair[1].receiver.floor_cdb = -9300;
    const struct rfade_diversity result = evaluate(pair, -9000);
    assert_true(fabs(result.gain_db[0] - 5.573) < 0.2);
    assert_true(isnan(result.gain_db[1]));
    const struct rfade_diversity deep = evaluate(pair, -9500);
    assert_true(deep.both_below == 0.0);
    assert_true(deep.below[0] == 0.0);
    /* on the scale of SNR over a noise of -100 dBm */
    const int32_t shift_cdb[1] = {10000};
    pair[0].shift_cdb = pair[1].shift_cdb = shift_cdb;
    const struct rfade_diversity snr = evaluate(pair, 1000);
    assert_true(snr.both_below == result.both_below);
    assert_true(fabs(snr.gain_db[0] - result.gain_db[0]) < 1e-6);
    free(branches);
}

/* Too little travel for a quantile, or for an interval: said by leaving it out. */
static void short_segments_say_less(void **state)
{
    (void)state;
    struct branches *branches = rayleigh_branches(0.0);
    const struct rfade_branch some[2] = {branch_of(branches->first, 300),
                                         branch_of(branches->second, 300)};
    const struct rfade_diversity result = evaluate(some, -9000);
    assert_true(isfinite(result.gain_db[0]) && isnan(result.gain_db[1]));
    const struct rfade_branch few[2] = {branch_of(branches->first, 60),
                                        branch_of(branches->second, 60)};
    const struct rfade_diversity little = evaluate(few, -9000);
    assert_true(isnan(little.gain_db[0]));
    assert_true(isnan(little.power_correlation_low) && isfinite(little.power_correlation));
    struct rfade_pairing pairing;
    const struct rfade_branch none[2] = {few[0], branch_of(branches->second, 0)};
    assert_int_equal(rfade_pair_branches(none, -9000, &pairing), RFADE_NO_DATA);
    assert_null(pairing.runs);
    struct rfade_branch bad[2] = {few[0], few[1]};
    bad[1].settings.wavelength_m = 0.0;
    assert_int_equal(rfade_pair_branches(bad, -9000, &pairing), RFADE_DOMAIN);
    free(branches);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(independent_branches_gain_what_theory_says),
        cmocka_unit_test(correlation_is_measured_with_its_interval),
        cmocka_unit_test(equal_branches_gain_nothing),
        cmocka_unit_test(only_what_belongs_together_is_paired),
        cmocka_unit_test(the_slower_log_sets_the_pairs),
        cmocka_unit_test(a_floor_hides_what_lies_below),
        cmocka_unit_test(short_segments_say_less),
    };
    (void)gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
