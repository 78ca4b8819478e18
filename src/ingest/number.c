/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/number.h"

#include <inttypes.h>
#include <stdio.h>
#include <stdlib.h>

/* 10^19 - 1 is the largest count of nines that fits 64 bits. */
enum { MAX_DIGITS = 19, MAX_EXPONENT = 9999 };

static const uint64_t powers_of_ten[MAX_DIGITS + 1] = {
    UINT64_C(1),
    UINT64_C(10),
    UINT64_C(100),
    UINT64_C(1000),
    UINT64_C(10000),
    UINT64_C(100000),
    UINT64_C(1000000),
    UINT64_C(10000000),
    UINT64_C(100000000),
    UINT64_C(1000000000),
    UINT64_C(10000000000),
    UINT64_C(100000000000),
    UINT64_C(1000000000000),
    UINT64_C(10000000000000),
    UINT64_C(100000000000000),
    UINT64_C(1000000000000000),
    UINT64_C(10000000000000000),
    UINT64_C(100000000000000000),
    UINT64_C(1000000000000000000),
    UINT64_C(10000000000000000000),
};

static bool is_digit(char c)
{
    return c >= '0' && c <= '9';
}

static bool is_blank(char c)
{
    return c == ' ' || c == '\t';
}

/* Reads the digits on one side of the decimal sign; `shift` is -1 behind it and 0 before.
 * Digits are counted from the first that isn't 0. */
static const char *take_digits(struct rfade_decimal *decimal, int *digits, const char *at,
                               const char *end, int shift)
{
    uint64_t mantissa = decimal->mantissa;
    int32_t exponent = decimal->exponent;
    int count = *digits;
    for (; at < end && is_digit(*at) && count < MAX_DIGITS; at++) {
        mantissa = mantissa * 10 + (uint64_t)(*at - '0');
        exponent += shift;
        count += mantissa != 0;
    }
    for (; at < end && is_digit(*at); at++) {
        decimal->inexact = decimal->inexact || *at != '0';
        exponent += shift + 1;
    }
    decimal->mantissa = mantissa;
    decimal->exponent = exponent;
    *digits = count;
    return at;
}

/* Reads "e-3"; NULL if what follows the letter is no exponent. */
static const char *take_exponent(struct rfade_decimal *decimal, const char *at, const char *end)
{
    at++;
    bool negative = at < end && *at == '-';
    if (at < end && (*at == '-' || *at == '+'))
        at++;
    if (at == end || !is_digit(*at))
        return NULL;
    int32_t exponent = 0;
    for (; at < end && is_digit(*at); at++)
        if (exponent <= MAX_EXPONENT)
            exponent = exponent * 10 + (*at - '0');
    decimal->exponent += negative ? -exponent : exponent;
    return at;
}

static bool is_decimal_sign(char c, char decimal_sign)
{
    return decimal_sign == RFADE_DECIMAL_EITHER ? c == '.' || c == ',' : c == decimal_sign;
}

static bool read_decimal(const char *at, const char *end, char decimal_sign,
                         struct rfade_decimal *decimal)
{
    int digits = 0;
    decimal->negative = at < end && *at == '-';
    if (at < end && (*at == '-' || *at == '+'))
        at++;
    const char *start = at;
    at = take_digits(decimal, &digits, at, end, 0);
    size_t figures = (size_t)(at - start);
    if (at < end && is_decimal_sign(*at, decimal_sign)) {
        start = ++at;
        at = take_digits(decimal, &digits, at, end, -1);
        figures += (size_t)(at - start);
    }
    if (figures == 0)
        return false;
    if (at < end && (*at == 'e' || *at == 'E'))
        at = take_exponent(decimal, at, end);
    return at == end;
}

bool rfade_decimal_read(const char *text, size_t size, char decimal_sign,
                        struct rfade_decimal *decimal)
{
    *decimal = (struct rfade_decimal){0};
    const char *end = text + size;
    while (text < end && is_blank(*text))
        text++;
    while (end > text && is_blank(end[-1]))
        end--;
    if (read_decimal(text, end, decimal_sign, decimal))
        return true;
    *decimal = (struct rfade_decimal){0};
    return false;
}

/* mantissa / 10^digits, to the nearest, ties to even; what lies behind breaks a tie upwards. */
static uint64_t divide_nearest(uint64_t mantissa, int32_t digits, bool more_behind)
{
    if (digits > MAX_DIGITS) /* mantissa < 2^64 < 10^20 / 2 */
        return 0;
    uint64_t divisor = powers_of_ten[digits];
    uint64_t quotient = mantissa / divisor;
    uint64_t rest = mantissa % divisor;
    uint64_t missing = divisor - rest;
    bool up = rest > missing || (rest == missing && (more_behind || quotient % 2 == 1));
    return quotient + (digits > 0 && up);
}

bool rfade_decimal_scaled(const struct rfade_decimal *decimal, int32_t digits, int64_t *value)
{
    *value = 0;
    if (decimal->mantissa == 0)
        return true;
    int32_t shift = decimal->exponent + digits;
    uint64_t magnitude = 0;
    if (shift <= 0) {
        magnitude = divide_nearest(decimal->mantissa, -shift, decimal->inexact);
    } else {
        /* Nineteen digits or digits beyond them can't be scaled up without losing some. */
        if (shift > MAX_DIGITS || decimal->inexact ||
            decimal->mantissa > (uint64_t)INT64_MAX / powers_of_ten[shift])
            return false;
        magnitude = decimal->mantissa * powers_of_ten[shift];
    }
    if (magnitude > (uint64_t)INT64_MAX)
        return false;
    *value = decimal->negative ? -(int64_t)magnitude : (int64_t)magnitude;
    return true;
}

double rfade_decimal_double(const struct rfade_decimal *decimal)
{
    static const double exact_powers[] = {1e0,  1e1,  1e2,  1e3,  1e4,  1e5,  1e6,  1e7,
                                          1e8,  1e9,  1e10, 1e11, 1e12, 1e13, 1e14, 1e15,
                                          1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22};
    double magnitude;
    if (decimal->mantissa <= UINT64_C(1) << 53 && decimal->exponent <= 0 &&
        decimal->exponent >= -22) {
        /* Both are exact doubles, so that their quotient is rounded once, correctly. */
        magnitude = (double)decimal->mantissa / exact_powers[-decimal->exponent];
    } else {
        char text[48]; /* no decimal sign in it: the locale has no say */
        (void)snprintf(text, sizeof text, "%" PRIu64 "e%" PRId32, decimal->mantissa,
                       decimal->exponent);
        magnitude = strtod(text, NULL);
    }
    return decimal->negative ? -magnitude : magnitude;
}
