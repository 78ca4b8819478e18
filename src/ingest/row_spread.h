/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file row_spread.h  Rows of a clock that shows whole seconds, spread evenly: of n rows in a
 * row with one stamp the k-th, from 0, gets k / n of a second more. Rows that are refused for
 * other reasons than their time count among them.
 */
#ifndef ROUTEFADE_INGEST_ROW_SPREAD_H
#define ROUTEFADE_INGEST_ROW_SPREAD_H

#include "ingest/lines.h"
#include "ingest/row.h"

struct rfade_row_spread; /* opaque */

/** `pass` gets the rows with their new times. NULL: no memory. */
struct rfade_row_spread *rfade_row_spread_create(
    enum rfade_status (*pass)(void *context, const struct rfade_row *row, bool usable,
                              const struct rfade_line *line, struct rfade_error *error),
    void *context);
void rfade_row_spread_destroy(struct rfade_row_spread *spread); /* NULL is harmless */

/**
 * The next row. One whose time, less offset_us, is no whole second keeps its time.
 * @return RFADE_OK; RFADE_INPUT if more than 4096 rows have one stamp; RFADE_NO_MEMORY; or what
 *     `pass` returned
 */
enum rfade_status rfade_row_spread_add(struct rfade_row_spread *spread, int64_t offset_us,
                                       const struct rfade_row *row, bool usable,
                                       const struct rfade_line *line,
                                       struct rfade_error *error);

/** Passes on what waits. */
enum rfade_status rfade_row_spread_flush(struct rfade_row_spread *spread,
                                         struct rfade_error *error);

#endif
