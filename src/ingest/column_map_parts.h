/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file column_map_parts.h  The parts of a column map, for those that read or apply it. */
#ifndef ROUTEFADE_INGEST_COLUMN_MAP_PARTS_H
#define ROUTEFADE_INGEST_COLUMN_MAP_PARTS_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "ingest/column_map.h"
#include "ingest/time.h"

enum {
    RFADE_NAME_SIZE = 128, /**< of a column, vehicle, channel or campaign, with the NUL */
    RFADE_MOST_COLUMNS = 1024,
    RFADE_MOST_LEVELS = 64,
    RFADE_MOST_SENTINELS = 16,
    RFADE_SENTINEL_SIZE = 24
};

/** A column by name, or by number if that isn't 0. Neither: not given. */
struct rfade_column {
    char name[RFADE_NAME_SIZE];
    size_t number; /**< from 1 */
};

/** A name that is fixed, or stands in a column. */
struct rfade_named {
    char name[RFADE_NAME_SIZE];
    struct rfade_column column;
    size_t line; /**< of the section; 0: not given */
};

/** Values that mean "nothing there": as text, and as a number where they are one. */
struct rfade_sentinels {
    size_t count;
    char texts[RFADE_MOST_SENTINELS][RFADE_SENTINEL_SIZE];
    double values[RFADE_MOST_SENTINELS]; /**< NaN: no number */
};

enum rfade_level_unit {
    RFADE_UNIT_DBM,
    RFADE_UNIT_DBW,
    RFADE_UNIT_DBUV,
    RFADE_UNIT_W,
    RFADE_UNIT_MW,
    RFADE_UNIT_UW
};

/** value * scale + offset, in the unit. */
struct rfade_quantity {
    struct rfade_column column;
    enum rfade_level_unit unit;
    double scale;
    double offset;
    struct rfade_sentinels sentinels;
    int32_t low_cdb; /**< valid range, ends included */
    int32_t high_cdb;
};

/** The lowest noise that is taken for one: that of 1 Hz lies at -174 dBm. */
enum { RFADE_LOWEST_NOISE_CDB = -25000 };

struct rfade_level_map {
    char channel[RFADE_NAME_SIZE]; /**< empty: [level] without a name */
    struct rfade_quantity level;
    struct rfade_quantity snr;
    struct rfade_column
        noise_column;  /**< given instead of an SNR column: then `snr` reads it */
    bool snr_is_noise; /**< noise in dBm: SNR is the level less it */
    size_t line;
};

enum rfade_position_form {
    RFADE_POSITION_NONE,
    RFADE_POSITION_DEGREES,
    RFADE_POSITION_GRID,
    RFADE_POSITION_LOCAL,
    RFADE_POSITION_FIXED
};

struct rfade_position_map {
    enum rfade_position_form form;
    struct rfade_column first;  /**< latitude, or x */
    struct rfade_column second; /**< longitude, or y */
    int epsg;
    double latitude_deg; /**< of the origin, or of what stands still; NaN: not given */
    double longitude_deg;
    struct rfade_sentinels no_fix;
    double held_s;
    double max_speed_m_s;
    size_t line;
};

enum rfade_header_form { RFADE_HEADER_FIRST, RFADE_HEADER_NONE, RFADE_HEADER_LINE };

/* Separators that are no character. */
enum { RFADE_SEPARATOR_BLANKS = ' ' };

/** How a file is read; told by its content. */
enum rfade_log_format {
    RFADE_FORMAT_DELIMITED,
    RFADE_FORMAT_JSON,
    RFADE_FORMAT_NMEA,
    RFADE_FORMAT_GPX
};

struct rfade_file_map {
    enum rfade_log_format format;  /**< that the map is for */
    char records[RFADE_NAME_SIZE]; /**< path of a JSON file's records; empty: not given */
    char name[RFADE_NAME_SIZE];    /**< pattern of the files' names; empty: any */
    char separator;                /**< RFADE_SEPARATOR_BLANKS: runs of blanks and tabs */
    char decimal_sign;
    char comment; /**< '\0': none */
    char quote;   /**< '\0': none */
    enum rfade_header_form header;
    size_t header_line;
    size_t skip;
    bool ragged;
};

struct rfade_column_map {
    char name[256];
    struct rfade_file_map file;
    struct rfade_time_format time; /**< its zone is owned by `zone` */
    struct rfade_zone *zone;
    struct rfade_column time_column;
    struct rfade_column date_column;
    struct rfade_column subsecond_column;
    struct rfade_column gnss_column;
    int subsecond_digits; /**< decimal places: 3 ms, 6 us, 9 ns; 0: not given */
    size_t time_line;
    int64_t time_offset_us; /**< added to each time */
    bool time_spread;       /**< rows with one whole-second stamp are spread over it */
    bool backward_refused;  /**< rows before one that came earlier are refused */
    struct rfade_position_map position;
    struct rfade_column speed_column;
    double speed_m_s_per_unit; /**< NaN: not given */
    size_t speed_line;
    struct rfade_column sequence_column;
    size_t sequence_modulus; /**< 0: numbers never begin anew */
    size_t sequence_line;
    struct rfade_named vehicle;
    struct rfade_named channel;
    struct rfade_named campaign;
    size_t level_count;
    struct rfade_level_map levels[RFADE_MOST_LEVELS];
};

/** A map with the defaults of the map language. NULL if there is no memory. */
struct rfade_column_map *rfade_column_map_create(const char *name);

/** Appends a level with the defaults; NULL if there are RFADE_MOST_LEVELS. */
struct rfade_level_map *rfade_column_map_add_level(struct rfade_column_map *map,
                                                   const char *channel);

/** An ASCII letter in lower case, whatever the locale; anything else as it is. */
char rfade_lower(char c);

/** NMEA and GPX: positions alone, and no columns. */
bool rfade_format_is_positions(enum rfade_log_format format);

bool rfade_column_given(const struct rfade_column *column);

#endif
