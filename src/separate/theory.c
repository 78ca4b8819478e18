/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Means over travel under isotropic scatter and a direct ray whose direction against the road
 * has the cosine c. With scatter of power s = 1/(1 + K), ray of power a = K s,
 * J = J0(2 pi u) and R = J cos(2 pi u c) the power y has
 *   cov(y(0), y(u))   = 2 a s R + s^2 J^2                          [Clarke 1968]
 *   cov(y(0)^2, y(u)) = (4 a^2 s + 8 a s^2) R + (4 a s^2 + 4 s^3) J^2,
 * the second from the moments of Gaussian variables, as E[y(u) | scatter at 0] =
 * 1 + R r + J^2 (q - s) and a part odd in the scatter's quadrature, r = 2 sqrt(a) Re(scatter
 * turned with the ray), q = |scatter|^2. With c = 1, along the road, R is asymptotically
 * cos(2 pi u - pi/4) cos(2 pi u)/(pi sqrt(u)), whose mean over a period is positive: scatter
 * from ahead moves in step with the ray, and means over travel settle but slowly.
 */
#include <gsl/gsl_integration.h>
#include <gsl/gsl_math.h>
#include <gsl/gsl_sf_bessel.h>
#include <math.h>
#include <stdbool.h>

#include "routefade/separate.h"
#include "separate/ray.h"

/* Up to here the oscillations are followed one by one; beyond, J0^2 is replaced by its mean
 * 1/(2 pi^2 u), and the integral of J0 cos by that to infinity, 1/(2 pi sin), [AMS 55,
 * 11.4.39]: relative errors stay below 2e-5 for a ray across the road. Along it J0 cos is
 * replaced by its mean 1/(pi sqrt(8 u)). */
static const double followed_wavelengths = 1000.0;

enum { GAUSS_POINTS = 16 };

/* Means of R and J^2 over [0, length]: plain, and with weight 2 (1 - u/length). */
struct lag_means {
    double plain[2];
    double falling[2];
};

/* Mean over the directions of cos(2 pi u c). */
static double ray_turn(const struct rfade_ray *ray, double u)
{
    double sum = 0.0;

    for (int i = 0; i < RFADE_RAY_DIRECTIONS; i++) {
        if (ray->weight[i] > 0.0) {
            sum += ray->weight[i] * cos(2.0 * M_PI * u * rfade_ray_cosine(i));
        }
    }
    return sum;
}

/* Panels of half a wavelength, on each of which the integrand is nearly a polynomial. */
static bool integrate(double length, double until, const struct rfade_ray *ray,
                      struct lag_means *means)
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
            double r;

            gsl_integration_glfixed_point((double)panel * width, (double)(panel + 1) * width, i,
                                          &u, &weight, table);
            j = gsl_sf_bessel_J0(2.0 * M_PI * u);
            r = j * ray_turn(ray, u);
            weight /= length;
            means->plain[0] += weight * r;
            means->plain[1] += weight * j * j;
            means->falling[0] += 2.0 * weight * (1.0 - u / length) * r;
            means->falling[1] += 2.0 * weight * (1.0 - u / length) * j * j;
        }
    }
    gsl_integration_glfixed_table_free(table);
    return true;
}

/* The falling mean of R over a length beyond what was followed. */
static double long_falling_mean(double length, double until, const struct rfade_ray *ray,
                                double along)
{
    double rest = sqrt(0.5) / (M_PI * length) *
                  (2.0 * (sqrt(length) - sqrt(until)) -
                   2.0 / 3.0 * (pow(length, 1.5) - pow(until, 1.5)) / length);
    double sum = ray->weight[0] * (along + rest);

    for (int i = 1; i < RFADE_RAY_DIRECTIONS; i++) {
        double cosine = rfade_ray_cosine(i);

        sum += ray->weight[i] / (M_PI * length * sqrt(1.0 - cosine * cosine));
    }
    return sum;
}

static bool lag_means(double length, const struct rfade_ray *ray, struct lag_means *means)
{
    double until = fmin(length, followed_wavelengths);
    bool cut = length > until;
    struct rfade_ray along = rfade_ray_at(0.0);

    *means = (struct lag_means){{0.0, 0.0}, {0.0, 0.0}};
    if (!integrate(length, until, cut ? &along : ray, means)) {
        return false;
    }
    if (cut) {
        means->falling[0] = long_falling_mean(length, until, ray, means->falling[0]);
        means->falling[1] +=
            (log(length / until) - 1.0 + until / length) / (M_PI * M_PI * length);
    }
    return true;
}

static bool valid(double length, double low, double high, double k)
{
    return length >= low && length <= high && k >= 0.0 && k <= 1e9;
}

double rfade_stretch_mean_variance(double length_wavelengths, double k,
                                   const struct rfade_ray *ray)
{
    struct lag_means means;

    if (!valid(length_wavelengths, 1e-9, 1e12, k) ||
        !lag_means(length_wavelengths, ray, &means)) {
        return NAN;
    }
    double s = 1.0 / (1.0 + k);
    return 2.0 * k * s * s * means.falling[0] + s * s * means.falling[1];
}

/*
 * x = y/m with the window's mean m = 1 + d; to first order in 1/window
 *   E[x] = 1 - cov(y, d) + var(d),  E[x^2] = E[y^2] - 2 cov(y^2, d) + 3 E[y^2] var(d),
 * from which var(x)/E[x]^2 = V - [2 cov(y^2, d) - 2 E[y^2] cov(y, d) - E[y^2] var(d)] with
 * V = var(y).
 */
double rfade_window_narrowing(double window_wavelengths, double k, const struct rfade_ray *ray)
{
    struct lag_means half;
    double with_mean;
    double square_with_mean;
    double mean_variance;

    if (!valid(window_wavelengths, 4.0, 2.0 * followed_wavelengths, k) ||
        !lag_means(0.5 * window_wavelengths, ray, &half)) {
        return NAN;
    }
    double s = 1.0 / (1.0 + k);
    double a = k * s;
    double variance = s * s * (1.0 + 2.0 * k);
    mean_variance = rfade_stretch_mean_variance(window_wavelengths, k, ray);
    with_mean = 2.0 * a * s * half.plain[0] + s * s * half.plain[1];
    square_with_mean = (4.0 * a * a * s + 8.0 * a * s * s) * half.plain[0] +
                       (4.0 * a * s * s + 4.0 * s * s * s) * half.plain[1];
    return (2.0 * square_with_mean - 2.0 * (1.0 + variance) * with_mean -
            (1.0 + variance) * mean_variance) /
           variance;
}

/* ln E[x] = -cov(y, d) + var(d) and E[ln x] = E[ln y] + var(d)/2 to the same order. */
double rfade_window_log_narrowing(double window_wavelengths, double k,
                                  const struct rfade_ray *ray)
{
    struct lag_means half;

    if (!valid(window_wavelengths, 4.0, 2.0 * followed_wavelengths, k) ||
        !lag_means(0.5 * window_wavelengths, ray, &half)) {
        return NAN;
    }
    double s = 1.0 / (1.0 + k);
    return 2.0 * k * s * s * half.plain[0] + s * s * half.plain[1] -
           0.5 * rfade_stretch_mean_variance(window_wavelengths, k, ray);
}
