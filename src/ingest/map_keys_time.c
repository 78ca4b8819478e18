/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/column_map_keys.h"

#include <math.h>
#include <string.h>

#include "ingest/map_value.h"
#include "ingest/time_text.h"

static bool set_format(void *target, const char *value)
{
    struct rfade_time_format *format = target;
    static const char *const words[] = {"auto",     "iso8601",  "epoch_s", "epoch_ms",
                                        "epoch_us", "epoch_ns", NULL};
    static const char pattern[] = "pattern ";
    int word = rfade_map_word(words, value);
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
    return rfade_map_text(format->pattern, sizeof format->pattern,
                          value + sizeof pattern - 1) &&
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
    int word = rfade_map_word(words, value);
    *(int *)target = 3 * (word + 1);
    return word >= 0;
}

static bool set_offset_s(void *target, const char *value)
{
    double seconds = NAN;
    bool read = rfade_map_number(value, -4e8, 4e8, &seconds); /* about 12 years */
    if (read)
        *(int64_t *)target = llround(seconds * 1e6);
    return read;
}

static bool set_spread(void *target, const char *value)
{
    static const char *const words[] = {"no", "yes", NULL};
    int word = rfade_map_word(words, value);
    *(bool *)target = word == 1;
    return word >= 0;
}

static bool set_backward(void *target, const char *value)
{
    static const char *const words[] = {"sort", "refuse", NULL};
    int word = rfade_map_word(words, value);
    *(bool *)target = word == 1;
    return word >= 0;
}

#define MAP(part) offsetof(struct rfade_column_map, part)

static const struct rfade_map_key time_keys[] = {
    {"column", rfade_map_set_column, MAP(time_column), rfade_map_column_remedy},
    {"date_column", rfade_map_set_column, MAP(date_column), rfade_map_column_remedy},
    {"date", set_date, MAP(time), "a date such as 2026-01-15"},
    {"format", set_format, MAP(time),
     "auto, iso8601, epoch_s, epoch_ms, epoch_us, epoch_ns, or pattern %d.%m.%Y %H:%M:%S with "
     "the conversions %Y %y %m %b %d %e %j %H %I %M %S %f %p %z %T %F"},
    {"zone", set_zone, 0,
     "UTC, an offset such as +01:00, or a name of the IANA time zone database such as "
     "Europe/Berlin"},
    {"origin", set_origin, MAP(time), "a time such as 2026-01-15T20:00:00Z"},
    {"subsecond_column", rfade_map_set_column, MAP(subsecond_column), rfade_map_column_remedy},
    {"subsecond_unit", set_subsecond, MAP(subsecond_digits), "ms, us or ns"},
    {"offset_s", set_offset_s, MAP(time_offset_us), "seconds, with a decimal point"},
    {"gnss_column", rfade_map_set_column, MAP(gnss_column), rfade_map_column_remedy},
    {"spread", set_spread, MAP(time_spread), "yes or no"},
    {"backward", set_backward, MAP(backward_refused), "sort or refuse"},
};

const struct rfade_map_section rfade_map_time_section = {
    "time", sizeof time_keys / sizeof time_keys[0], time_keys};
