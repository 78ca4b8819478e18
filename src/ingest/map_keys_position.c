/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/column_map_keys.h"

#include "ingest/map_value.h"

static bool set_form(struct rfade_position_map *position, enum rfade_position_form form)
{
    bool first = position->form == RFADE_POSITION_NONE || position->form == form;
    position->form = form;
    return first;
}

static bool set_latitude_column(void *target, const char *value)
{
    struct rfade_position_map *position = target;
    return set_form(position, RFADE_POSITION_DEGREES) &&
           rfade_map_set_column(&position->first, value);
}

static bool set_longitude_column(void *target, const char *value)
{
    struct rfade_position_map *position = target;
    return set_form(position, RFADE_POSITION_DEGREES) &&
           rfade_map_set_column(&position->second, value);
}

static bool set_x_column(void *target, const char *value)
{
    struct rfade_position_map *position = target;
    return set_form(position, RFADE_POSITION_GRID) &&
           rfade_map_set_column(&position->first, value);
}

static bool set_y_column(void *target, const char *value)
{
    struct rfade_position_map *position = target;
    return set_form(position, RFADE_POSITION_GRID) &&
           rfade_map_set_column(&position->second, value);
}

static bool set_origin_latitude(void *target, const char *value)
{
    struct rfade_position_map *position = target;
    return rfade_map_number(value, -90, 90, &position->latitude_deg);
}

static bool set_origin_longitude(void *target, const char *value)
{
    struct rfade_position_map *position = target;
    return rfade_map_number(value, -180, 180, &position->longitude_deg);
}

static bool set_latitude(void *target, const char *value)
{
    return set_form(target, RFADE_POSITION_FIXED) && set_origin_latitude(target, value);
}

static bool set_longitude(void *target, const char *value)
{
    return set_form(target, RFADE_POSITION_FIXED) && set_origin_longitude(target, value);
}

static bool set_epsg(void *target, const char *value)
{
    size_t code = 0;
    bool read =
        rfade_map_count(value, 1024, 32767, &code); /* the range that EPSG codes lie in */
    *(int *)target = (int)code;
    return read;
}

static bool set_held(void *target, const char *value)
{
    return rfade_map_number(value, 0, 3600, target);
}

static bool set_max_speed(void *target, const char *value)
{
    return rfade_map_number(value, 1, 20000, target);
}

static bool set_speed_unit(void *target, const char *value)
{
    /* Mile 1609.344 m (1959 agreement), nautical mile 1852 m (1929): exact. */
    static const char *const words[] = {"km/h", "m/s", "mph", "knots", NULL};
    static const double factors[] = {1000.0 / 3600, 1, 1609.344 / 3600, 1852.0 / 3600};
    int word = rfade_map_word(words, value);
    if (word >= 0)
        *(double *)target = factors[word];
    return word >= 0;
}

static const char degrees_remedy[] =
    "give degrees with a decimal point, north and east positive; the keys of one form of "
    "position only";
static const char position_remedy[] =
    "give a column's name or number; the keys of one form of position only";

#define MAP(part) offsetof(struct rfade_column_map, part)

static const struct rfade_map_key position_keys[] = {
    {"latitude_column", set_latitude_column, MAP(position), position_remedy},
    {"longitude_column", set_longitude_column, MAP(position), position_remedy},
    {"x_column", set_x_column, MAP(position), position_remedy},
    {"y_column", set_y_column, MAP(position), position_remedy},
    {"epsg", set_epsg, MAP(position.epsg), "an EPSG code such as 32631"},
    {"origin_latitude", set_origin_latitude, MAP(position), degrees_remedy},
    {"origin_longitude", set_origin_longitude, MAP(position), degrees_remedy},
    {"latitude", set_latitude, MAP(position), degrees_remedy},
    {"longitude", set_longitude, MAP(position), degrees_remedy},
    {"no_fix", rfade_map_set_sentinels, MAP(position.no_fix), rfade_map_sentinel_remedy},
    {"held_s", set_held, MAP(position.held_s), "seconds, from 0 to 3600"},
    {"max_speed", set_max_speed, MAP(position.max_speed_m_s),
     "metres a second, from 1 to 20000"},
};

static const struct rfade_map_key speed_keys[] = {
    {"column", rfade_map_set_column, MAP(speed_column), rfade_map_column_remedy},
    {"unit", set_speed_unit, MAP(speed_m_s_per_unit), "km/h, m/s, mph or knots"},
};

const struct rfade_map_section rfade_map_position_section = {
    "position", sizeof position_keys / sizeof position_keys[0], position_keys};
const struct rfade_map_section rfade_map_speed_section = {
    "speed", sizeof speed_keys / sizeof speed_keys[0], speed_keys};
