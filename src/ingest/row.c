/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/row.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "common/text.h"
#include "ingest/fields.h"
#include "ingest/names.h"
#include "ingest/number.h"
#include "ingest/position.h"
#include "ingest/quantity.h"
#include "ingest/time.h"

/* Faster than any vehicle that one would send round for this: 1000 km/h. */
static const double most_speed_m_s = 1000.0 / 3.6;

struct rfade_row_maker {
    const struct rfade_column_map *map;
    const struct rfade_row_values *values;
    struct rfade_name_table *names;
    struct rfade_position_converter *converter;
    struct rfade_time_reader time_reader;
    const char *vehicle; /* NULL: in a column */
    const char *channel;
    const char *campaign;
    bool has_place; /* a place was read, from these texts: rows repeat positions */
    struct rfade_field first;
    struct rfade_field second;
    double latitude_deg;
    double longitude_deg;
};

void rfade_row_maker_destroy(struct rfade_row_maker *maker)
{
    if (!maker)
        return;
    rfade_name_table_destroy(maker->names);
    rfade_position_converter_destroy(maker->converter);
    free(maker);
}

/* What is given wins over the map's name; both over the column. NULL: by column. */
static const char *fixed_name(const char *given, const struct rfade_named *named,
                              const char *otherwise)
{
    if (given)
        return given;
    if (named->name[0])
        return named->name;
    return rfade_column_given(&named->column) ? NULL : otherwise;
}

enum rfade_status rfade_row_vehicle(const struct rfade_column_map *map,
                                    const struct rfade_ingest_names *names,
                                    const char **vehicle, struct rfade_error *error)
{
    *vehicle = fixed_name(names ? names->vehicle : NULL, &map->vehicle, "");
    if (!*vehicle || **vehicle)
        return RFADE_OK;
    return rfade_error_set(error, RFADE_INPUT,
                           "give --vehicle NAME, or a [vehicle] section in the column map",
                           "nothing says which vehicle the log is from");
}

static enum rfade_status settle_names(struct rfade_row_maker *maker,
                                      const struct rfade_ingest_names *names,
                                      struct rfade_error *error)
{
    static const struct rfade_ingest_names none;
    const struct rfade_column_map *map = maker->map;
    const struct rfade_ingest_names *given = names ? names : &none;
    enum rfade_status status = rfade_row_vehicle(map, given, &maker->vehicle, error);
    if (status != RFADE_OK)
        return status;
    bool one_named = map->level_count == 1 && map->levels[0].channel[0];
    if (given->channel && (map->level_count > 1 || one_named))
        return rfade_error_set(error, RFADE_INPUT, "leave out --channel",
                               "%s names the channels itself", map->name);
    maker->channel = fixed_name(given->channel, &map->channel, RFADE_DEFAULT_CHANNEL);
    maker->campaign = fixed_name(given->campaign, &map->campaign, RFADE_DEFAULT_CAMPAIGN);
    return RFADE_OK;
}

enum rfade_status rfade_row_maker_create(const struct rfade_column_map *map,
                                         const struct rfade_row_values *values,
                                         const struct rfade_ingest_names *names,
                                         struct rfade_row_maker **maker,
                                         struct rfade_error *error)
{
    *maker = NULL;
    struct rfade_row_maker *made = calloc(1, sizeof *made);
    if (!made)
        return rfade_error_no_memory(error);
    made->map = map;
    made->values = values;
    made->time_reader.format = &map->time;
    made->names = rfade_name_table_create();
    enum rfade_status status = RFADE_OK;
    if (!made->names)
        status = rfade_error_no_memory(error);
    if (status == RFADE_OK)
        status = settle_names(made, names, error);
    if (status == RFADE_OK)
        status = rfade_position_converter_create(&map->position, &made->converter, error);
    if (status != RFADE_OK) {
        rfade_row_maker_destroy(made);
        return status;
    }
    *maker = made;
    return RFADE_OK;
}

static const struct rfade_field *field(const struct rfade_row_maker *maker, size_t role)
{
    static const struct rfade_field absent;
    const struct rfade_field *value = maker->values->by_role[role];
    return value ? value : &absent;
}

bool rfade_row_refuse(struct rfade_row *row, const char *format, ...)
{
    size_t used = strlen(row->refused);
    if (used > 0 && used + 2 < sizeof row->refused) {
        memcpy(row->refused + used, "; ", 3);
        used += 2;
    }
    va_list arguments;
    va_start(arguments, format);
    /* NOLINTNEXTLINE(clang-analyzer-valist.Uninitialized): it is initialised a line above */
    (void)vsnprintf(row->refused + used, sizeof row->refused - used, format, arguments);
    va_end(arguments);
    rfade_text_printable(row->refused);
    return false;
}

static bool refuse_value(struct rfade_row *row, const char *what,
                         const struct rfade_field *value, const char *reason)
{
    return rfade_row_refuse(row, "the %s '%.40s' %s", what, value->text, reason);
}

/* Whole units of a subsecond column, in microseconds. */
static const char *read_subsecond(const struct rfade_row_maker *maker, int64_t *subsecond_us)
{
    const struct rfade_field *value = field(maker, RFADE_ROLE_SUBSECOND);
    struct rfade_decimal decimal;
    *subsecond_us = 0;
    if (!rfade_decimal_read(value->text, value->size, maker->map->file.decimal_sign, &decimal))
        return "has a fraction that is not a number";
    if (!rfade_decimal_scaled(&decimal, 6 - maker->map->subsecond_digits, subsecond_us) ||
        *subsecond_us < 0 || *subsecond_us > 1000000)
        return "has a fraction that is not within a second";
    return NULL;
}

/* Compared and put right: the clock's offset is added. */
static const char *settle_time(struct rfade_row_maker *maker, struct rfade_row *row)
{
    static const struct rfade_time_format automatic = {.decimal_sign = '.'};
    const struct rfade_field *gnss = field(maker, RFADE_ROLE_GNSS);
    struct rfade_time_reader reader = {.format = &automatic};
    row->has_gnss =
        gnss->size > 0 && !rfade_time_read(&reader, gnss->text, gnss->size, &row->gnss_us);
    row->time_us += maker->map->time_offset_us;
    bool valid = row->time_us >= RFADE_EARLIEST_US && row->time_us < RFADE_LATEST_US;
    return valid ? NULL : "lies out of range with the clock's offset";
}

static bool read_time(struct rfade_row_maker *maker, struct rfade_row *row)
{
    const struct rfade_field *value = field(maker, RFADE_ROLE_TIME);
    struct rfade_field joined;
    if (maker->values->by_role[RFADE_ROLE_DATE]) {
        const struct rfade_field *date = field(maker, RFADE_ROLE_DATE);
        joined.cut = date->size + value->size + 1 >= sizeof joined.text;
        joined.size = 0;
        if (!joined.cut) {
            memcpy(joined.text, date->text, date->size);
            joined.text[date->size] = ' ';
            memcpy(joined.text + date->size + 1, value->text, value->size + 1);
            joined.size = date->size + value->size + 1;
        }
        joined.text[joined.size] = '\0';
        value = &joined;
    }
    const char *reason = value->cut ? "is too long"
                                    : rfade_time_read(&maker->time_reader, value->text,
                                                      value->size, &row->time_us);
    if (!reason && maker->values->by_role[RFADE_ROLE_SUBSECOND]) {
        int64_t subsecond_us = 0;
        reason = read_subsecond(maker, &subsecond_us);
        row->time_us += subsecond_us;
    }
    if (!reason)
        reason = settle_time(maker, row);
    return !reason || refuse_value(row, "time", value, reason);
}

static bool read_name(struct rfade_row_maker *maker, struct rfade_row *row, const char *fixed,
                      size_t role, const char *what, const char **name)
{
    *name = fixed;
    if (fixed)
        return true;
    const struct rfade_field *value = field(maker, role);
    const char *reason = value->cut
                             ? "is too long for a name"
                             : rfade_name_keep(maker->names, value->text, value->size, name);
    return !reason || refuse_value(row, what, value, reason);
}

/* One level and its SNR; false if one of them can't be used. */
static bool read_level(const struct rfade_row_maker *maker, struct rfade_row *row, size_t index,
                       struct rfade_row_level *level)
{
    const struct rfade_level_map *map = &maker->map->levels[index];
    char decimal_sign = maker->map->file.decimal_sign;
    level->level_cdb = RFADE_NO_VALUE_CDB;
    level->snr_cdb = RFADE_NO_VALUE_CDB;
    const struct rfade_field *value = field(maker, RFADE_ROLE_LEVELS + 2 * index);
    const char *reason = rfade_quantity_read(&map->level, decimal_sign, value->text,
                                             value->size, &level->level_cdb);
    if (reason)
        return refuse_value(row, "level", value, reason);
    value = field(maker, RFADE_ROLE_LEVELS + 2 * index + 1);
    reason =
        rfade_quantity_read(&map->snr, decimal_sign, value->text, value->size, &level->snr_cdb);
    return !reason || refuse_value(row, "SNR", value, reason);
}

/* A number that can't be right is refused alone; the reading stays, without one. */
static void read_sequence(struct rfade_row_maker *maker, struct rfade_row *row)
{
    static const struct rfade_sentinels none;
    if (!maker->values->by_role[RFADE_ROLE_SEQUENCE])
        return;
    const struct rfade_field *value = field(maker, RFADE_ROLE_SEQUENCE);
    size_t modulus = maker->map->sequence_modulus;
    int64_t most = modulus > 0 ? (int64_t)modulus - 1 : RFADE_MOST_SEQUENCE;
    struct rfade_decimal decimal;
    enum rfade_number_kind kind = rfade_number_read(&none, maker->map->file.decimal_sign,
                                                    value->text, value->size, &decimal);
    if (kind == RFADE_NOTHING)
        return;
    row->numbered = kind == RFADE_NUMBER && rfade_decimal_scaled(&decimal, 0, &row->sequence) &&
                    row->sequence >= 0 && row->sequence <= most;
    if (!row->numbered)
        (void)refuse_value(row, "sequence number", value, "can't be right; not used");
}

/* All levels; false if some were refused and none is left. */
static bool read_levels(struct rfade_row_maker *maker, struct rfade_row *row,
                        const char *channel)
{
    size_t bad = 0;
    for (size_t i = 0; i < maker->map->level_count; i++) {
        struct rfade_row_level level = {0};
        const char *named = maker->map->levels[i].channel;
        level.channel = named[0] ? named : channel;
        bool good = read_level(maker, row, i, &level);
        bool none =
            level.level_cdb == RFADE_NO_VALUE_CDB && level.snr_cdb == RFADE_NO_VALUE_CDB;
        bad += !good;
        row->no_reading += good && none;
        if (!good || none) {
            row->valueless[row->valueless_count++] = level.channel;
            continue;
        }
        row->levels[row->level_count++] = level;
    }
    return bad == 0 || row->level_count > 0;
}

/* Both coordinates; false if there are none, refused or not. */
static bool read_coordinates(const struct rfade_row_maker *maker, struct rfade_row *row,
                             double *first, double *second)
{
    char decimal_sign = maker->map->file.decimal_sign;
    const struct rfade_position_map *map = &maker->map->position;
    double *values[2] = {first, second};
    for (size_t i = 0; i < 2; i++) {
        const struct rfade_field *value = field(maker, RFADE_ROLE_FIRST + i);
        struct rfade_decimal decimal;
        enum rfade_number_kind kind =
            rfade_number_read(&map->no_fix, decimal_sign, value->text, value->size, &decimal);
        if (kind == RFADE_NO_NUMBER)
            return refuse_value(row, "coordinate", value, "is not a number; position not used");
        if (kind == RFADE_NOTHING) {
            row->no_place = true;
            return false;
        }
        *values[i] = rfade_decimal_double(&decimal);
    }
    if (map->form == RFADE_POSITION_DEGREES && *first == 0 && *second == 0)
        row->no_place = true;
    return !row->no_place;
}

/* Whether the coordinates are to the letter those that were read last, and good. */
static bool is_same_place(const struct rfade_row_maker *maker)
{
    const struct rfade_field *first = field(maker, RFADE_ROLE_FIRST);
    const struct rfade_field *second = field(maker, RFADE_ROLE_SECOND);
    return maker->has_place && first->size == maker->first.size &&
           second->size == maker->second.size &&
           memcmp(first->text, maker->first.text, first->size) == 0 &&
           memcmp(second->text, maker->second.text, second->size) == 0;
}

static void remember_place(struct rfade_row_maker *maker, const struct rfade_row *row)
{
    maker->has_place = row->has_place;
    maker->first = *field(maker, RFADE_ROLE_FIRST);
    maker->second = *field(maker, RFADE_ROLE_SECOND);
    maker->latitude_deg = row->latitude_deg;
    maker->longitude_deg = row->longitude_deg;
}

static void read_place(struct rfade_row_maker *maker, struct rfade_row *row)
{
    enum rfade_position_form form = maker->map->position.form;
    double first = 0;
    double second = 0;
    if (form == RFADE_POSITION_NONE)
        return;
    if (is_same_place(maker)) {
        row->has_place = true;
        row->latitude_deg = maker->latitude_deg;
        row->longitude_deg = maker->longitude_deg;
        return;
    }
    if (form != RFADE_POSITION_FIXED && !read_coordinates(maker, row, &first, &second))
        return;
    const char *reason = rfade_position_convert(maker->converter, first, second,
                                                &row->latitude_deg, &row->longitude_deg);
    row->has_place = !reason;
    if (reason)
        (void)rfade_row_refuse(row, "the position %.20s, %.20s %s; not used",
                               field(maker, RFADE_ROLE_FIRST)->text,
                               field(maker, RFADE_ROLE_SECOND)->text, reason);
    remember_place(maker, row);
}

static void read_speed(struct rfade_row_maker *maker, struct rfade_row *row)
{
    static const struct rfade_sentinels none;
    const struct rfade_field *value = field(maker, RFADE_ROLE_SPEED);
    struct rfade_decimal decimal;
    enum rfade_number_kind kind = rfade_number_read(&none, maker->map->file.decimal_sign,
                                                    value->text, value->size, &decimal);
    if (kind == RFADE_NOTHING)
        return;
    if (kind == RFADE_NUMBER)
        row->speed_m_s = rfade_decimal_double(&decimal) * maker->map->speed_m_s_per_unit;
    if (row->speed_m_s >= 0 && row->speed_m_s <= most_speed_m_s)
        return;
    row->speed_m_s = NAN;
    (void)refuse_value(row, "speed", value, "can't be right; not used");
}

/* Whether a name is missing that nothing needs: there is no reading, number or position. */
static bool says_nothing(const struct rfade_row_maker *maker)
{
    static const size_t names[] = {RFADE_ROLE_VEHICLE, RFADE_ROLE_CHANNEL, RFADE_ROLE_CAMPAIGN};
    static const size_t others[] = {RFADE_ROLE_FIRST, RFADE_ROLE_SECOND, RFADE_ROLE_SEQUENCE};
    bool missing = false;
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++)
        missing =
            missing || (maker->values->by_role[names[i]] && field(maker, names[i])->size == 0);
    for (size_t i = 0; i < sizeof others / sizeof others[0]; i++)
        missing = missing && field(maker, others[i])->size == 0;
    for (size_t i = 0; missing && i < maker->map->level_count; i++) {
        struct rfade_row scratch;
        struct rfade_row_level level = {0};
        rfade_row_begin(&scratch);
        missing = read_level(maker, &scratch, i, &level) &&
                  level.level_cdb == RFADE_NO_VALUE_CDB && level.snr_cdb == RFADE_NO_VALUE_CDB;
    }
    return missing;
}

void rfade_row_begin(struct rfade_row *row)
{
    row->time_us = 0;
    row->has_gnss = false;
    row->has_place = false;
    row->no_place = false;
    row->speed_m_s = NAN;
    row->level_count = 0;
    row->no_reading = 0;
    row->numbered = false;
    row->sequence = 0;
    row->valueless_count = 0;
    row->refused[0] = '\0';
}

bool rfade_row_make(struct rfade_row_maker *maker, struct rfade_row *row)
{
    const char *channel = NULL;
    if (says_nothing(maker)) {
        row->no_reading = maker->map->level_count;
        return false;
    }
    if (!read_time(maker, row) ||
        !read_name(maker, row, maker->vehicle, RFADE_ROLE_VEHICLE, "vehicle", &row->vehicle) ||
        !read_name(maker, row, maker->channel, RFADE_ROLE_CHANNEL, "channel", &channel) ||
        !read_name(maker, row, maker->campaign, RFADE_ROLE_CAMPAIGN, "campaign",
                   &row->campaign))
        return false;
    read_sequence(maker, row);
    if (!read_levels(maker, row, channel))
        return false;
    read_place(maker, row);
    if (row->has_place)
        read_speed(maker, row);
    return true;
}
