/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file gpx.h  The points of a GPX 1.1 file (GPX 1.1 Schema Documentation, topografix.com), by
 * expat, in bounded memory. GPX 1.0 is read as well. A document type declaration is refused:
 * GPX has none, and entities can only do harm.
 */
#ifndef ROUTEFADE_COMMON_GPX_H
#define ROUTEFADE_COMMON_GPX_H

#include <stdbool.h>
#include <stddef.h>

#include "common/error.h"

enum rfade_gpx_kind { RFADE_GPX_TRACK, RFADE_GPX_ROUTE, RFADE_GPX_WAYPOINT };

/** A point; texts are valid during the call only. */
struct rfade_gpx_point {
    enum rfade_gpx_kind kind;
    size_t number;       /**< of its track or route in the file, from 1; 0 for a waypoint */
    double latitude_deg; /**< as written; NaN: none that is a number */
    double longitude_deg;
    double speed_m_s; /**< of <speed>, which GPX 1.0 and extensions have; NaN: none */
    const char *time; /**< of <time>; empty: none */
    size_t line;      /**< from 1 */
    const char *text; /**< the file from the point's tag on, some bytes of it */
    size_t text_size;
};

/** Whether the first bytes are those of a GPX file. */
bool rfade_gpx_is_gpx(const char *head, size_t size);

struct rfade_gpx; /* opaque */

/** `take` gets each point; anything but RFADE_OK stops the file. NULL: no memory. */
struct rfade_gpx *
rfade_gpx_create(enum rfade_status (*take)(void *context, const struct rfade_gpx_point *point,
                                           struct rfade_error *error),
                 void *context);
void rfade_gpx_destroy(struct rfade_gpx *gpx); /* NULL is harmless */

/**
 * Reads on. After the last bytes call it with `last`.
 * @return RFADE_OK; RFADE_INPUT for what is no GPX, with its line; RFADE_NO_MEMORY; or what
 *     `take` returned
 */
enum rfade_status rfade_gpx_read(struct rfade_gpx *gpx, const char *bytes, size_t size,
                                 bool last, struct rfade_error *error);

/** After RFADE_INPUT: whether it was only that the file stops before its XML is complete. */
bool rfade_gpx_is_cut_off(const struct rfade_gpx *gpx);

/** Lines so far. */
size_t rfade_gpx_lines(const struct rfade_gpx *gpx);

#endif
