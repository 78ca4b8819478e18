/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file common_options.h  The options that every command takes; target struct
 * rfade_common_options. */
#ifndef ROUTEFADE_CLI_COMMON_OPTIONS_H
#define ROUTEFADE_CLI_COMMON_OPTIONS_H

#include "cli/command.h"

extern const struct rfade_option rfade_common_option_table[];
extern const size_t rfade_common_option_count;

/** What holds without options: survey from $ROUTEFADE_SURVEY, else routefade.survey. */
struct rfade_common_options rfade_common_option_defaults(void);

#endif
