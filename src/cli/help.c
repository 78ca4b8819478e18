/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "cli/command.h"
#include "cli/common_options.h"

static const char cautions[] =
    "Before you drive and before you rely on a figure:\n"
    "  - Nobody operates a logger while driving. Stop, or take a passenger for it.\n"
    "  - Transmit only as your licence allows, and keep people outside the limits of\n"
    "    exposure to radio-frequency fields around your antennas.\n"
    "  - A predicted outage is no safety case for an emergency, rail or life-critical link:\n"
    "    local rules and a licensed engineer decide.\n";

/* Of the longest command, so that what they do stands in one column. */
static int name_width(void)
{
    size_t width = 0;
    for (size_t i = 0; rfade_command_at(i); i++) {
        size_t length = strlen(rfade_command_at(i)->name);
        width = length > width ? length : width;
    }
    return (int)width;
}

void rfade_program_help(FILE *stream)
{
    (void)fputs("routefade: how a radio link fades along a route, how often it is below its\n"
                "threshold, and how sure that is.\n\n"
                "Usage: routefade COMMAND [OPTION]... [ARGUMENT]...\n\n"
                "Commands:\n",
                stream);
    for (size_t i = 0; rfade_command_at(i); i++)
        (void)fprintf(stream, "  %-*s %s\n", name_width(), rfade_command_at(i)->name,
                      rfade_command_at(i)->summary);
    (void)fputs("\n'routefade COMMAND --help' explains a command; 'routefade --version' names\n"
                "the version. Exit status: 0 done; 1 failed, the survey is as before; 2 wrong\n"
                "usage; 3 done, but at least one file was refused whole.\n\n",
                stream);
    (void)fputs(cautions, stream);
}

void rfade_command_help(FILE *stream, const struct rfade_command *command)
{
    (void)fprintf(stream, "Usage: routefade %s [OPTION]...%s%s\n\nTo %s.\n", command->name,
                  command->arguments ? " " : "", command->arguments ? command->arguments : "",
                  command->summary);
    if (command->details) {
        (void)fputc('\n', stream);
        rfade_help_text(stream, command->details, 0);
    }
    if (command->option_count > 0)
        (void)fputs("\nOptions:\n", stream);
    rfade_options_help(stream, command->options, command->option_count);
    (void)fputs("\nOptions of every command:\n", stream);
    rfade_options_help(stream, rfade_common_option_table, rfade_common_option_count);
    (void)fputc('\n', stream);
    (void)fputs(cautions, stream);
}
