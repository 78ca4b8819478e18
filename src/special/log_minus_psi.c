/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stddef.h>

#include "routefade/special.h"

/* B_2k/(2k), k = 1..8, of AMS 55 6.3.18; from 10 up the rest is below 1e-17 of the sum. */
static const double bernoulli_over_2k[] = {1.0 / 12.0,   -1.0 / 120.0,    1.0 / 252.0,
                                           -1.0 / 240.0, 1.0 / 132.0,     -691.0 / 32760.0,
                                           1.0 / 12.0,   -3617.0 / 8160.0};
enum { TERMS = sizeof bernoulli_over_2k / sizeof bernoulli_over_2k[0] };

static const double expansion_limit = 10.0;
static const double smallest_m = 0.1;

enum rfade_status rfade_log_minus_psi(double m, double *value, double *derivative)
{
    *value = NAN;
    if (derivative != NULL) {
        *derivative = NAN;
    }
    if (!(m >= smallest_m)) {
        return RFADE_DOMAIN;
    }
    const double given = m;
    double sum = 0.0;
    double slope = 0.0;
    while (m < expansion_limit) {
        /* psi(m+1) = psi(m) + 1/m: every step adds 1/m - ln(1 + 1/m), which is positive. */
        sum += 1.0 / m;
        slope -= 1.0 / (m * m * (m + 1.0));
        m += 1.0;
    }
    sum -= log(m / given);
    const double u = 1.0 / m;
    double tail = 0.0;
    double tail_slope = 0.0;
    for (int k = TERMS; k > 0; k--) {
        tail = u * u * (tail + bernoulli_over_2k[k - 1]);
        tail_slope = u * u * (tail_slope + 2 * k * bernoulli_over_2k[k - 1]);
    }
    *value = sum + (0.5 * u + tail);
    if (derivative != NULL) {
        *derivative = slope - (0.5 * u * u + u * tail_slope);
    }
    return RFADE_OK;
}
