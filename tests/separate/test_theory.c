/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Means over travel against quadrature in 20 digits: mpmath 1.3.0, mp.dps = 20, mp.quad over
 * panels of half a wavelength, J = besselj(0, 2*pi*u), s = 1/(1+K):
 *   variance(L) = 2/L quad((1 - u/L)(s^2 J^2 + 2 K s^2 J), 0..L)
 *   narrowing(W), with means j1 and j2 of J and J^2 over 0..W/2, a = K s, V = s^2 (1 + 2K):
 *   [2((4 a^2 s + 8 a s^2) j1 + (4 a s^2 + 4 s^3) j2) - 2 (1 + V)(2 a s j1 + s^2 j2)
 *    - (1 + V) variance(W)]/V
 * and with the ray at an angle cos(2 pi u c) J for J, but not for J^2.
 * The rows of 3000 wavelengths: numpy 1.24, 24 Gauss-Legendre points a panel, scipy j0.
 */
#include <gsl/gsl_errno.h>
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>

#include <cmocka.h>

#include "routefade/separate.h"
#include "simulate/drives.h"

struct row {
    double length_wavelengths;
    double k;
    double expected;
    double relative_tolerance;
};

static const struct rfade_ray ACROSS = {{[RFADE_RAY_DIRECTIONS - 1] = 1.0}};

static const struct row variances[] = {
    {0.1, 0.0, 0.968056588174781, 1e-12},       {0.1, 10.0, 0.170597502002819, 1e-12},
    {1.0, 0.0, 0.354028365581582, 1e-12},       {7.3, 1.0, 0.0407989962120929, 1e-12},
    {40.0, 0.0, 0.0181957970790985, 1e-12},     {40.0, 10.0, 0.0014655231863862, 1e-12},
    {152.4, 1.0, 0.00246060467135349, 1e-12},   {1000.0, 0.0, 0.00105397228983593, 1e-12},
    {3000.0, 0.0, 0.0003884283291434218, 2e-5}, {3000.0, 10.0, 2.0747882433343935e-05, 2e-5}};

static const struct row narrowings[] = {
    {4.0, 0.0, 0.274391456262333, 1e-12},     {4.0, 10.0, 0.0671061506210772, 1e-12},
    {20.0, 1.0, 0.0384703711570606, 1e-12},   {40.0, 0.0, 0.039460401065434, 1e-12},
    {40.0, 1.0, 0.0211396771178354, 1e-12},   {40.0, 4.0, 0.0127255584898745, 1e-12},
    {40.0, 10.0, 0.00970476564290633, 1e-12}, {100.0, 10.0, 0.00419441836769003, 1e-12}};

static void variance_of_a_stretch_matches_quadrature(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof variances / sizeof variances[0]; i++) {
        const struct row *row = &variances[i];
        double value = rfade_stretch_mean_variance(row->length_wavelengths, row->k, &ACROSS);

        assert_true(fabs(value / row->expected - 1.0) <= row->relative_tolerance);
    }
}

static void narrowing_matches_quadrature(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof narrowings / sizeof narrowings[0]; i++) {
        const struct row *row = &narrowings[i];
        double value = rfade_window_narrowing(row->length_wavelengths, row->k, &ACROSS);

        assert_true(fabs(value / row->expected - 1.0) <= row->relative_tolerance);
    }
}

/* Without a ray cov(y, d) is the mean of J0^2, which follows from the narrowing above, 4 times
 * it less twice the variance. */
static void log_narrowing_follows_from_the_other_two(void **state)
{
    double variance = 0.0181957970790985;
    double covariance = 0.25 * (0.039460401065434 + 2.0 * variance);

    (void)state;
    assert_true(
        fabs(rfade_window_log_narrowing(40.0, 0.0, &ACROSS) / (covariance - 0.5 * variance) -
             1.0) < 1e-11);
    assert_true(isnan(rfade_window_log_narrowing(3.9, 0.0, &ACROSS)));
}

struct angled_row {
    double length_wavelengths;
    double k;
    double angle_deg;
    double variance; /* NaN: not computed */
    double narrowing;
};

static const struct angled_row angled[] = {
    {40.0, 4.0, 0.0, 0.015934693732974333, 0.043887375962863965},
    {40.0, 10.0, 0.0, NAN, 0.047535281535188651},
    {152.4, 1.0, 180.0, 0.013575937224696471, NAN},
    {10.0, 10.0, 45.0, 0.0079110354272195710, NAN},
    {20.0, 1.0, -45.0, NAN, 0.039061658108412795}};

static void a_ray_at_an_angle_matches_quadrature(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof angled / sizeof angled[0]; i++) {
        const struct angled_row *row = &angled[i];
        struct rfade_ray ray = rfade_ray_at(row->angle_deg);
        double variance = rfade_stretch_mean_variance(row->length_wavelengths, row->k, &ray);
        double narrowing = rfade_window_narrowing(row->length_wavelengths, row->k, &ray);

        if (!isnan(row->variance)) {
            assert_true(fabs(variance / row->variance - 1.0) <= 1e-12);
        }
        if (!isnan(row->narrowing)) {
            assert_true(fabs(narrowing / row->narrowing - 1.0) <= 1e-12);
        }
    }
}

/* Weight that the sums of one simulated pass give to rays within 20 degrees of an angle. */
static double weight_near(double angle_deg, uint64_t seed)
{
    struct rfade_drive_settings settings = plain_drive();
    struct rfade_drive_reading *readings;
    struct rfade_separation separation;
    struct rfade_receiver receiver = {
        .step_cdb = 10, .floor_cdb = RFADE_NO_FLOOR_CDB, .ceiling_cdb = RFADE_NO_CEILING_CDB};
    struct rfade_separate_settings how = {1.0, RFADE_DEFAULT_WINDOW_WAVELENGTHS,
                                          RFADE_DEFAULT_BLOCK_WAVELENGTHS};
    struct rfade_track_reading *track;
    struct rfade_ray ray;
    double k = 4.0;
    double weight = 0.0;
    size_t count;

    settings.length_m = 300.0; /* one metre is a wavelength */
    settings.k = &k;
    settings.ray_angle_deg = angle_deg;
    settings.seed = seed;
    assert_int_equal(rfade_simulate_drive(&settings, &readings, &count), RFADE_OK);
    track = calloc(count, sizeof *track);
    assert_non_null(track);
    for (size_t i = 0; i < count; i++) {
        track[i].time_us = (int64_t)i;
        track[i].travel_mm = llround(1000.0 * readings[i].distance_m);
        track[i].level_cdb = (int32_t)(10 * lround(10.0 * readings[i].power_dbm));
    }
    assert_int_equal(rfade_separate(track, count, &receiver, &how, &separation), RFADE_OK);
    ray = rfade_ray_from_lags(&separation.traversals[0].sampling, k);
    for (int i = 0; i < RFADE_RAY_DIRECTIONS; i++) {
        double about = 90.0 * i / (RFADE_RAY_DIRECTIONS - 1) - angle_deg;

        weight += fabs(about) <= 20.0 ? ray.weight[i] : 0.0;
    }
    rfade_separation_clear(&separation);
    free(track);
    free(readings);
    return weight;
}

static void lags_tell_the_rays_direction(void **state)
{
    const double angles_deg[] = {0.0, 45.0, 90.0};

    (void)state;
    for (size_t i = 0; i < sizeof angles_deg / sizeof angles_deg[0]; i++) {
        for (uint64_t seed = 1; seed <= 5; seed++) {
            assert_true(weight_near(angles_deg[i], seed) > 0.9);
        }
    }
}

static void nothing_known_is_a_ray_across(void **state)
{
    struct rfade_sampling_sums nothing = {0};
    struct rfade_ray ray = rfade_ray_from_lags(&nothing, 4.0);

    (void)state;
    assert_true(ray.weight[RFADE_RAY_DIRECTIONS - 1] == 1.0);
}

static void outside_the_domain_is_nan(void **state)
{
    (void)state;
    assert_true(isnan(rfade_stretch_mean_variance(0.0, 1.0, &ACROSS)));
    assert_true(isnan(rfade_stretch_mean_variance(NAN, 1.0, &ACROSS)));
    assert_true(isnan(rfade_stretch_mean_variance(10.0, -1.0, &ACROSS)));
    assert_true(isnan(rfade_window_narrowing(3.9, 1.0, &ACROSS)));
    assert_true(isnan(rfade_window_narrowing(2001.0, 1.0, &ACROSS)));
    assert_true(isnan(rfade_window_narrowing(40.0, NAN, &ACROSS)));

    struct rfade_lag_means means;
    assert_int_equal(rfade_lag_means(0.0, &means), RFADE_DOMAIN);
    assert_true(isnan(means.length_wavelengths));
    assert_int_equal(rfade_lag_means(NAN, &means), RFADE_DOMAIN);
}

/* A stretch that is next to nothing has the variance of the power itself. */
static void a_short_stretch_has_the_variance_of_power(void **state)
{
    (void)state;
    assert_true(fabs(rfade_stretch_mean_variance(1e-6, 0.0, &ACROSS) - 1.0) < 1e-9);
    assert_true(fabs(rfade_stretch_mean_variance(1e-6, 4.0, &ACROSS) - 9.0 / 25.0) < 1e-9);
}

/* Sums of a power and of the same divided by the mean of a window around it. */
struct moments {
    double plain[2];
    double divided[2];
    double count;
};

static double normalised_variance(const double sum[2], double count)
{
    return count * sum[1] / (sum[0] * sum[0]) - 1.0;
}

static void add_windows(const struct rfade_drive_reading *readings, size_t count, size_t half,
                        struct moments *moments)
{
    double window = 0.0;
    double width = 2.0 * (double)half + 1.0;

    for (size_t i = 0; i < count; i++) {
        window += pow(10.0, readings[i].power_dbm / 10.0);
        if (i > 2 * half) {
            double power = pow(10.0, readings[i - half].power_dbm / 10.0);
            double ratio;

            window -= pow(10.0, readings[i - 2 * half - 1].power_dbm / 10.0);
            ratio = power * width / window;
            moments->plain[0] += power;
            moments->plain[1] += power * power;
            moments->divided[0] += ratio;
            moments->divided[1] += ratio * ratio;
            moments->count += 1.0;
        }
    }
}

/* Simulated drives of 400 wavelengths, divided by a mean over 40, ten readings in each. */
static void check_narrowing_by_simulation(double k)
{
    struct rfade_drive_settings settings = plain_drive();
    struct moments moments = {.count = 0.0};
    double share;

    settings.length_m = 400.0;
    settings.mean_level_dbm = 0.0;
    settings.k = &k;
    for (settings.seed = 1; settings.seed <= 300; settings.seed++) {
        struct rfade_drive_reading *readings;
        size_t count;

        assert_int_equal(rfade_simulate_drive(&settings, &readings, &count), RFADE_OK);
        add_windows(readings, count, 200, &moments);
        free(readings);
    }
    share = 1.0 - normalised_variance(moments.divided, moments.count) /
                      normalised_variance(moments.plain, moments.count);
    assert_true(fabs(share / rfade_window_narrowing(40.0, k, &ACROSS) - 1.0) < 0.2);
}

static void narrowing_is_what_drives_show(void **state)
{
    (void)state;
    check_narrowing_by_simulation(0.0);
    check_narrowing_by_simulation(1.0);
    check_narrowing_by_simulation(4.0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(variance_of_a_stretch_matches_quadrature),
        cmocka_unit_test(narrowing_matches_quadrature),
        cmocka_unit_test(log_narrowing_follows_from_the_other_two),
        cmocka_unit_test(a_ray_at_an_angle_matches_quadrature),
        cmocka_unit_test(lags_tell_the_rays_direction),
        cmocka_unit_test(nothing_known_is_a_ray_across),
        cmocka_unit_test(outside_the_domain_is_nan),
        cmocka_unit_test(a_short_stretch_has_the_variance_of_power),
        cmocka_unit_test(narrowing_is_what_drives_show),
    };

    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
