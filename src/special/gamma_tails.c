/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Incomplete gamma function of shape m at x = m y. With phi(y) = y - 1 - ln y,
 *     x^m exp(-x) / Gamma(m) = exp(-m phi) sqrt(m / (2 pi)) / Gamma*(m),
 * Gamma* being Gamma over Stirling's formula: the large logarithms of m never appear.
 * In s = ln(x'/m), s = ln y -+ t, the integrand of either tail relative to its threshold is
 *     exp(-m h(t)),  h = t + y expm1(-t) below,  h = y expm1(t) - t above,
 * and the density's own slope in m is ln m - psi(m) - phi(s), with phi(s) = phi(y) + h(t).
 */
#include "special/gamma_tails.h"

#include <gsl/gsl_math.h>
#include <gsl/gsl_sf_gamma.h>
#include <math.h>
#include <stdbool.h>
#include <stddef.h>

#include "special/gauss_legendre.h"

/* What lies beyond exp(-42) of the integrand's start is below 1e-18 of the integral. */
static const double negligible_exponent = 42.0;

/* Up to here the series needs at most about 90 terms and the quadrature too many nodes. */
static const double series_shape_limit = 30.0;

static const double smallest_shape = 0.1;
static const double largest_shape = 1e6;

/* A tail over exp(-m phi) sqrt(m / 2 pi) / Gamma*(m), and d ln of that ratio / d m. */
struct integral {
    double value;
    double slope;
};

double rfade_log_gamma_star(double shape)
{
    gsl_sf_result result;
    (void)gsl_sf_gammastar_e(shape, &result);
    return log(result.val);
}

/* 1/m (1 + x/(m+1) + x^2/((m+1)(m+2)) + ...), AMS 55 6.5.29. */
static struct integral lower_series(double m, double y)
{
    const double x = m * y;
    double term = 1.0;
    double term_slope = 0.0; /* d ln term / d m at fixed y: sum of 1/m - 1/(m+j) */
    double sum = 1.0;
    double slope = 0.0;
    for (int n = 1; term > 1e-18 * sum; n++) {
        term *= x / (m + n);
        term_slope += n / (m * (m + n));
        sum += term;
        slope += term * term_slope;
    }
    return (struct integral){sum / m, slope / sum - 1.0 / m};
}

/* A length beyond which m h(t) exceeds the negligible exponent; h as at the top. */
static double tail_length(double m, double y, bool is_upper)
{
    const double c = negligible_exponent / m;
    if (!is_upper) {
        /* h >= (1 - y) t + y t^2/(2 + t) >= ((1-y) 2 t + t^2)/(2 + t) for y <= 1 */
        const double b = 2.0 * (1.0 - y) - c;
        return b > 0.0 ? 4.0 * c / (b + sqrt(b * b + 8.0 * c))
                       : 0.5 * (sqrt(b * b + 8.0 * c) - b);
    }
    /* h >= (y - 1) t + y t^2/2; t = log1p((c + t)/y) is the root, mapped from above to above */
    const double b = y - 1.0;
    double t = 2.0 * c / (b + sqrt(b * b + 2.0 * c * y));
    for (int i = 0; i < 3; i++) {
        t = log1p((c + t) / y);
    }
    return t;
}

static struct integral tail_quadrature(double m, double y, bool is_upper)
{
    const double length = tail_length(m, y, is_upper);
    const double sign = is_upper ? 1.0 : -1.0;
    const struct rfade_gauss_rule *rule = rfade_gauss_rule_finest();
    double sum = 0.0;
    double sum_h = 0.0;
    for (int i = 0; i < rule->half_count; i++) {
        for (int side = -1; side <= 1; side += 2) {
            const double t = 0.5 * length * (1.0 + side * rule->node[i]);
            const double h = y * expm1(sign * t) - sign * t;
            const double term = rule->weight[i] * exp(-m * h);
            sum += term;
            sum_h += term * h;
        }
    }
    return (struct integral){0.5 * length * sum, -sum_h / sum};
}

struct rfade_gamma_scaled rfade_gamma_scaled(double shape, double log_ratio)
{
    const double y = exp(log_ratio);
    const double phi = rfade_exp_excess(log_ratio);
    /* Below y = 1 or x = 1 the upper tail is at least a fortieth: no loss from 1 - lower. */
    const bool is_upper = log_ratio > 0.0 && shape * y > 1.0;
    const struct integral integral = !is_upper && shape < series_shape_limit
                                         ? lower_series(shape, y)
                                         : tail_quadrature(shape, y, is_upper);
    const double log_gamma_star = rfade_log_gamma_star(shape);
    double log_minus_psi = NAN;
    (void)rfade_log_minus_psi(shape, &log_minus_psi, NULL);
    struct rfade_gamma_scaled result;
    result.tail.is_upper = is_upper;
    result.tail.exponent = -shape * phi;
    result.tail.factor = sqrt(shape / (2.0 * M_PI)) * integral.value * exp(-log_gamma_star);
    result.tail.log_factor = log(result.tail.factor);
    result.slope = log_minus_psi - phi + integral.slope;
    return result;
}

struct rfade_tails rfade_gamma_tails_at(double shape, double log_ratio)
{
    if (isinf(log_ratio)) {
        return log_ratio < 0.0 ? (struct rfade_tails){0.0, 1.0, -INFINITY, 0.0}
                               : (struct rfade_tails){1.0, 0.0, 0.0, -INFINITY};
    }
    const struct rfade_gamma_scaled scaled = rfade_gamma_scaled(shape, log_ratio);
    return rfade_tails_from_scaled(&scaled.tail, exp(scaled.tail.exponent));
}

enum rfade_status rfade_gamma_tails(double shape, double x, struct rfade_tails *tails)
{
    *tails = rfade_tails_nan();
    if (!(shape >= smallest_shape && shape <= largest_shape) || !(x >= 0.0)) {
        return RFADE_DOMAIN;
    }
    const double difference = (x - shape) / shape;
    const double log_ratio = fabs(difference) < 0.5 ? log1p(difference) : log(x) - log(shape);
    *tails = rfade_gamma_tails_at(shape, log_ratio);
    return RFADE_OK;
}
