/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file read_line_text.h  The formats behind read_line.h, from text in memory. Private. */
#ifndef ROUTEFADE_ROUTE_READ_LINE_TEXT_H
#define ROUTEFADE_ROUTE_READ_LINE_TEXT_H

#include "route/read_line.h"

/** `text` of `size` bytes without a NUL, one follows; `name` is the file's for errors. */
enum rfade_status rfade_line_from_csv(const char *name, const char *text, size_t size,
                                      struct rfade_place **places, size_t *count,
                                      struct rfade_error *error);
enum rfade_status rfade_line_from_geojson(const char *name, const char *text, size_t size,
                                          struct rfade_place **places, size_t *count,
                                          struct rfade_error *error);
enum rfade_status rfade_line_from_gpx(const char *name, const char *text, size_t size,
                                      struct rfade_place **places, size_t *count,
                                      struct rfade_error *error);

/** Places that grow. */
struct rfade_place_list {
    struct rfade_place *all;
    size_t count;
    size_t capacity;
};

/** Refuses a place that is off the earth; false as well if memory ran out. */
enum rfade_status rfade_place_list_add(struct rfade_place_list *list,
                                       const struct rfade_place *place, const char *remedy,
                                       struct rfade_error *error);

#endif
