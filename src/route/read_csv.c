/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <csv.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "common/text.h"
#include "route/read_line_text.h"

enum { FIELD_BYTES_MAX = 64, COLUMNS_MAX = 64 };

struct reading {
    struct rfade_place_list places;
    char decimal_sign;
    bool header_possible; /* no record was read yet */
    size_t latitude_column;
    size_t longitude_column;
    size_t column;                             /* of the record that is being read */
    char fields[COLUMNS_MAX][FIELD_BYTES_MAX]; /* cut; only the first columns are kept */
    enum rfade_status status;
    struct rfade_error *error;
};

static const char *const remedy = "give latitude,longitude in decimal degrees on each line";

static void take_field(void *bytes, size_t size, void *context)
{
    struct reading *reading = context;
    if (reading->column < COLUMNS_MAX) {
        char *field = reading->fields[reading->column];
        size_t kept = size < FIELD_BYTES_MAX ? size : FIELD_BYTES_MAX - 1;
        memcpy(field, bytes, kept);
        field[kept] = '\0';
        if (reading->decimal_sign != '.')
            for (char *sign = field; (sign = strchr(sign, reading->decimal_sign)) != NULL;)
                *sign = '.';
    }
    reading->column++;
}

static bool is_one_of(const char *text, const char *const *names)
{
    for (; *names; names++)
        if (strcasecmp(text, *names) == 0)
            return true;
    return false;
}

/* A header names both columns, or the first record holds places already. */
static bool take_header(struct reading *reading)
{
    static const char *const latitudes[] = {"lat", "latitude", "latitude_deg", NULL};
    static const char *const longitudes[] = {"lon", "lng", "longitude", "longitude_deg", NULL};
    size_t latitude = SIZE_MAX;
    size_t longitude = SIZE_MAX;
    for (size_t i = reading->column < COLUMNS_MAX ? reading->column : COLUMNS_MAX; i-- > 0;) {
        if (is_one_of(reading->fields[i], latitudes))
            latitude = i;
        if (is_one_of(reading->fields[i], longitudes))
            longitude = i;
    }
    if (latitude == SIZE_MAX || longitude == SIZE_MAX)
        return false;
    reading->latitude_column = latitude;
    reading->longitude_column = longitude;
    return true;
}

static void take_record(int end, void *context)
{
    struct reading *reading = context;
    (void)end;
    struct rfade_place place;
    size_t columns = reading->column < COLUMNS_MAX ? reading->column : COLUMNS_MAX;
    bool first = reading->header_possible;
    reading->header_possible = false;
    if (reading->status == RFADE_OK && !(first && take_header(reading))) {
        if (reading->latitude_column >= columns || reading->longitude_column >= columns)
            reading->status = rfade_error_set(reading->error, RFADE_INPUT, remedy,
                                              "the line has too few columns");
        else if (!rfade_text_to_double(reading->fields[reading->latitude_column],
                                       &place.latitude_deg) ||
                 !rfade_text_to_double(reading->fields[reading->longitude_column],
                                       &place.longitude_deg))
            reading->status =
                rfade_error_set(reading->error, RFADE_INPUT, remedy,
                                "'%s' and '%s' are not a latitude and a longitude",
                                reading->fields[reading->latitude_column],
                                reading->fields[reading->longitude_column]);
        else
            reading->status =
                rfade_place_list_add(&reading->places, &place, remedy, reading->error);
    }
    reading->column = 0;
}

static char find_separator(const char *text)
{
    size_t end = strcspn(text, "\r\n");
    while (text[0] == '#' || end == 0) { /* the first line with something in it */
        text += end + strspn(text + end, "\r\n");
        end = strcspn(text, "\r\n");
        if (*text == '\0')
            break;
    }
    for (const char *separator = ";\t"; *separator; separator++)
        if (memchr(text, *separator, end))
            return *separator;
    return ',';
}

/* libcsv doesn't count lines: it is fed one at a time. */
static void parse(struct csv_parser *parser, const char *name, const char *text, size_t size,
                  struct reading *reading)
{
    size_t number = 0;
    for (size_t at = 0; at < size && reading->status == RFADE_OK;) {
        const char *end = memchr(text + at, '\n', size - at);
        size_t length = end ? (size_t)(end - text) - at + 1 : size - at;
        number++;
        if (text[at] != '#' &&
            csv_parse(parser, text + at, length, take_field, take_record, reading) != length)
            reading->status = rfade_error_set(reading->error, RFADE_INPUT, remedy, "%s",
                                              csv_strerror(csv_error(parser)));
        at += length;
    }
    if (reading->status == RFADE_OK && csv_fini(parser, take_field, take_record, reading) != 0)
        reading->status = rfade_error_set(reading->error, RFADE_INPUT, remedy, "%s",
                                          csv_strerror(csv_error(parser)));
    if (reading->status != RFADE_OK)
        rfade_error_at(reading->error, name, number);
}

enum rfade_status rfade_line_from_csv(const char *name, const char *text, size_t size,
                                      struct rfade_place **places, size_t *count,
                                      struct rfade_error *error)
{
    struct reading *reading = calloc(1, sizeof *reading);
    struct csv_parser parser;
    if (!reading || csv_init(&parser, CSV_APPEND_NULL) != 0) {
        free(reading);
        return rfade_error_no_memory(error);
    }
    char separator = find_separator(text);
    csv_set_delim(&parser, (unsigned char)separator);
    reading->decimal_sign = separator == ',' ? '.' : ',';
    reading->header_possible = true;
    reading->longitude_column = 1;
    reading->error = error;
    parse(&parser, name, text, size, reading);
    csv_free(&parser);
    enum rfade_status status = reading->status;
    *places = reading->places.all;
    *count = reading->places.count;
    free(reading);
    return status;
}
