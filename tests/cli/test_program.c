/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The program itself: help, version, unknown words, output that can't be written. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <string.h>

#include "cli/command.h"
#include "program.h"

static void version_is_one_line(void **state)
{
    (void)state;
    struct program program = {0};
    RUN(&program, "--version");
    assert_int_equal(program.status, 0);
    assert_int_equal(strncmp(program.output, "routefade ", 10), 0);
    assert_string_equal(program.errors, "");
    program_clear(&program);
}

static void assert_cautions(const char *help)
{
    assert_non_null(strstr(help, "while driving"));
    assert_non_null(strstr(help, "licence"));
    assert_non_null(strstr(help, "exposure"));
    assert_non_null(strstr(help, "no safety case"));
    assert_non_null(strstr(help, "licensed engineer"));
}

static void help_names_every_command_and_the_cautions(void **state)
{
    (void)state;
    struct program program = {0};
    RUN(&program, "--help");
    assert_int_equal(program.status, 0);
    assert_string_equal(program.errors, "");
    assert_cautions(program.output);
    ptrdiff_t column = 0; /* what commands do stands in one column */
    for (size_t i = 0; rfade_command_at(i); i++) {
        char line[64];
        (void)snprintf(line, sizeof line, "\n  %s ", rfade_command_at(i)->name);
        const char *start = strstr(program.output, line);
        const char *summary = strstr(program.output, rfade_command_at(i)->summary);
        assert_non_null(start);
        assert_non_null(summary);
        column = column ? column : summary - start;
        assert_int_equal(summary - start, column);
    }
    program_clear(&program);
}

/* The longest line, in bytes. */
static size_t longest_line(const char *text)
{
    size_t longest = 0;
    for (const char *line = text; *line;) {
        size_t length = strcspn(line, "\n");
        longest = length > longest ? length : longest;
        line += length + (line[length] == '\n');
    }
    return longest;
}

/* Makes every run of blanks and line ends one blank, so that broken lines can be searched. */
static void join_lines(char *text)
{
    char *to = text;
    for (const char *from = text; *from; from++)
        if (strchr(" \n", *from) == NULL)
            *to++ = *from;
        else if (to == text || to[-1] != ' ')
            *to++ = ' ';
    *to = '\0';
}

static void help_of_each_command_names_its_options_and_the_cautions(void **state)
{
    (void)state;
    struct program program = {0};
    for (size_t i = 0; rfade_command_at(i); i++) {
        const struct rfade_command *command = rfade_command_at(i);
        RUN(&program, command->name, "--help");
        assert_int_equal(program.status, 0);
        assert_string_equal(program.errors, "");
        assert_non_null(strstr(program.output, command->summary));
        assert_cautions(program.output);
        assert_true(longest_line(program.output) <= 88); /* the cautions' widest */
        join_lines(program.output);
        for (size_t k = 0; k < command->option_count; k++) {
            assert_non_null(strstr(program.output, command->options[k].name));
            assert_non_null(strstr(program.output, command->options[k].help));
        }
        assert_non_null(strstr(program.output, "--survey FILE"));
        assert_non_null(strstr(program.output, "--format NAME"));
        assert_non_null(strstr(program.output, "table, csv, json"));
        assert_non_null(strstr(program.output, "--quiet"));
    }
    program_clear(&program);
}

/* All that `route` reads is named where its user looks. */
static void help_of_route_names_its_formats(void **state)
{
    (void)state;
    static const char *const formats[] = {"GeoJSON", "GPX", "latitude"};
    struct program program = {0};
    RUN(&program, "route", "--help");
    for (size_t i = 0; i < sizeof formats / sizeof formats[0]; i++)
        assert_non_null(strstr(program.output, formats[i]));
    program_clear(&program);
}

static void wrong_usage_is_two(void **state)
{
    (void)state;
    struct program program = {0};
    program_run(&program, (const char *const[]){NULL});
    assert_int_equal(program.status, 2);
    assert_string_equal(program.errors,
                        "routefade: no command was given; see 'routefade --help'\n");
    program_clear(&program);
    REFUSED(2, "unknown command 'simulat'; did you mean 'simulate'?", "simulat");
    REFUSED(2, "unknown command 'paint'; see 'routefade --help'", "paint");
    REFUSED(2, "unknown command ''", "");
    REFUSED(2, "unknown option '--verison'", "--verison");
    REFUSED(2, "unknown option '-h'", "-h");
    REFUSED(2, "unknown option '--sped-kmh'; did you mean '--speed-kmh'?", "simulate",
            "--sped-kmh", "5");
    REFUSED(2, "option --format needs one of table, csv, json, not 'xml'", "simulate",
            "--format", "xml");
    REFUSED(2, "option --survey needs a value", "simulate", "--survey");
    REFUSED(2, "'simulate' takes no argument 'here'", "simulate", "here");
    REFUSED(2, "an argument is empty", "simulate", "");
}

static void lost_output_is_an_error(void **state)
{
    (void)state;
    static const struct {
        const char *path, *reason;
    } outputs[] = {{"/dev/full", "No space left on device"},
                   {"-", "Bad file descriptor"},
                   {"|", "Broken pipe"}};
    for (size_t i = 0; i < sizeof outputs / sizeof outputs[0]; i++) {
        struct program program = {.output_path = outputs[i].path};
        RUN(&program, "--help");
        assert_int_equal(program.status, 1);
        assert_non_null(strstr(program.errors, "routefade: standard output: can't write"));
        assert_non_null(strstr(program.errors, outputs[i].reason));
        RUN(&program, "simulate");
        assert_int_equal(program.status, 1);
        assert_non_null(strstr(program.errors, "routefade: standard output: can't write"));
        assert_non_null(strstr(program.errors, outputs[i].reason));
        program_clear(&program);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(version_is_one_line),
        cmocka_unit_test(help_names_every_command_and_the_cautions),
        cmocka_unit_test(help_of_route_names_its_formats),
        cmocka_unit_test(help_of_each_command_names_its_options_and_the_cautions),
        cmocka_unit_test(wrong_usage_is_two),
        cmocka_unit_test(lost_output_is_an_error),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
