/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file drive_log.h  A simulated drive written as the log that a vehicle would bring back. */
#ifndef ROUTEFADE_OUTPUT_DRIVE_LOG_H
#define ROUTEFADE_OUTPUT_DRIVE_LOG_H

#include <stdint.h>
#include <stdio.h>

#include "common/error.h"
#include "route/geodesy.h"
#include "routefade/simulate.h"

/** How a log lays out its columns. */
enum rfade_log_layout {
    RFADE_LAYOUT_COMMA,     /**< commas, header, ISO 8601 in UTC, position only when new */
    RFADE_LAYOUT_SEMICOLON, /**< semicolons, decimal comma, local time with its zone */
    RFADE_LAYOUT_BLANKS     /**< runs of blanks, no header, epoch in ms, one or two channels */
};

/** Where the vehicle is after `distance_m` of travel. */
struct rfade_drive_line {
    struct rfade_place (*locate)(const void *context, double distance_m);
    const void *context;
};

struct rfade_drive_log {
    enum rfade_log_layout layout;
    const char *vehicle;
    const char *channel;
    const char *second_channel; /**< NULL: none; RFADE_LAYOUT_BLANKS only */
    const struct rfade_drive_reading *readings;
    const struct rfade_drive_reading *second_readings; /**< as many; NULL: none */
    size_t count;
    double step_db;            /**< tells how many decimals a level has */
    double noise_dbm;          /**< level less this is logged as SNR; NaN: no SNR;
                                    RFADE_LAYOUT_COMMA only */
    int64_t start_us;          /**< time of the first reading, since 1970-01-01T00:00:00Z */
    int zone_minutes;          /**< east of UTC; RFADE_LAYOUT_SEMICOLON only */
    double fix_interval_s;     /**< a new position so often, > 0 */
    double position_scatter_m; /**< standard deviation of a fix, north and east each */
    uint64_t seed;             /**< of that scatter */
    struct rfade_drive_line line;
};

/** Writes the log. RFADE_NO_MEMORY, or RFADE_STORAGE if the stream did not take it all. */
enum rfade_status rfade_drive_log_write(FILE *stream, const char *stream_name,
                                        const struct rfade_drive_log *log,
                                        struct rfade_error *error);

/** Writes what was true at each reading, as CSV with exact numbers. */
enum rfade_status rfade_drive_truth_write(FILE *stream, const char *stream_name,
                                          const struct rfade_drive_reading *readings,
                                          size_t count, struct rfade_error *error);

#endif
