/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file json.h  JSON values (jansson) written with numbers that read back the same. */
#ifndef ROUTEFADE_OUTPUT_JSON_H
#define ROUTEFADE_OUTPUT_JSON_H

#include <jansson.h>
#include <stdio.h>

#include "common/error.h"
#include "output/rows.h"

/** A number; null for NaN and the infinities, which JSON doesn't have. NULL: no memory. */
json_t *rfade_json_number(double value);

/** A text made printable; null for NULL. NULL: no memory. */
json_t *rfade_json_text(const char *text);

/** A field of a row, its text taken as it is. NULL: no memory. */
json_t *rfade_json_value(const struct rfade_value *value);

/**
 * Adds the members of `part` to `object`; takes both over. NULL if either is NULL or there
 * is no memory, so that calls can be chained and the end tested once.
 */
json_t *rfade_json_join(json_t *object, json_t *part);

/** Writes one value on one line, without a line's end. RFADE_NO_MEMORY | RFADE_STORAGE */
enum rfade_status rfade_json_write(FILE *stream, const json_t *value);

/**
 * Writes one document to a stream and flushes it. Takes `document` over; NULL stands for
 * one that could not be built for lack of memory.
 */
enum rfade_status rfade_json_document(FILE *stream, const char *stream_name, json_t *document,
                                      struct rfade_error *error);

#endif
