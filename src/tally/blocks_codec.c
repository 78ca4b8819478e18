/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Byte form of a rfade_blocks, numbers as varint.h says:
 *   byte 'B', byte 1 (version), then the numbers in the order blocks, total, square, same,
 *   next, second as signed varints; after a 0 stands, unsigned, how many zeros follow it.
 * There is one form for one content; decoding refuses everything else, a `same` that isn't
 * symmetric included.
 */
#include <stdlib.h>
#include <string.h>

#include "tally/blocks_private.h"
#include "tally/varint.h"

enum { MARK = 'B', VERSION = 1 };

enum rfade_status rfade_blocks_encode(const struct rfade_blocks *blocks, uint8_t **bytes,
                                      size_t *size)
{
    struct rfade_writer writer = {NULL, 0, 0, false};
    struct rfade_blocks copy = *blocks;
    *bytes = NULL;
    *size = 0;
    rfade_write_byte(&writer, MARK);
    rfade_write_byte(&writer, VERSION);
    for (size_t i = 0; i < RFADE_BLOCKS_NUMBERS; i++) {
        int64_t value = *rfade_blocks_number(&copy, i);
        rfade_write_signed(&writer, value);
        if (value == 0) {
            size_t zeros = 0;
            while (i + 1 < RFADE_BLOCKS_NUMBERS && *rfade_blocks_number(&copy, i + 1) == 0) {
                zeros++;
                i++;
            }
            rfade_write_unsigned(&writer, zeros);
        }
    }
    if (writer.failed) {
        free(writer.bytes);
        return RFADE_NO_MEMORY;
    }
    *bytes = writer.bytes;
    *size = writer.size;
    return RFADE_OK;
}

static bool symmetric(const struct rfade_blocks *blocks)
{
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        for (int j = 0; j < i; j++) {
            if (blocks->same[i][j] != blocks->same[j][i]) {
                return false;
            }
        }
    }
    return true;
}

enum rfade_status rfade_blocks_decode(const uint8_t *bytes, size_t size,
                                      struct rfade_blocks *blocks)
{
    struct rfade_reader reader = {bytes, size, 0, false};
    struct rfade_blocks read;
    bool after_zeros = false;
    memset(&read, 0, sizeof read);
    memset(blocks, 0, sizeof *blocks);
    if (rfade_read_byte(&reader) != MARK || rfade_read_byte(&reader) != VERSION) {
        return RFADE_INPUT;
    }
    for (size_t i = 0; i < RFADE_BLOCKS_NUMBERS; i++) {
        int64_t value = rfade_read_signed(&reader);
        if (value == 0) {
            uint64_t zeros = rfade_read_unsigned(&reader);
            if (after_zeros || zeros >= RFADE_BLOCKS_NUMBERS - i) {
                return RFADE_INPUT;
            }
            i += (size_t)zeros;
        } else {
            *rfade_blocks_number(&read, i) = value;
        }
        after_zeros = value == 0;
        if (reader.failed) {
            return RFADE_INPUT;
        }
    }
    if (reader.position != size || !symmetric(&read)) {
        return RFADE_INPUT;
    }
    *blocks = read;
    return RFADE_OK;
}
