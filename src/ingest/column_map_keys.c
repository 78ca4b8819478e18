/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/column_map_keys.h"

#include <math.h>
#include <stddef.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "common/text.h"
#include "ingest/json_path.h"
#include "ingest/number.h"
#include "ingest/sink.h"
#include "ingest/time_text.h"

static bool read_double(const char *value, double low, double high, double *number)
{
    double read = NAN;
    if (!rfade_text_to_double(value, &read) || !(read >= low && read <= high))
        return false;
    *number = read;
    return true;
}

static bool read_count(const char *value, size_t low, size_t high, size_t *count)
{
    struct rfade_decimal decimal;
    int64_t read = 0;
    if (value[0] < '0' || value[0] > '9' || strspn(value, "0123456789") != strlen(value) ||
        !rfade_decimal_read(value, strlen(value), '.', &decimal) ||
        !rfade_decimal_scaled(&decimal, 0, &read) || (uint64_t)read < low ||
        (uint64_t)read > high)
        return false;
    *count = (size_t)read;
    return true;
}

/* Index of a word in a list that ends with NULL; -1 if it is not there. */
static int find_word(const char *const *words, const char *value)
{
    for (int i = 0; words[i]; i++)
        if (strcmp(words[i], value) == 0)
            return i;
    return -1;
}

static bool copy_text(char *target, size_t size, const char *value)
{
    size_t length = strlen(value);
    if (length == 0 || length >= size)
        return false;
    memcpy(target, value, length + 1);
    return true;
}

static bool set_name(void *target, const char *value)
{
    return copy_text(target, RFADE_NAME_SIZE, value);
}

/* A number, a name, or a name in double quotes. */
static bool set_column(void *target, const char *value)
{
    struct rfade_column *column = target;
    size_t length = strlen(value);
    if (length > 0 && strspn(value, "0123456789") == length)
        return read_count(value, 1, RFADE_MOST_COLUMNS, &column->number);
    if (length < 2 || value[0] != '"' || value[length - 1] != '"')
        return copy_text(column->name, sizeof column->name, value);
    if (!copy_text(column->name, sizeof column->name, value + 1) || length == 2)
        return false;
    column->name[length - 2] = '\0';
    return true;
}

static bool set_separator(void *target, const char *value)
{
    static const char *const words[] = {"comma", "semicolon", "tab", "pipe", "blanks", NULL};
    static const char separators[] = {',', ';', '\t', '|', RFADE_SEPARATOR_BLANKS};
    char *separator = target;
    int word = find_word(words, value);
    if (word >= 0)
        *separator = separators[word];
    else if (strlen(value) == 1 && value[0] > ' ' && value[0] < 0x7F &&
             !strchr("\"'", value[0]))
        *separator = value[0];
    else
        return false;
    return true;
}

static bool set_file_format(void *target, const char *value)
{
    static const char *const words[] = {"delimited", "json", "nmea", "gpx", NULL};
    int word = find_word(words, value);
    if (word >= 0)
        *(enum rfade_log_format *)target = (enum rfade_log_format)word;
    return word >= 0;
}

static bool set_records(void *target, const char *value)
{
    struct rfade_json_path path;
    return copy_text(target, RFADE_NAME_SIZE, value) && rfade_json_path_read(target, &path);
}

static bool set_decimal(void *target, const char *value)
{
    struct rfade_column_map *map = target;
    static const char *const words[] = {"point", "comma", NULL};
    int word = find_word(words, value);
    if (word < 0)
        return false;
    map->file.decimal_sign = word == 0 ? '.' : ',';
    map->time.decimal_sign = map->file.decimal_sign;
    return true;
}

static bool set_header(void *target, const char *value)
{
    struct rfade_file_map *file = target;
    static const char *const words[] = {"yes", "no", NULL};
    int word = find_word(words, value);
    file->header = word == 0   ? RFADE_HEADER_FIRST
                   : word == 1 ? RFADE_HEADER_NONE
                               : RFADE_HEADER_LINE;
    return word >= 0 || read_count(value, 1, 1000000, &file->header_line);
}

static bool set_skip(void *target, const char *value)
{
    return read_count(value, 0, 1000000, target);
}

static bool set_comment(void *target, const char *value)
{
    char *comment = target;
    if (strcmp(value, "none") == 0)
        *comment = '\0';
    else if (strlen(value) == 1 && value[0] > ' ' && value[0] < 0x7F)
        *comment = value[0];
    else
        return false;
    return true;
}

static bool set_quote(void *target, const char *value)
{
    static const char *const words[] = {"double", "single", "none", NULL};
    int word = find_word(words, value);
    if (word >= 0)
        *(char *)target = "\"'"[word];
    return word >= 0;
}

static bool set_rows(void *target, const char *value)
{
    static const char *const words[] = {"even", "ragged", NULL};
    int word = find_word(words, value);
    *(bool *)target = word == 1;
    return word >= 0;
}

static bool set_format(void *target, const char *value)
{
    struct rfade_time_format *format = target;
    static const char *const words[] = {"auto",     "iso8601",  "epoch_s", "epoch_ms",
                                        "epoch_us", "epoch_ns", NULL};
    static const char pattern[] = "pattern ";
    int word = find_word(words, value);
    if (word >= 0) {
        format->form = word == 0   ? RFADE_TIME_AUTO
                       : word == 1 ? RFADE_TIME_ISO8601
                                   : RFADE_TIME_EPOCH;
        format->epoch_digits = word >= 2 ? 3 * (word - 2) : 0;
        return true;
    }
    if (strncmp(value, pattern, sizeof pattern - 1) != 0)
        return false;
    format->form = RFADE_TIME_PATTERN;
    return copy_text(format->pattern, sizeof format->pattern, value + sizeof pattern - 1) &&
           !rfade_time_pattern_check(format->pattern);
}

static bool set_date(void *target, const char *value)
{
    struct rfade_time_format *format = target;
    struct rfade_clock_time time;
    if (rfade_time_pattern("%Y-%m-%d", value, strlen(value), &time))
        return false;
    format->has_date = true;
    format->date_days = time.days;
    return true;
}

static bool set_origin(void *target, const char *value)
{
    struct rfade_time_format *format = target;
    struct rfade_time_format iso = {.form = RFADE_TIME_ISO8601};
    struct rfade_time_reader reader = {.format = &iso};
    return !rfade_time_read(&reader, value, strlen(value), &format->origin_us);
}

static bool set_zone(void *target, const char *value)
{
    struct rfade_column_map *map = target;
    rfade_zone_destroy(map->zone);
    bool made = rfade_zone_create(value, &map->zone, NULL) == RFADE_OK;
    map->time.zone = map->zone;
    return made;
}

static bool set_subsecond(void *target, const char *value)
{
    static const char *const words[] = {"ms", "us", "ns", NULL};
    int word = find_word(words, value);
    *(int *)target = 3 * (word + 1);
    return word >= 0;
}

static bool set_form(struct rfade_position_map *position, enum rfade_position_form form)
{
    bool first = position->form == RFADE_POSITION_NONE || position->form == form;
    position->form = form;
    return first;
}

static bool set_latitude_column(void *target, const char *value)
{
    struct rfade_position_map *position = target;
    return set_form(position, RFADE_POSITION_DEGREES) && set_column(&position->first, value);
}

static bool set_longitude_column(void *target, const char *value)
{
    struct rfade_position_map *position = target;
    return set_form(position, RFADE_POSITION_DEGREES) && set_column(&position->second, value);
}

static bool set_x_column(void *target, const char *value)
{
    struct rfade_position_map *position = target;
    return set_form(position, RFADE_POSITION_GRID) && set_column(&position->first, value);
}

static bool set_y_column(void *target, const char *value)
{
    struct rfade_position_map *position = target;
    return set_form(position, RFADE_POSITION_GRID) && set_column(&position->second, value);
}

static bool set_origin_latitude(void *target, const char *value)
{
    struct rfade_position_map *position = target;
    return read_double(value, -90, 90, &position->latitude_deg);
}

static bool set_origin_longitude(void *target, const char *value)
{
    struct rfade_position_map *position = target;
    return read_double(value, -180, 180, &position->longitude_deg);
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
    bool read = read_count(value, 1024, 32767, &code); /* the range that EPSG codes lie in */
    *(int *)target = (int)code;
    return read;
}

static bool set_held(void *target, const char *value)
{
    return read_double(value, 0, 3600, target);
}

static bool set_max_speed(void *target, const char *value)
{
    return read_double(value, 1, 20000, target);
}

static bool set_speed_unit(void *target, const char *value)
{
    /* Mile 1609.344 m (1959 agreement), nautical mile 1852 m (1929): exact. */
    static const char *const words[] = {"km/h", "m/s", "mph", "knots", NULL};
    static const double factors[] = {1000.0 / 3600, 1, 1609.344 / 3600, 1852.0 / 3600};
    int word = find_word(words, value);
    if (word >= 0)
        *(double *)target = factors[word];
    return word >= 0;
}

static bool set_level_unit(void *target, const char *value)
{
    static const char *const words[] = {"dbm", "dbw", "dbuv", "w", "mw", "uw", NULL};
    int word = find_word(words, value);
    if (word >= 0)
        *(enum rfade_level_unit *)target = (enum rfade_level_unit)word;
    return word >= 0;
}

static bool set_scale(void *target, const char *value)
{
    return read_double(value, -1e12, 1e12, target) && *(double *)target != 0;
}

static bool set_offset(void *target, const char *value)
{
    return read_double(value, -1e12, 1e12, target);
}

/* Values between commas. */
static bool set_sentinels(void *target, const char *value)
{
    struct rfade_sentinels *sentinels = target;
    while (sentinels->count < RFADE_MOST_SENTINELS) {
        value += strspn(value, " \t");
        size_t length = strcspn(value, ",");
        const char *next = value + length;
        while (length > 0 && (value[length - 1] == ' ' || value[length - 1] == '\t'))
            length--;
        if (length == 0 || length >= RFADE_SENTINEL_SIZE)
            return false;
        char *text = sentinels->texts[sentinels->count];
        memcpy(text, value, length);
        text[length] = '\0';
        (void)rfade_text_to_double(text, &sentinels->values[sentinels->count++]);
        if (*next == '\0')
            return true;
        value = next + 1;
    }
    return false;
}

static bool set_modulus(void *target, const char *value)
{
    return read_count(value, 16, (size_t)RFADE_MOST_SEQUENCE, target);
}

/* -140 .. -20 */
static bool set_valid(void *target, const char *value)
{
    struct rfade_quantity *quantity = target;
    char low_text[32];
    const char *dots = strstr(value, "..");
    double low = NAN;
    double high = NAN;
    if (!dots || (size_t)(dots - value) >= sizeof low_text)
        return false;
    memcpy(low_text, value, (size_t)(dots - value));
    low_text[dots - value] = '\0';
    if (!read_double(low_text, -200, 60, &low) || !read_double(dots + 2, -200, 60, &high) ||
        low >= high)
        return false;
    quantity->low_cdb = (int32_t)lround(100 * low);
    quantity->high_cdb = (int32_t)lround(100 * high);
    return true;
}

static const char column_remedy[] =
    "give a column's name as in the header, or its number from 1 on";
static const char name_remedy[] = "give a name of at most 127 bytes";
static const char degrees_remedy[] =
    "give degrees with a decimal point, north and east positive; the keys of one form of "
    "position only";
static const char position_remedy[] =
    "give a column's name or number; the keys of one form of position only";
static const char sentinel_remedy[] = "give at most 16 values, joined by commas";
static const char scale_remedy[] = "give a number other than 0, with a decimal point";
static const char offset_remedy[] = "give a number with a decimal point";

#define MAP(part) offsetof(struct rfade_column_map, part)
#define LEVEL(part) offsetof(struct rfade_level_map, part)

static const struct rfade_map_key keys[] = {
    {"file", "format", set_file_format, MAP(file.format), "delimited, json, nmea or gpx"},
    {"file", "records", set_records, MAP(file.records),
     "the path of the records, such as $[*], $.packets[*] or $"},
    {"file", "separator", set_separator, MAP(file.separator),
     "comma, semicolon, tab, pipe, blanks, or one character"},
    {"file", "decimal", set_decimal, 0, "point or comma"},
    {"file", "header", set_header, MAP(file), "yes, no, or the line number of the header"},
    {"file", "skip", set_skip, MAP(file.skip), "a number of lines"},
    {"file", "comment", set_comment, MAP(file.comment), "one character, or none"},
    {"file", "quote", set_quote, MAP(file.quote), "double, single or none"},
    {"file", "rows", set_rows, MAP(file.ragged), "even or ragged"},
    {"time", "column", set_column, MAP(time_column), column_remedy},
    {"time", "date_column", set_column, MAP(date_column), column_remedy},
    {"time", "date", set_date, MAP(time), "a date such as 2026-01-15"},
    {"time", "format", set_format, MAP(time),
     "auto, iso8601, epoch_s, epoch_ms, epoch_us, epoch_ns, or pattern %d.%m.%Y %H:%M:%S with "
     "the conversions %Y %y %m %b %d %e %j %H %I %M %S %f %p %z %T %F"},
    {"time", "zone", set_zone, 0,
     "UTC, an offset such as +01:00, or a name of the IANA time zone database such as "
     "Europe/Berlin"},
    {"time", "origin", set_origin, MAP(time), "a time such as 2026-01-15T20:00:00Z"},
    {"time", "subsecond_column", set_column, MAP(subsecond_column), column_remedy},
    {"time", "subsecond_unit", set_subsecond, MAP(subsecond_digits), "ms, us or ns"},
    {"position", "latitude_column", set_latitude_column, MAP(position), position_remedy},
    {"position", "longitude_column", set_longitude_column, MAP(position), position_remedy},
    {"position", "x_column", set_x_column, MAP(position), position_remedy},
    {"position", "y_column", set_y_column, MAP(position), position_remedy},
    {"position", "epsg", set_epsg, MAP(position.epsg), "an EPSG code such as 32631"},
    {"position", "origin_latitude", set_origin_latitude, MAP(position), degrees_remedy},
    {"position", "origin_longitude", set_origin_longitude, MAP(position), degrees_remedy},
    {"position", "latitude", set_latitude, MAP(position), degrees_remedy},
    {"position", "longitude", set_longitude, MAP(position), degrees_remedy},
    {"position", "no_fix", set_sentinels, MAP(position.no_fix), sentinel_remedy},
    {"position", "held_s", set_held, MAP(position.held_s), "seconds, from 0 to 3600"},
    {"position", "max_speed", set_max_speed, MAP(position.max_speed_m_s),
     "metres a second, from 1 to 20000"},
    {"speed", "column", set_column, MAP(speed_column), column_remedy},
    {"speed", "unit", set_speed_unit, MAP(speed_m_s_per_unit), "km/h, m/s, mph or knots"},
    {"sequence", "column", set_column, MAP(sequence_column), column_remedy},
    {"sequence", "modulus", set_modulus, MAP(sequence_modulus),
     "the number of different numbers, such as 65536"},
    {"vehicle", "name", set_name, MAP(vehicle.name), name_remedy},
    {"vehicle", "column", set_column, MAP(vehicle.column), column_remedy},
    {"channel", "name", set_name, MAP(channel.name), name_remedy},
    {"channel", "column", set_column, MAP(channel.column), column_remedy},
    {"campaign", "name", set_name, MAP(campaign.name), name_remedy},
    {"campaign", "column", set_column, MAP(campaign.column), column_remedy},
    {"level", "column", set_column, LEVEL(level.column), column_remedy},
    {"level", "unit", set_level_unit, LEVEL(level.unit), "dbm, dbw, dbuv, w, mw or uw"},
    {"level", "scale", set_scale, LEVEL(level.scale), scale_remedy},
    {"level", "offset", set_offset, LEVEL(level.offset), offset_remedy},
    {"level", "no_reading", set_sentinels, LEVEL(level.sentinels), sentinel_remedy},
    {"level", "valid", set_valid, LEVEL(level),
     "the lowest and highest dBm from -200 to 60, such as -140 .. -20"},
    {"level", "snr_column", set_column, LEVEL(snr.column), column_remedy},
    {"level", "snr_scale", set_scale, LEVEL(snr.scale), scale_remedy},
    {"level", "snr_offset", set_offset, LEVEL(snr.offset), offset_remedy},
    {"level", "snr_no_reading", set_sentinels, LEVEL(snr.sentinels), sentinel_remedy},
};

enum { KEY_COUNT = sizeof keys / sizeof keys[0] };
_Static_assert(KEY_COUNT <= 64, "keys given twice are told by the bits of 64");

const struct rfade_map_key *rfade_map_key(const char *section, const char *name)
{
    for (size_t i = 0; i < KEY_COUNT; i++)
        if (strcmp(keys[i].section, section) == 0 && strcmp(keys[i].name, name) == 0)
            return &keys[i];
    return NULL;
}

unsigned rfade_map_key_index(const struct rfade_map_key *key)
{
    return (unsigned)(key - keys);
}

void rfade_map_key_names(const char *section, char *text, size_t size)
{
    size_t used = 0;
    text[0] = '\0';
    for (size_t i = 0; i < KEY_COUNT; i++) {
        if (strcmp(keys[i].section, section) != 0)
            continue;
        int added = snprintf(text + used, size - used, "%s%s", used ? ", " : "", keys[i].name);
        if (added < 0 || (size_t)added >= size - used)
            return;
        used += (size_t)added;
    }
}
