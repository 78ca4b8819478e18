/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file row.h  One row of a log, its values taken apart, made a time, names, levels and a
 * place.
 */
#ifndef ROUTEFADE_INGEST_ROW_H
#define ROUTEFADE_INGEST_ROW_H

#include "ingest/layout.h"
#include "ingest/open.h"

/** Faster than any vehicle that one would send round for this: 1000 km/h. */
#define RFADE_MOST_SPEED_M_S (1000.0 / 3.6)

struct rfade_row_level {
    const char *channel;
    int32_t level_cdb; /**< RFADE_NO_VALUE_CDB: none */
    int32_t snr_cdb;
};

struct rfade_row {
    int64_t time_us;
    bool has_gnss; /**< the receiver's time stands in the row, too */
    int64_t gnss_us;
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

/** Where the values of the row at hand stand, by role; NULL: the map has no such column. */
struct rfade_row_values {
    const struct rfade_field *by_role[RFADE_MOST_ROLES];
};

/**
 * The vehicle by the names given or the map; NULL: it stands in a column. RFADE_INPUT if
 * nothing says it.
 */
enum rfade_status rfade_row_vehicle(const struct rfade_column_map *map,
                                    const struct rfade_ingest_names *names,
                                    const char **vehicle, struct rfade_error *error);

struct rfade_row_maker; /* opaque */

/**
 * Refuses a map and names that don't say what vehicle or channel it is (RFADE_INPUT). Map,
 * values and names are borrowed; the fields that `values` points at change from row to row.
 */
enum rfade_status rfade_row_maker_create(const struct rfade_column_map *map,
                                         const struct rfade_row_values *values,
                                         const struct rfade_ingest_names *names,
                                         struct rfade_row_maker **maker,
                                         struct rfade_error *error);
void rfade_row_maker_destroy(struct rfade_row_maker *maker); /* NULL is harmless */

/** The value of a role; empty if there is no such column. */
const struct rfade_field *rfade_row_value(const struct rfade_row_values *values, size_t role);

/** Empties a row, to be filled by _make or refused. */
void rfade_row_begin(struct rfade_row *row);

/** Adds to what is refused, as far as there is room. Returns false, for callers to return. */
bool rfade_row_refuse(struct rfade_row *row, const char *format, ...)
    __attribute__((format(printf, 2, 3)));

/** As _refuse: the what 'value' reason. */
bool rfade_row_refuse_value(struct rfade_row *row, const char *what,
                            const struct rfade_field *value, const char *reason);

/**
 * Fills a row that was begun from the values. Whether anything of them can be used, other
 * than the numbers of `valueless` levels; row->refused says what can't. A row without a name
 * that it doesn't need, having nothing to tell, is not refused.
 */
bool rfade_row_make(struct rfade_row_maker *maker, struct rfade_row *row);

#endif
