/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file checked.h  Integer sums and products that say when they don't fit. */
#ifndef ROUTEFADE_TALLY_CHECKED_H
#define ROUTEFADE_TALLY_CHECKED_H

#include <stdbool.h>
#include <stdint.h>

/** False, and *result unchanged, if the true sum doesn't fit. */
static inline bool rfade_checked_add(int64_t a, int64_t b, int64_t *result)
{
    if ((b > 0 && a > INT64_MAX - b) || (b < 0 && a < INT64_MIN - b)) {
        return false;
    }
    *result = a + b;
    return true;
}

/** False, and *result unchanged, if the true product doesn't fit. */
static inline bool rfade_checked_multiply(int64_t a, int64_t b, int64_t *result)
{
    int64_t product = 0;
    if (__builtin_mul_overflow(a, b, &product)) {
        return false;
    }
    *result = product;
    return true;
}

#endif
