/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file reception.h  What by-segment commands are told of modulation, diversity and the other
 * direction of the link. */
#ifndef ROUTEFADE_CLI_RECEPTION_H
#define ROUTEFADE_CLI_RECEPTION_H

#include "analyse/rates.h"
#include "cli/command.h"

struct rfade_reception_options {
    int64_t branches;
    const char *combining;
    double other_direction_db;
};

#define RFADE_RECEPTION_DEFAULTS                                                               \
    {                                                                                          \
        1, "mrc", 0.0                                                                          \
    }

/** Lines of a command's option table; `type` has a member `reception` of the struct above. */
#define RFADE_RECEPTION_OPTION_LINES(type)                                                     \
    {"branches",                                                                               \
     "L",                                                                                      \
     RFADE_OPTION_INTEGER,                                                                     \
     offsetof(type, reception.branches),                                                       \
     1,                                                                                        \
     RFADE_BRANCHES_MAX,                                                                       \
     NULL,                                                                                     \
     "diversity branches, each like the one measured, fading independently (1)"},              \
        {"combining",                                                                          \
         "HOW",                                                                                \
         RFADE_OPTION_CHOICE,                                                                  \
         offsetof(type, reception.combining),                                                  \
         0,                                                                                    \
         0,                                                                                    \
         rfade_combining_name,                                                                 \
         "mrc (maximal ratio, coherent, before detection) or selection (mrc)"},                \
    {                                                                                          \
        "other-direction-db", "DB", RFADE_OPTION_NUMBER,                                       \
            offsetof(type, reception.other_direction_db), -200, 200, NULL,                     \
            "for the link's other direction: what its transmit power, antennas and receiver "  \
            "add to the measured SNR (0)"                                                      \
    }

/** "mrc", "selection"; NULL past the last. */
const char *rfade_combining_name(size_t index);

/** The way of that name, which is one of the above. */
enum rfade_combining rfade_combining_by_name(const char *name);

struct rfade_reception rfade_reception_take(const struct rfade_reception_options *given);

/** Values of columns branches, combining ("none" of one branch) and other_direction_db. */
void rfade_reception_values(const struct rfade_reception_options *given,
                            struct rfade_value values[3]);

/**
 * The modulation of a name that was typed.
 * @return RFADE_OK | RFADE_USAGE, with the names that there are
 */
enum rfade_status rfade_modulation_take(const struct rfade_command *command, const char *name,
                                        const struct rfade_modulation **modulation,
                                        struct rfade_error *error);

/** The modulations of all names that were typed, at most RFADE_MODULATION_COUNT. */
enum rfade_status
rfade_modulations_take(const struct rfade_command *command, const struct rfade_texts *names,
                       const struct rfade_modulation *modulations[RFADE_MODULATION_COUNT],
                       struct rfade_error *error);

/** The word in the output for what a target is of: "outage", "bit", ... */
const char *rfade_target_kind_name(enum rfade_target_kind kind);

/**
 * The level at which Es/N0 is 0 dB on a row's channel, in the direction that was asked for.
 * @return RFADE_OK | RFADE_INPUT (noise, bandwidth or symbol rate isn't known)
 */
enum rfade_status rfade_reception_reference(const struct rfade_segment_result *row,
                                            const struct rfade_reception_options *given,
                                            double *reference_dbm, struct rfade_error *error);

#endif
