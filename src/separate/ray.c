/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * The direction of the direct ray from the autocovariance of power. Under isotropic scatter
 * and a ray whose direction against the road has the cosine c it is, at u wavelengths,
 *   C(u) = [2K J0(2 pi u) cos(2 pi u c) + J0(2 pi u)^2]/(1 + K)^2     [Clarke 1968],
 * so a few wavelengths already tell c, from ripples that no local mean makes. What slow
 * variation of a mean over a long way follows from c can't be seen directly: it looks like
 * the local mean.
 *
 * Each measured product is about normal with the variance
 *   (1/L) integral of C(v)^2 + C(v + u) C(v - u) dv             [Bartlett 1946]
 * of which the first part, integral of C^2 over all lags, is kept. Neighbouring lags are not
 * independent; the sum of their squared deviations is divided by how many of them repeat one
 * another (a composite likelihood [Varin, Reid and Firth 2011]).
 */
#include "separate/ray.h"

#include <gsl/gsl_math.h>
#include <gsl/gsl_sf_bessel.h>
#include <math.h>

#include "routefade/separate.h"

/* Integrals over all lags of the square of J0 cos, a logarithm cut at the segment's usual
 * length, and of J0^4: in wavelengths. */
static const double correlated_wavelengths = 0.6;
static const double lags_alike = 2.0;

/* Prior: streets lead waves along them, so half goes to a ray along the road, and the rest
 * evenly to the other directions. */
static const double prior_along = 0.5;

double rfade_ray_cosine(int i)
{
    return i == RFADE_RAY_DIRECTIONS - 1 ? 0.0
                                         : cos(0.5 * M_PI * i / (RFADE_RAY_DIRECTIONS - 1));
}

struct rfade_ray rfade_ray_at(double angle_deg)
{
    struct rfade_ray ray = {{0.0}};
    double about = fabs(remainder(angle_deg, 180.0)); /* [0, 90] */

    ray.weight[(int)lround(about / 90.0 * (RFADE_RAY_DIRECTIONS - 1))] = 1.0;
    return ray;
}

/* Adds what one lag says to the log-likelihood of each direction. */
static void judge_lag(const struct rfade_sampling_sums *sums, int lag, double k,
                      double log_likelihood[RFADE_RAY_DIRECTIONS])
{
    double mm = (double)sums->lag_mm[lag];
    double wavelength_mm =
        1e-3 * (double)sums->wavelength_um_readings / (double)sums->window_count;
    double s = 1.0 / (1.0 + k);
    double u = (double)sums->lag_distance[lag] / mm / wavelength_mm;
    double j = gsl_sf_bessel_J0(2.0 * M_PI * u);
    double power_variance = s * s * (1.0 + 2.0 * k);
    double variance = lags_alike * power_variance * power_variance * correlated_wavelengths *
                      wavelength_mm / mm;
    double measured = 1e-6 * (double)sums->lag_product[lag] / mm;

    for (int i = 0; i < RFADE_RAY_DIRECTIONS; i++) {
        double r = j * cos(2.0 * M_PI * u * rfade_ray_cosine(i));
        double apart = measured - s * s * (2.0 * k * r + j * j);

        log_likelihood[i] -= 0.5 * apart * apart / variance;
    }
}

struct rfade_ray rfade_ray_from_lags(const struct rfade_sampling_sums *sums, double k)
{
    double log_weight[RFADE_RAY_DIRECTIONS];
    struct rfade_ray ray = {{0.0}};
    double best = -INFINITY;
    double sum = 0.0;

    if (!(k > 0.0 && k <= 1e9) || sums->window_count <= 0) {
        return rfade_ray_at(90.0);
    }
    for (int i = 0; i < RFADE_RAY_DIRECTIONS; i++) {
        log_weight[i] =
            log(i == 0 ? prior_along : (1.0 - prior_along) / (RFADE_RAY_DIRECTIONS - 1));
    }
    for (int lag = 0; lag < RFADE_LAGS; lag++) {
        if (sums->lag_mm[lag] > 0) {
            judge_lag(sums, lag, k, log_weight);
        }
    }
    for (int i = 0; i < RFADE_RAY_DIRECTIONS; i++) {
        best = fmax(best, log_weight[i]);
    }
    for (int i = 0; i < RFADE_RAY_DIRECTIONS; i++) {
        ray.weight[i] = exp(log_weight[i] - best);
        sum += ray.weight[i];
    }
    for (int i = 0; i < RFADE_RAY_DIRECTIONS; i++) {
        ray.weight[i] /= sum;
    }
    return ray;
}
