/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file rate_surface.h  Error rates and outages of a link over whole ranges of its mean SNR and
 * of the fading's parameter, for those who need them at thousands of places.
 *
 * A surface holds the logarithm of each probability at Chebyshev points of both axes; between
 * them it is the interpolating polynomial [Berrut and Trefethen 2004, eq. 4.2]. Reentrant; no
 * input or output; a surface, once made, is constant, so threads may share it.
 */
#ifndef ROUTEFADE_RATE_SURFACE_H
#define ROUTEFADE_RATE_SURFACE_H

#include <stddef.h>

#include "routefade/error_rate.h"

#ifdef __cplusplus
extern "C" {
#endif

struct rfade_rate_surface; /* opaque */

/** Where a surface holds. */
struct rfade_rate_domain {
    double snr_low_db; /**< mean Es/N0 of one branch */
    double snr_high_db;
    double parameter_low; /**< K or m; ignored for rayleigh and unfaded */
    double parameter_high;
};

/** Mean SNR along a way: `weight` of travel at `snr_db`. */
struct rfade_snr_place {
    double snr_db;
    double weight; /**< > 0 */
};

/**
 * Makes a surface of several probabilities of one link.
 * @param link     its mean SNR and parameter are ignored
 * @param targets  [count]: which probabilities; their values are ignored
 * @param domain   low <= high on both axes; at most 400 dB of SNR
 * @param[out] surface  _destroy it; NULL on failure
 * @return RFADE_OK | RFADE_DOMAIN | RFADE_NO_MEMORY | as rfade_error_rates()
 * Accuracy, for K up to 1000 and m up to 100: 2e-5 relative above 1e-30, of packets 2e-4. For
 * m up to 500 an outage is off by up to 2e-3, which moves a level that is solved for by 1e-4 dB
 * at most.
 */
RFADE_API enum rfade_status rfade_rate_surface_create(const struct rfade_link *link,
                                                      const struct rfade_target *targets,
                                                      size_t count,
                                                      const struct rfade_rate_domain *domain,
                                                      struct rfade_rate_surface **surface);
RFADE_API void rfade_rate_surface_destroy(struct rfade_rate_surface *surface);

struct rfade_rate_curve; /* opaque: a surface cut at one parameter */

/**
 * Cuts a surface, over no more of the targets and of the SNR than is asked for. A parameter
 * beyond the domain is taken at its end.
 * @param targets  how many of the surface's targets, the first ones; at least 1
 * @param low_db, high_db  the SNR that the curve will be asked about; infinite: all
 * @param[out] curve  _destroy it; holds nothing of the surface
 */
RFADE_API enum rfade_status rfade_rate_surface_cut(const struct rfade_rate_surface *surface,
                                                   double parameter, size_t targets,
                                                   double low_db, double high_db,
                                                   struct rfade_rate_curve **curve);
RFADE_API void rfade_rate_curve_destroy(struct rfade_rate_curve *curve);

/**
 * The probabilities averaged along a way, all of whose SNRs are moved by shift_db. SNR beyond
 * the curve is taken at its end.
 * @param way  [place_count], total weight > 0
 * @param[out] probabilities  [targets of the curve]
 * @return RFADE_OK | RFADE_NO_DATA (no weight)
 */
RFADE_API enum rfade_status rfade_rate_curve_mean(const struct rfade_rate_curve *curve,
                                                  const struct rfade_snr_place *way,
                                                  size_t place_count, double shift_db,
                                                  double *probabilities);

#ifdef __cplusplus
}
#endif
#endif
