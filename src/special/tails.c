/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "special/tails.h"

#include <math.h>

struct rfade_tails rfade_tails_from(double tail, double log_tail, bool is_upper)
{
    if (is_upper) {
        return (struct rfade_tails){1.0 - tail, tail, log1p(-tail), log_tail};
    }
    return (struct rfade_tails){tail, 1.0 - tail, log_tail, log1p(-tail)};
}

struct rfade_tails rfade_tails_from_scaled(const struct rfade_scaled_tail *tail,
                                           double exp_exponent)
{
    return rfade_tails_from(exp_exponent * tail->factor, tail->exponent + tail->log_factor,
                            tail->is_upper);
}

struct rfade_tails rfade_tails_nan(void)
{
    return (struct rfade_tails){NAN, NAN, NAN, NAN};
}

double rfade_exp_half_square(double x)
{
    const double square = x * x;
    if (isinf(square)) {
        return 0.0;
    }
    return exp(-0.5 * square) * exp(-0.5 * fma(x, x, -square));
}

double rfade_exp_excess(double x)
{
    if (fabs(x) >= 1.0) {
        return expm1(x) - x;
    }
    /* x^2/2! + x^3/3! + ... + x^18/18!, by Horner; the next term is below 1e-17 of it. */
    double sum = 1.0;
    for (int n = 18; n > 2; n--) {
        sum = 1.0 + sum * x / n;
    }
    return 0.5 * x * x * sum;
}
