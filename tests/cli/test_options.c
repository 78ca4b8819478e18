/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "cli/options.h"

struct target {
    bool flag;
    const char *text;
    const char *choice;
    double number;
    double any;
    int64_t integer;
    struct rfade_numbers numbers;
    struct rfade_texts texts;
};

static const char *choice_name(size_t index)
{
    static const char *const names[] = {"smooth", "exponential"};
    return index < 2 ? names[index] : NULL;
}

#define TARGET(member) offsetof(struct target, member)

static const struct rfade_option options[] = {
    {"flag", NULL, RFADE_OPTION_FLAG, TARGET(flag), 0, 0, NULL, "a flag"},
    {"text", "TEXT", RFADE_OPTION_TEXT, TARGET(text), 0, 0, NULL, "a text"},
    {"choice", "WORD", RFADE_OPTION_CHOICE, TARGET(choice), 0, 0, choice_name, "one of"},
    {"number-db", "DB", RFADE_OPTION_NUMBER, TARGET(number), -10, 10, NULL, "a number"},
    {"any", "X", RFADE_OPTION_NUMBER, TARGET(any), 0, 0, NULL, "any number"},
    {"integer", "N", RFADE_OPTION_INTEGER, TARGET(integer), 1, 100, NULL, "a whole number"},
    {"numbers", "LIST", RFADE_OPTION_NUMBERS, TARGET(numbers), 0, INFINITY, NULL, "numbers"},
    {"texts", "TEXT", RFADE_OPTION_TEXTS, TARGET(texts), 0, 0, NULL, "texts"},
};

struct parsed {
    struct target target;
    struct rfade_option_group group;
    struct rfade_texts arguments;
    struct rfade_error error;
    enum rfade_status status;
};

static void parse(struct parsed *parsed, const char *const *words)
{
    char *vector[16] = {"command"};
    int count = 1;
    for (; words[count - 1]; count++)
        vector[count] = (char *)words[count - 1];
    *parsed = (struct parsed){.target = {.number = NAN, .any = NAN}};
    parsed->group = (struct rfade_option_group){options, sizeof options / sizeof options[0],
                                                &parsed->target};
    parsed->status =
        rfade_options_parse(count, vector, &parsed->group, 1, "routefade command --help",
                            &parsed->arguments, &parsed->error);
}

static void clear(struct parsed *parsed)
{
    rfade_options_clear(&parsed->group, 1);
    free((void *)parsed->arguments.items);
}

#define PARSE(parsed, ...) parse((parsed), (const char *const[]){__VA_ARGS__, NULL})

static void every_type_reaches_its_target(void **state)
{
    (void)state;
    struct parsed parsed;
    PARSE(&parsed, "--flag", "--text", "a b", "--choice=exponential", "--number-db", "-2.5",
          "--integer", "7", "--any=-1e30");
    assert_int_equal(parsed.status, RFADE_OK);
    assert_true(parsed.target.flag);
    assert_string_equal(parsed.target.text, "a b");
    assert_string_equal(parsed.target.choice, "exponential");
    assert_true(parsed.target.number == -2.5);
    assert_true(parsed.target.any == -1e30);
    assert_int_equal(parsed.target.integer, 7);
    clear(&parsed);
}

static void what_is_not_given_keeps_its_default(void **state)
{
    (void)state;
    struct parsed parsed;
    PARSE(&parsed, "--flag");
    assert_true(isnan(parsed.target.number));
    assert_null(parsed.target.text);
    assert_int_equal(parsed.target.numbers.count, 0);
    clear(&parsed);
}

static void lists_come_repeated_or_with_commas(void **state)
{
    (void)state;
    struct parsed parsed;
    PARSE(&parsed, "--numbers", "0,1,4.5", "--numbers", "10", "--texts", "a,b", "--texts", "c");
    assert_int_equal(parsed.status, RFADE_OK);
    const double expected[] = {0, 1, 4.5, 10};
    assert_int_equal(parsed.target.numbers.count, 4);
    assert_memory_equal(parsed.target.numbers.items, expected, sizeof expected);
    assert_int_equal(parsed.target.texts.count, 2);
    assert_string_equal(parsed.target.texts.items[0], "a,b");
    assert_string_equal(parsed.target.texts.items[1], "c");
    clear(&parsed);
}

static void arguments_keep_their_order_among_options(void **state)
{
    (void)state;
    struct parsed parsed;
    PARSE(&parsed, "one", "--flag", "-", "--", "--text", "two");
    assert_int_equal(parsed.status, RFADE_OK);
    assert_int_equal(parsed.arguments.count, 4);
    assert_string_equal(parsed.arguments.items[0], "one");
    assert_string_equal(parsed.arguments.items[1], "-");
    assert_string_equal(parsed.arguments.items[2], "--text");
    assert_string_equal(parsed.arguments.items[3], "two");
    assert_null(parsed.target.text);
    clear(&parsed);
}

static void an_unambiguous_beginning_is_understood(void **state)
{
    (void)state;
    struct parsed parsed;
    PARSE(&parsed, "--fl", "--numbe=1"); /* the latter begins two names */
    assert_int_equal(parsed.status, RFADE_USAGE);
    assert_string_equal(parsed.error.what, "option '--numbe' is ambiguous");
    assert_string_equal(parsed.error.remedy, "write one of --number-db, --numbers");
    assert_true(parsed.target.flag);
    clear(&parsed);
    PARSE(&parsed, "--text", "x", "--texts", "y"); /* a whole name is never ambiguous */
    assert_int_equal(parsed.status, RFADE_OK);
    assert_string_equal(parsed.target.text, "x");
    clear(&parsed);
}

static void assert_parse_refused(const char *word, const char *value, const char *what,
                                 const char *remedy)
{
    struct parsed parsed;
    const char *const words[] = {word, value, NULL};
    parse(&parsed, words);
    assert_int_equal(parsed.status, RFADE_USAGE);
    assert_string_equal(parsed.error.what, what);
    assert_string_equal(parsed.error.remedy, remedy);
    clear(&parsed);
}

static void each_fault_names_its_option(void **state)
{
    (void)state;
    static const char help[] = "see 'routefade command --help'";
    assert_parse_refused("--unheard-of", NULL, "unknown option '--unheard-of'", help);
    assert_parse_refused("--flog", NULL, "unknown option '--flog'",
                         "did you mean '--flag'? See 'routefade command --help'");
    assert_parse_refused("-f", NULL, "unknown option '-f'",
                         "options begin with two dashes; see 'routefade command --help'");
    assert_parse_refused("--flag=1", NULL, "option --flag takes no value", help);
    assert_parse_refused("--text", NULL, "option --text needs a value", help);
    assert_parse_refused("--text=", NULL, "option --text has an empty value", help);
    assert_parse_refused("--choice", "rough",
                         "option --choice needs one of smooth, exponential, not 'rough'", help);
    assert_parse_refused("--number-db", "10.01",
                         "option --number-db needs a number from -10 to 10, not '10.01'", help);
    assert_parse_refused("--number-db", "nan",
                         "option --number-db needs a number from -10 to 10, not 'nan'", help);
    assert_parse_refused("--number-db", "1,5",
                         "option --number-db needs a number from -10 to 10, not '1,5'", help);
    assert_parse_refused("--any", "1 dB", "option --any needs a number, not '1 dB'", help);
    assert_parse_refused("--integer", "1.5",
                         "option --integer needs a whole number from 1 to 100, not '1.5'",
                         help);
    assert_parse_refused("--integer", "101",
                         "option --integer needs a whole number from 1 to 100, not '101'",
                         help);
    assert_parse_refused("--integer", "99999999999999999999",
                         "option --integer needs a whole number from 1 to 100, not "
                         "'99999999999999999999'",
                         help);
    assert_parse_refused("--numbers", "1,,2",
                         "option --numbers needs a number from 0 up, not ''", help);
    assert_parse_refused("--numbers", "1,-2",
                         "option --numbers needs a number from 0 up, not '-2'", help);
    assert_parse_refused("--numbers", "1,", "option --numbers needs a number from 0 up, not ''",
                         help);
}

static void faults_show_no_escapes(void **state)
{
    (void)state;
    assert_parse_refused("--any", "\x1b[2J", "option --any needs a number, not '?[2J'",
                         "see 'routefade command --help'");
}

static const char *near_name_at(const void *context, size_t index)
{
    (void)context;
    static const char *const names[] = {"estimate", "predict", "simulate", "fit"};
    return index < 4 ? names[index] : NULL;
}

static void near_matches_are_near(void **state)
{
    (void)state;
    assert_string_equal(rfade_near_match("simulat", near_name_at, NULL), "simulate");
    assert_string_equal(rfade_near_match("perdict", near_name_at, NULL), "predict");
    assert_string_equal(rfade_near_match("fot", near_name_at, NULL), "fit");
    assert_null(rfade_near_match("status", near_name_at, NULL));
    assert_null(rfade_near_match("xyz", near_name_at, NULL));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_type_reaches_its_target),
        cmocka_unit_test(what_is_not_given_keeps_its_default),
        cmocka_unit_test(lists_come_repeated_or_with_commas),
        cmocka_unit_test(arguments_keep_their_order_among_options),
        cmocka_unit_test(an_unambiguous_beginning_is_understood),
        cmocka_unit_test(each_fault_names_its_option),
        cmocka_unit_test(faults_show_no_escapes),
        cmocka_unit_test(near_matches_are_near),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
