/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file threshold.h  The threshold of a by-segment command, in the unit the user thinks in. */
#ifndef ROUTEFADE_CLI_THRESHOLD_H
#define ROUTEFADE_CLI_THRESHOLD_H

#include "analyse/results.h"
#include "cli/command.h"

/** As typed; NaN: not given. */
struct rfade_threshold_options {
    double db;
    double esn0_db;
    double dbm;
};

#define RFADE_THRESHOLD_DEFAULTS                                                               \
    {                                                                                          \
        NAN, NAN, NAN                                                                          \
    }

/** Lines of a command's option table; `type` has a member `threshold` of the struct above. */
#define RFADE_THRESHOLD_OPTION_LINES(type)                                                     \
    {"threshold-db",                                                                           \
     "X",                                                                                      \
     RFADE_OPTION_NUMBER,                                                                      \
     offsetof(type, threshold.db),                                                             \
     -200,                                                                                     \
     200,                                                                                      \
     NULL,                                                                                     \
     "SNR in the channel's bandwidth, dB"},                                                    \
        {"threshold-esn0-db",                                                                  \
         "X",                                                                                  \
         RFADE_OPTION_NUMBER,                                                                  \
         offsetof(type, threshold.esn0_db),                                                    \
         -200,                                                                                 \
         200,                                                                                  \
         NULL,                                                                                 \
         "Es/N0, dB: needs the channel's bandwidth and symbol rate"},                          \
    {                                                                                          \
        "threshold-dbm", "X", RFADE_OPTION_NUMBER, offsetof(type, threshold.dbm), -300, 200,   \
            NULL, "received level, dBm"                                                        \
    }

/** The one that was given: its column's name and value. */
struct rfade_threshold_asked {
    const char *column;
    double value;
};

/** @return RFADE_OK | RFADE_USAGE (none, or several) */
enum rfade_status rfade_threshold_choose(const struct rfade_command *command,
                                         const struct rfade_threshold_options *given,
                                         struct rfade_threshold_asked *asked,
                                         struct rfade_error *error);

/**
 * The threshold on a row's channel, as a level and as SNR in the bandwidth.
 * @return RFADE_OK | RFADE_INPUT (what is known of the channel does not tell)
 */
enum rfade_status rfade_threshold_here(const struct rfade_segment_result *row,
                                       const struct rfade_threshold_asked *asked,
                                       struct rfade_threshold *here, struct rfade_error *error);

/** Whether it is a received level, which no noise comes into. */
bool rfade_threshold_is_level(const struct rfade_threshold_asked *asked);

/** Values of columns noise_dbm and noise: missing where the threshold is a received level.
 * Without a column there is no threshold, but SNR. */
void rfade_threshold_noise_values(const struct rfade_threshold_asked *asked,
                                  const struct rfade_segment_result *row,
                                  struct rfade_value values[2]);

#endif
