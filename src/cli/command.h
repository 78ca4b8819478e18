/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file command.h  What a command of the program is: a description, a table of options and
 * a function. Adding one is a file with its `struct rfade_command` and a line in commands.c;
 * the help derives from the tables.
 */
#ifndef ROUTEFADE_CLI_COMMAND_H
#define ROUTEFADE_CLI_COMMAND_H

#include <stdbool.h>
#include <stddef.h>
#include <stdio.h>

#include "cli/options.h"
#include "common/error.h"
#include "output/rows.h"

/** Exit statuses of the program. */
enum rfade_exit {
    RFADE_EXIT_DONE = 0,
    RFADE_EXIT_FAILED = 1, /**< the survey is as before */
    RFADE_EXIT_USAGE = 2,  /**< the command line can't be understood */
    RFADE_EXIT_PARTLY = 3  /**< done, but a file was refused whole */
};

/** Options that every command takes. */
struct rfade_common_options {
    const char *survey;                     /**< path; never NULL when a command runs */
    const char *format_name;                /**< as typed */
    const struct rfade_rows_format *format; /**< of that name */
    bool quiet;
    bool help;
};

/** One run of a command. */
struct rfade_run {
    const struct rfade_common_options *common;
    const void *options;          /**< the command's struct, filled */
    struct rfade_texts arguments; /**< what is no option; count within the command's limits */
    FILE *output;                 /**< standard output */
    FILE *notes;                  /**< standard error: progress and notes */
    bool file_refused;            /**< set by the command: exit 3 */
};

struct rfade_command {
    const char *name;
    const char *arguments; /**< as the help shows them, for instance "FILE"; NULL: none */
    const char *summary;   /**< one line without a full stop */
    const char *details;   /**< a paragraph for the command's own help; NULL: none */
    size_t arguments_min;
    size_t arguments_max;
    const struct rfade_option *options;
    size_t option_count;
    const void *defaults; /**< the options' struct before parsing */
    size_t options_size;
    enum rfade_status (*run)(struct rfade_run *run, struct rfade_error *error);
};

/** The command number `index`, from 0; NULL past the last. */
const struct rfade_command *rfade_command_at(size_t index);

/** Help of the program and of one command. */
void rfade_program_help(FILE *stream);
void rfade_command_help(FILE *stream, const struct rfade_command *command);

/** The whole program: runs a command, prints at most one error line, returns the status. */
enum rfade_exit rfade_program(int argc, char **argv, FILE *output, FILE *notes);

/** The one line that tells what went wrong: "routefade: FILE:LINE: what; remedy". */
void rfade_print_error(FILE *notes, const struct rfade_error *error);

/** RFADE_USAGE with a remedy that points to the command's help. */
enum rfade_status rfade_usage(struct rfade_error *error, const struct rfade_command *command,
                              const char *what_format, ...)
    __attribute__((format(printf, 3, 4)));

extern const struct rfade_command rfade_command_acceptance;
extern const struct rfade_command rfade_command_channel;
extern const struct rfade_command rfade_command_error_rate;
extern const struct rfade_command rfade_command_diversity;
extern const struct rfade_command rfade_command_estimate;
extern const struct rfade_command rfade_command_fade_timing;
extern const struct rfade_command rfade_command_fading;
extern const struct rfade_command rfade_command_fit;
extern const struct rfade_command rfade_command_import;
extern const struct rfade_command rfade_command_margin;
extern const struct rfade_command rfade_command_noise;
extern const struct rfade_command rfade_command_outage;
extern const struct rfade_command rfade_command_predict;
extern const struct rfade_command rfade_command_route;
extern const struct rfade_command rfade_command_simulate;
extern const struct rfade_command rfade_command_status;
extern const struct rfade_command rfade_command_vehicle;
extern const struct rfade_command rfade_command_withdraw;

#endif
