/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file integers.h  Sums of nothing but int64_t as bytes: little-endian, one after another. */
#ifndef ROUTEFADE_SEPARATE_INTEGERS_H
#define ROUTEFADE_SEPARATE_INTEGERS_H

#include <stddef.h>
#include <stdint.h>

#include "routefade/status.h"

/** free() the bytes; NULL and 0 on failure. */
enum rfade_status rfade_integers_encode(const void *sums, size_t sums_size, uint8_t **bytes,
                                        size_t *size);

/** RFADE_INPUT, and all 0, if the size is not that of the sums. */
enum rfade_status rfade_integers_decode(const uint8_t *bytes, size_t size, void *sums,
                                        size_t sums_size);

#endif
