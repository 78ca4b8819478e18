/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file drives.h  Settings that the tests of drives start from. */
#ifndef ROUTEFADE_TESTS_DRIVES_H
#define ROUTEFADE_TESTS_DRIVES_H

#include <math.h>

#include "routefade/simulate.h"

/** Exactly one wavelength a metre. */
static const double one_metre_hz = 299792458.0;
static const double no_ray[] = {0.0};

/** 100 m of Rayleigh fading at 1 m wavelength, ten readings a metre, no receiver effects. */
static inline struct rfade_drive_settings plain_drive(void)
{
    return (struct rfade_drive_settings){.seed = 1,
                                         .length_m = 100.0,
                                         .carrier_hz = one_metre_hz,
                                         .speed_m_s = 10.0,
                                         .rate_hz = 100.0,
                                         .k = no_ray,
                                         .k_count = 1,
                                         .stretch_m = 100.0,
                                         .ray_angle_deg = 90.0,
                                         .mean_level_dbm = -80.0,
                                         .decorrelation_m = 50.0,
                                         .floor_dbm = NAN,
                                         .ceiling_dbm = NAN};
}

#endif
