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
    uint64_t seed;
    double length_m;
    double carrier_hz;
    double speed_m_s;
    double rate_hz;  /**< readings a second */
    const double *k; /**< Rice K by stretch, repeated in turn */
    size_t k_count;
    double stretch_m;       /**< length over which one K holds */
    double ray_angle_deg;   /**< direct ray against the road: 90 broadside, 0 along it */
    double mean_level_dbm;  /**< median of the local mean */
    double shadowing_db;    /**< standard deviation of the local mean */
    double decorrelation_m; /**< D of the shadowing */
    enum rfade_shadowing shadowing;
    double step_db;                /**< receiver's quantisation; 0: none */
    double floor_dbm;              /**< NaN: none */
    double ceiling_dbm;            /**< NaN: none */
    const double *standstill_at_m; /**< places where the vehicle stands */
    size_t standstill_count;
    double standstill_s; /**< how long, each */
};

struct rfade_drive_reading {
    double time_s;     /**< from the drive's start */
    double distance_m; /**< true travel */
    double speed_m_s;
    double level_dbm;      /**< what the receiver reports */
    double power_dbm;      /**< true instantaneous power */
    double local_mean_dbm; /**< true local mean power */
    double k;              /**< true K here */
};

/** The drive's readings, in order. free() the array. Same settings, same digits. */
RFADE_API enum rfade_status rfade_simulate_drive(const struct rfade_drive_settings *settings,
                                                 struct rfade_drive_reading **readings,
                                                 size_t *count);

#ifdef __cplusplus
}
#endif
#endif
