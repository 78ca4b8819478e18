/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "separate/integers.h"

#include <stdlib.h>
#include <string.h>

enum { NUMBER_BYTES = sizeof(uint64_t) };

enum rfade_status rfade_integers_encode(const void *sums, size_t sums_size, uint8_t **bytes,
                                        size_t *size)
{
    *size = 0;
    *bytes = malloc(sums_size);
    if (*bytes == NULL) {
        return RFADE_NO_MEMORY;
    }
    for (size_t at = 0; at < sums_size; at += NUMBER_BYTES) {
        uint64_t number;

        memcpy(&number, (const char *)sums + at, sizeof number);
        for (size_t i = 0; i < NUMBER_BYTES; i++) {
            (*bytes)[at + i] = (uint8_t)(number >> (8 * i));
        }
    }
    *size = sums_size;
    return RFADE_OK;
}

enum rfade_status rfade_integers_decode(const uint8_t *bytes, size_t size, void *sums,
                                        size_t sums_size)
{
    memset(sums, 0, sums_size);
    if (bytes == NULL || size != sums_size) {
        return RFADE_INPUT;
    }
    for (size_t at = 0; at < sums_size; at += NUMBER_BYTES) {
        uint64_t number = 0;

        for (size_t i = 0; i < NUMBER_BYTES; i++) {
            number |= (uint64_t)bytes[at + i] << (8 * i);
        }
        memcpy((char *)sums + at, &number, sizeof number);
    }
    return RFADE_OK;
}
