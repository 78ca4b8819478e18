/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <math.h>
#include <stdbool.h>
#include <string.h>

#include "ingest/number.h"

static bool scaled(const char *text, char sign, int32_t digits, int64_t *value)
{
    struct rfade_decimal decimal;
    return rfade_decimal_read(text, strlen(text), sign, &decimal) &&
           rfade_decimal_scaled(&decimal, digits, value);
}

/* Expectations by hand: decimal arithmetic with ties to even (IEEE 754-2019, 4.3.1). */
static void numbers_are_scaled_exactly(void **state)
{
    (void)state;
    static const struct {
        const char *text;
        char sign;
        int32_t digits;
        int64_t value;
    } cases[] = {
        {"-87.5", '.', 2, -8750},
        {"-87,5", ',', 2, -8750},
        {"+3", '.', 2, 300},
        {".5", '.', 2, 50},
        {"5.", '.', 2, 500},
        {" -0.0\t", '.', 2, 0},
        {"0.125", '.', 2, 12}, /* tie: down to the even */
        {"0.135", '.', 2,
         14}, /* tie: up to the even; the double below it is 0.1350000000000000088 */
        {"0.145", '.', 2, 14}, /* tie: a double would be 0.14499999 */
        {"0.1450000000000000000000000001", '.', 2, 15},
        {"-0.125", '.', 2, -12},
        {"-0.1251", '.', 2, -13},
        {"1e2", '.', 2, 10000},
        {"-8.75E+1", '.', 2, -8750},
        {"875e-1", '.', 2, 8750},
        {"1e-30", '.', 2, 0},
        {"1768508107.3062914", '.', 6, INT64_C(1768508107306291)},
        {"1.768508103128e12", '.', 3, INT64_C(1768508103128000)},
        {"000000000000000000000000012.5", '.', 2, 1250},
        {"9223372036854775807", '.', 0, INT64_MAX},
        {"-9223372036854775807", '.', 0, -INT64_MAX},
        {"92233720368547758.07", '.', 2, INT64_MAX},
        {"1,5", RFADE_DECIMAL_EITHER, 1, 15},
        {"1.5", RFADE_DECIMAL_EITHER, 1, 15},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        int64_t value = -1;
        if (!scaled(cases[i].text, cases[i].sign, cases[i].digits, &value) ||
            value != cases[i].value)
            fail_msg("%s gives %lld", cases[i].text, (long long)value);
    }
}

static void numbers_that_are_none_are_refused(void **state)
{
    (void)state;
    static const struct {
        const char *text;
        char sign;
    } cases[] = {{"", '.'},
                 {" ", '.'},
                 {"-", '.'},
                 {".", '.'},
                 {"1.2.3", '.'},
                 {"1,234", '.'},
                 {"1.234", ','},
                 {"1,234.5", RFADE_DECIMAL_EITHER},
                 {"1 234", '.'},
                 {"0x10", '.'},
                 {"nan", '.'},
                 {"inf", '.'},
                 {"-87 dBm", '.'},
                 {"1e", '.'},
                 {"1e+", '.'},
                 {"--5", '.'},
                 {"5-", '.'},
                 {"1'000", '.'},
                 {"\xEF\xBC\x95", '.'}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_decimal decimal = {1, 1, true, true};
        if (rfade_decimal_read(cases[i].text, strlen(cases[i].text), cases[i].sign, &decimal))
            fail_msg("%s was read", cases[i].text);
        assert_int_equal(decimal.mantissa, 0);
    }
    struct rfade_decimal decimal;
    assert_false(rfade_decimal_read("1\0"
                                    "2",
                                    3, '.', &decimal)); /* a NUL inside */
}

static void numbers_too_large_are_refused(void **state)
{
    (void)state;
    static const char *const texts[] = {"9223372036854775808", "1e19", "-1e300",
                                        "1e99999999999", "123456789012345678901234567890"};
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++) {
        int64_t value = 7;
        assert_false(scaled(texts[i], '.', 0, &value));
        assert_int_equal(value, 0);
    }
    int64_t value = 7;
    assert_false(scaled("92233720368547758.08", '.', 2, &value));
}

/* The nearest doubles, which the compiler knows too. */
static void doubles_are_the_nearest(void **state)
{
    (void)state;
    static const struct {
        const char *text;
        double value;
    } cases[] = {{"54.1203", 54.1203},
                 {"-2.341178", -2.341178},
                 {"329231.160000000032596", 329231.160000000032596},
                 {"0.1", 0.1},
                 {"1e23", 1e23},
                 {"8.5e-300", 8.5e-300},
                 {"123456789012345678", 123456789012345678.0},
                 {"-0", -0.0}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_decimal decimal;
        assert_true(rfade_decimal_read(cases[i].text, strlen(cases[i].text), '.', &decimal));
        assert_true(rfade_decimal_double(&decimal) == cases[i].value);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(numbers_are_scaled_exactly),
        cmocka_unit_test(numbers_that_are_none_are_refused),
        cmocka_unit_test(numbers_too_large_are_refused),
        cmocka_unit_test(doubles_are_the_nearest),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
