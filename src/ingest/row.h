/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file row.h  One row of a delimited text file made a time, names, levels and a place. */
#ifndef ROUTEFADE_INGEST_ROW_H
#define ROUTEFADE_INGEST_ROW_H

#include "ingest/layout.h"
#include "ingest/open.h"

struct rfade_row_level {
    const char *channel;
    int32_t level_cdb; /**< RFADE_NO_VALUE_CDB: none */
    int32_t snr_cdb;
};

struct rfade_row {
    int64_t time_us;
    const char *vehicle; /**< as names.h keeps them */
    const char *campaign;
    bool has_place;
    bool no_place; /**< the row says that there is none */
    double latitude_deg;
    double longitude_deg;
    double speed_m_s; /**< NaN: none */
    size_t level_count;
    struct rfade_row_level levels[RFADE_MOST_LEVELS]; /**< those that can be used, or none */
    bool numbered;                                    /**< the row has a sequence number */
    int64_t sequence;
    /** Numbered levels that have no value, or were refused: their number is not lost. */
    size_t valueless_count;
    const char *valueless[RFADE_MOST_LEVELS]; /**< their channels */
    size_t no_reading;                        /**< of these, how many say that there is none */
    char refused[256]; /**< what was refused of the row, a plain sentence; empty: nothing */
};

struct rfade_row_maker; /* opaque */

/**
 * Refuses a map and names that don't say what vehicle or channel it is (RFADE_INPUT). Map,
 * layout and names are borrowed.
 */
enum rfade_status rfade_row_maker_create(const struct rfade_column_map *map,
                                         const struct rfade_layout *layout,
                                         const struct rfade_ingest_names *names,
                                         struct rfade_row_maker **maker,
                                         struct rfade_error *error);
void rfade_row_maker_destroy(struct rfade_row_maker *maker); /* NULL is harmless */

/**
 * Whether anything of the line can be used, other than the numbers of `valueless` levels;
 * row->refused says what can't.
 */
bool rfade_row_make(struct rfade_row_maker *maker, const struct rfade_line *line,
                    struct rfade_row *row);

#endif
