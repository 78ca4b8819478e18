/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <string.h>

#include "cli/command.h"

/* In the order of the help, one a line. */
/* clang-format off */
static const struct rfade_command *const commands[] = {
    &rfade_command_import,
    &rfade_command_channel,
    &rfade_command_vehicle,
    &rfade_command_route,
    &rfade_command_noise,
    &rfade_command_fit,
    &rfade_command_fading,
    &rfade_command_outage,
    &rfade_command_error_rate,
    &rfade_command_margin,
    &rfade_command_acceptance,
    &rfade_command_fade_timing,
    &rfade_command_diversity,
    &rfade_command_status,
    &rfade_command_estimate,
    &rfade_command_predict,
    &rfade_command_simulate,
    &rfade_command_withdraw,
};
/* clang-format on */

const struct rfade_command *rfade_command_at(size_t index)
{
    return index < sizeof commands / sizeof commands[0] ? commands[index] : NULL;
}

enum rfade_status rfade_usage(struct rfade_error *error, const struct rfade_command *command,
                              const char *what_format, ...)
{
    char what[256];
    char remedy[128];
    va_list arguments;
    va_start(arguments, what_format);
    (void)vsnprintf(what, sizeof what, what_format, arguments);
    va_end(arguments);
    (void)snprintf(remedy, sizeof remedy, "see 'routefade %s --help'", command->name);
    return rfade_error_set(error, RFADE_USAGE, remedy, "%s", what);
}
