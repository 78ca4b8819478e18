/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file stretch.h  Outage of one stretch of route: fast fading averaged over the local-mean
 * track that was driven, with what is known of its uncertainty.
 * Reentrant; no input or output.
 */
#ifndef ROUTEFADE_STRETCH_H
#define ROUTEFADE_STRETCH_H

#include <stddef.h>

#include "routefade/model.h"
#include "routefade/status.h"
#include "routefade/tally.h"

#ifdef __cplusplus
extern "C" {
#endif

/** The local mean along the track: `weight` (of travel) at `level_dbm`. */
struct rfade_local_mean {
    double level_dbm;
    double weight; /**< > 0 */
};

/** How one stretch fades. */
struct rfade_stretch {
    const struct rfade_model *model;
    double parameter;     /**< K or m; ignored for rayleigh */
    double parameter_low; /**< ends of its confidence interval */
    double parameter_high;
    double offset_db; /**< fitted mean of the fast fading about the local mean, dB */
    const struct rfade_local_mean *track;
    size_t track_count;
    double length_wavelengths;   /**< travel of one pass */
    double passes;               /**< how many passes the track is made of */
    double level_uncertainty_db; /**< standard error of the stretch's mean level, dB:
                                      fading not averaged out, and calibration */
    double calibration_db;       /**< the part of it that all of the track shares, dB */
    double spread_below;      /**< share, [0, 1], by which the interval of the local mean's */
    double spread_above;      /**< standard deviation reaches below it, and above; 0: known */
    double pass_deviation_db; /**< standard deviation of another pass's level, fading left
                                   out; 0: passes under the same conditions */
    double slow_variance;     /**< variance of one pass's mean power, relative, beyond that
                                   under a ray across the road; 0: none */
    double readings;          /**< by which one more pass would be observed; 0: many */
    double confidence;        /**< of both intervals, two-sided */
};

struct rfade_stretch_outage {
    double outage;    /**< probability of being below the threshold on this stretch */
    double low, high; /**< confidence interval of that probability */
    double next_low;  /**< prediction interval of the fraction of travel that one more */
    double next_high; /**< pass over the same local mean finds below the threshold */
    double crossings_per_wavelength; /**< mean rate of fades along the stretch */
};

/**
 * Outage of a stretch at a threshold.
 *
 * outage = sum w F(threshold - local mean) / sum w. The confidence interval combines, on the
 * scale of ln(odds), the ends of the intervals of the parameter, the mean level and the local
 * mean's standard deviation by the method of variance estimates recovery [Zou and Donner 2008,
 * eq. 4]; only the part of the
 * track that lies near the threshold counts, so its level is less certain than the whole
 * stretch's. The prediction interval takes the readings below the threshold on one pass as a
 * Poisson number of fades of geometric length [Polya and Aeppli; Johnson, Kemp and Kotz 2005,
 * section 9.7], with the mean of the outage and the variance that isotropic scatter gives it
 * (fluctuation.c), mixed over the uncertainty of the outage itself and over how much passes
 * differ. With one pass nothing is known of that: it holds for the same conditions. It is made
 * for another scatter over the same local mean; of the pass that was fitted itself, whose
 * fades the fit has seen, it holds the fraction nearly always.
 *
 * @return RFADE_OK | RFADE_DOMAIN | RFADE_NO_DATA (empty track)
 * Accuracy: the outage to that of the model's tails; interval ends are solved to 1e-6
 * relative, the statistics behind them are approximations of first order.
 */
RFADE_API enum rfade_status rfade_stretch_outage(const struct rfade_stretch *stretch,
                                                 double threshold_dbm,
                                                 struct rfade_stretch_outage *result);

/**
 * The same where several models were fitted: the outage is the preferred one's, the intervals
 * those of the models' weighted mean distribution [Hoeting, Madigan, Raftery and Volinsky
 * 1999, eq. 1; weights of Akaike: Burnham and Anderson 2002, section 4.3]. Models that fit
 * about equally well may differ by orders in the deepest fades.
 * @param stretches  [count], alike but for model, parameters and offset
 * @param weights    [count], >= 0
 * @param preferred  index of the preferred model
 * @return as above; RFADE_DOMAIN for more stretches than there are models, too
 */
RFADE_API enum rfade_status rfade_stretch_outage_mixed(const struct rfade_stretch *stretches,
                                                       const double *weights, size_t count,
                                                       size_t preferred, double threshold_dbm,
                                                       struct rfade_stretch_outage *result);

/**
 * Level crossings per wavelength of travel, in one direction, of a level x_db about the mean
 * power: isotropic scatter, direct ray across the road. The rate in time is this times
 * speed / wavelength. [Rice 1948; Yacoub, Bautista and Guedes 1999, eq. 17 for Nakagami]
 * @param parameter  K or m; ignored for rayleigh
 * Accuracy: that of the model's density, 1e-12 relative.
 */
RFADE_API enum rfade_status rfade_crossings_per_wavelength(const struct rfade_model *model,
                                                           double parameter, double x_db,
                                                           double *crossings);

/** Share of a tally of absolute levels that lies below a threshold. */
struct rfade_observed {
    double fraction; /**< intervals that straddle the threshold split in proportion; NaN if a
                          censored reading could lie on either side */
    double low;      /**< bounds: straddling readings all above, */
    double high;     /**< or all below */
};

/** @return RFADE_OK | RFADE_DOMAIN (NaN threshold) | RFADE_NO_DATA (empty tally) */
RFADE_API enum rfade_status rfade_observed_below(struct rfade_tally *levels,
                                                 double threshold_dbm,
                                                 struct rfade_observed *result);

#ifdef __cplusplus
}
#endif
#endif
