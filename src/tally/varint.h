/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file varint.h  Integers as a few bytes: seven bits a byte, least significant first, the
 * top bit set on all but the last byte. Signed numbers are folded first (0, -1, 1, -2, ...
 * become 0, 1, 2, 3, ...). Each number has exactly one form: longer ones are refused.
 */
#ifndef ROUTEFADE_TALLY_VARINT_H
#define ROUTEFADE_TALLY_VARINT_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

/** Bytes being written. Once an allocation fails, `failed` stays set and writing does nothing.
 */
struct rfade_writer {
    uint8_t *bytes;
    size_t size;
    size_t capacity;
    bool failed;
};

void rfade_write_byte(struct rfade_writer *writer, uint8_t byte);
void rfade_write_unsigned(struct rfade_writer *writer, uint64_t value);
void rfade_write_signed(struct rfade_writer *writer, int64_t value);

/** Bytes being read. Once a number is malformed, `failed` stays set and reading gives 0. */
struct rfade_reader {
    const uint8_t *bytes;
    size_t size;
    size_t position;
    bool failed;
};

uint8_t rfade_read_byte(struct rfade_reader *reader);
uint64_t rfade_read_unsigned(struct rfade_reader *reader);
int64_t rfade_read_signed(struct rfade_reader *reader);

#endif
