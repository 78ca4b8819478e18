/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file validity.h  Where predictions for a signal that fades slowly and evenly over its band
 * stop being true: errors that no SNR takes away. Reentrant; no input or output.
 */
#ifndef ROUTEFADE_VALIDITY_H
#define ROUTEFADE_VALIDITY_H

#include "routefade/status.h"

#ifdef __cplusplus
extern "C" {
#endif

/**
 * Bit error rate of binary differential detection (dbpsk) that remains without noise, as the
 * channel turns from one symbol to the next. Rayleigh, and Rice with the ray across the road:
 *     (1 - J0(2 pi f T))/2 exp(-K)      [Bello and Nelin 1962, isotropic scatter]
 * With the ray's direction of cosine c its phase advances by theta = 2 pi f T c, and
 *     Q1(a, b) - (1 + J0(2 pi f T))/2 exp(-K) I0(K sin(theta)),
 *     a = sqrt(2K) |sin(theta/2)|, b = sqrt(2K) |cos(theta/2)|       [Stein 1964, for two
 * Gaussian variables of unequal variance]; the derivation stands in validity.c.
 * @param k           Rice K, [0, 1e5]; 0: Rayleigh
 * @param ray_cosine  cosine of the ray's direction against the road: 0 across, 1 along it
 * @param doppler_hz  maximum Doppler shift f, >= 0 (rfade_doppler_hz)
 * @param symbol_s    symbol's length T, > 0
 * @return the rate, in [0, 1]; NaN outside the domain
 * Accuracy: relative 1e-12 up to theta of 0.9, else absolute 1e-12.
 */
RFADE_API double rfade_dbpsk_error_floor(double k, double ray_cosine, double doppler_hz,
                                         double symbol_s);

/** How a symbol stands to the channel's delay spread. */
enum rfade_delay_validity {
    RFADE_DELAY_FLAT,      /**< fading is even over the band: predictions hold */
    RFADE_DELAY_MARGINAL,  /**< errors from the delay spread begin to show */
    RFADE_DELAY_SELECTIVE, /**< they rule: predictions are too good without an equaliser */
    RFADE_DELAY_UNKNOWN    /**< no delay spread, or no symbol, given */
};

/** Bounds of rms delay spread over symbol length between them. */
#define RFADE_DELAY_FLAT_MAX 0.01
#define RFADE_DELAY_MARGINAL_MAX 0.1

/**
 * A RULE OF THUMB. What matters of a channel's delays is the rms delay spread over the symbol's
 * length, nearly whatever the profile, as long as it is small [Chuang 1987]; the errors that
 * remain without noise grow with its square [Bello and Nelin 1963]. The trade takes fading as
 * flat up to about a tenth. At a hundredth such errors are some hundred times rarer.
 * @param rms_delay_s, symbol_s  >= 0 and > 0; NaN: not given
 */
RFADE_API enum rfade_delay_validity rfade_delay_validity(double rms_delay_s, double symbol_s);

/** Fixed lower-case word: "flat", "marginal", "selective", "unknown". */
RFADE_API const char *rfade_delay_validity_name(enum rfade_delay_validity validity);

#ifdef __cplusplus
}
#endif
#endif
