/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Errors of differential detection without noise [Bello, P. A. and Nelin, B. D., "The influence
 * of fading spectrum on the binary error probabilities of incoherent and differentially
 * coherent matched filter receivers", IRE Transactions on Communications Systems 10 (1962)].
 *
 * The channel's gains at two symbols are x = A + g, y = A exp(j theta) + h, the scatter g, h of
 * power s each and correlation rho = J0(2 pi f T). Detection errs where Re(x* y) < 0, that is
 * |x + y| < |x - y|, and the two are independent Gaussian variables of the variances
 * 2 s (1 + rho), 2 s (1 - rho) and the means A (1 + exp(j theta)), A (1 - exp(j theta)). With
 * a^2, b^2 twice the squared means of difference and sum over the sum of the variances, and
 * A^2/s = K, the probability is [Stein, S., IEEE Transactions on Information Theory 10 (1964)]
 *     Q1(a, b) - (1 + rho)/2 exp(-(a^2 + b^2)/2) I0(ab),   a^2 + b^2 = 2K, ab = K |sin(theta)|.
 * Where a < b, Q1(a, b) = exp(-K) (I0(ab) + sum over n >= 1 of (a/b)^n In(ab)) [Marcum 1960],
 * so that nothing cancels:
 *     exp(-K) ((1 - rho)/2 I0(ab) + sum over n >= 1 of tan(theta/2)^n In(ab)).
 */
#include "routefade/validity.h"

#include <gsl/gsl_errno.h>
#include <gsl/gsl_math.h>
#include <gsl/gsl_sf_bessel.h>
#include <math.h>

#include "routefade/special.h"

static const double k_max = 1e5;
/* Up to this phase the series is short: its terms fall at least as powers of a half. */
static const double series_theta_max = 0.9;
enum { TERMS_MAX = 80 };

/* 1 - J0(x) [AMS 55, 9.1.10]. */
static double one_less_j0(double x)
{
    gsl_sf_result j0;
    double quarter = 0.25 * x * x;
    double term = 1.0;
    double sum = 0.0;

    if (x > 1.0) {
        return gsl_sf_bessel_J0_e(x, &j0) == GSL_SUCCESS ? 1.0 - j0.val : NAN;
    }
    for (int n = 1; n <= 12; n++) {
        term *= -quarter / ((double)n * n);
        sum -= term;
    }
    return sum;
}

/* Both factors that could over- or underflow, exp(-K) and In(ab), as one. */
static double series(double k, double theta, double half_one_less_rho)
{
    double sine = sin(theta);
    double ratio = tan(0.5 * theta);
    double ab = k * sine;
    double power = 1.0;
    double sum = 0.0;
    gsl_sf_result bessel;

    for (int n = 0; n <= TERMS_MAX; n++) {
        if (gsl_sf_bessel_In_scaled_e(n, ab, &bessel) != GSL_SUCCESS) {
            /* GSL calls it an underflow where it rounds a term to 0. */
            bessel.val = 0.0;
        }
        double term = (n == 0 ? half_one_less_rho : power) * bessel.val;
        sum += term;
        power *= ratio;
        if (n > 0 && term <= 1e-17 * sum) {
            break;
        }
    }
    return sum * exp(ab - k);
}

static double direct(double k, double theta, double half_one_less_rho)
{
    struct rfade_tails tails;
    gsl_sf_result i0;
    double ab = k * fabs(sin(theta));

    if (rfade_marcum_tails(sqrt(2.0 * k) * fabs(sin(0.5 * theta)),
                           sqrt(2.0 * k) * fabs(cos(0.5 * theta)), &tails) != RFADE_OK ||
        gsl_sf_bessel_I0_scaled_e(ab, &i0) != GSL_SUCCESS) {
        return NAN;
    }
    double rate = tails.upper - (1.0 - half_one_less_rho) * i0.val * exp(ab - k);
    return fmin(1.0, fmax(0.0, rate));
}

double rfade_dbpsk_error_floor(double k, double ray_cosine, double doppler_hz, double symbol_s)
{
    double turn = 2.0 * M_PI * doppler_hz * symbol_s;

    if (!(k >= 0.0 && k <= k_max) || !(fabs(ray_cosine) <= 1.0) || !(doppler_hz >= 0.0) ||
        !(symbol_s > 0.0) || !(turn <= 1e6)) {
        return NAN;
    }
    double half_one_less_rho = 0.5 * one_less_j0(turn);
    double theta = turn * fabs(ray_cosine);
    return theta <= series_theta_max ? series(k, theta, half_one_less_rho)
                                     : direct(k, theta, half_one_less_rho);
}

enum rfade_delay_validity rfade_delay_validity(double rms_delay_s, double symbol_s)
{
    if (!(rms_delay_s >= 0.0 && symbol_s > 0.0)) {
        return RFADE_DELAY_UNKNOWN;
    }
    if (rms_delay_s <= RFADE_DELAY_FLAT_MAX * symbol_s) {
        return RFADE_DELAY_FLAT;
    }
    return rms_delay_s <= RFADE_DELAY_MARGINAL_MAX * symbol_s ? RFADE_DELAY_MARGINAL
                                                              : RFADE_DELAY_SELECTIVE;
}

const char *rfade_delay_validity_name(enum rfade_delay_validity validity)
{
    switch (validity) {
    case RFADE_DELAY_FLAT:
        return "flat";
    case RFADE_DELAY_MARGINAL:
        return "marginal";
    case RFADE_DELAY_SELECTIVE:
        return "selective";
    default:
        return "unknown";
    }
}
