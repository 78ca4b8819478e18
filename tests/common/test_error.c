/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <errno.h>
#include <string.h>

#include "common/error.h"

static void error_keeps_what_remedy_and_status(void **state)
{
    (void)state;
    struct rfade_error error;
    assert_int_equal(rfade_error_set(&error, RFADE_INPUT, "mend it", "row %d is short", 7),
                     RFADE_INPUT);
    assert_int_equal(error.status, RFADE_INPUT);
    assert_string_equal(error.what, "row 7 is short");
    assert_string_equal(error.remedy, "mend it");
    assert_string_equal(error.file, "");
    rfade_error_at(&error, "night.csv", 12);
    assert_string_equal(error.file, "night.csv");
    assert_int_equal(error.line, 12);
    assert_string_equal(error.what, "row 7 is short");
}

static void error_shows_no_escapes(void **state)
{
    (void)state;
    struct rfade_error error;
    (void)rfade_error_set(&error, RFADE_INPUT, "\x1b[31m", "name '%s'", "a\x1b]0;b\a\xff%n");
    assert_string_equal(error.what, "name 'a?]0;b??%n'");
    assert_string_equal(error.remedy, "?[31m");
    rfade_error_at(&error, "a\nb", 1);
    assert_string_equal(error.file, "a?b");
}

static void error_cuts_long_text(void **state)
{
    (void)state;
    struct rfade_error error;
    char text[2000];
    memset(text, 'x', sizeof text);
    text[sizeof text - 1] = '\0';
    (void)rfade_error_set(&error, RFADE_INPUT, text, "%s", text);
    assert_int_equal(strlen(error.what), sizeof error.what - 1);
    rfade_error_at(&error, text, 1);
    assert_int_equal(strlen(error.file), sizeof error.file - 1);
}

static void memory_that_ran_out_has_a_remedy(void **state)
{
    (void)state;
    struct rfade_error error;
    assert_int_equal(rfade_error_no_memory(&error), RFADE_NO_MEMORY);
    assert_int_equal(error.status, RFADE_NO_MEMORY);
    assert_string_equal(error.what, "memory ran out");
    assert_string_not_equal(error.remedy, "");
    assert_int_equal(rfade_error_no_memory(NULL), RFADE_NO_MEMORY);
}

static void error_of_the_system_says_why(void **state)
{
    (void)state;
    struct rfade_error error;
    assert_int_equal(rfade_error_system(&error, "gone.csv", ENOENT, "look again", "can't open"),
                     RFADE_STORAGE);
    assert_string_equal(error.what, "can't open: No such file or directory");
    assert_string_equal(error.file, "gone.csv");
    assert_string_equal(error.remedy, "look again");
    (void)rfade_error_system(&error, "gone.csv", 0, NULL, "can't open");
    assert_string_equal(error.what, "can't open");
}

static void no_error_wanted_is_harmless(void **state)
{
    (void)state;
    assert_int_equal(rfade_error_set(NULL, RFADE_DOMAIN, NULL, "x"), RFADE_DOMAIN);
    rfade_error_at(NULL, "x", 1);
    assert_int_equal(rfade_error_system(NULL, "x", EIO, NULL, "x"), RFADE_STORAGE);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(error_keeps_what_remedy_and_status),
        cmocka_unit_test(error_shows_no_escapes),
        cmocka_unit_test(error_cuts_long_text),
        cmocka_unit_test(memory_that_ran_out_has_a_remedy),
        cmocka_unit_test(error_of_the_system_says_why),
        cmocka_unit_test(no_error_wanted_is_harmless),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
