/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The channel of a simulated drive against the theory of Rice fading and of shadowing. */
#include <gsl/gsl_errno.h>
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>

#include <cmocka.h>

#include "simulate/drives.h"

/* Mean of independent figures, one a drive, and its standard error. */
struct average {
    double sum;
    double square;
    double count;
};

static void average_add(struct average *average, double value)
{
    average->sum += value;
    average->square += value * value;
    average->count += 1.0;
}

static void assert_average_is(const struct average *average, double expected)
{
    double mean = average->sum / average->count;
    double variance = average->square / average->count - mean * mean;

    assert_true(average->count > 10.0);
    assert_true(fabs(mean - expected) < 4.0 * sqrt(variance / average->count));
}

static struct rfade_drive_reading *drive(const struct rfade_drive_settings *settings,
                                         size_t *count)
{
    struct rfade_drive_reading *readings;

    assert_int_equal(rfade_simulate_drive(settings, &readings, count), RFADE_OK);
    assert_non_null(readings);
    return readings;
}

/* Rice 1948; Greenstein, Michelson and Erceg 1999: with mean power 1 the power's variance is
 * (1 + 2K)/(1 + K)^2. */
static void check_moments(double k, double ray_angle_deg)
{
    struct rfade_drive_settings settings = plain_drive();
    struct average power = {0};
    struct average square = {0};

    settings.k = &k;
    settings.ray_angle_deg = ray_angle_deg;
    for (settings.seed = 1; settings.seed <= 300; settings.seed++) {
        size_t count;
        struct rfade_drive_reading *readings = drive(&settings, &count);
        double sum = 0.0;
        double sum_square = 0.0;

        for (size_t i = 0; i < count; i++) {
            double ratio =
                pow(10.0, (readings[i].power_dbm - readings[i].local_mean_dbm) / 10.0);

            sum += ratio / (double)count;
            sum_square += ratio * ratio / (double)count;
        }
        average_add(&power, sum);
        average_add(&square, sum_square);
        free(readings);
    }
    assert_average_is(&power, 1.0);
    assert_average_is(&square, 1.0 + (1.0 + 2.0 * k) / ((1.0 + k) * (1.0 + k)));
}

static void power_has_the_moments_of_rice_fading(void **state)
{
    (void)state;
    check_moments(0.0, 90.0);
    check_moments(1.0, 90.0);
    check_moments(4.0, 0.0);
    check_moments(10.0, 60.0);
}

enum { LEVELS = 3, DRIVES = 20 };

struct crossings {
    double k;
    double level_db[LEVELS];
    double per_wavelength[LEVELS];
};

/* Upward crossings a wavelength, direct ray at zero Doppler: from the definition
 * N = p(R) E[max(dR/dt, 0)] in 50-digit arithmetic [Rice 1948], level = 20 log10(R/rms). */
static const struct crossings crossings[] = {
    {0.0, {-10.0, 0.0, 3.0}, {0.71723336775945203, 0.92213700889578912, 0.48145812573167499}},
    {1.0, {-10.0, -3.0, 0.0}, {0.40861817688783899, 0.77367743459689180, 0.75049979700315739}},
    {3.0, {-5.0, 0.0, 3.0}, {0.40939281772972760, 0.72119725708046023, 0.27716231030635980}},
    {10.0, {-3.0, 0.0, 3.0}, {0.31670637637665413, 0.71144280032096111, 0.085093252156924063}}};

static void count_crossings(const struct rfade_drive_reading *readings, size_t count,
                            const double level_db[LEVELS], double upward[LEVELS])
{
    for (int j = 0; j < LEVELS; j++) {
        upward[j] = 0.0;
        for (size_t i = 1; i < count; i++) {
            if (readings[i - 1].power_dbm < level_db[j] &&
                readings[i].power_dbm >= level_db[j]) {
                upward[j] += 1.0;
            }
        }
    }
}

static void check_crossings(const struct crossings *expected)
{
    struct rfade_drive_settings settings = plain_drive();
    struct average rate[LEVELS] = {0};

    settings.length_m = 200.0;
    settings.rate_hz = 1000.0;
    settings.k = &expected->k;
    settings.mean_level_dbm = 0.0;
    for (settings.seed = 1; settings.seed <= DRIVES; settings.seed++) {
        size_t count;
        struct rfade_drive_reading *readings = drive(&settings, &count);
        double upward[LEVELS];

        count_crossings(readings, count, expected->level_db, upward);
        for (int j = 0; j < LEVELS; j++) {
            average_add(&rate[j], upward[j] / settings.length_m);
        }
        free(readings);
    }
    for (int j = 0; j < LEVELS; j++) {
        assert_average_is(&rate[j], expected->per_wavelength[j]);
    }
}

static void levels_are_crossed_as_often_as_theory_says(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof crossings / sizeof crossings[0]; i++) {
        check_crossings(&crossings[i]);
    }
}

/* Standard deviation 6 dB; correlation at one and two decorrelation distances. */
static void check_shadowing(enum rfade_shadowing shadowing, double at_one, double at_two)
{
    struct rfade_drive_settings settings = plain_drive();
    struct average mean = {0};
    struct average same = {0};
    struct average one = {0};
    struct average two = {0};

    settings.length_m = 1000.0;
    settings.carrier_hz = one_metre_hz / 50.0; /* the scatter is of no interest here */
    settings.rate_hz = 1.0;
    settings.shadowing = shadowing;
    settings.shadowing_db = 6.0;
    for (settings.seed = 1; settings.seed <= 1000; settings.seed++) {
        size_t count;
        struct rfade_drive_reading *readings = drive(&settings, &count);
        double normal[3];

        assert_int_equal(count, 101);
        for (int i = 0; i < 3; i++) {
            normal[i] = (readings[50 + 5 * i].local_mean_dbm + 80.0) / 6.0;
        }
        average_add(&mean, normal[0]);
        average_add(&same, normal[0] * normal[0]);
        average_add(&one, normal[0] * normal[1]);
        average_add(&two, normal[0] * normal[2]);
        free(readings);
    }
    assert_average_is(&mean, 0.0);
    assert_average_is(&same, 1.0);
    assert_average_is(&one, at_one);
    assert_average_is(&two, at_two);
}

static void shadowing_has_its_deviation_and_correlation(void **state)
{
    (void)state;
    check_shadowing(RFADE_SHADOWING_SMOOTH, exp(-1.0), exp(-4.0));
    check_shadowing(RFADE_SHADOWING_EXPONENTIAL, exp(-1.0), exp(-2.0));
}

static void k_changes_by_stretch_in_turn(void **state)
{
    const double k[] = {0.0, 1.0, 4.0};
    struct rfade_drive_settings settings = plain_drive();
    struct rfade_drive_reading *readings;
    size_t count;

    (void)state;
    settings.k = k;
    settings.k_count = 3;
    settings.stretch_m = 20.0;
    readings = drive(&settings, &count);
    assert_int_equal(count, 1001);
    for (size_t i = 0; i < count; i++) {
        double expected = k[(size_t)(readings[i].distance_m / 20.0) % 3];

        assert_true(readings[i].k == expected);
    }
    free(readings);
}

static void same_settings_give_the_same_digits(void **state)
{
    struct rfade_drive_settings settings = plain_drive();
    struct rfade_drive_reading *first;
    struct rfade_drive_reading *again;
    struct rfade_drive_reading *other;
    size_t count;

    (void)state;
    settings.shadowing_db = 4.0;
    settings.shadowing = RFADE_SHADOWING_EXPONENTIAL;
    first = drive(&settings, &count);
    again = drive(&settings, &count);
    settings.seed = UINT64_C(1) << 40;
    other = drive(&settings, &count);
    for (size_t i = 0; i < count; i++) {
        assert_memory_equal(&first[i], &again[i], sizeof first[i]);
        assert_true(first[i].power_dbm != other[i].power_dbm);
    }
    free(first);
    free(again);
    free(other);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(power_has_the_moments_of_rice_fading),
        cmocka_unit_test(levels_are_crossed_as_often_as_theory_says),
        cmocka_unit_test(shadowing_has_its_deviation_and_correlation),
        cmocka_unit_test(k_changes_by_stretch_in_turn),
        cmocka_unit_test(same_settings_give_the_same_digits),
    };

    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
