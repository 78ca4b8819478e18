/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file modulation.h  The table of modulations: error rates as sums of exponential integrals.
 */
#ifndef ROUTEFADE_PREDICT_MODULATION_H
#define ROUTEFADE_PREDICT_MODULATION_H

#include <stdbool.h>

#include "routefade/error_rate.h"

enum rfade_term_kind {
    RFADE_TERM_EXPONENTIAL, /**< E(u) = exp(-u) */
    RFADE_TERM_HALF_PLANE,  /**< H(u) = 1/pi integral of exp(-u/sin^2 t), t from 0 to pi/2 */
    RFADE_TERM_WEDGE        /**< W(u) = the same, t from `angle` to pi/2 */
};

/**
 * One term of an error rate: weight times E, H or W of u = factor Es/N0. Averaging over fading
 * replaces exp(-u/sin^2 t) by the moment generating function of the SNR, and nothing else.
 */
struct rfade_term {
    enum rfade_term_kind kind;
    double weight;
    double factor;    /**< ascending within a sum; the first term is the greatest */
    double angle;     /**< of a wedge, radians, (0, pi/2) */
    double angle_cot; /**< its cotangent */
};

enum { RFADE_TERMS_MAX = 14 };

struct rfade_term_sum {
    int count;
    double limit; /**< at no SNR at all */
    struct rfade_term terms[RFADE_TERMS_MAX];
};

struct rfade_modulation {
    const char *name;
    struct rfade_term_sum bit;
    struct rfade_term_sum symbol; /**< no terms: as the bits */
    enum rfade_modulation_id id;
    int bits; /**< a symbol */
};

/** The terms of the symbol error rate. */
const struct rfade_term_sum *rfade_symbol_terms(const struct rfade_modulation *modulation);

/** value exp(log_scale): however small, its logarithm stays. */
struct rfade_scaled {
    double value;
    double log_scale;
};

/** A term's value under whatever the SNR does; `context` is the caller's. */
typedef struct rfade_scaled rfade_term_value(const struct rfade_term *term,
                                             const void *context);

/**
 * Both rates of a modulation, term by term, within their limits; with bits_only the symbols' is
 * the bits'.
 */
struct rfade_error_rate rfade_error_rate_by_terms(const struct rfade_modulation *modulation,
                                                  rfade_term_value *value_of,
                                                  const void *context, bool bits_only);

/** Rates at a steady linear Es/N0 >= 0; no checks. */
struct rfade_error_rate rfade_error_rate_at(const struct rfade_modulation *modulation,
                                            double snr, bool bits_only);

/** Both rates NaN: what a failure leaves behind. */
struct rfade_error_rate rfade_error_rate_nan(void);

#endif
