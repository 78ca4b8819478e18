/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file json_scan.h  The records of a JSON file (RFC 8259), cut out one by one in bounded
 * memory. Only brackets and strings are followed; what a record says is for json_values.h.
 *
 * Records are the values at a path: $ each value of the file (one a line, or one after
 * another), $[*] each element of an array, $.campaigns[*].packets[*] and so on. Without a
 * path the elements, where the file is an array, else its values.
 *
 * In a file with a value a line a damaged line is refused alone. Elsewhere damage outside of
 * strings can't be put right, and the file is refused; one that merely stops short keeps the
 * records before.
 */
#ifndef ROUTEFADE_INGEST_JSON_SCAN_H
#define ROUTEFADE_INGEST_JSON_SCAN_H

#include "ingest/json_path.h"
#include "ingest/lines.h"

/** A record, valid until the next. */
struct rfade_json_record {
    struct rfade_line line; /**< its text, and the line that it begins on */
    const char *reason;     /**< NULL, or why it can't be used (static storage) */
};

struct rfade_json_scanner; /* opaque */

/**
 * @param reader  borrowed; has read nothing yet
 * @param path    NULL: none. Copied; the text that it was read from is borrowed
 * @return RFADE_OK, RFADE_NO_MEMORY, or what reading the first bytes returned
 */
enum rfade_status rfade_json_scanner_create(struct rfade_line_reader *reader,
                                            const struct rfade_json_path *path,
                                            struct rfade_json_scanner **scanner,
                                            struct rfade_error *error);
void rfade_json_scanner_destroy(struct rfade_json_scanner *scanner); /* NULL is harmless */

/** The next record; *more is false at the end. RFADE_INPUT for damage that can't be skipped. */
enum rfade_status rfade_json_next(struct rfade_json_scanner *scanner,
                                  struct rfade_json_record *record, bool *more,
                                  struct rfade_error *error);

/** Lines so far. */
size_t rfade_json_lines(const struct rfade_json_scanner *scanner);

#endif
