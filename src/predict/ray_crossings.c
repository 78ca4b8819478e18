/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Level crossings of a direct ray of amplitude A with a Doppler shift of its own, plus
 * isotropic scatter of power s [Rice, S. O., "Statistical properties of a sine wave plus random
 * noise", Bell System Technical Journal 27 (1948), section 5: a sine wave off the middle of the
 * noise's band].
 *
 * Seen from the ray, the scatter g turns with -w, w the ray's angular Doppler shift:
 * g' = -j w g + v, v Gaussian, independent of g, of variance sigma^2 = s (2 pi)^2/4 in either
 * component per wavelength. With A + g = r exp(j phi) the slope of the amplitude is
 *     r' = Re(exp(-j phi) g') = w A sin(phi) + normal(0, sigma),
 * and p(r, phi) is proportional to exp(z cos(phi)), z = 2 A r/s. As phi and -phi are as likely,
 * the mean positive slope is sigma/sqrt(2 pi) times the mean over phi in (0, pi) of
 *     g(t) = exp(-t^2/2) + sqrt(pi/2) t erf(t/sqrt(2)),  t = w A sin(phi)/sigma.
 * With w = 2 pi c, c the cosine of the ray's direction, and A^2/s = K: t = 2 c sqrt(K)
 * sin(phi). The integrand is periodic, even and analytic: the trapezoidal rule converges
 * exponentially (L. N. Trefethen and J. A. C. Weideman, SIAM Review 56, 2014).
 */
#include <gsl/gsl_math.h>
#include <math.h>

#include "model/model.h"
#include "routefade/fade_timing.h"

static const double k_max = 1e5;
static const double level_max_db = 1000.0;

/* Weights below exp(-40) of the greatest are left out. */
static const double negligible_exponent = 40.0;
/* Points on the scale on which weight and slope vary: three more change nothing. */
static const double points_per_scale = 5.0;

static double mean_slope(double t)
{
    return exp(-0.5 * t * t) + M_SQRTPI * M_SQRT1_2 * t * erf(t * M_SQRT1_2);
}

enum rfade_status rfade_ray_crossing_factor(double k, double ray_cosine, double x_db,
                                            double *factor)
{
    *factor = NAN;
    if (!(k >= 0.0 && k <= k_max) || !(fabs(ray_cosine) <= 1.0) ||
        !(fabs(x_db) <= level_max_db)) {
        return RFADE_DOMAIN;
    }
    const double z = 2.0 * sqrt(k * (1.0 + k)) * exp(0.5 * rfade_log_ratio(x_db));
    const double turn = 2.0 * fabs(ray_cosine) * sqrt(k);
    /* 1 - cos(phi) = 2 sin^2(phi/2) */
    const double reach = 0.5 * negligible_exponent;
    const double end = reach < z ? 2.0 * asin(sqrt(reach / z)) : M_PI;
    const double scale = 1.0 / fmax(1.0, fmax(turn, sqrt(z)));
    const int points = (int)ceil(end * points_per_scale / scale);
    double weights = 1.0;
    double sum = 1.0;
    for (int i = 1; i <= points; i++) {
        const double phi = end * i / points;
        const double half_sine = sin(0.5 * phi);
        const double weight = exp(-2.0 * z * half_sine * half_sine) * (i < points ? 2.0 : 1.0);
        weights += weight;
        sum += weight * mean_slope(turn * sin(phi));
    }
    *factor = sum / weights;
    return RFADE_OK;
}
