/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file options.h  Long options read into a command's own struct by a table of typed
 * targets. Numbers have a decimal point whatever the locale. Every fault is one line that
 * names the option, RFADE_USAGE.
 */
#ifndef ROUTEFADE_CLI_OPTIONS_H
#define ROUTEFADE_CLI_OPTIONS_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>

#include "common/error.h"

/** The type of the member that an option fills. */
enum rfade_option_type {
    RFADE_OPTION_FLAG,    /**< bool */
    RFADE_OPTION_TEXT,    /**< const char *, borrowed from the command line */
    RFADE_OPTION_CHOICE,  /**< const char *, one of `choice` */
    RFADE_OPTION_NUMBER,  /**< double in [minimum, maximum] */
    RFADE_OPTION_INTEGER, /**< int64_t in [minimum, maximum] */
    RFADE_OPTION_NUMBERS, /**< struct rfade_numbers: repeated, and comma-separated */
    RFADE_OPTION_TEXTS    /**< struct rfade_texts: repeated */
};

/** Owned by the options that hold them; all zero is none. */
struct rfade_numbers {
    double *items;
    size_t count;
};
struct rfade_texts {
    const char **items; /* the array is owned, the texts are the command line's */
    size_t count;
};

struct rfade_option {
    const char *name;     /**< without the dashes */
    const char *argument; /**< what the help calls the value; NULL for a flag */
    enum rfade_option_type type;
    size_t offset;  /**< of the member in the options' struct */
    double minimum; /**< of numbers; both 0: any finite number */
    double maximum;
    const char *(*choice)(size_t index); /**< the words of a CHOICE; NULL past the last */
    const char *help;                    /**< one short sentence without a full stop */
};

/** A table of options and the struct that they fill. */
struct rfade_option_group {
    const struct rfade_option *options;
    size_t count;
    void *target;
};

/**
 * Reads argv[1..] into the groups. Arguments that are no options are kept in `arguments`,
 * in order; "--" ends the options. Unambiguous beginnings of option names are understood.
 * @param help_command  "routefade predict --help": where errors send the reader
 */
enum rfade_status rfade_options_parse(int argc, char *const *argv,
                                      const struct rfade_option_group *groups,
                                      size_t group_count, const char *help_command,
                                      struct rfade_texts *arguments, struct rfade_error *error);

/** Frees the lists that parsing made. */
void rfade_options_clear(const struct rfade_option_group *groups, size_t group_count);

/** Writes a text in lines of at most 80 characters, each indented; line ends in it are blanks.
 */
void rfade_help_text(FILE *stream, const char *text, size_t indent);

/** Writes the table's help, one option a paragraph. */
void rfade_options_help(FILE *stream, const struct rfade_option *options, size_t count);

/** The name nearest to a mistyped one, or NULL if none is near. Borrowed from `name_at`. */
const char *rfade_near_match(const char *mistyped,
                             const char *(*name_at)(const void *context, size_t index),
                             const void *context);

#endif
