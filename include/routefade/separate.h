/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file separate.h  A pass along a route taken apart into local mean and fast fading.
 * Input in order of travel; output are tallies by segment. Reentrant; no input or output.
 */
#ifndef ROUTEFADE_SEPARATE_H
#define ROUTEFADE_SEPARATE_H

#include <stddef.h>
#include <stdint.h>

#include "routefade/crossings.h"
#include "routefade/status.h"
#include "routefade/tally.h"

#ifdef __cplusplus
extern "C" {
#endif

/** No floor, no ceiling. */
#define RFADE_NO_FLOOR_CDB INT32_MIN
#define RFADE_NO_CEILING_CDB INT32_MAX

/** A reading without an SNR. */
#define RFADE_NO_SNR_CDB INT32_MIN

/** One located reading. */
struct rfade_track_reading {
    int64_t time_us;
    int64_t travel_mm; /**< distance travelled along the pass; never falls; equal: standing */
    int32_t level_cdb;
    int32_t segment; /**< index of the segment that the reading lies in */
    int32_t snr_cdb; /**< as logged, in the bandwidth, or RFADE_NO_SNR_CDB; not looked at where
                          the receiver reports no SNR */
};

struct rfade_receiver {
    int32_t step_cdb;        /**< quantisation step, >= 1 */
    int32_t floor_cdb;       /**< readings at or below stand for all below floor + step/2 */
    int32_t ceiling_cdb;     /**< readings at or above stand for all from ceiling - step/2 up */
    int32_t snr_step_cdb;    /**< quantisation step of the SNR; 0: it reports none */
    int32_t snr_ceiling_cdb; /**< an SNR at or above stands for all above, and says nothing of
                                  the noise; RFADE_NO_CEILING_CDB: none */
};

struct rfade_separate_settings {
    double wavelength_m;       /**< [1e-3, 1e4] */
    double window_wavelengths; /**< width of the local mean's window of travel, [4, 2000];
                                    RFADE_DEFAULT_WINDOW_WAVELENGTHS [Lee 1985] */
    double block_wavelengths;  /**< length of the blocks that measure correlation, [1, 1e5];
                                    RFADE_DEFAULT_BLOCK_WAVELENGTHS: shorter ones miss
                                    correlation, longer ones leave a segment too few */
};
#define RFADE_DEFAULT_WINDOW_WAVELENGTHS 40.0
#define RFADE_DEFAULT_BLOCK_WAVELENGTHS 10.0

/** How many lengths, each twice the one before, the movement of the local mean is seen over:
 * window/16, window/8, window/4 and window/2. */
enum { RFADE_SAMPLING_SCALES = 4 };

/** Distances at which the fast fading is compared with itself. */
enum { RFADE_LAGS = 16 };
#define RFADE_LAG_WAVELENGTHS 0.25

/**
 * Integer sums from which the sampling is judged; they add over traversals. Products are
 * weighted by travel: mm cdB^2. In a pass whose level is held, everything below `travel_mm`
 * is about the updates alone, and the rows between them are left out of the tallies.
 */
struct rfade_sampling_sums {
    int64_t readings;         /**< rows, standing ones too */
    int64_t standing;         /**< rows without travel since the one before */
    int64_t held;             /**< rows of passes whose level is held between updates */
    int64_t moving_intervals; /**< steps from one row to the next with travel */
    int64_t updates;          /**< of these, how many changed the level */
    int64_t jump_square_cdb2; /**< sum of squared level changes at updates */
    int64_t step_square_cdb2; /**< sum over updates of the quantisation step squared */
    int64_t travel_mm;
    int64_t window_count;           /**< readings that had a window */
    int64_t windows_mm;             /**< sum over them of their window's travel */
    int64_t window_readings;        /**< sum over them of the readings in their window */
    int64_t wavelength_um_readings; /**< sum over them of the wavelength, micrometres */
    int64_t near_square; /**< squared level differences half a wavelength (or a bit) on */
    int64_t near_mm;
    int64_t far_square; /**< the same two wavelengths on */
    int64_t far_mm;
    int64_t fading_sum;    /**< fast fading: mm cdB */
    int64_t fading_square; /**< fast fading: mm cdB^2 */
    int64_t fading_mm;
    /** Squared second differences of three adjacent means, by scale, out to 20 windows
     * beyond the segment on either side (so they overlap from segment to segment). */
    int64_t curvature_square[RFADE_SAMPLING_SCALES];
    int64_t curvature_mm[RFADE_SAMPLING_SCALES];
    /** Products of the fast fading (power over local mean less 1, in thousandths) of readings
     * that lie (i + 1) RFADE_LAG_WAVELENGTHS apart or a bit more: mm 1e-6; the distances at
     * which they lie, mm mm; and the travel that they stand for. */
    int64_t lag_product[RFADE_LAGS];
    int64_t lag_distance[RFADE_LAGS];
    int64_t lag_mm[RFADE_LAGS];
};

enum rfade_sampling {
    RFADE_RESOLVED,     /**< the sampling could see the fast fading */
    RFADE_INSEPARABLE,  /**< local mean moves within the window: not told apart */
    RFADE_UNDERSAMPLED, /**< too few readings a window for a local mean */
    RFADE_AVERAGED,     /**< the receiver smoothed the fast fading away */
    RFADE_HELD,         /**< rows repeat a level that is updated much more rarely */
    RFADE_STATIONARY    /**< no travel: nothing of fading over distance was seen */
};

/** Fixed lower-case word: "resolved", "inseparable", ... */
RFADE_API const char *rfade_sampling_name(enum rfade_sampling sampling);

/** What the sums say; the rules and their figures stand in sampling_label.c. */
RFADE_API enum rfade_sampling rfade_sampling_label(const struct rfade_sampling_sums *sums);

/** Adds sign (1 or -1) times `other`; RFADE_OVERFLOW and RFADE_DOMAIN leave `sums` as is. */
RFADE_API enum rfade_status rfade_sampling_merge(struct rfade_sampling_sums *sums,
                                                 const struct rfade_sampling_sums *other,
                                                 int sign);

/** The members in their order as little-endian int64, nothing else. free() it. */
RFADE_API enum rfade_status rfade_sampling_encode(const struct rfade_sampling_sums *sums,
                                                  uint8_t **bytes, size_t *size);

/** RFADE_INPUT, and all 0, if the size is not that of the sums. */
RFADE_API enum rfade_status rfade_sampling_decode(const uint8_t *bytes, size_t size,
                                                  struct rfade_sampling_sums *sums);

/** What one traversal of one segment gave. Owned by the list. */
struct rfade_traversal_tally {
    int32_t segment;
    int64_t first_time_us;
    int64_t last_time_us;
    struct rfade_tally *fading;     /**< fast fading about its local mean; weights in mm */
    struct rfade_tally *level;      /**< absolute level; weights in mm */
    struct rfade_tally *local_mean; /**< local mean power, dBm, by 0.1 dB; weights in mm */
    struct rfade_tally *snr;        /**< logged SNR, dB; weights in mm; empty without any */
    struct rfade_tally *noise;      /**< level less SNR, dBm, by 0.1 dB; weights in mm */
    struct rfade_blocks blocks;
    struct rfade_sampling_sums sampling;
    struct rfade_crossings crossings;
};

struct rfade_separation {
    struct rfade_traversal_tally *traversals; /**< in order of travel */
    size_t count;
};

/**
 * Separates one pass. Each reading weighs the halves of the gaps of travel to its neighbours,
 * each half at most half a wavelength: a vehicle that stands adds nothing, and readings far
 * apart count evenly. Windows are centred on each reading, by travel; where the pass begins
 * or ends they are cut. The local mean is the weighted mean POWER of the window; a censored
 * reading enters it with the level that was reported. A run of readings in one segment makes
 * one traversal; the window reaches over the segment's ends, the blocks do not.
 * @param readings  [count], travel never falling; at most 1e10 mm of travel, levels within
 *                  240 dB of each other, SNR within 10,000 dB of 0
 * @return RFADE_OK | RFADE_DOMAIN | RFADE_NO_DATA (no readings) | RFADE_NO_MEMORY |
 *         RFADE_OVERFLOW; on failure `result` is empty
 */
RFADE_API enum rfade_status rfade_separate(const struct rfade_track_reading *readings,
                                           size_t count, const struct rfade_receiver *receiver,
                                           const struct rfade_separate_settings *settings,
                                           struct rfade_separation *result);
RFADE_API void rfade_separation_clear(struct rfade_separation *separation);

/** Directions of the direct ray against the road that are told apart: i * 90/(n - 1) degrees,
 * from along the road (0) to across (the last). */
enum { RFADE_RAY_DIRECTIONS = 13 };

/** How likely the direct ray came from each direction; sums to 1. */
struct rfade_ray {
    double weight[RFADE_RAY_DIRECTIONS];
};

/** A ray from one direction, rounded to the nearest that is told apart. */
RFADE_API struct rfade_ray rfade_ray_at(double angle_deg);

/**
 * What the correlation of the fast fading over a few wavelengths says of the ray's direction,
 * given K; the derivation stands in ray.c. Where nothing is known: a ray across the road.
 * @param k  Rice K, [0, 1e9]
 */
RFADE_API struct rfade_ray rfade_ray_from_lags(const struct rfade_sampling_sums *sums,
                                               double k);

/**
 * Means of J0(2 pi u) cos(2 pi u c), for the ray from each direction, and of J0(2 pi u)^2 over
 * lags u from 0 to a length: all that the variances below need, whatever K and the ray.
 */
struct rfade_lag_means {
    double length_wavelengths;
    double plain_ray[RFADE_RAY_DIRECTIONS]; /**< up to 1000 wavelengths */
    double plain_scatter;
    double falling_ray[RFADE_RAY_DIRECTIONS]; /**< with weight 2 (1 - u/length) */
    double falling_scatter;
};

/**
 * @param length_wavelengths  [1e-9, 1e12]
 * @return RFADE_OK | RFADE_DOMAIN | RFADE_NO_MEMORY
 * Accuracy: 1e-13 absolute up to 1000 wavelengths; beyond as the stretch's mean variance.
 */
RFADE_API enum rfade_status rfade_lag_means(double length_wavelengths,
                                            struct rfade_lag_means *means);

/** rfade_stretch_mean_variance over the means' length. */
RFADE_API double rfade_lag_mean_variance(const struct rfade_lag_means *stretch, double k,
                                         const struct rfade_ray *ray);

struct rfade_narrowing {
    double power; /**< rfade_window_narrowing */
    double log;   /**< rfade_window_log_narrowing */
};

/** Both narrowings from the lag means over a window and over half of it; NaN for a bad K. */
RFADE_API struct rfade_narrowing rfade_lag_narrowing(const struct rfade_lag_means *window,
                                                     const struct rfade_lag_means *half,
                                                     double k, const struct rfade_ray *ray);

/**
 * Share of the power's normalised variance that dividing by the local mean of a centred
 * window takes away, under Rice fading with isotropic scatter [Clarke 1968]: to first order
 * in 1/window, third moments included. Not the same as var(window mean)/var(power): for
 * Rayleigh fading it is about twice that.
 * @param window_wavelengths  [4, 2000]
 * @param k                   Rice K, [0, 1e9]
 * @param ray                 directions of the direct ray
 * @return the share, or NaN outside the domain
 * Accuracy of the integrals 1e-10; the expansion is good to about a tenth of the share.
 */
RFADE_API double rfade_window_narrowing(double window_wavelengths, double k,
                                        const struct rfade_ray *ray);

/**
 * What the same dividing takes away from ln E[y] - E[ln y], from which maximum likelihood
 * finds Nakagami's m [Thom 1958]: cov(y, d) - var(d)/2, d the window's mean less 1.
 * Domain, failure and accuracy as above.
 */
RFADE_API double rfade_window_log_narrowing(double window_wavelengths, double k,
                                            const struct rfade_ray *ray);

/**
 * Variance of the mean power over a stretch, relative to the mean power squared:
 * (2/L) integral from 0 to L of (1 - u/L) [J0(2 pi u)^2 + 2K J0(2 pi u) cos(2 pi u c)] du
 * over (1 + K)^2, c the cosine of the ray's direction, under Rice fading with isotropic
 * scatter [Clarke 1968; Lee 1985]: what makes the segment's local mean uncertain.
 * @param length_wavelengths  L > 0
 * @param k                   Rice K, [0, 1e9]
 * @param ray                 directions of the direct ray: the variance is their mean
 * @return the variance, or NaN outside the domain
 * Accuracy: relative 1e-9 up to 1000 wavelengths; beyond, 2e-5 with the ray across the road,
 * 1 % from other directions.
 */
RFADE_API double rfade_stretch_mean_variance(double length_wavelengths, double k,
                                             const struct rfade_ray *ray);

#ifdef __cplusplus
}
#endif
#endif
