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

/* In a panel of at most one wavelength, in which the integrand turns by at most two periods:
 * the rule's remainder [AMS 55, 25.4.30] is below 1e-15. */
enum { GAUSS_POINTS = 16 };

/* Where the nodes of a panel lie, and how far each direction's cosine turns up to there. */
struct rule {
    double width;
    double place[GAUSS_POINTS];
    double weight[GAUSS_POINTS];
    double cosine[GAUSS_POINTS][RFADE_RAY_DIRECTIONS];
    double sine[GAUSS_POINTS][RFADE_RAY_DIRECTIONS];
};

static bool make_rule(double width, struct rule *rule)
{
    gsl_integration_glfixed_table *table = gsl_integration_glfixed_table_alloc(GAUSS_POINTS);

    if (table == NULL) {
        return false;
    }
    rule->width = width;
    for (size_t node = 0; node < GAUSS_POINTS; node++) {
        gsl_integration_glfixed_point(0.0, width, node, &rule->place[node], &rule->weight[node],
                                      table);
        for (int i = 0; i < RFADE_RAY_DIRECTIONS; i++) {
            double turn = 2.0 * M_PI * rule->place[node] * rfade_ray_cosine(i);

            rule->cosine[node][i] = cos(turn);
            rule->sine[node][i] = sin(turn);
        }
    }
    gsl_integration_glfixed_table_free(table);
    return true;
}

/* All directions share J; their cosines come from the panel's start by the sum of angles. */
static void add_panel(const struct rule *rule, double start, struct rfade_lag_means *means)
{
    double cosine[RFADE_RAY_DIRECTIONS];
    double sine[RFADE_RAY_DIRECTIONS];

    for (int i = 0; i < RFADE_RAY_DIRECTIONS; i++) {
        double turn = 2.0 * M_PI * start * rfade_ray_cosine(i);

        cosine[i] = cos(turn);
        sine[i] = sin(turn);
    }
    for (size_t node = 0; node < GAUSS_POINTS; node++) {
        double u = start + rule->place[node];
        double plain = rule->weight[node] / means->length_wavelengths;
        double falling = 2.0 * plain * (1.0 - u / means->length_wavelengths);
        double j = gsl_sf_bessel_J0(2.0 * M_PI * u);

        means->plain_scatter += plain * j * j;
        means->falling_scatter += falling * j * j;
        for (int i = 0; i < RFADE_RAY_DIRECTIONS; i++) {
            double r = j * (cosine[i] * rule->cosine[node][i] - sine[i] * rule->sine[node][i]);

            means->plain_ray[i] += plain * r;
            means->falling_ray[i] += falling * r;
        }
    }
}

/* The falling means over a length beyond what was followed. */
static void extend(double until, struct rfade_lag_means *means)
{
    double length = means->length_wavelengths;
    double rest = sqrt(0.5) / (M_PI * length) *
                  (2.0 * (sqrt(length) - sqrt(until)) -
                   2.0 / 3.0 * (pow(length, 1.5) - pow(until, 1.5)) / length);

    means->falling_ray[0] += rest;
    for (int i = 1; i < RFADE_RAY_DIRECTIONS; i++) {
        double cosine = rfade_ray_cosine(i);

        means->falling_ray[i] = 1.0 / (M_PI * length * sqrt(1.0 - cosine * cosine));
    }
    means->falling_scatter +=
        (log(length / until) - 1.0 + until / length) / (M_PI * M_PI * length);
}

enum rfade_status rfade_lag_means(double length_wavelengths, struct rfade_lag_means *means)
{
    struct rule rule;

    *means = (struct rfade_lag_means){.length_wavelengths = NAN};
    if (!(length_wavelengths >= 1e-9 && length_wavelengths <= 1e12)) {
        return RFADE_DOMAIN;
    }
    double until = fmin(length_wavelengths, followed_wavelengths);
    int panels = (int)ceil(until);

    if (!make_rule(until / panels, &rule)) {
        return RFADE_NO_MEMORY;
    }
    means->length_wavelengths = length_wavelengths;
    for (int panel = 0; panel < panels; panel++) {
        add_panel(&rule, panel * rule.width, means);
    }
    if (length_wavelengths > until) {
        extend(until, means);
    }
    return RFADE_OK;
}

/* Mean over the directions. */
static double directed(const double means[RFADE_RAY_DIRECTIONS], const struct rfade_ray *ray)
{
    double sum = 0.0;

    for (int i = 0; i < RFADE_RAY_DIRECTIONS; i++) {
        sum += ray->weight[i] * means[i];
    }
    return sum;
}

static bool valid(double k)
{
    return k >= 0.0 && k <= 1e9;
}

double rfade_lag_mean_variance(const struct rfade_lag_means *stretch, double k,
                               const struct rfade_ray *ray)
{
    if (!valid(k)) {
        return NAN;
    }
    double s = 1.0 / (1.0 + k);
    return 2.0 * k * s * s * directed(stretch->falling_ray, ray) +
           s * s * stretch->falling_scatter;
}

double rfade_stretch_mean_variance(double length_wavelengths, double k,
                                   const struct rfade_ray *ray)
{
    struct rfade_lag_means stretch;

    return rfade_lag_means(length_wavelengths, &stretch) == RFADE_OK
               ? rfade_lag_mean_variance(&stretch, k, ray)
               : NAN;
}

/*
 * x = y/m with the window's mean m = 1 + d; to first order in 1/window
 *   E[x] = 1 - cov(y, d) + var(d),  E[x^2] = E[y^2] - 2 cov(y^2, d) + 3 E[y^2] var(d),
 * from which var(x)/E[x]^2 = V - [2 cov(y^2, d) - 2 E[y^2] cov(y, d) - E[y^2] var(d)] with
 * V = var(y); ln E[x] = -cov(y, d) + var(d) and E[ln x] = E[ln y] + var(d)/2.
 */
struct rfade_narrowing rfade_lag_narrowing(const struct rfade_lag_means *window,
                                           const struct rfade_lag_means *half, double k,
                                           const struct rfade_ray *ray)
{
    if (!valid(k)) {
        return (struct rfade_narrowing){NAN, NAN};
    }
    double mean_variance = rfade_lag_mean_variance(window, k, ray);
    double s = 1.0 / (1.0 + k);
    double a = k * s;
    double variance = s * s * (1.0 + 2.0 * k);
    double turned = directed(half->plain_ray, ray);
    double with_mean = 2.0 * a * s * turned + s * s * half->plain_scatter;
    double square_with_mean = (4.0 * a * a * s + 8.0 * a * s * s) * turned +
                              (4.0 * a * s * s + 4.0 * s * s * s) * half->plain_scatter;

    return (struct rfade_narrowing){.power = (2.0 * square_with_mean -
                                              2.0 * (1.0 + variance) * with_mean -
                                              (1.0 + variance) * mean_variance) /
                                             variance,
                                    .log = with_mean - 0.5 * mean_variance};
}

static struct rfade_narrowing narrowing(double window_wavelengths, double k,
                                        const struct rfade_ray *ray)
{
    struct rfade_lag_means window;
    struct rfade_lag_means half;

    if (!(window_wavelengths >= 4.0 && window_wavelengths <= 2.0 * followed_wavelengths) ||
        rfade_lag_means(window_wavelengths, &window) != RFADE_OK ||
        rfade_lag_means(0.5 * window_wavelengths, &half) != RFADE_OK) {
        return (struct rfade_narrowing){NAN, NAN};
    }
    return rfade_lag_narrowing(&window, &half, k, ray);
}

double rfade_window_narrowing(double window_wavelengths, double k, const struct rfade_ray *ray)
{
    return narrowing(window_wavelengths, k, ray).power;
}

double rfade_window_log_narrowing(double window_wavelengths, double k,
                                  const struct rfade_ray *ray)
{
    return narrowing(window_wavelengths, k, ray).log;
}
