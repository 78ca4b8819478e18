/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file lines.h  The lines of a log, numbered, out of any source of bytes. */
#ifndef ROUTEFADE_INGEST_LINES_H
#define ROUTEFADE_INGEST_LINES_H

#include <stdbool.h>
#include <stddef.h>

#include "common/error.h"

enum {
    RFADE_BLOCK_SIZE = 65536,   /**< bytes asked for at once */
    RFADE_LINE_SIZE = 65536 - 2 /**< longest line */
};

/** Where bytes come from. read fills up to `capacity`; *size 0 at the end. */
struct rfade_byte_source {
    void *context;
    enum rfade_status (*read)(void *context, char *buffer, size_t capacity, size_t *size,
                              struct rfade_error *error);
};

/** Bytes in memory as a source: context of rfade_byte_memory_read, which uses them up. */
struct rfade_byte_memory {
    const char *bytes;
    size_t size;
};

enum rfade_status rfade_byte_memory_read(void *context, char *buffer, size_t capacity,
                                         size_t *size, struct rfade_error *error);

/** One line, valid until the next is read. */
struct rfade_line {
    const char *text; /**< without line end; text[size] is '\n' unless too_long */
    size_t size;
    size_t number; /**< from 1 */
    bool ended;    /**< false: the file stops without a line end */
    bool too_long; /**< cut at RFADE_LINE_SIZE */
};

struct rfade_line_reader; /* opaque */

/** NULL: no memory. The source is borrowed. */
struct rfade_line_reader *rfade_line_reader_create(const struct rfade_byte_source *source);
void rfade_line_reader_destroy(struct rfade_line_reader *reader);

/**
 * The first bytes, up to a block, without reading them away. Only before the first line.
 * Borrowed until the first line is read.
 */
enum rfade_status rfade_line_peek(struct rfade_line_reader *reader, const char **bytes,
                                  size_t *size, struct rfade_error *error);

/**
 * The next line; *more is false at the end. Lines end with LF or CR LF, mixed or not, or with
 * CR alone in a file whose first block has no LF. A UTF-8 byte-order mark is left out.
 */
enum rfade_status rfade_line_next(struct rfade_line_reader *reader, struct rfade_line *line,
                                  bool *more, struct rfade_error *error);

/**
 * The next bytes as they stand, without the byte-order mark, for formats that have no lines;
 * not to be mixed with _next. *size is 0 at the end. Borrowed until the next call.
 */
enum rfade_status rfade_line_bytes(struct rfade_line_reader *reader, const char **bytes,
                                   size_t *size, struct rfade_error *error);

#endif
