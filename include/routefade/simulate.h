/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file simulate.h  Drives with known truth: Gaussian scatter with Clarke's spectrum, a
 * direct ray, a correlated lognormal local mean, a receiver with step, floor and ceiling.
 * Reentrant; the generator belongs to the drive and is seeded by the caller.
 */
#ifndef ROUTEFADE_SIMULATE_H
#define ROUTEFADE_SIMULATE_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "routefade/status.h"

#ifdef __cplusplus
extern "C" {
#endif

enum rfade_shadowing {
    RFADE_SHADOWING_SMOOTH,     /**< Gaussian-shaped correlation exp(-(d/D)^2) */
    RFADE_SHADOWING_EXPONENTIAL /**< exp(-d/D), Gudmundson 1991 */
};

struct rfade_drive_settings {
    uint64_t seed;          /**< folded to 32 bits: seeds from 1 to 2^32 - 1 all differ */
    double length_m;        /**< [1e-3, 1e9], and at most 800,000 wavelengths */
    double carrier_hz;      /**< [1e5, 3e11] */
    double speed_m_s;       /**< [1e-3, 1e5], between standstills */
    double rate_hz;         /**< readings a second, on a regular clock, standing or not */
    const double *k;        /**< Rice K by stretch, repeated in turn; the mean power stays */
    size_t k_count;         /**< >= 1 */
    double stretch_m;       /**< length over which one K holds */
    double ray_angle_deg;   /**< direct ray against the road: 90 broadside, 0 along it */
    double mean_level_dbm;  /**< dB-median of the local mean POWER, over the drive */
    double shadowing_db;    /**< standard deviation of the local mean, [0, 30]; 0: none */
    double decorrelation_m; /**< D of the shadowing */
    enum rfade_shadowing shadowing;
    double step_db;     /**< levels are rounded to multiples of it; 0: not rounded */
    double floor_dbm;   /**< lower levels are reported as this one; NaN: no floor */
    double ceiling_dbm; /**< higher levels are reported as this one; NaN: no ceiling */
    const double *standstill_at_m; /**< places where the vehicle stands, in rising order */
    size_t standstill_count;
    double standstill_s; /**< how long, each */
};

struct rfade_drive_reading {
    double time_s;         /**< from the drive's start */
    double distance_m;     /**< true travel */
    double speed_m_s;      /**< 0 at a standstill */
    double level_dbm;      /**< what the receiver reports: rounded, then clipped */
    double power_dbm;      /**< true instantaneous power */
    double local_mean_dbm; /**< true local mean power */
    double k;              /**< true K here */
};

/**
 * The drive's readings, in order. The channel is a function of place: a ray of power
 * K/(K+1) and random phase, and Gaussian scatter of power 1/(K+1) with autocorrelation
 * J0(2 pi d / wavelength) [Clarke 1968], both on top of a lognormal local mean.
 * Same settings, same digits. The scatter doesn't depend on k, the receiver or the speed.
 * @param[out] readings  free() the array; NULL on failure
 * @return RFADE_OK | RFADE_DOMAIN (a setting outside its domain, or more than 1e8 readings) |
 *         RFADE_NO_MEMORY
 */
RFADE_API enum rfade_status rfade_simulate_drive(const struct rfade_drive_settings *settings,
                                                 struct rfade_drive_reading **readings,
                                                 size_t *count);

#ifdef __cplusplus
}
#endif
#endif
