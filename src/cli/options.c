/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/options.h"

#include <ctype.h>
#include <errno.h>
#include <getopt.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "common/text.h"

enum { HELP_WIDTH = 80 };

/* What getopt_long returns for the option number 0: above every character. */
enum { FIRST_OPTION = 1000 };

struct parse {
    const struct rfade_option_group *groups;
    size_t group_count;
    const char *help_command;
    struct rfade_error *error;
};

static enum rfade_status refuse(const struct parse *parse, const char *name, const char *what,
                                const char *value)
{
    char remedy[256];
    (void)snprintf(remedy, sizeof remedy, "see '%s'", parse->help_command);
    return rfade_error_set(parse->error, RFADE_USAGE, remedy, "option --%s %s%s%s%s", name,
                           what, value ? ", not '" : "", value ? value : "", value ? "'" : "");
}

/* The option number `index` over all groups; NULL past the last. */
static const struct rfade_option *option_at(const struct parse *parse, size_t index,
                                            void **target)
{
    for (size_t g = 0; g < parse->group_count; g++) {
        if (index < parse->groups[g].count) {
            if (target)
                *target = parse->groups[g].target;
            return &parse->groups[g].options[index];
        }
        index -= parse->groups[g].count;
    }
    return NULL;
}

static const char *option_name_at(const void *context, size_t index)
{
    const struct rfade_option *option = option_at(context, index, NULL);
    return option ? option->name : NULL;
}

static bool grow(void **items, size_t count, size_t item_size)
{
    void *grown = realloc(*items, (count + 1) * item_size);
    if (!grown)
        return false;
    *items = grown;
    return true;
}

static enum rfade_status add_text(const struct parse *parse, struct rfade_texts *texts,
                                  const char *text)
{
    void *items = (void *)texts->items;
    if (!grow(&items, texts->count, sizeof *texts->items))
        return rfade_error_no_memory(parse->error);
    texts->items = (const char **)items;
    texts->items[texts->count++] = text;
    return RFADE_OK;
}

static bool out_of_range(const struct rfade_option *option, double value)
{
    bool bounded = option->minimum != 0 || option->maximum != 0;
    return bounded && !(value >= option->minimum && value <= option->maximum);
}

/* "needs a number from -400 to 400" */
static enum rfade_status refuse_number(const struct parse *parse,
                                       const struct rfade_option *option, const char *value)
{
    const char *sort = option->type == RFADE_OPTION_INTEGER ? "a whole number" : "a number";
    char what[128];
    if (option->minimum == 0 && option->maximum == 0)
        (void)snprintf(what, sizeof what, "needs %s", sort);
    else if (isinf(option->maximum))
        (void)snprintf(what, sizeof what, "needs %s from %.12g up", sort, option->minimum);
    else
        (void)snprintf(what, sizeof what, "needs %s from %.12g to %.12g", sort, option->minimum,
                       option->maximum);
    return refuse(parse, option->name, what, value);
}

static enum rfade_status read_number(const struct parse *parse,
                                     const struct rfade_option *option, const char *value,
                                     double *number)
{
    if (!rfade_text_to_double(value, number) || out_of_range(option, *number))
        return refuse_number(parse, option, value);
    return RFADE_OK;
}

static enum rfade_status read_integer(const struct parse *parse,
                                      const struct rfade_option *option, const char *value,
                                      int64_t *integer)
{
    char *end = NULL;
    errno = 0;
    long long number = strtoll(value, &end, 10);
    bool plain = isdigit((unsigned char)value[value[0] == '-']) && *end == '\0';
    if (!plain || errno == ERANGE || out_of_range(option, (double)number))
        return refuse_number(parse, option, value);
    *integer = number;
    return RFADE_OK;
}

static enum rfade_status add_numbers(const struct parse *parse,
                                     const struct rfade_option *option, const char *value,
                                     struct rfade_numbers *numbers)
{
    for (const char *at = value; at; at = strchr(at, ',') ? strchr(at, ',') + 1 : NULL) {
        char text[64];
        size_t length = strcspn(at, ",");
        if (length >= sizeof text)
            return refuse_number(parse, option, value);
        memcpy(text, at, length);
        text[length] = '\0';
        double number;
        enum rfade_status status = read_number(parse, option, text, &number);
        if (status != RFADE_OK)
            return status;
        void *items = numbers->items;
        if (!grow(&items, numbers->count, sizeof *numbers->items))
            return rfade_error_no_memory(parse->error);
        numbers->items = items;
        numbers->items[numbers->count++] = number;
    }
    return RFADE_OK;
}

static enum rfade_status read_choice(const struct parse *parse,
                                     const struct rfade_option *option, const char *value,
                                     const char **chosen)
{
    char what[256] = "needs one of";
    for (size_t i = 0; option->choice(i); i++) {
        if (strcmp(option->choice(i), value) == 0) {
            *chosen = option->choice(i);
            return RFADE_OK;
        }
        size_t used = strlen(what);
        (void)snprintf(what + used, sizeof what - used, "%s %s", i ? "," : "",
                       option->choice(i));
    }
    return refuse(parse, option->name, what, value);
}

static enum rfade_status read_value(const struct parse *parse,
                                    const struct rfade_option *option, void *target,
                                    const char *value)
{
    void *member = (char *)target + option->offset;
    if (option->type == RFADE_OPTION_FLAG) {
        *(bool *)member = true;
        return RFADE_OK;
    }
    if (!value || *value == '\0')
        return refuse(parse, option->name, "has an empty value", NULL);
    switch (option->type) {
    case RFADE_OPTION_TEXT:
        *(const char **)member = value;
        return RFADE_OK;
    case RFADE_OPTION_CHOICE:
        return read_choice(parse, option, value, member);
    case RFADE_OPTION_NUMBER:
        return read_number(parse, option, value, member);
    case RFADE_OPTION_INTEGER:
        return read_integer(parse, option, value, member);
    case RFADE_OPTION_NUMBERS:
        return add_numbers(parse, option, value, member);
    case RFADE_OPTION_TEXTS:
        return add_text(parse, member, value);
    case RFADE_OPTION_FLAG:
        break;
    }
    return refuse(parse, option->name, "can't be read", NULL);
}

/* getopt_long reports an unknown and an ambiguous name alike: tell them apart here. */
static enum rfade_status refuse_name(const struct parse *parse, const char *given)
{
    char name[64] = "";
    char remedy[256];
    (void)snprintf(name, sizeof name, "%.*s", (int)strcspn(given, "="), given);
    const char *dashless = name + strspn(name, "-");
    if (strncmp(name, "--", 2) != 0) {
        (void)snprintf(remedy, sizeof remedy, "options begin with two dashes; see '%s'",
                       parse->help_command);
        return rfade_error_set(parse->error, RFADE_USAGE, remedy, "unknown option '%s'", name);
    }
    char candidates[256] = "";
    size_t matches = 0;
    for (size_t i = 0; option_name_at(parse, i); i++) {
        if (strncmp(option_name_at(parse, i), dashless, strlen(dashless)) != 0)
            continue;
        size_t used = strlen(candidates);
        (void)snprintf(candidates + used, sizeof candidates - used, "%s--%s",
                       matches ? ", " : "", option_name_at(parse, i));
        matches++;
    }
    if (matches > 1) {
        (void)snprintf(remedy, sizeof remedy, "write one of %.200s", candidates);
        return rfade_error_set(parse->error, RFADE_USAGE, remedy, "option '%s' is ambiguous",
                               name);
    }
    const char *near = rfade_near_match(dashless, option_name_at, parse);
    if (near)
        (void)snprintf(remedy, sizeof remedy, "did you mean '--%s'? See '%s'", near,
                       parse->help_command);
    else
        (void)snprintf(remedy, sizeof remedy, "see '%s'", parse->help_command);
    return rfade_error_set(parse->error, RFADE_USAGE, remedy, "unknown option '%s'", name);
}

/* getopt_long's table of the same names; free() it. */
static struct option *library_table(const struct parse *parse)
{
    size_t count = 0;
    while (option_at(parse, count, NULL))
        count++;
    struct option *table = calloc(count + 1, sizeof *table);
    if (!table)
        return NULL;
    for (size_t i = 0; i < count; i++) {
        const struct rfade_option *option = option_at(parse, i, NULL);
        table[i].name = option->name;
        table[i].val = FIRST_OPTION + (int)i; /* alike ones would not be called ambiguous */
        table[i].has_arg = option->type == RFADE_OPTION_FLAG ? no_argument : required_argument;
    }
    return table;
}

/* Handles what one call of getopt_long returned. */
static enum rfade_status take_option(const struct parse *parse, int found, char *const *argv,
                                     struct rfade_texts *arguments)
{
    void *target = NULL;
    if (found == 1) /* an argument that is no option */
        return add_text(parse, arguments, optarg);
    if (found >= FIRST_OPTION) {
        size_t index = (size_t)(found - FIRST_OPTION);
        const struct rfade_option *option = option_at(parse, index, &target);
        return read_value(parse, option, target, optarg);
    }
    const char *given = argv[optind - 1];
    if (found == ':')
        return refuse(parse, given + strspn(given, "-"), "needs a value", NULL);
    for (size_t i = 0; strchr(given, '=') && option_name_at(parse, i); i++)
        if (strncmp(option_name_at(parse, i), given + 2, strcspn(given + 2, "=")) == 0 &&
            option_at(parse, i, NULL)->type == RFADE_OPTION_FLAG)
            return refuse(parse, option_name_at(parse, i), "takes no value", NULL);
    return refuse_name(parse, given);
}

enum rfade_status rfade_options_parse(int argc, char *const *argv,
                                      const struct rfade_option_group *groups,
                                      size_t group_count, const char *help_command,
                                      struct rfade_texts *arguments, struct rfade_error *error)
{
    struct parse parse = {groups, group_count, help_command, error};
    enum rfade_status status = RFADE_OK;
    struct option *table = library_table(&parse);
    if (!table)
        return rfade_error_no_memory(error);
    opterr = 0;
    optind = 0; /* starts over, and reads the "-" below anew */
    /* "-": arguments come in order, whatever POSIXLY_CORRECT says; ":": a missing value is
     * told from an unknown name. */
    while (status == RFADE_OK) {
        /* NOLINTNEXTLINE(concurrency-mt-unsafe): before any thread is started */
        int found = getopt_long(argc, argv, "-:", table, NULL);
        if (found == -1)
            break;
        status = take_option(&parse, found, argv, arguments);
    }
    for (int i = optind; status == RFADE_OK && i < argc; i++) /* what follows "--" */
        status = add_text(&parse, arguments, argv[i]);
    free(table);
    return status;
}

void rfade_options_clear(const struct rfade_option_group *groups, size_t group_count)
{
    struct parse parse = {groups, group_count, "", NULL};
    void *target = NULL;
    const struct rfade_option *option;
    for (size_t i = 0; (option = option_at(&parse, i, &target)) != NULL; i++) {
        void *member = (char *)target + option->offset;
        if (option->type == RFADE_OPTION_NUMBERS) {
            struct rfade_numbers *numbers = member;
            free(numbers->items);
            *numbers = (struct rfade_numbers){0};
        } else if (option->type == RFADE_OPTION_TEXTS) {
            struct rfade_texts *texts = member;
            free((void *)texts->items);
            *texts = (struct rfade_texts){0};
        }
    }
}

void rfade_help_text(FILE *stream, const char *text, size_t indent)
{
    size_t column = 0;
    for (const char *word = text + strspn(text, " \n"); *word;) {
        size_t length = strcspn(word, " \n");
        if (column > 0 && column + 1 + length > HELP_WIDTH) {
            (void)fputc('\n', stream);
            column = 0;
        }
        if (column == 0)
            (void)fprintf(stream, "%*s", (int)indent, "");
        else
            (void)fputc(' ', stream);
        column = (column == 0 ? indent : column + 1) + length;
        (void)fwrite(word, 1, length, stream);
        word += length;
        word += strspn(word, " \n");
    }
    (void)fputc('\n', stream);
}

static void option_help(FILE *stream, const struct rfade_option *option)
{
    char text[512];
    (void)snprintf(text, sizeof text, "%s", option->help);
    for (size_t k = 0; option->choice && option->choice(k); k++) {
        size_t used = strlen(text);
        (void)snprintf(text + used, sizeof text - used, "%s%s", k ? ", " : ": ",
                       option->choice(k));
    }
    (void)fprintf(stream, "  --%s%s%s\n", option->name, option->argument ? " " : "",
                  option->argument ? option->argument : "");
    rfade_help_text(stream, text, 6);
}

void rfade_options_help(FILE *stream, const struct rfade_option *options, size_t count)
{
    for (size_t i = 0; i < count; i++)
        option_help(stream, &options[i]);
}
