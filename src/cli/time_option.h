/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file time_option.h  A time typed as the value of an option. */
#ifndef ROUTEFADE_CLI_TIME_OPTION_H
#define ROUTEFADE_CLI_TIME_OPTION_H

#include <stdint.h>

#include "cli/command.h"

/** ISO 8601, in UTC unless it says otherwise; a date alone is its midnight. RFADE_USAGE */
enum rfade_status rfade_time_option(const struct rfade_command *command, const char *option,
                                    const char *text, int64_t *time_us,
                                    struct rfade_error *error);

#endif
