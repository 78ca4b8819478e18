/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "common/text.h"

static void assert_printable(const char *given, const char *expected)
{
    char text[128];
    (void)snprintf(text, sizeof text, "%s", given);
    rfade_text_printable(text);
    assert_string_equal(text, expected);
}

static void printable_keeps_utf8(void **state)
{
    (void)state;
    assert_printable("", "");
    assert_printable("plain 457 MHz", "plain 457 MHz");
    assert_printable("M\xC3\xA5rdal \xE2\x82\xAC \xF0\x9F\x93\xA1",
                     "M\xC3\xA5rdal \xE2\x82\xAC \xF0\x9F\x93\xA1");
}

/* Malformed sequences by RFC 3629 section 10 and section 3's table. */
static void printable_replaces_what_is_no_utf8(void **state)
{
    (void)state;
    assert_printable("\xC0\xAF", "??");           /* overlong '/' */
    assert_printable("\xE0\x80\xAF", "???");      /* overlong */
    assert_printable("\xED\xA0\x80", "???");      /* surrogate U+D800 */
    assert_printable("\xF4\x90\x80\x80", "????"); /* above U+10FFFF */
    assert_printable("a\xE2\x82", "a??");         /* cut at the end */
    assert_printable("\x80\xBF", "??");           /* stray continuation */
    assert_printable("\xFF\xFE", "??");
}

/* C0 and DEL (ASCII), C1 in UTF-8 (ECMA-48 section 5.3). */
static void printable_replaces_control_characters(void **state)
{
    (void)state;
    assert_printable("\x1b[2J\r\n\t\x7f", "?[2J????");
    assert_printable("\xC2\x9B"
                     "31m",
                     "?31m");
    assert_printable("\xC2\xA0", "\xC2\xA0");
}

static void numbers_are_read_whole(void **state)
{
    (void)state;
    double value;
    assert_true(rfade_text_to_double(" -87.25 ", &value) && value == -87.25);
    assert_true(rfade_text_to_double("+1e3", &value) && value == 1000);
    assert_true(rfade_text_to_double(".5", &value) && value == 0.5);
    assert_true(rfade_text_to_double("0", &value) && value == 0);
}

static void other_texts_are_no_numbers(void **state)
{
    (void)state;
    static const char *const texts[] = {"",      " ",   "nan", "inf", "-inf",    "0x10",
                                        "1,5",   "1 2", "12a", "a12", "--1",     "+-1",
                                        "1e999", ".",   "1e",  "e5",  "infinity"};
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++) {
        double value = 5;
        assert_false(rfade_text_to_double(texts[i], &value));
        assert_true(isnan(value));
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(printable_keeps_utf8),
        cmocka_unit_test(printable_replaces_what_is_no_utf8),
        cmocka_unit_test(printable_replaces_control_characters),
        cmocka_unit_test(numbers_are_read_whole),
        cmocka_unit_test(other_texts_are_no_numbers),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
