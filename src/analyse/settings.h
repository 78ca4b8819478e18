/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file settings.h  What the user can set of the analysis. */
#ifndef ROUTEFADE_ANALYSE_SETTINGS_H
#define ROUTEFADE_ANALYSE_SETTINGS_H

#include "analyse/fingerprint.h"

struct rfade_analysis_settings {
    double window_wavelengths; /**< width of the local mean's window of travel */
    double block_wavelengths;  /**< length of the blocks that measure correlation */
    double gap_s;              /**< a longer gap between readings ends a trace */
    double fix_gap_s;          /**< readings in a longer gap between fixes stay unlocated */
    double noise_margin_db;    /**< > 0: levels are of signal and noise; known noise is taken
                                    off, and levels less than this above it are censored.
                                    0: levels are of the signal alone */
    double confidence;         /**< of the intervals that are stored */
};

/** 40 wavelengths, blocks of 10, gaps of 30 s, levels taken as they are, confidence 0.95. */
struct rfade_analysis_settings rfade_analysis_defaults(void);

/** The settings and the version of the method. */
void rfade_analysis_settings_fingerprint(const struct rfade_analysis_settings *settings,
                                         struct rfade_fingerprint_writer *writer);

#endif
