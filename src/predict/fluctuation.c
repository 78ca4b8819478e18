/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * The share of travel in fades is the mean of an indicator of the scatter, a complex normal
 * process. In Hermite polynomials of it the parts of each order n are correlated by
 * J0(2 pi u)^n [Clarke 1968; Price 1958]; so the share's variance over a length L is the sum
 * over the orders of their part of p(1 - p) times the mean of J0^n with weight 2 (1 - u/L).
 * Order 1 is what the scatter in step with the ray moves; its mean is 1/(pi L). Order 2 is
 * correlated over long ways: its mean is (ln(8 * 2 pi L) + Euler's constant - 1)/(pi^2 L).
 * With scatter of power 1, a ray of amplitude a and the level's amplitude b the outage F and
 *   F' = -2 b exp(-a^2 - b^2) I1(2 a b)      [Marcum 1960]
 * give the parts F'^2/2 and (F''^2 + (F'/a)^2)/8.
 *
 * What is left, R, are fades by themselves. They begin at the rate N of level crossings and
 * have the mean length R/N, and lengths as those of a normal process beyond a high level, of
 * Rayleigh's distribution [Rice 1958]: their mean square is 4/pi of the mean squared, and the
 * variance 4/pi R^2/(N L).
 */
#include "predict/fluctuation.h"

#include <gsl/gsl_math.h>
#include <gsl/gsl_sf_bessel.h>
#include <math.h>

#include "routefade/stretch.h"

/* Below it F'/a is taken at its limit. */
static const double LEAST_RAY = 1e-6;

static const double SQUARE_OF_LENGTHS = 4.0 / M_PI;

/* Parts of p(1 - p). */
struct parts {
    double first;
    double second;
};

static struct parts find_parts(double k, double x_db)
{
    double a = sqrt(k);
    double b = sqrt((1.0 + k) * pow(10.0, x_db / 10.0));
    double z = 2.0 * a * b;
    double scale = 2.0 * b * exp(-(a - b) * (a - b));
    double i1 = gsl_sf_bessel_I1_scaled(z);
    double i1_over_z = a < LEAST_RAY ? 0.5 * exp(-z) : i1 / z;
    double slope = -scale * i1;
    double curvature = 2.0 * scale * (a * i1 - b * (gsl_sf_bessel_I0_scaled(z) - i1_over_z));
    double turned = -2.0 * scale * b * i1_over_z; /* F'/a */

    return (struct parts){0.5 * slope * slope,
                          0.125 * (curvature * curvature + turned * turned)};
}

/* K of Rice fading with the same variance of the power; m below 1 has no ray. */
static double ray_of(const struct rfade_model *model, double parameter)
{
    if (model->id == RFADE_RICE)
        return parameter;
    if (model->id != RFADE_NAKAGAMI || !(parameter > 1.0))
        return 0.0;
    double root = sqrt(parameter * parameter - parameter);
    return root / (parameter - root);
}

enum rfade_status rfade_fluctuation(const struct rfade_model *model, double parameter,
                                    double x_db, double length_wavelengths, double *variance)
{
    double rate = NAN;
    struct rfade_tails own, equal;
    double k = ray_of(model, parameter);
    *variance = NAN;
    enum rfade_status status = model->tails(parameter, x_db, &own);
    if (status == RFADE_OK)
        status = rfade_model(RFADE_RICE)->tails(k, x_db, &equal);
    if (status == RFADE_OK)
        status = rfade_crossings_per_wavelength(model, parameter, x_db, &rate);
    if (status != RFADE_OK)
        return status;
    double whole = own.lower * own.upper;
    struct parts parts = find_parts(k, x_db);
    double share = equal.lower * equal.upper > 0.0 ? whole / (equal.lower * equal.upper) : 0.0;
    double first = share * parts.first, second = share * parts.second;
    double rest = fmax(whole - first - second, 0.0);
    double l = length_wavelengths;
    double mean_of_squares = (log(16.0 * M_PI * l) + M_EULER - 1.0) / (M_PI * M_PI * l);
    double fades = rate > 0.0 ? SQUARE_OF_LENGTHS * rest * rest / (rate * l) : 0.0;
    double sum = first / (M_PI * l) + second * mean_of_squares + fades;
    /* Over less than a wavelength or so: no more than the indicator's own variance. */
    *variance = fmin(fmax(sum, 0.0), whole);
    return RFADE_OK;
}
