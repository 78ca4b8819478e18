/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sampling sums added up, and as bytes: the members in their order, little-endian int64. */
#include <stdlib.h>
#include <string.h>

#include "routefade/separate.h"
#include "tally/checked.h"

enum { NUMBERS = 19 + 2 * RFADE_SAMPLING_SCALES + 3 * RFADE_LAGS, NUMBER_BYTES = 8 };

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
    uint64_t numbers[NUMBERS];

    *size = 0;
    *bytes = malloc((size_t)NUMBERS * NUMBER_BYTES);
    if (*bytes == NULL) {
        return RFADE_NO_MEMORY;
    }
    memcpy(numbers, sums, sizeof numbers);
    for (size_t i = 0; i < (size_t)NUMBERS * NUMBER_BYTES; i++) {
        (*bytes)[i] = (uint8_t)(numbers[i / NUMBER_BYTES] >> (8 * (i % NUMBER_BYTES)));
    }
    *size = sizeof numbers;
    return RFADE_OK;
}

enum rfade_status rfade_sampling_decode(const uint8_t *bytes, size_t size,
                                        struct rfade_sampling_sums *sums)
{
    uint64_t numbers[NUMBERS] = {0};

    *sums = (struct rfade_sampling_sums){0};
    if (bytes == NULL || size != sizeof numbers) {
        return RFADE_INPUT;
    }
    for (size_t i = 0; i < (size_t)NUMBERS * NUMBER_BYTES; i++) {
        numbers[i / NUMBER_BYTES] |= (uint64_t)bytes[i] << (8 * (i % NUMBER_BYTES));
    }
    memcpy(sums, numbers, sizeof numbers);
    return RFADE_OK;
}
