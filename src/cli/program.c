/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdlib.h>
#include <string.h>

#include "cli/command.h"
#include "cli/common_options.h"

static const char *command_name_at(const void *context, size_t index)
{
    (void)context;
    const struct rfade_command *command = rfade_command_at(index);
    return command ? command->name : NULL;
}

void rfade_print_error(FILE *notes, const struct rfade_error *error)
{
    (void)fputs("routefade: ", notes);
    if (error->file[0] != '\0' && error->line > 0)
        (void)fprintf(notes, "%s:%zu: ", error->file, error->line);
    else if (error->file[0] != '\0')
        (void)fprintf(notes, "%s: ", error->file);
    (void)fprintf(notes, "%s%s%s\n", error->what, error->remedy[0] ? "; " : "", error->remedy);
}

static enum rfade_status find_command(const char *name, const struct rfade_command **command,
                                      struct rfade_error *error)
{
    *command = NULL;
    if (!name)
        return rfade_error_set(error, RFADE_USAGE, "see 'routefade --help'",
                               "no command was given");
    for (size_t i = 0; rfade_command_at(i); i++)
        if (strcmp(rfade_command_at(i)->name, name) == 0)
            *command = rfade_command_at(i);
    if (*command)
        return RFADE_OK;
    char remedy[128] = "see 'routefade --help'";
    const char *near = rfade_near_match(name, command_name_at, NULL);
    if (near)
        (void)snprintf(remedy, sizeof remedy, "did you mean '%s'? See 'routefade --help'",
                       near);
    return rfade_error_set(error, RFADE_USAGE, remedy, "unknown %s '%s'",
                           name[0] == '-' ? "option" : "command", name);
}

static enum rfade_status check_arguments(const struct rfade_command *command,
                                         const struct rfade_texts *arguments,
                                         struct rfade_error *error)
{
    for (size_t i = 0; i < arguments->count; i++)
        if (arguments->items[i][0] == '\0')
            return rfade_usage(error, command, "an argument is empty");
    if (arguments->count < command->arguments_min)
        return rfade_usage(error, command, "'%s' needs %s", command->name, command->arguments);
    if (arguments->count > command->arguments_max)
        return rfade_usage(error, command, "'%s' takes no argument '%s'", command->name,
                           arguments->items[command->arguments_max]);
    return RFADE_OK;
}

static enum rfade_status run_parsed(const struct rfade_command *command, struct rfade_run *run,
                                    struct rfade_common_options *common,
                                    struct rfade_error *error)
{
    if (common->help) {
        rfade_command_help(run->output, command);
        return RFADE_OK;
    }
    common->format = rfade_rows_format(common->format_name);
    enum rfade_status status = check_arguments(command, &run->arguments, error);
    return status == RFADE_OK ? command->run(run, error) : status;
}

/* argv[0] is the command's name. */
static enum rfade_status run_command(const struct rfade_command *command, int argc, char **argv,
                                     struct rfade_run *run, struct rfade_error *error)
{
    struct rfade_common_options common = rfade_common_option_defaults();
    void *options = malloc(command->options_size ? command->options_size : 1);
    if (!options)
        return rfade_error_no_memory(error);
    if (command->options_size > 0)
        memcpy(options, command->defaults, command->options_size);
    const struct rfade_option_group groups[] = {
        {command->options, command->option_count, options},
        {rfade_common_option_table, rfade_common_option_count, &common},
    };
    char help_command[64];
    (void)snprintf(help_command, sizeof help_command, "routefade %s --help", command->name);
    run->common = &common;
    run->options = options;
    enum rfade_status status =
        rfade_options_parse(argc, argv, groups, 2, help_command, &run->arguments, error);
    if (status == RFADE_OK)
        status = run_parsed(command, run, &common, error);
    rfade_options_clear(groups, 2);
    free((void *)run->arguments.items);
    free(options);
    return status;
}

static enum rfade_status run_program(int argc, char **argv, struct rfade_run *run,
                                     struct rfade_error *error)
{
    const char *name = argc > 1 ? argv[1] : NULL;
    if (name && strcmp(name, "--version") == 0) {
        (void)fprintf(run->output, "routefade %s\n", ROUTEFADE_VERSION);
        return RFADE_OK;
    }
    if (name && strcmp(name, "--help") == 0) {
        rfade_program_help(run->output);
        return RFADE_OK;
    }
    const struct rfade_command *command = NULL;
    enum rfade_status status = find_command(name, &command, error);
    return command ? run_command(command, argc - 1, argv + 1, run, error) : status;
}

enum rfade_exit rfade_program(int argc, char **argv, FILE *output, FILE *notes)
{
    struct rfade_error error = {.status = RFADE_OK};
    struct rfade_run run = {.output = output, .notes = notes};
    enum rfade_status status = run_program(argc, argv, &run, &error);
    struct rfade_error flush_error = {.status = RFADE_OK};
    enum rfade_status flushed = rfade_stream_flush(output, NULL, &flush_error);
    if (status == RFADE_OK && flushed != RFADE_OK) {
        status = flushed;
        error = flush_error;
    }
    if (status == RFADE_OK)
        return run.file_refused ? RFADE_EXIT_PARTLY : RFADE_EXIT_DONE;
    if (error.what[0] == '\0') /* a layer that gave no words */
        (void)rfade_error_set(&error, status, NULL, "%s", rfade_status_text(status));
    rfade_print_error(notes, &error);
    return status == RFADE_USAGE ? RFADE_EXIT_USAGE : RFADE_EXIT_FAILED;
}
