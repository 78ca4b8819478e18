/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file json_values.h  The values of a JSON record at the paths of a column map's columns, by
 * SQLite's JSON functions. The record's text and the paths are only ever bound values.
 */
#ifndef ROUTEFADE_INGEST_JSON_VALUES_H
#define ROUTEFADE_INGEST_JSON_VALUES_H

#include "ingest/fields.h"
#include "ingest/row.h"

/** Whether a column's name can be a path: rx.rssi, $.rx."a b", $.list[0], $.list[#-1]. */
bool rfade_json_column_valid(const char *name);

struct rfade_json_values; /* opaque; one thread */

/**
 * @param map      its columns are paths; `$.` before the first name may be left out
 * @param[out] row_values  where the fields of each role will stand
 * @return RFADE_OK | RFADE_NO_MEMORY | RFADE_INPUT (a column that is no path)
 */
enum rfade_status rfade_json_values_create(const struct rfade_column_map *map,
                                           struct rfade_json_values **values,
                                           struct rfade_row_values *row_values,
                                           struct rfade_error *error);
void rfade_json_values_destroy(struct rfade_json_values *values); /* NULL is harmless */

/**
 * Reads the fields of a record: numbers as they are written, texts without their quotes, null
 * and what is not there as empty.
 * @return NULL, or a reason why the record can't be used (static storage)
 */
const char *rfade_json_values_read(struct rfade_json_values *values, const char *record,
                                   size_t size);

/** Of the record read last, how many columns have something. */
size_t rfade_json_values_present(const struct rfade_json_values *values);

/** Adds the names of a record's top level that `header` lacks. False: no memory. */
bool rfade_json_names(const char *record, size_t size, struct rfade_header *header);

#endif
