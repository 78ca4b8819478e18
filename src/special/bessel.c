/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * r(z) = I1(z)/I0(z). Sources: AMS 55 (1964), chapter 9, and the Riccati equation
 * dr/dz = 1 - r/z - r^2 that follows from 9.6.26.
 */
#include "special/bessel.h"

#include <gsl/gsl_math.h>
#include <math.h>

#include "routefade/special.h"
#include "special/bessel_pieces.h"

static const double series_limit = 2.0;
static const double expansion_limit = 25.0;

/*
 * 1 - r = c1/z + c2/z^2 + ...: the Riccati equation gives c1 = 1/2 and
 * 2 c_n = (n - 2) c_(n-1) + sum of c_i c_(n-i). At z = 25 what is left out is below 1e-16
 * of the derivative, which takes n c_n.
 */
static const double expansion[] = {0.5,
                                   0.125,
                                   0.125,
                                   0.1953125,
                                   0.40625,
                                   1.0478515625,
                                   3.21875,
                                   11.466461181640625,
                                   46.478515625,
                                   211.27614974975586,
                                   1064.67822265625,
                                   5892.0457146167755,
                                   35528.87744140625,
                                   231884.6359563172,
                                   1628749.4532470703,
                                   12251067.63286615,
                                   98252781.81546783,
                                   836956449.7799761,
                                   7546911569.366995,
                                   71816112232.68327,
                                   719236632073.3802,
                                   7562132599676.877,
                                   83284339829845.66,
                                   958823685326569.2,
                                   1.1517422782528824e16,
                                   1.4409993748135704e17};
enum { EXPANSION_TERMS = sizeof expansion / sizeof expansion[0] };

/* Enough terms for z: they shrink by n/(2z), so that far out a few do. */
static int expansion_terms(double z)
{
    if (z > 1e3) {
        return 6;
    }
    return z > 60.0 ? 14 : EXPANSION_TERMS;
}

static double expansion_complement(double z)
{
    const double u = 1.0 / z;
    double sum = 0.0;
    for (int n = expansion_terms(z); n > 0; n--) {
        sum = u * (sum + expansion[n - 1]);
    }
    return sum;
}

static double expansion_derivative(double z)
{
    const double u = 1.0 / z;
    double sum = 0.0;
    for (int n = expansion_terms(z); n > 0; n--) {
        sum = u * (sum + n * expansion[n - 1]);
    }
    return u * sum;
}

/* AMS 55 9.6.10: I0 = sum q^k/k!^2, 2 I1/z = sum q^k/(k! (k+1)!), q = z^2/4. */
struct power_series {
    double i0;
    double i1_over_half_z;
    double difference; /* of the two, summed for itself */
};

/* 1/k^2 and 1/(k+1); for q <= 1 the eleventh term, q^11/11!^2, is below 1e-15. */
static const double inverse_square[] = {1.0,      1.0 / 4,  1.0 / 9,  1.0 / 16, 1.0 / 25,
                                        1.0 / 36, 1.0 / 49, 1.0 / 64, 1.0 / 81, 1.0 / 100};
static const double inverse[] = {1.0 / 2, 1.0 / 3, 1.0 / 4, 1.0 / 5,  1.0 / 6,
                                 1.0 / 7, 1.0 / 8, 1.0 / 9, 1.0 / 10, 1.0 / 11};
enum { SERIES_TERMS = sizeof inverse / sizeof inverse[0] };

static inline struct power_series power_series(double z)
{
    const double q = 0.25 * z * z;
    double term = 1.0;
    struct power_series sum = {1.0, 1.0, 0.0};
    for (int k = 1; k <= SERIES_TERMS; k++) {
        term *= q * inverse_square[k - 1];
        const double part = term * inverse[k - 1]; /* of k + 1 */
        sum.i0 += term;
        sum.i1_over_half_z += part;
        sum.difference += term - part;
    }
    return sum;
}

/*
 * A polynomial with an even number of coefficients, odd and even powers apart: two shorter
 * chains, which a processor works on side by side.
 */
static inline double polynomial(const double *coefficients, int count, double v)
{
    const double v2 = v * v;
    double even = coefficients[count - 2];
    double odd = coefficients[count - 1];
    for (int i = count - 4; i >= 0; i -= 2) {
        even = even * v2 + coefficients[i];
        odd = odd * v2 + coefficients[i + 1];
    }
    return even + odd * v;
}

#define COUNT(array) ((int)(sizeof(array) / sizeof((array)[0])))

/* From sqrt(z) exp(-z) I0 and z (1 - r). */
static inline struct rfade_bessel_pair pair_from(double z, double scaled_i0,
                                                 double scaled_complement)
{
    const double complement = scaled_complement / z;
    return (struct rfade_bessel_pair){scaled_i0 / sqrt(z), complement,
                                      1.0 - 2.0 * (1.0 - complement) / z};
}

struct rfade_bessel_pair rfade_bessel_pair(double z)
{
    if (z <= series_limit) {
        const struct power_series sum = power_series(z);
        return (struct rfade_bessel_pair){exp(-z) * sum.i0,
                                          1.0 - 0.5 * z * sum.i1_over_half_z / sum.i0,
                                          sum.difference / sum.i0};
    }
    if (z < 4.0) {
        const double v = z - 3.0;
        return pair_from(z, polynomial(i0_2_to_4, COUNT(i0_2_to_4), v),
                         polynomial(complement_2_to_4, COUNT(complement_2_to_4), v));
    }
    if (z < 8.0) {
        const double v = 0.5 * (z - 6.0);
        return pair_from(z, polynomial(i0_4_to_8, COUNT(i0_4_to_8), v),
                         polynomial(complement_4_to_8, COUNT(complement_4_to_8), v));
    }
    if (z < 20.0) {
        /* 1/z from 1/20 to 1/8 */
        const double v = (80.0 / z - 7.0) / 3.0;
        return pair_from(z, polynomial(i0_8_to_20, COUNT(i0_8_to_20), v),
                         polynomial(complement_8_to_20, COUNT(complement_8_to_20), v));
    }
    /* 1/z from 0 to 1/20 */
    const double v = 40.0 / z - 1.0;
    return pair_from(z, polynomial(i0_above_20, COUNT(i0_above_20), v),
                     polynomial(complement_above_20, COUNT(complement_above_20), v));
}

/*
 * Under the weight exp(z cos theta) (9.6.16, 9.6.19) the mean of 1 - cos is 1 - r and its
 * variance is dr/dz. 64 points of the trapezoidal rule are off by I64(z)/I0(z) < 1e-25.
 */
static void trapezoid(double z, struct rfade_bessel_ratio *result)
{
    enum { HALF = 32 };
    double weights = 0.0;
    double first = 0.0;
    double second = 0.0;
    for (int j = 0; j <= HALF; j++) {
        const double half_sine = sin(j * M_PI / (2 * HALF));
        const double u = 2.0 * half_sine * half_sine;
        const double weight = exp(-z * u) * (j == 0 || j == HALF ? 0.5 : 1.0);
        weights += weight;
        first += weight * u;
        second += weight * u * u;
    }
    result->complement = first / weights;
    result->ratio = 1.0 - result->complement;
    result->derivative = second / weights - result->complement * result->complement;
}

enum rfade_status rfade_bessel_ratio(double z, struct rfade_bessel_ratio *result)
{
    *result = (struct rfade_bessel_ratio){NAN, NAN, NAN};
    if (!(z >= 0.0)) {
        return RFADE_DOMAIN;
    }
    if (z <= series_limit) {
        const struct power_series sum = power_series(z);
        const double half_ratio = 0.5 * sum.i1_over_half_z / sum.i0; /* r/z */
        result->ratio = z * half_ratio;
        result->complement = 1.0 - result->ratio;
        result->derivative = 1.0 - half_ratio - result->ratio * result->ratio;
    } else if (z < expansion_limit) {
        trapezoid(z, result);
    } else {
        result->complement = expansion_complement(z);
        result->ratio = 1.0 - result->complement;
        result->derivative = expansion_derivative(z);
    }
    return RFADE_OK;
}
