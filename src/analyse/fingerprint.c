/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/fingerprint.h"

#include <math.h>
#include <string.h>

void rfade_fingerprint_begin(struct rfade_fingerprint_writer *writer)
{
    SHA256Init(&writer->hash);
}

static void write_little_endian(struct rfade_fingerprint_writer *writer, uint64_t value)
{
    uint8_t bytes[8];
    for (int i = 0; i < 8; i++)
        bytes[i] = (uint8_t)(value >> (8 * i));
    SHA256Update(&writer->hash, bytes, sizeof bytes);
}

void rfade_fingerprint_bytes(struct rfade_fingerprint_writer *writer, const void *bytes,
                             size_t size)
{
    write_little_endian(writer, size);
    SHA256Update(&writer->hash, bytes, size);
}

void rfade_fingerprint_text(struct rfade_fingerprint_writer *writer, const char *text)
{
    rfade_fingerprint_bytes(writer, text, strlen(text));
}

void rfade_fingerprint_integer(struct rfade_fingerprint_writer *writer, int64_t value)
{
    write_little_endian(writer, (uint64_t)value);
}

void rfade_fingerprint_number(struct rfade_fingerprint_writer *writer, double value)
{
    if (isnan(value))
        value = (double)NAN;
    if (value == 0)
        value = 0.0;
    uint64_t bits = 0;
    memcpy(&bits, &value, sizeof bits);
    write_little_endian(writer, bits);
}

struct rfade_fingerprint rfade_fingerprint_end(struct rfade_fingerprint_writer *writer)
{
    struct rfade_fingerprint fingerprint;
    SHA256Final(fingerprint.bytes, &writer->hash);
    return fingerprint;
}
