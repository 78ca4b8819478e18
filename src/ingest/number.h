/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file number.h  Decimal numbers out of a log, kept exactly as they are written until they
 * are rounded once. Locale-free, reentrant, allocates nothing.
 */
#ifndef ROUTEFADE_INGEST_NUMBER_H
#define ROUTEFADE_INGEST_NUMBER_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

/** Either sign may stand before the fraction. */
#define RFADE_DECIMAL_EITHER '\0'

/** (-1)^negative * mantissa * 10^exponent, and a little more in magnitude if `inexact`. */
struct rfade_decimal {
    uint64_t mantissa; /**< the first 19 significant digits */
    int32_t exponent;
    bool negative;
    bool inexact; /**< digits other than 0 stood behind the nineteenth */
};

/**
 * Reads a whole text of `size` bytes: sign, digits, fraction, exponent (1.5e-3). Blanks around
 * it are allowed; digit groups, hexadecimal, nan and inf are not.
 * @param decimal_sign  '.', ',' or RFADE_DECIMAL_EITHER
 * @return false if the text is no such number; *decimal is 0 then
 */
bool rfade_decimal_read(const char *text, size_t size, char decimal_sign,
                        struct rfade_decimal *decimal);

/**
 * The number times 10^digits, rounded to the nearest integer, ties to even, exactly.
 * @return false if it doesn't fit; *value is 0 then
 */
bool rfade_decimal_scaled(const struct rfade_decimal *decimal, int32_t digits, int64_t *value);

/** The nearest double (of the first 19 digits); may be infinite for a huge exponent. */
double rfade_decimal_double(const struct rfade_decimal *decimal);

#endif
