/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <string.h>

#include "output/utc.h"

static void assert_utc(int64_t time_us, const char *expected)
{
    char text[RFADE_UTC_SIZE];
    rfade_utc_text(time_us, text);
    assert_string_equal(text, expected);
}

/* Counts of seconds by date(1): date -u -d 2000-02-29T12:00:00Z +%s, and so on. */
static void times_are_iso_8601(void **state)
{
    (void)state;
    assert_utc(0, "1970-01-01T00:00:00Z");
    assert_utc(INT64_C(951825600000000), "2000-02-29T12:00:00Z");
    assert_utc(INT64_C(1799784000010000), "2027-01-12T20:00:00.010000Z");
    assert_utc(-1, "1969-12-31T23:59:59.999999Z");
    assert_utc(-1000000, "1969-12-31T23:59:59Z");
}

static void the_ends_of_time_do_no_harm(void **state)
{
    (void)state;
    char text[RFADE_UTC_SIZE];
    rfade_utc_text(INT64_MIN, text);
    assert_non_null(memchr(text, '\0', sizeof text));
    rfade_utc_text(INT64_MAX, text);
    assert_non_null(memchr(text, '\0', sizeof text));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(times_are_iso_8601),
        cmocka_unit_test(the_ends_of_time_do_no_harm),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
