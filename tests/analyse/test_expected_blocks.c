/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file test_expected_blocks.c  Covariances of classes that theory expects, held against how
 * classes vary from drive to drive on simulated drives.
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
#include <gsl/gsl_math.h>

#include "analyse/expected_blocks.h"
#include "routefade/model.h"
#include "simulate/drives.h"

enum { DRIVES = 1500, LENGTH = 150, A_METRE = 10, CLASSES = RFADE_COARSE_BINS };

/* Shares of a drive of 150 wavelengths that lie in each class; known mean power. */
static void drive_shares(double k, double angle_deg, uint64_t seed, double share[CLASSES])
{
    struct rfade_drive_settings settings = plain_drive();
    struct rfade_drive_reading *readings = NULL;
    size_t count = 0;
    settings.length_m = LENGTH;
    settings.stretch_m = LENGTH;
    settings.k = &k;
    settings.ray_angle_deg = angle_deg;
    settings.seed = seed;
    assert_int_equal(rfade_simulate_drive(&settings, &readings, &count), RFADE_OK);
    memset(share, 0, CLASSES * sizeof *share);
    for (size_t i = 0; i < count; i++) {
        share[rfade_coarse_bin(readings[i].power_dbm - readings[i].local_mean_dbm)] +=
            1.0 / (double)count;
    }
    free(readings);
}

/* Score of Nakagami's m, ln x - x, by class, at the power in the class's middle. */
static double score(int class_of)
{
    double low_db = class_of > 0 ? rfade_coarse_edges_db[class_of - 1] : -36.0;
    double high_db = class_of < CLASSES - 1 ? rfade_coarse_edges_db[class_of] : 9.0;
    double ln_x = 0.5 * (low_db + high_db) * M_LN10 / 10.0;
    return ln_x - exp(ln_x);
}

static double drawn_variance(double k, double angle_deg)
{
    double sum = 0.0, squares = 0.0;
    for (uint64_t seed = 1; seed <= DRIVES; seed++) {
        double share[CLASSES], value = 0.0;
        drive_shares(k, angle_deg, seed, share);
        for (int i = 0; i < CLASSES; i++) {
            value += share[i] * score(i);
        }
        sum += value;
        squares += value * value;
    }
    return squares / DRIVES - sum / DRIVES * (sum / DRIVES);
}

static struct rfade_expected_fading fading(double k, double angle_deg,
                                           struct rfade_tally *levels)
{
    struct rfade_expected_fading fading = {.k = k,
                                           .ray = rfade_ray_at(angle_deg),
                                           .travel_wavelengths = LENGTH,
                                           .spacing_wavelengths = 1.0 / A_METRE,
                                           .step_db = 0.01,
                                           .levels = levels};
    assert_int_equal(rfade_lag_means(LENGTH, &fading.pass), RFADE_OK);
    assert_int_equal(rfade_lag_means(30.0, &fading.followed), RFADE_OK);
    return fading;
}

/* One block that was measured: too few to count, so that theory stands alone. */
static struct rfade_blocks one_block(void)
{
    struct rfade_blocks blocks = {.blocks = 1};
    for (int i = 0; i < CLASSES; i++) {
        blocks.total[i] = 100000;
    }
    return blocks;
}

/* Of the mean score over the drive, as the estimate makes it from the blocks. */
static double expected_variance(double k, double angle_deg)
{
    struct rfade_tally *levels = NULL;
    struct rfade_blocks blocks = one_block();
    double total = 100000.0 * CLASSES, sum = 0.0;
    assert_int_equal(rfade_tally_create(&levels), RFADE_OK);
    struct rfade_expected_fading how = fading(k, angle_deg, levels);
    assert_int_equal(rfade_expect_blocks(&how, &blocks), RFADE_OK);
    assert_int_equal(blocks.blocks, 191); /* 1 + 90 * 19/9: theory alone */
    for (int i = 0; i < CLASSES; i++) {
        for (int j = 0; j < CLASSES; j++) {
            sum += score(i) * score(j) * (double)blocks.same[i][j];
        }
    }
    rfade_tally_destroy(levels);
    double unbiased = 191.0 / (191.0 - 3.0);
    return sum * unbiased / (total * total);
}

/* Simulation knows the variance to 1/sqrt(750), 4 %; theory's lengths are good to a tenth. */
static void variance_is_what_drives_show(void **state)
{
    const double ks[] = {0.0, 1.0, 4.0};
    const double angles_deg[] = {90.0, 0.0};
    (void)state;
    for (size_t i = 0; i < sizeof ks / sizeof ks[0]; i++) {
        for (size_t j = 0; j < sizeof angles_deg / sizeof angles_deg[0]; j++) {
            double ratio =
                expected_variance(ks[i], angles_deg[j]) / drawn_variance(ks[i], angles_deg[j]);
            assert_true(ratio > 0.75 && ratio < 1.3);
        }
    }
}

/* And what was counted stays. */
static void no_variance_is_negative(void **state)
{
    struct rfade_tally *levels = NULL;
    struct rfade_blocks blocks = one_block();
    (void)state;
    assert_int_equal(rfade_tally_create(&levels), RFADE_OK);
    struct rfade_expected_fading how = fading(4.0, 90.0, levels);
    assert_int_equal(rfade_expect_blocks(&how, &blocks), RFADE_OK);
    for (int i = 0; i < CLASSES; i++) {
        assert_true(blocks.same[i][i] >= 0);
        assert_true(blocks.total[i] == 100000);
    }
    rfade_tally_destroy(levels);
}

static void what_theory_has_no_say_in_is_refused(void **state)
{
    struct rfade_tally *levels = NULL;
    struct rfade_blocks blocks = one_block(), before = blocks, nothing = {0};
    (void)state;
    assert_int_equal(rfade_tally_create(&levels), RFADE_OK);
    struct rfade_expected_fading how = fading(1e4, 90.0, levels);
    assert_int_equal(rfade_expect_blocks(&how, &blocks), RFADE_DOMAIN);
    how.k = NAN;
    assert_int_equal(rfade_expect_blocks(&how, &nothing), RFADE_DOMAIN);
    how.k = 1.0;
    how.travel_wavelengths = 0.0;
    assert_int_equal(rfade_expect_blocks(&how, &blocks), RFADE_DOMAIN);
    how.travel_wavelengths = LENGTH;
    assert_int_equal(rfade_expect_blocks(&how, &nothing), RFADE_DOMAIN);
    assert_memory_equal(&blocks, &before, sizeof blocks);
    rfade_tally_destroy(levels);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(variance_is_what_drives_show),
        cmocka_unit_test(no_variance_is_negative),
        cmocka_unit_test(what_theory_has_no_say_in_is_refused),
    };
    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
