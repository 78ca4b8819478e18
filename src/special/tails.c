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

/* 1/n!, n = 2 ... 19; the next is below 1e-17 of the first. */
static const double inverse_factorial[] = {
    1.0 / 2.0,
    1.0 / 6.0,
    1.0 / 24.0,
    1.0 / 120.0,
    1.0 / 720.0,
    1.0 / 5040.0,
    1.0 / 40320.0,
    1.0 / 362880.0,
    1.0 / 3628800.0,
    1.0 / 39916800.0,
    1.0 / 479001600.0,
    1.0 / 6227020800.0,
    1.0 / 87178291200.0,
    1.0 / 1307674368000.0,
    1.0 / 20922789888000.0,
    1.0 / 355687428096000.0,
    1.0 / 6402373705728000.0,
    1.0 / 121645100408832000.0,
};
enum { INVERSE_FACTORIALS = sizeof inverse_factorial / sizeof inverse_factorial[0] };

double rfade_exp_excess(double x)
{
    if (fabs(x) >= 1.0) {
        return expm1(x) - x;
    }
    const double square = x * x;
    double even = 0.0;
    double odd = 0.0;
    for (int n = INVERSE_FACTORIALS - 1; n >= 0; n -= 2) {
        odd = odd * square + inverse_factorial[n];
        even = even * square + inverse_factorial[n - 1];
    }
    return square * (even + x * odd);
}
