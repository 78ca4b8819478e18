/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file fingerprint.h  The SHA-256 of all that a result was made from: equal fingerprints
 * mean that a result need not be made again.
 */
#ifndef ROUTEFADE_ANALYSE_FINGERPRINT_H
#define ROUTEFADE_ANALYSE_FINGERPRINT_H

#include <stddef.h>
#include <stdint.h>
#include <sys/types.h> /* libmd's header needs u_int types */

#include <sha2.h>

enum { RFADE_FINGERPRINT_SIZE = 32 };

struct rfade_fingerprint {
    uint8_t bytes[RFADE_FINGERPRINT_SIZE];
};

/** Feed values in a fixed order; each carries its own length, so that runs can't collide. */
struct rfade_fingerprint_writer {
    SHA2_CTX hash;
};

void rfade_fingerprint_begin(struct rfade_fingerprint_writer *writer);
void rfade_fingerprint_bytes(struct rfade_fingerprint_writer *writer, const void *bytes,
                             size_t size);
void rfade_fingerprint_text(struct rfade_fingerprint_writer *writer, const char *text);
void rfade_fingerprint_integer(struct rfade_fingerprint_writer *writer, int64_t value);
/** All NaNs are one value, and so are both zeros. */
void rfade_fingerprint_number(struct rfade_fingerprint_writer *writer, double value);
struct rfade_fingerprint rfade_fingerprint_end(struct rfade_fingerprint_writer *writer);

#endif
