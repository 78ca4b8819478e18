/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file json_shape.h  How a JSON file is laid out, from its first bytes. Pure functions. */
#ifndef ROUTEFADE_INGEST_JSON_SHAPE_H
#define ROUTEFADE_INGEST_JSON_SHAPE_H

#include <stdbool.h>
#include <stddef.h>

bool rfade_json_is_array(const char *text, size_t size);

/** Whether one of the first lines is a whole value; where the file is an array, the first. */
bool rfade_json_is_value_a_line(const char *text, size_t size);

#endif
