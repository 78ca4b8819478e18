/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file emit.h  The way of rows and positions from a format's reader to the sink: counted,
 * positions thinned to fixes (track.h), refusals told.
 */
#ifndef ROUTEFADE_INGEST_EMIT_H
#define ROUTEFADE_INGEST_EMIT_H

#include "ingest/lines.h"
#include "ingest/row.h"

struct rfade_emitter; /* opaque; one file */

/** Map, sink and summary are borrowed. RFADE_NO_MEMORY; *emitter is NULL on failure. */
enum rfade_status rfade_emitter_create(const struct rfade_column_map *map,
                                       const struct rfade_sink *sink,
                                       struct rfade_ingest_summary *summary,
                                       struct rfade_emitter **emitter,
                                       struct rfade_error *error);
void rfade_emitter_destroy(struct rfade_emitter *emitter); /* NULL is harmless */

/**
 * A row of data.
 * @param usable  what rfade_row_make said of it; what is refused of it is told either way
 * @param line    where it stands, for refusals now or later
 */
enum rfade_status rfade_emitter_row(struct rfade_emitter *emitter, const struct rfade_row *row,
                                    bool usable, const struct rfade_line *line,
                                    struct rfade_error *error);

/** Refuses something that made no row. Counts as a row. */
enum rfade_status rfade_emitter_refuse(struct rfade_emitter *emitter,
                                       const struct rfade_line *line, const char *reason,
                                       struct rfade_error *error);

/**
 * After the last row: tells what still waits. RFADE_INPUT, with the first reason, if nothing of
 * the file could be used: it is of another kind than its map says.
 */
enum rfade_status rfade_emitter_finish(struct rfade_emitter *emitter,
                                       struct rfade_error *error);

#endif
