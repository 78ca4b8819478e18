/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/map_of_file.h"

#include <stdlib.h>
#include <string.h>

#include "common/text.h"
#include "ingest/position.h"

struct rfade_column_map *rfade_map_copy(const struct rfade_column_map *map)
{
    struct rfade_column_map *copy = malloc(sizeof *copy);
    if (copy) {
        *copy = *map;
        copy->zone = NULL; /* time.zone borrows it */
    }
    return copy;
}

static void put_name(struct rfade_named *named, const char *text)
{
    if (text[0])
        memcpy(named->name, text, strlen(text) + 1);
}

/* The place that the name says, by the map's grid or origin. */
static enum rfade_status put_place(struct rfade_column_map *map, const char *first_text,
                                   const char *second_text, enum rfade_position_form form,
                                   struct rfade_error *error)
{
    struct rfade_position_converter *converter = NULL;
    double first = 0;
    double second = 0;
    double latitude_deg = 0;
    double longitude_deg = 0;
    if (!rfade_text_to_double(first_text, &first) ||
        !rfade_text_to_double(second_text, &second))
        return RFADE_OK; /* the pattern has no such parts */
    map->position.form = form;
    enum rfade_status status =
        rfade_position_converter_create(&map->position, &converter, error);
    if (status != RFADE_OK)
        return status;
    const char *reason =
        rfade_position_convert(converter, first, second, &latitude_deg, &longitude_deg);
    rfade_position_converter_destroy(converter);
    if (reason)
        return rfade_error_set(error, RFADE_INPUT, "check `name` in the map's [file] section",
                               "the position in the file's name, %s and %s, %s", first_text,
                               second_text, reason);
    map->position.form = RFADE_POSITION_FIXED;
    map->position.latitude_deg = latitude_deg;
    map->position.longitude_deg = longitude_deg;
    return RFADE_OK;
}

enum rfade_status rfade_map_of_file(const struct rfade_column_map *map,
                                    const struct rfade_name_parts *parts,
                                    struct rfade_column_map **own, struct rfade_error *error)
{
    struct rfade_column_map *made = rfade_map_copy(map);
    *own = NULL;
    if (!made)
        return rfade_error_no_memory(error);
    put_name(&made->vehicle, parts->texts[RFADE_PART_VEHICLE]);
    put_name(&made->channel, parts->texts[RFADE_PART_CHANNEL]);
    put_name(&made->campaign, parts->texts[RFADE_PART_CAMPAIGN]);
    if (parts->texts[RFADE_PART_DATE][0])
        made->time.has_date =
            rfade_name_date(parts->texts[RFADE_PART_DATE], &made->time.date_days);
    enum rfade_status status =
        put_place(made, parts->texts[RFADE_PART_LATITUDE], parts->texts[RFADE_PART_LONGITUDE],
                  RFADE_POSITION_DEGREES, error);
    if (status == RFADE_OK)
        status =
            put_place(made, parts->texts[RFADE_PART_X], parts->texts[RFADE_PART_Y],
                      map->position.epsg ? RFADE_POSITION_GRID : RFADE_POSITION_LOCAL, error);
    if (status == RFADE_OK)
        *own = made;
    else
        rfade_column_map_destroy(made);
    return status;
}
