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
#include "ingest/quantity.h"
#include "ingest/row_place.h"
#include "ingest/time.h"

struct rfade_row_maker {
    const struct rfade_column_map *map;
    const struct rfade_row_values *values;
    struct rfade_name_table *names;
    struct rfade_place_reader *places;
    struct rfade_time_reader time_reader;
    const char *vehicle; /* NULL: in a column */
    const char *channel;
    const char *campaign;
};

void rfade_row_maker_destroy(struct rfade_row_maker *maker)
{
    if (!maker)
        return;
    rfade_name_table_destroy(maker->names);
    rfade_place_reader_destroy(maker->places);
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
        status = rfade_place_reader_create(map, values, &made->places, error);
    if (status != RFADE_OK) {
        rfade_row_maker_destroy(made);
        return status;
    }
    *maker = made;
    return RFADE_OK;
}

const struct rfade_field *rfade_row_value(const struct rfade_row_values *values, size_t role)
{
    static const struct rfade_field absent;
    const struct rfade_field *value = values->by_role[role];
    return value ? value : &absent;
}

static const struct rfade_field *field(const struct rfade_row_maker *maker, size_t role)
{
    return rfade_row_value(maker->values, role);
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

bool rfade_row_refuse_value(struct rfade_row *row, const char *what,
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
    return !reason || rfade_row_refuse_value(row, "time", value, reason);
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
    return !reason || rfade_row_refuse_value(row, what, value, reason);
}

/* SNR from the noise that was read in its place; without a level noise tells nothing. */
static void take_noise(struct rfade_row_level *level)
{
    bool both = level->level_cdb != RFADE_NO_VALUE_CDB && level->snr_cdb != RFADE_NO_VALUE_CDB;
    level->snr_cdb = both ? level->level_cdb - level->snr_cdb : RFADE_NO_VALUE_CDB;
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
        return rfade_row_refuse_value(row, "level", value, reason);
    value = field(maker, RFADE_ROLE_LEVELS + 2 * index + 1);
    reason =
        rfade_quantity_read(&map->snr, decimal_sign, value->text, value->size, &level->snr_cdb);
    if (!reason && map->snr_is_noise)
        take_noise(level);
    return !reason ||
           rfade_row_refuse_value(row, map->snr_is_noise ? "noise" : "SNR", value, reason);
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
        (void)rfade_row_refuse_value(row, "sequence number", value, "can't be right; not used");
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
    rfade_place_read(maker->places, row);
    return true;
}
