/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file fade_timing.h  How often a fading level crosses a threshold, and for how long it stays
 * below and above; and how much of that readings at a given spacing can see.
 *
 * Everything is per wavelength of travel: with the maximum Doppler shift f = rfade_doppler_hz
 * a rate is f times as many a second, and a length is 1/f times as many seconds.
 * Reentrant; no input or output.
 */
#ifndef ROUTEFADE_FADE_TIMING_H
#define ROUTEFADE_FADE_TIMING_H

#include "routefade/model.h"
#include "routefade/status.h"

#ifdef __cplusplus
extern "C" {
#endif

/** Mean rate and lengths of fades below a level. */
struct rfade_fade_timing {
    double crossings_per_wavelength; /**< in one direction: the number of fades */
    double mean_fade_wavelengths;    /**< P(below) / crossings */
    double mean_gap_wavelengths;     /**< P(above) / crossings: infinite where it exceeds the
                                          range of doubles */
    double log_crossings;            /**< ln of the rate, finite where it underflows */
};

/**
 * Fade timing under isotropic scatter and a direct ray across the road, which has no Doppler
 * shift of its own.
 *
 * Rice and Rayleigh [Rice 1948, section 5], Nakagami [Yacoub, Bautista and Guedes 1999, eq.
 * 17]. With a lognormal local mean, the rate is the mean of the rate over the local mean, which
 * itself moves too slowly to cross anything: the mean fade is then the outage over that rate.
 * @param model         rayleigh, rice or nakagami
 * @param parameter     K or m; ignored for rayleigh
 * @param shadowing_db  standard deviation of the local mean, [0, 30] dB; 0: none
 * @param x_db          level about the mean power, or about the dB-median of the local mean
 *                      power; within 800 dB
 * @param[out] result   NaN on failure
 * @return RFADE_OK | RFADE_DOMAIN | RFADE_NO_CONVERGENCE
 * Accuracy: relative 1e-12 without shadowing and 1e-10 with it, as long as rate and outage
 * exceed 1e-300; beyond, lengths come from logarithms of up to 1e5, right to 1e-13 of them.
 */
RFADE_API enum rfade_status rfade_fade_timing(const struct rfade_model *model, double parameter,
                                              double shadowing_db, double x_db,
                                              struct rfade_fade_timing *result);

/**
 * By how much a direct ray that isn't across the road raises the rate of crossings under Rice
 * fading; fades and gaps are as much shorter. Its Doppler shift turns the ray against the
 * scatter [Rice 1948, section 5, for a sine wave off the middle of the noise's band]; the
 * derivation stands in ray_crossings.c.
 * @param k           Rice K, [0, 1e5]
 * @param ray_cosine  cosine of the ray's direction against the road: 0 across, 1 along it
 * @param x_db        level about the mean power, within 1000 dB
 * @param[out] factor >= 1, rising with |ray_cosine|; NaN on failure
 * @return RFADE_OK | RFADE_DOMAIN
 * Accuracy: relative 1e-12.
 */
RFADE_API enum rfade_status rfade_ray_crossing_factor(double k, double ray_cosine, double x_db,
                                                      double *factor);

/** Maximum Doppler shift, Hz: speed over wavelength in vacuum. NaN unless speed >= 0 and
 * carrier > 0. */
RFADE_API double rfade_doppler_hz(double speed_m_s, double carrier_hz);

/**
 * Share of the fades that readings see: a fade between two readings leaves none below the
 * level, and a gap between two readings joins two fades.
 *
 * A fade of length T is met with the probability min(1, T/spacing). Lengths of deep fades are
 * those of chords [Rice 1958]: with u = spacing/mean fade and s = 2/(pi u^2),
 * share = exp(-s) (I0(s) + I1(s)) / u. Lengths of gaps above a high level have the law of
 * Rayleigh [Cramer and Leadbetter 1967, section 11.4]: with u = spacing/mean gap,
 * share = erf(u sqrt(pi)/2)/u. The result is their product. Near the mean level, where neither
 * law holds, it is a bit too small.
 * @param spacing, mean_fade, mean_gap  > 0, in one unit
 * @return in (0, 1]; NaN outside the domain
 */
RFADE_API double rfade_fades_seen_share(double spacing, double mean_fade, double mean_gap);

/**
 * What rounding to a step makes of a crossing rate, on average over where the level lies
 * between two steps: the mean of the rate from x_db - step/2 to x_db + step/2 over the rate at
 * x_db. One segment alone may differ by as much as the rate does over that range.
 * @param step_db  [0, 20]
 */
RFADE_API enum rfade_status rfade_step_crossing_factor(const struct rfade_model *model,
                                                       double parameter, double x_db,
                                                       double step_db, double *factor);

#ifdef __cplusplus
}
#endif
#endif
