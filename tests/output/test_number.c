/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <float.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "output/number.h"

static void assert_exact(double value, const char *expected)
{
    char text[RFADE_NUMBER_SIZE];
    rfade_number_exact(value, text);
    assert_string_equal(text, expected);
}

/* IEEE 754: 15 digits survive text -> double -> text, 17 survive double -> text -> double. */
static void exact_is_short_where_it_can_be(void **state)
{
    (void)state;
    assert_exact(0.1, "0.1");
    assert_exact(-87, "-87");
    assert_exact(457e6, "457000000");
    assert_exact(1.0 / 3, "0.3333333333333333");
    assert_exact(0.1 + 0.2, "0.30000000000000004");
    assert_exact(INFINITY, "inf");
    assert_exact(-INFINITY, "-inf");
    assert_exact(NAN, "");
}

static void assert_reads_back(double value)
{
    char text[RFADE_NUMBER_SIZE];
    rfade_number_exact(value, text);
    double read = strtod(text, NULL);
    assert_memory_equal(&read, &value, sizeof value);
}

static void exact_reads_back_to_the_same_double(void **state)
{
    (void)state;
    gsl_rng *generator = gsl_rng_alloc(gsl_rng_mt19937);
    for (int i = 0; i < 200000; i++) {
        uint64_t bits = ((uint64_t)gsl_rng_get(generator) << 32) | gsl_rng_get(generator);
        double value;
        memcpy(&value, &bits, sizeof value);
        if (isfinite(value))
            assert_reads_back(value);
        assert_reads_back(ldexp((double)bits, -64));
    }
    gsl_rng_free(generator);
    assert_reads_back(DBL_MAX);
    assert_reads_back(DBL_MIN);
    assert_reads_back(5e-324);
    assert_reads_back(-0.0);
}

/* JCGM 100:2008, 7.2.6: a standard uncertainty has at most two significant digits, and the
 * estimate is given to the same place. Its example H.1: 50 000 838 nm, uncertainty 93 nm. */
static void place_is_the_second_digit_of_the_half_width(void **state)
{
    (void)state;
    assert_int_equal(rfade_number_place(50000838, 50000838 - 93, 50000838 + 93, 9), 0);
    assert_int_equal(rfade_number_place(4.0, 3.5, 4.7, 9), -2);
    assert_int_equal(rfade_number_place(4.0, 3.0, 5.0, 9), -1);
    assert_int_equal(rfade_number_place(1000, 0, 5000, 9), 2);
    assert_int_equal(rfade_number_place(4.0, 3.5, INFINITY, 9), -2);
    assert_int_equal(rfade_number_place(4.0, NAN, NAN, 9), 9);
    assert_int_equal(rfade_number_place(4.0, 4.0, 4.0, 9), 9);
    assert_int_equal(rfade_number_place(4.0, -INFINITY, INFINITY, 9), 9);
}

static void assert_rounded(double value, int place, const char *expected)
{
    char text[RFADE_NUMBER_SIZE];
    rfade_number_rounded(value, place, text);
    assert_string_equal(text, expected);
}

static void rounded_keeps_the_place(void **state)
{
    (void)state;
    assert_rounded(3.14159, -2, "3.14");
    assert_rounded(1234, 2, "1200");
    assert_rounded(-0.001, -2, "0.00");
    assert_rounded(-0.4, 0, "0");
    assert_rounded(-1.26, -1, "-1.3");
    assert_rounded(NAN, -1, "-");
    assert_rounded(INFINITY, -1, "inf");
    assert_rounded(-INFINITY, -1, "-inf");
    assert_rounded(1e300, -2, "1e+300");
}

static void second_digit_is_the_value_s_own(void **state)
{
    (void)state;
    assert_int_equal(rfade_number_second_digit(250.49, 3), 1);
    assert_int_equal(rfade_number_second_digit(-250.49, 3), 1);
    assert_int_equal(rfade_number_second_digit(250.49, -2), -2);
    assert_int_equal(rfade_number_second_digit(0.05, 0), -3);
    assert_int_equal(rfade_number_second_digit(0, 3), 3);
    assert_int_equal(rfade_number_second_digit(INFINITY, 3), 3);
    assert_int_equal(rfade_number_second_digit(NAN, 3), 3);
    assert_rounded(250.49, 1, "250");
    assert_rounded(3.14e-7, -8, "3.1e-07");
    assert_rounded(-3.14e-7, -8, "-3.1e-07");
}

static void limit_says_more_than(void **state)
{
    (void)state;
    char text[RFADE_NUMBER_SIZE];
    rfade_number_limit(1e5, text);
    assert_string_equal(text, ">1e5");
    rfade_number_limit(10000, text);
    assert_string_equal(text, ">1e4");
    rfade_number_limit(30, text);
    assert_string_equal(text, ">30");
}

static void assert_probability(double value, int place, const char *expected)
{
    char text[RFADE_NUMBER_SIZE];
    rfade_probability_rounded(value, place, text);
    assert_string_equal(text, expected);
}

static void small_probability_never_reads_as_zero(void **state)
{
    (void)state;
    assert_probability(0.25, -2, "0.25");
    assert_probability(0.0123, -4, "0.0123");
    assert_probability(1.234e-7, -9, "1.23e-07");
    assert_probability(1.234e-7, -2, "1e-07");
    assert_probability(0.012, -1, "0.01");
    assert_probability(0, -3, "0");
    assert_probability(1, -3, "1.000");
    assert_probability(NAN, -3, "-");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(exact_is_short_where_it_can_be),
        cmocka_unit_test(exact_reads_back_to_the_same_double),
        cmocka_unit_test(place_is_the_second_digit_of_the_half_width),
        cmocka_unit_test(rounded_keeps_the_place),
        cmocka_unit_test(second_digit_is_the_value_s_own),
        cmocka_unit_test(limit_says_more_than),
        cmocka_unit_test(small_probability_never_reads_as_zero),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
