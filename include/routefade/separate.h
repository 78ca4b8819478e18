/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file separate.h  A pass along a route taken apart into local mean and fast fading.
 * Input in order of travel; output are tallies by segment. Reentrant; no input or output.
 */
#ifndef ROUTEFADE_SEPARATE_H
#define ROUTEFADE_SEPARATE_H

#include <stddef.h>
#include <stdint.h>

#include "routefade/status.h"
#include "routefade/tally.h"

#ifdef __cplusplus
extern "C" {
#endif

/** No floor, no ceiling. */
#define RFADE_NO_FLOOR_CDB INT32_MIN
#define RFADE_NO_CEILING_CDB INT32_MAX

/** One located reading. */
struct rfade_track_reading {
    int64_t time_us;
    int64_t travel_mm; /**< distance travelled along the pass; never falls; equal: standing */
    int32_t level_cdb;
    int32_t segment; /**< index of the segment that the reading lies in */
};

struct rfade_receiver {
    int32_t step_cdb;    /**< quantisation step, >= 1 */
    int32_t floor_cdb;   /**< readings at or below stand for all below floor + step/2 */
    int32_t ceiling_cdb; /**< readings at or above stand for all from ceiling - step/2 up */
};

struct rfade_separate_settings {
    double wavelength_m;
    double window_wavelengths; /**< width of the local mean's window of travel; default 40 */
    double block_wavelengths;  /**< length of the blocks that measure correlation */
};

/** Integer sums from which the sampling is judged; they add over traversals. */
struct rfade_sampling_sums {
    int64_t readings;         /**< rows, standing ones too */
    int64_t standing;         /**< rows without travel */
    int64_t moving_intervals; /**< steps from one row to the next with travel */
    int64_t updates;          /**< of these, how many changed the level */
    int64_t jump_square_cdb2; /**< sum of squared level changes at updates */
    int64_t step_square_cdb2; /**< sum over updates of the quantisation step squared */
    int64_t travel_mm;
    int64_t windows_mm;     /**< sum over readings of their window's travel */
    int64_t window_updates; /**< sum over readings of the updates in their window */
    int64_t window_count;   /**< readings that had a window */
    int64_t lag_product; /**< sum of products of fast fading (cdB^2) half a wavelength apart */
    int64_t lag_square;  /**< sum of squares at the first of each such pair */
    int64_t lag_pairs;
    int64_t
        half_window_difference_cdb2; /**< sum of squared differences of adjacent half windows */
    int64_t half_windows;
    int64_t wavelength_um_readings; /**< sum over readings of the wavelength in micrometres */
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
RFADE_API enum rfade_sampling rfade_sampling_label(const struct rfade_sampling_sums *sums);

/** What one traversal of one segment gave. Owned by the list. */
struct rfade_traversal_tally {
    int32_t segment;
    int64_t first_time_us;
    int64_t last_time_us;
    struct rfade_tally *fading;     /**< fast fading about its local mean; weights in mm */
    struct rfade_tally *level;      /**< absolute level; weights in mm */
    struct rfade_tally *local_mean; /**< local mean power, dBm, by 0.1 dB; weights in mm */
    struct rfade_blocks blocks;
    struct rfade_sampling_sums sampling;
};

struct rfade_separation {
    struct rfade_traversal_tally *traversals; /**< in order of travel */
    size_t count;
};

/**
 * Separates one pass. Windows are centred on each reading, by travel; where the pass begins
 * or ends they are cut. The local mean is the travel-weighted mean POWER of the window.
 * A run of readings in one segment makes one traversal.
 */
RFADE_API enum rfade_status rfade_separate(const struct rfade_track_reading *readings,
                                           size_t count, const struct rfade_receiver *receiver,
                                           const struct rfade_separate_settings *settings,
                                           struct rfade_separation *result);
RFADE_API void rfade_separation_clear(struct rfade_separation *separation);

/**
 * Share of the power's variance that dividing by a local mean over the window takes away:
 * var(window mean)/var(power) under Clarke's correlation J0^2 [Clarke 1968; Lee 1985].
 */
RFADE_API double rfade_window_narrowing(double window_wavelengths, double k);

/**
 * Variance of the mean power over a stretch, relative to the mean power squared, under
 * Rice fading with isotropic scatter: what makes the segment's local mean uncertain.
 */
RFADE_API double rfade_stretch_mean_variance(double length_wavelengths, double k);

#ifdef __cplusplus
}
#endif
#endif
