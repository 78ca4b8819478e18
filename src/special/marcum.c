/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Marcum's Q function, J. I. Marcum, "A statistical theory of target detection by pulsed
 * radar", IRE Transactions on Information Theory IT-6, 1960, by quadrature of its definition.
 *
 * With x = b + t above and x = b - t below the threshold, (x - a)^2/2 is
 * (b - a)^2/2 +- (b - a) t + t^2/2, so
 *     tail = exp(-(b-a)^2/2) * integral of x exp(-(+-(b-a) t + t^2/2)) exp(-a x) I0(a x) dt.
 * The integrand is positive and entire, and drops by exp(-42) within the length that is
 * integrated; 32 nodes leave less than 1e-16 (see gauss_legendre.c).
 */
#include "special/marcum.h"

#include <gsl/gsl_math.h>
#include <math.h>
#include <stdbool.h>

#include "special/bessel.h"
#include "special/gauss_legendre.h"

/* What lies beyond exp(-42) of the integrand's start is below 1e-18 of the integral. */
static const double negligible_exponent = 42.0;

static const double largest_a = 1e8;

/* Integral over the tail, without exp(-(b-a)^2/2), over b * length; see above. */
static double mean_integrand(double a, double b, double slope, double sign, double length)
{
    const struct rfade_gauss_rule *rule = rfade_gauss_rule_finest();
    double sum = 0.0;
    for (int i = 0; i < rule->half_count; i++) {
        for (int side = -1; side <= 1; side += 2) {
            const double share = 0.5 * (1.0 + side * rule->node[i]);
            const double t = length * share;
            const double relative = 1.0 + sign * (length / b) * share;
            sum += 0.5 * rule->weight[i] * relative * exp(-t * (slope + 0.5 * t)) *
                   rfade_bessel_pair(a * b * relative).i0_scaled;
        }
    }
    return sum;
}

struct rfade_scaled_tail rfade_marcum_scaled(double a, double b, double offset)
{
    struct rfade_scaled_tail tail;
    /* The median lies between a^2 + 2 ln 2 (a = 0) and a^2 + 1 (a large). */
    tail.is_upper = offset * (a + b) > 1.2;
    const double slope = tail.is_upper ? offset : -offset;
    double length =
        2.0 * negligible_exponent / (slope + sqrt(slope * slope + 2.0 * negligible_exponent));
    if (!tail.is_upper && length > b) {
        length = b;
    }
    const double mean = mean_integrand(a, b, slope, tail.is_upper ? 1.0 : -1.0, length);
    tail.exponent = -0.5 * offset * offset;
    tail.factor = b * length * mean;
    tail.log_factor = log(b) + log(length) + log(mean);
    return tail;
}

struct rfade_tails rfade_marcum_tails_at(double a, double b, double offset)
{
    if (a == 0.0) {
        /* P1(0, b) = 1 - exp(-b^2/2) */
        const double exponent = -0.5 * b * b;
        if (exponent < -M_LN2) {
            return rfade_tails_from(rfade_exp_half_square(b), exponent, true);
        }
        const double lower = -expm1(exponent);
        const double log_lower = b < 1e-8 ? 2.0 * log(b) - M_LN2 : log(lower);
        return rfade_tails_from(lower, log_lower, false);
    }
    if (b == 0.0) {
        return (struct rfade_tails){0.0, 1.0, -INFINITY, 0.0};
    }
    const struct rfade_scaled_tail tail = rfade_marcum_scaled(a, b, offset);
    return rfade_tails_from_scaled(&tail, rfade_exp_half_square(offset));
}

enum rfade_status rfade_marcum_tails(double a, double b, struct rfade_tails *tails)
{
    *tails = rfade_tails_nan();
    if (!(a >= 0.0 && a <= largest_a) || !(b >= 0.0)) {
        return RFADE_DOMAIN;
    }
    if (isinf(b)) {
        *tails = (struct rfade_tails){1.0, 0.0, 0.0, -INFINITY};
        return RFADE_OK;
    }
    *tails = rfade_marcum_tails_at(a, b, b - a);
    return RFADE_OK;
}
