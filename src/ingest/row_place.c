/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/row_place.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "ingest/number.h"
#include "ingest/position.h"
#include "ingest/quantity.h"

struct rfade_place_reader {
    const struct rfade_column_map *map;
    const struct rfade_row_values *values;
    struct rfade_position_converter *converter;
    bool has_place; /* a place was read, from these texts: rows repeat positions */
    struct rfade_field first;
    struct rfade_field second;
    double latitude_deg;
    double longitude_deg;
};

enum rfade_status rfade_place_reader_create(const struct rfade_column_map *map,
                                            const struct rfade_row_values *values,
                                            struct rfade_place_reader **reader,
                                            struct rfade_error *error)
{
    *reader = calloc(1, sizeof **reader);
    if (!*reader)
        return rfade_error_no_memory(error);
    (*reader)->map = map;
    (*reader)->values = values;
    enum rfade_status status =
        rfade_position_converter_create(&map->position, &(*reader)->converter, error);
    if (status != RFADE_OK) {
        free(*reader);
        *reader = NULL;
    }
    return status;
}

void rfade_place_reader_destroy(struct rfade_place_reader *reader)
{
    if (reader)
        rfade_position_converter_destroy(reader->converter);
    free(reader);
}

/* Both coordinates; false if there are none, refused or not. */
static bool read_coordinates(const struct rfade_place_reader *reader, struct rfade_row *row,
                             double *first, double *second)
{
    char decimal_sign = reader->map->file.decimal_sign;
    const struct rfade_position_map *map = &reader->map->position;
    double *values[2] = {first, second};
    for (size_t i = 0; i < 2; i++) {
        const struct rfade_field *value = rfade_row_value(reader->values, RFADE_ROLE_FIRST + i);
        struct rfade_decimal decimal;
        enum rfade_number_kind kind =
            rfade_number_read(&map->no_fix, decimal_sign, value->text, value->size, &decimal);
        if (kind == RFADE_NO_NUMBER)
            return rfade_row_refuse_value(row, "coordinate", value,
                                          "is not a number; position not used");
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
static bool is_same_place(const struct rfade_place_reader *reader)
{
    const struct rfade_field *first = rfade_row_value(reader->values, RFADE_ROLE_FIRST);
    const struct rfade_field *second = rfade_row_value(reader->values, RFADE_ROLE_SECOND);
    return reader->has_place && first->size == reader->first.size &&
           second->size == reader->second.size &&
           memcmp(first->text, reader->first.text, first->size) == 0 &&
           memcmp(second->text, reader->second.text, second->size) == 0;
}

static void remember_place(struct rfade_place_reader *reader, const struct rfade_row *row)
{
    reader->has_place = row->has_place;
    reader->first = *rfade_row_value(reader->values, RFADE_ROLE_FIRST);
    reader->second = *rfade_row_value(reader->values, RFADE_ROLE_SECOND);
    reader->latitude_deg = row->latitude_deg;
    reader->longitude_deg = row->longitude_deg;
}

static void read_place(struct rfade_place_reader *reader, struct rfade_row *row)
{
    enum rfade_position_form form = reader->map->position.form;
    double first = 0;
    double second = 0;
    if (form == RFADE_POSITION_NONE)
        return;
    if (is_same_place(reader)) {
        row->has_place = true;
        row->latitude_deg = reader->latitude_deg;
        row->longitude_deg = reader->longitude_deg;
        return;
    }
    if (form != RFADE_POSITION_FIXED && !read_coordinates(reader, row, &first, &second))
        return;
    const char *reason = rfade_position_convert(reader->converter, first, second,
                                                &row->latitude_deg, &row->longitude_deg);
    row->has_place = !reason;
    if (reason)
        (void)rfade_row_refuse(row, "the position %.20s, %.20s %s; not used",
                               rfade_row_value(reader->values, RFADE_ROLE_FIRST)->text,
                               rfade_row_value(reader->values, RFADE_ROLE_SECOND)->text,
                               reason);
    remember_place(reader, row);
}

static void read_speed(struct rfade_place_reader *reader, struct rfade_row *row)
{
    static const struct rfade_sentinels none;
    const struct rfade_field *value = rfade_row_value(reader->values, RFADE_ROLE_SPEED);
    struct rfade_decimal decimal;
    enum rfade_number_kind kind = rfade_number_read(&none, reader->map->file.decimal_sign,
                                                    value->text, value->size, &decimal);
    if (kind == RFADE_NOTHING)
        return;
    if (kind == RFADE_NUMBER)
        row->speed_m_s = rfade_decimal_double(&decimal) * reader->map->speed_m_s_per_unit;
    if (row->speed_m_s >= 0 && row->speed_m_s <= RFADE_MOST_SPEED_M_S)
        return;
    row->speed_m_s = NAN;
    (void)rfade_row_refuse_value(row, "speed", value, "can't be right; not used");
}

void rfade_place_read(struct rfade_place_reader *reader, struct rfade_row *row)
{
    read_place(reader, row);
    if (row->has_place)
        read_speed(reader, row);
}
