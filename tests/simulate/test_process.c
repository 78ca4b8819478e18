/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The Gaussian process against the autocorrelations it is meant to have. */
#include <gsl/gsl_errno.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include "simulate/process.h"

enum { DRAWS = 60, PLACES = 2000 };

static const double wavelength_m = 0.656;
static const double two_pi = 6.283185307179586;

struct lag {
    double argument; /* 2 pi d / wavelength, or d / decorrelation */
    double expected;
};

/* AMS 55, Table 9.1, J0(x). The last is far beyond any correlation: J0(6283.19) = 0.007117
 * (mpmath 1.2.1, besselj(0, 2000*pi)). */
static const struct lag clarke_lags[] = {
    {0.0, 1.0},           {1.0, 0.7651976866},   {2.0, 0.2238907791},
    {5.0, -0.1775967713}, {10.0, -0.2459357645}, {2000.0 * 3.141592653589793, 0.0071}};

/* exp(-x^2), AMS 55, Table 4.4. */
static const struct lag gaussian_lags[] = {
    {0.0, 1.0}, {0.5, 0.7788007831}, {1.0, 0.3678794412}, {2.0, 0.0183156389}};

/* The mean over the draws of the correlation at a lag has to meet the expected value within
 * 4.5 of its own standard errors. */
static void check_lag(rfade_spectrum *spectrum, double scale_m, double lag_m, double spacing_m,
                      double expected)
{
    gsl_rng *generator = gsl_rng_alloc(gsl_rng_mt19937);
    double sum = 0.0;
    double square = 0.0;

    for (int draw = 0; draw < DRAWS; draw++) {
        struct rfade_process process;
        double mean = 0.0;

        assert_int_equal(rfade_process_create(&process, generator, spectrum, scale_m,
                                              PLACES * spacing_m + lag_m),
                         RFADE_OK);
        for (int i = 0; i < PLACES; i++) {
            double here[2];
            double there[2];

            rfade_process_at(&process, i * spacing_m, here);
            rfade_process_at(&process, i * spacing_m + lag_m, there);
            mean += (here[0] * there[0] + here[1] * there[1]) / PLACES;
        }
        sum += mean / DRAWS;
        square += mean * mean / DRAWS;
        rfade_process_destroy(&process);
    }
    assert_true(fabs(sum - expected) < 4.5 * sqrt((square - sum * sum) / DRAWS));
    gsl_rng_free(generator);
}

static void scatter_is_correlated_as_clarke_says(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof clarke_lags / sizeof clarke_lags[0]; i++) {
        check_lag(rfade_spectrum_clarke, wavelength_m,
                  clarke_lags[i].argument * wavelength_m / two_pi, 0.2 * wavelength_m,
                  clarke_lags[i].expected);
    }
}

static void smooth_process_has_gaussian_correlation(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof gaussian_lags / sizeof gaussian_lags[0]; i++) {
        check_lag(rfade_spectrum_gaussian, 60.0, gaussian_lags[i].argument * 60.0, 20.0,
                  gaussian_lags[i].expected);
    }
}

/* A sinusoid at the highest frequency of Clarke's spectrum, the worst for interpolation. */
static void interpolation_keeps_its_accuracy(void **state)
{
    enum { COUNT = 64 };
    double values[2 * COUNT];
    struct rfade_process process = {.values = values, .count = COUNT, .spacing_m = 1.0 / 16.0};

    (void)state;
    for (size_t i = 0; i < COUNT; i++) {
        values[2 * i] = cos(two_pi * (double)i / 16.0);
        values[2 * i + 1] = sin(two_pi * (double)i / 16.0);
    }
    for (int i = 0; i < 1000; i++) {
        double distance_m = 0.0037 * i;
        double value[2];

        rfade_process_at(&process, distance_m, value);
        assert_true(fabs(value[0] - cos(two_pi * distance_m)) < 1e-6);
        assert_true(fabs(value[1] - sin(two_pi * distance_m)) < 1e-6);
    }
}

static void refuses_what_does_not_fit(void **state)
{
    gsl_rng *generator = gsl_rng_alloc(gsl_rng_mt19937);
    struct rfade_process process;

    (void)state;
    assert_int_equal(
        rfade_process_create(&process, generator, rfade_spectrum_clarke, 0.01, 1e6),
        RFADE_DOMAIN);
    assert_null(process.values);
    gsl_rng_free(generator);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(scatter_is_correlated_as_clarke_says),
        cmocka_unit_test(smooth_process_has_gaussian_correlation),
        cmocka_unit_test(interpolation_keeps_its_accuracy),
        cmocka_unit_test(refuses_what_does_not_fit),
    };

    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
