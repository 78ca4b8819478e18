/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Means over travel under isotropic scatter and a direct ray across the road. With scatter of
 * power s = 1/(1 + K), ray of power a = K s and J = J0(2 pi u) the power y has
 *   cov(y(0), y(u))   = 2 a s J + s^2 J^2                          [Clarke 1968]
 *   cov(y(0)^2, y(u)) = (4 a^2 s + 8 a s^2) J + (4 a s^2 + 4 s^3) J^2,
 * the second from the moments of Gaussian variables, as E[y(u) | scatter at 0] =
 * 1 + J r + J^2 (q - s), r = 2 sqrt(a) Re(scatter), q = |scatter|^2.
 */
#include <gsl/gsl_integration.h>
#include <gsl/gsl_math.h>
#include <gsl/gsl_sf_bessel.h>
#include <math.h>
#include <stdbool.h>

#include "routefade/separate.h"

/* Up to here the oscillations are followed one by one; beyond, J0^2 is replaced by its mean
 * 1/(2 pi^2 u), and the integral of J0 by that to infinity, 1/(2 pi): relative errors stay
 * below 2e-5. */
static const double followed_wavelengths = 1000.0;

enum { GAUSS_POINTS = 16 };

/* Means of J0 and J0^2 over [0, length]: plain, and with weight 2 (1 - u/length). */
struct lag_means {
    double plain[2];
    double falling[2];
};

/* Panels of half a wavelength, on each of which the integrand is nearly a polynomial. */
static bool integrate(double length, double until, struct lag_means *means)
{
    gsl_integration_glfixed_table *table = gsl_integration_glfixed_table_alloc(GAUSS_POINTS);
    size_t panels = (size_t)ceil(2.0 * until);
    double width = until / (double)panels;

    if (table == NULL) {
        return false;
    }
    for (size_t panel = 0; panel < panels; panel++) {
        for (size_t i = 0; i < GAUSS_POINTS; i++) {
            double u;
            double weight;
            double j;

            gsl_integration_glfixed_point((double)panel * width, (double)(panel + 1) * width, i,
                                          &u, &weight, table);
            j = gsl_sf_bessel_J0(2.0 * M_PI * u);
            weight /= length;
            means->plain[0] += weight * j;
            means->plain[1] += weight * j * j;
            means->falling[0] += 2.0 * weight * (1.0 - u / length) * j;
            means->falling[1] += 2.0 * weight * (1.0 - u / length) * j * j;
        }
    }
    gsl_integration_glfixed_table_free(table);
    return true;
}

static bool lag_means(double length, struct lag_means *means)
{
    double until = fmin(length, followed_wavelengths);

    *means = (struct lag_means){{0.0, 0.0}, {0.0, 0.0}};
    if (!integrate(length, until, means)) {
        return false;
    }
    if (length > until) {
        means->falling[0] = 1.0 / (M_PI * length);
        means->falling[1] +=
            (log(length / until) - 1.0 + until / length) / (M_PI * M_PI * length);
    }
    return true;
}

static bool valid(double length, double low, double high, double k)
{
    return length >= low && length <= high && k >= 0.0 && k <= 1e9;
}

double rfade_stretch_mean_variance(double length_wavelengths, double k)
{
    struct lag_means means;
    double s = 1.0 / (1.0 + k);

    if (!valid(length_wavelengths, 1e-9, 1e12, k) || !lag_means(length_wavelengths, &means)) {
        return NAN;
    }
    return 2.0 * k * s * s * means.falling[0] + s * s * means.falling[1];
}

/*
 * x = y/m with the window's mean m = 1 + d; to first order in 1/window
 *   E[x] = 1 - cov(y, d) + var(d),  E[x^2] = E[y^2] - 2 cov(y^2, d) + 3 E[y^2] var(d),
 * from which var(x)/E[x]^2 = V - [2 cov(y^2, d) - 2 E[y^2] cov(y, d) - E[y^2] var(d)] with
 * V = var(y).
 */
double rfade_window_narrowing(double window_wavelengths, double k)
{
    struct lag_means half;
    double s = 1.0 / (1.0 + k);
    double a = k * s;
    double variance = s * s * (1.0 + 2.0 * k);
    double with_mean;
    double square_with_mean;
    double mean_variance;

    if (!valid(window_wavelengths, 4.0, 2.0 * followed_wavelengths, k) ||
        !lag_means(0.5 * window_wavelengths, &half)) {
        return NAN;
    }
    mean_variance = rfade_stretch_mean_variance(window_wavelengths, k);
    with_mean = 2.0 * a * s * half.plain[0] + s * s * half.plain[1];
    square_with_mean = (4.0 * a * a * s + 8.0 * a * s * s) * half.plain[0] +
                       (4.0 * a * s * s + 4.0 * s * s * s) * half.plain[1];
    return (2.0 * square_with_mean - 2.0 * (1.0 + variance) * with_mean -
            (1.0 + variance) * mean_variance) /
           variance;
}
