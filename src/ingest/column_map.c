/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/column_map_parts.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* Valid levels unless a map says otherwise: from below the noise of 1 Hz to what destroys the
 * input of a usual receiver, +20 dBm (common practice). One fault of +48 dBm taken for a
 * reading would be all of a segment's mean power. */
enum { LOWEST_LEVEL_CDB = -20000, HIGHEST_LEVEL_CDB = 2000 };
enum { LOWEST_SNR_CDB = -10000, HIGHEST_SNR_CDB = 15000 };

static const double default_held_s = 2;
static const double default_max_speed_m_s = 150;

struct rfade_column_map *rfade_column_map_create(const char *name)
{
    struct rfade_column_map *map = calloc(1, sizeof *map);
    if (!map)
        return NULL;
    (void)snprintf(map->name, sizeof map->name, "%s", name);
    map->file = (struct rfade_file_map){
        .separator = ',', .decimal_sign = '.', .comment = '#', .quote = '"'};
    map->time.decimal_sign = '.';
    map->position.latitude_deg = NAN;
    map->position.longitude_deg = NAN;
    map->position.held_s = default_held_s;
    map->position.max_speed_m_s = default_max_speed_m_s;
    map->speed_m_s_per_unit = NAN;
    return map;
}

void rfade_column_map_destroy(struct rfade_column_map *map)
{
    if (map)
        rfade_zone_destroy(map->zone);
    free(map);
}

struct rfade_level_map *rfade_column_map_add_level(struct rfade_column_map *map,
                                                   const char *channel)
{
    if (map->level_count == RFADE_MOST_LEVELS)
        return NULL;
    struct rfade_level_map *level = &map->levels[map->level_count++];
    *level = (struct rfade_level_map){
        .level = {.scale = 1, .low_cdb = LOWEST_LEVEL_CDB, .high_cdb = HIGHEST_LEVEL_CDB},
        .snr = {.scale = 1, .low_cdb = LOWEST_SNR_CDB, .high_cdb = HIGHEST_SNR_CDB}};
    (void)snprintf(level->channel, sizeof level->channel, "%s", channel);
    return level;
}

char rfade_lower(char c)
{
    static const char upper[] = "ABCDEFGHIJKLMNOPQRSTUVWXYZ";
    static const char lower[] = "abcdefghijklmnopqrstuvwxyz";
    const char *found = c ? strchr(upper, c) : NULL;
    if (!found)
        return c;
    return lower[found - upper];
}

bool rfade_format_is_positions(enum rfade_log_format format)
{
    return format == RFADE_FORMAT_NMEA || format == RFADE_FORMAT_GPX;
}

bool rfade_column_given(const struct rfade_column *column)
{
    return column->number > 0 || column->name[0] != '\0';
}
