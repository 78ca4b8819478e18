/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sampling sums added up, and as bytes: the members in their order, little-endian int64. */
#include <string.h>

#include "routefade/separate.h"
#include "separate/integers.h"
#include "tally/checked.h"

enum { NUMBERS = 19 + 2 * RFADE_SAMPLING_SCALES + 3 * RFADE_LAGS };

_Static_assert(sizeof(struct rfade_sampling_sums) == NUMBERS * sizeof(int64_t),
               "the sums are nothing but int64_t");

enum rfade_status rfade_sampling_merge(struct rfade_sampling_sums *sums,
                                       const struct rfade_sampling_sums *other, int sign)
{
    int64_t total[NUMBERS];
    int64_t more[NUMBERS];

    if (sign != 1 && sign != -1) {
        return RFADE_DOMAIN;
    }
    memcpy(total, sums, sizeof total);
    memcpy(more, other, sizeof more);
    for (int i = 0; i < NUMBERS; i++) {
        if (!rfade_checked_multiply(more[i], sign, &more[i]) ||
            !rfade_checked_add(total[i], more[i], &total[i])) {
            return RFADE_OVERFLOW;
        }
    }
    memcpy(sums, total, sizeof total);
    return RFADE_OK;
}

enum rfade_status rfade_sampling_encode(const struct rfade_sampling_sums *sums, uint8_t **bytes,
                                        size_t *size)
{
    return rfade_integers_encode(sums, sizeof *sums, bytes, size);
}

enum rfade_status rfade_sampling_decode(const uint8_t *bytes, size_t size,
                                        struct rfade_sampling_sums *sums)
{
    return rfade_integers_decode(bytes, size, sums, sizeof *sums);
}
