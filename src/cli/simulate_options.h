/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file simulate_options.h  What `routefade simulate` is told. Private to src/cli. */
#ifndef ROUTEFADE_CLI_SIMULATE_OPTIONS_H
#define ROUTEFADE_CLI_SIMULATE_OPTIONS_H

#include "cli/command.h"
#include "output/drive_log.h"
#include "routefade/simulate.h"

struct simulate_options {
    int64_t seed;
    double length_m, carrier_hz, speed_kmh, rate_hz;
    struct rfade_numbers k;
    double stretch_m, ray_angle_deg;
    double mean_level_dbm, shadowing_db, decorrelation_m;
    const char *shadowing;
    double step_db, floor_dbm, ceiling_dbm, noise_dbm;
    struct rfade_numbers standstill_at_m;
    double standstill_s;
    double position_scatter_m, fix_interval_s;
    const char *route;
    const char *start, *layout;
    int64_t zone_minutes;
    const char *vehicle, *channel, *second_channel;
    double second_carrier_hz, second_mean_level_dbm;
    const char *output, *truth;
};

extern const struct simulate_options rfade_simulate_defaults;
enum { RFADE_SIMULATE_OPTIONS = 31 };
extern const struct rfade_option rfade_simulate_option_table[];

/** Refuses options that don't go together. */
enum rfade_status rfade_simulate_options_check(const struct simulate_options *given,
                                               struct rfade_error *error);

/** The drive that was asked for; its lists are borrowed from `given`. */
struct rfade_drive_settings rfade_simulate_settings(const struct simulate_options *given);

/** That of the second channel: the same drive, another draw of the fading. */
struct rfade_drive_settings
rfade_simulate_second_settings(const struct simulate_options *given);

enum rfade_log_layout rfade_simulate_layout(const struct simulate_options *given);

#endif
