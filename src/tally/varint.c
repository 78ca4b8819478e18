/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "tally/varint.h"

#include <stdlib.h>

enum { PAYLOAD_BITS = 7, CONTINUED = 0x80, PAYLOAD = 0x7f, FIRST_CAPACITY = 256 };

void rfade_write_byte(struct rfade_writer *writer, uint8_t byte)
{
    if (writer->failed) {
        return;
    }
    if (writer->size == writer->capacity) {
        size_t capacity = writer->capacity == 0 ? FIRST_CAPACITY : 2 * writer->capacity;
        uint8_t *bytes = realloc(writer->bytes, capacity);
        if (bytes == NULL) {
            writer->failed = true;
            return;
        }
        writer->bytes = bytes;
        writer->capacity = capacity;
    }
    writer->bytes[writer->size++] = byte;
}

void rfade_write_unsigned(struct rfade_writer *writer, uint64_t value)
{
    while (value > PAYLOAD) {
        rfade_write_byte(writer, (uint8_t)((value & PAYLOAD) | CONTINUED));
        value >>= PAYLOAD_BITS;
    }
    rfade_write_byte(writer, (uint8_t)value);
}

void rfade_write_signed(struct rfade_writer *writer, int64_t value)
{
    uint64_t magnitude = value < 0 ? ~(uint64_t)value : (uint64_t)value;
    rfade_write_unsigned(writer, (magnitude << 1) | (value < 0 ? 1U : 0U));
}

uint8_t rfade_read_byte(struct rfade_reader *reader)
{
    if (reader->failed || reader->position == reader->size) {
        reader->failed = true;
        return 0;
    }
    return reader->bytes[reader->position++];
}

uint64_t rfade_read_unsigned(struct rfade_reader *reader)
{
    uint64_t value = 0;
    for (unsigned shift = 0; shift < 64; shift += PAYLOAD_BITS) {
        uint8_t byte = rfade_read_byte(reader);
        uint64_t payload = byte & PAYLOAD;
        bool fits = (payload << shift) >> shift == payload;
        bool shortest = byte != 0 || shift == 0;
        if (reader->failed || !fits || !shortest) {
            break;
        }
        value |= payload << shift;
        if ((byte & CONTINUED) == 0) {
            return value;
        }
    }
    reader->failed = true;
    return 0;
}

int64_t rfade_read_signed(struct rfade_reader *reader)
{
    uint64_t folded = rfade_read_unsigned(reader);
    int64_t magnitude = (int64_t)(folded >> 1);
    return (folded & 1U) != 0 ? -magnitude - 1 : magnitude;
}
