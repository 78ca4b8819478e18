/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file special.h  The functions that fading needs and a general library lacks, or has with
 * cancellation: Marcum's Q, the incomplete gamma and normal tails with their logarithms,
 * the ratio of Bessel functions I1/I0, and ln m - psi(m).
 *
 * Accuracy is relative and was taken against 50-digit arithmetic on the tables named in
 * tests/reference/; where a result is below the smallest normal double, only its logarithm
 * keeps it. Reentrant; allocates nothing; no input or output.
 */
#ifndef ROUTEFADE_SPECIAL_H
#define ROUTEFADE_SPECIAL_H

#include "routefade/status.h"

#ifdef __cplusplus
extern "C" {
#endif

/** Both tails of a distribution, each computed on its own small side. */
struct rfade_tails {
    double lower;     /**< P(level <= x) */
    double upper;     /**< P(level > x) */
    double log_lower; /**< ln of lower, finite where lower underflows */
    double log_upper; /**< ln of upper */
};

/**
 * Marcum's function of first order: upper = Q1(a, b), the integral of
 * x exp(-(x^2 + a^2)/2) I0(a x) from b to infinity, lower = 1 - Q1(a, b).
 * Gauss-Legendre quadrature of that definition from b outward (J. I. Marcum, IRE
 * Transactions IT-6, 1960), scaled by exp(-(b-a)^2/2): every term is positive.
 * @param a  [0, 1e8]
 * @param b  >= 0, infinity allowed
 * @return RFADE_OK | RFADE_DOMAIN (tails NaN)
 * Accuracy: 1e-12 in either tail down to 1e-300; 1e-13 in the logarithms.
 */
RFADE_API enum rfade_status rfade_marcum_tails(double a, double b, struct rfade_tails *tails);

/**
 * Regularised incomplete gamma function: lower = P(shape, x), upper = Q(shape, x).
 * Series of positive terms (AMS 55, 6.5.29) for the lower tail of small shapes, else
 * Gauss-Legendre quadrature of the definition (6.5.2, 6.5.3) in ln x from x outward.
 * @param shape  [0.1, 1e6]
 * @param x      >= 0, infinity allowed
 * @return RFADE_OK | RFADE_DOMAIN (tails NaN)
 * Accuracy: 1e-12 in either tail down to 1e-300; 1e-13 in the logarithms.
 */
RFADE_API enum rfade_status rfade_gamma_tails(double shape, double x,
                                              struct rfade_tails *tails);

/**
 * Normal distribution function of a standardised variable (AMS 55, 26.2.2, 26.2.3).
 * @param z  any, infinities allowed; NaN is outside the domain
 * Accuracy: 1e-12 in either tail down to 1e-300; 1e-13 in the logarithms.
 */
RFADE_API enum rfade_status rfade_normal_tails(double z, struct rfade_tails *tails);

/**
 * ln(p / (1 - p)) of a probability, and back; infinite at 0 and 1. NaN outside of [0, 1].
 * Accuracy: 2e-16 of the larger of ln p and ln(1 - p), and 4e-16 relative.
 */
RFADE_API double rfade_log_odds(double probability);
RFADE_API double rfade_from_log_odds(double log_odds);

/** r(z) = I1(z)/I0(z). */
struct rfade_bessel_ratio {
    double ratio;      /**< r */
    double complement; /**< 1 - r, without cancellation */
    double derivative; /**< dr/dz = 1 - r/z - r^2, without cancellation */
};

/**
 * Ratio of the modified Bessel functions of orders 1 and 0.
 * z <= 2: power series (AMS 55, 9.6.10); z < 25: moments of 1 - cos under the weight
 * exp(z cos), trapezoidal rule on 9.6.16; above: the expansion in 1/z that satisfies the
 * equation dr/dz = 1 - r/z - r^2.
 * @param z  >= 0, infinity allowed
 * Accuracy: 2e-15 in ratio, 1e-14 in complement and derivative.
 */
RFADE_API enum rfade_status rfade_bessel_ratio(double z, struct rfade_bessel_ratio *result);

/**
 * ln m - psi(m), and its derivative 1/m - psi'(m), by the expansion 6.3.18 of AMS 55 above
 * 10 and the recurrence 6.3.5, whose terms are all of one sign, below.
 * @param m                >= 0.1
 * @param[out] value       > 0
 * @param[out] derivative  < 0; may be NULL
 * Accuracy: 1e-14 in both.
 */
RFADE_API enum rfade_status rfade_log_minus_psi(double m, double *value, double *derivative);

#ifdef __cplusplus
}
#endif
#endif
