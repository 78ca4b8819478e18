/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * The generalised Marcum function, the distribution of the amplitude of `order` steady signals
 * in noise (Marcum 1960; Simon and Alouini 2005, eq. 4.60), by quadrature of its definition
 *     Q_M(a, b) = integral from b of x (x/a)^(M-1) exp(-(x^2 + a^2)/2) I_(M-1)(a x) dx
 * as for the first order (marcum.c). With n = M - 1 and B_n(z) = n! (2/z)^n exp(-z) I_n(z),
 * which is 1 at z = 0, the integrand is x (x^2/2)^n/n! B_n(a x) exp(-(x - a)^2/2): a = 0 needs
 * no limit.
 */
#include "special/marcum_order.h"

#include <gsl/gsl_math.h>
#include <gsl/gsl_sf_bessel.h>
#include <math.h>
#include <stdbool.h>

#include "special/gauss_legendre.h"

/* What lies beyond exp(-42) of the integrand's start is below 1e-18 of the integral. */
static const double negligible_exponent = 42.0;

/* Up to here the power series takes at most 20 terms. */
static const double series_limit = 4.0;

/* ln of B_n; AMS 55 9.6.10 for small z. */
static double log_bessel(int n, double z)
{
    if (z <= series_limit) {
        const double q = 0.25 * z * z;
        double term = 1.0;
        double sum = 1.0;
        for (int k = 1; term > 1e-17 * sum; k++) {
            term *= q / (k * (double)(n + k));
            sum += term;
        }
        return log(sum) - z;
    }
    gsl_sf_result scaled = {NAN, 0.0};
    (void)gsl_sf_bessel_In_scaled_e(n, z, &scaled);
    double log_ratio = log(scaled.val);
    for (int k = 1; k <= n; k++) {
        log_ratio += log(2.0 * k / z);
    }
    return log_ratio;
}

/* ln of (x^2/2)^n/n!. */
static double log_power(int n, double x)
{
    double sum = 0.0;
    for (int k = 1; k <= n; k++) {
        sum += log(0.5 * x * x / k);
    }
    return sum;
}

double rfade_marcum_order_log_density(int order, double a, double b, double offset)
{
    return log(0.5 * b * b) + log_power(order - 1, b) + log_bessel(order - 1, a * b) -
           0.5 * offset * offset;
}

/* Where t^2/2 + slope t has outgrown the power of x by the negligible exponent. */
static double upper_length(int order, double b, double slope)
{
    double length = 0.0;
    for (int i = 0; i < 4; i++) {
        const double drop = negligible_exponent + (2 * order - 1) * log1p(length / b);
        length = 2.0 * drop / (slope + sqrt(slope * slope + 2.0 * drop));
    }
    return length;
}

/* The tail over exp(log_factor - offset^2/2). */
static double tail_integral(int order, double a, double b, double slope, double sign,
                            double length, double log_start)
{
    const struct rfade_gauss_rule *rule = rfade_gauss_rule_finest();
    double sum = 0.0;
    for (int i = 0; i < rule->half_count; i++) {
        for (int side = -1; side <= 1; side += 2) {
            const double share = 0.5 * (1.0 + side * rule->node[i]);
            const double t = length * share;
            const double relative = 1.0 + sign * (length / b) * share;
            const double log_growth = (2 * order - 1) * log(relative) +
                                      log_bessel(order - 1, a * b * relative) - log_start;
            sum += 0.5 * rule->weight[i] * exp(log_growth - t * (slope + 0.5 * t));
        }
    }
    return length * sum;
}

struct rfade_tails rfade_marcum_order_tails(int order, double a, double b, double offset)
{
    /* The median of b^2 lies near a^2 + 2 order - 0.7: either tail is at least a fifth there.
     */
    const bool is_upper = offset * (a + b) > 2.0 * order - 0.8;
    const double slope = is_upper ? offset : -offset;
    double length = upper_length(order, b, slope);
    if (!is_upper) {
        length = fmin(b, 2.0 * negligible_exponent /
                             (slope + sqrt(slope * slope + 2.0 * negligible_exponent)));
    }
    const double log_start = log_bessel(order - 1, a * b);
    const double integral =
        tail_integral(order, a, b, slope, is_upper ? 1.0 : -1.0, length, log_start);
    const double log_factor = log(b) + log_power(order - 1, b) + log_start + log(integral);
    const double log_tail = log_factor - 0.5 * offset * offset;
    /* far out the factor alone leaves the range of doubles */
    const double tail = fabs(log_factor) < 600.0
                            ? exp(log_factor) * rfade_exp_half_square(offset)
                            : exp(log_tail);
    return rfade_tails_from(tail, log_tail, is_upper);
}
