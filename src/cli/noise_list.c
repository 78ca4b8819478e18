/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/noise_list.h"

#include <csv.h>
#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "common/text.h"

/* The columns that the header must name. */
enum column { ROUTE, CHANNEL, FROM_M, TO_M, NOISE_DBM, COLUMNS };
static const char *const column_names[COLUMNS] = {"route", "channel", "from_m", "to_m",
                                                  "noise_dbm"};

/* Columns of a file, at most; what lies further right can't be a wanted one. */
enum { PLACES = 64, NOWHERE = PLACES };

struct reader {
    const char *path;
    size_t line;
    bool header_seen;
    size_t place;                         /* of the field that comes next */
    size_t places[COLUMNS];               /* of the wanted columns, by the header */
    char fields[PLACES][RFADE_NAME_SIZE]; /* of the row */
    bool whole[PLACES];                   /* not cut */
    struct rfade_noise_line *lines;
    size_t count, capacity;
    enum rfade_status status;
    struct rfade_error *error;
};

static const char *const remedy =
    "the list is CSV with the columns route, channel, from_m, to_m and noise_dbm";

static void refuse(struct reader *reader, const char *what, const char *value)
{
    if (reader->status != RFADE_OK)
        return;
    reader->status =
        rfade_error_set(reader->error, RFADE_INPUT, remedy, "%s '%s'", what, value);
    rfade_error_at(reader->error, reader->path, reader->line);
}

static void take_field(void *bytes, size_t size, void *context)
{
    struct reader *reader = context;
    if (reader->place < PLACES) {
        char *field = reader->fields[reader->place];
        size_t kept = size < RFADE_NAME_SIZE ? size : RFADE_NAME_SIZE - 1;
        memcpy(field, bytes, kept);
        field[kept] = '\0';
        reader->whole[reader->place] = kept == size && !memchr(bytes, '\0', size);
    }
    reader->place++;
}

static void take_header(struct reader *reader)
{
    size_t places = reader->place < PLACES ? reader->place : PLACES;
    reader->header_seen = true;
    for (int column = 0; column < COLUMNS; column++) {
        reader->places[column] = NOWHERE;
        for (size_t i = places; i-- > 0;)
            if (strcmp(reader->fields[i], column_names[column]) == 0)
                reader->places[column] = i;
        if (reader->places[column] == NOWHERE)
            refuse(reader, "the header has no column", column_names[column]);
    }
}

/* The text of a wanted column; "" after a refusal. */
static const char *text_of(struct reader *reader, enum column column)
{
    size_t place = reader->places[column];
    if (place >= reader->place || !reader->whole[place]) {
        refuse(reader, "the line has no usable", column_names[column]);
        return "";
    }
    return reader->fields[place];
}

static double number_of(struct reader *reader, enum column column)
{
    const char *text = text_of(reader, column);
    double value = 0.0;
    if (!rfade_text_to_double(text, &value))
        refuse(reader, "not a number:", text);
    return value;
}

static bool grow(struct reader *reader)
{
    if (reader->count < reader->capacity)
        return true;
    size_t capacity = reader->capacity ? 2 * reader->capacity : 64;
    struct rfade_noise_line *grown = realloc(reader->lines, capacity * sizeof *grown);
    if (!grown) {
        reader->status = rfade_error_no_memory(reader->error);
        return false;
    }
    reader->lines = grown;
    reader->capacity = capacity;
    return true;
}

static void take_values(struct reader *reader)
{
    if (!grow(reader))
        return;
    struct rfade_noise_line *line = &reader->lines[reader->count];
    line->number = reader->line;
    (void)snprintf(line->noise.route, RFADE_NAME_SIZE, "%s", text_of(reader, ROUTE));
    (void)snprintf(line->noise.channel, RFADE_NAME_SIZE, "%s", text_of(reader, CHANNEL));
    line->noise.from_m = number_of(reader, FROM_M);
    line->noise.to_m = number_of(reader, TO_M);
    line->noise.noise_dbm = number_of(reader, NOISE_DBM);
    reader->count++;
}

static void take_row(int terminator, void *context)
{
    struct reader *reader = context;
    (void)terminator;
    if (reader->status == RFADE_OK && !reader->header_seen)
        take_header(reader);
    else if (reader->status == RFADE_OK)
        take_values(reader);
    reader->place = 0;
}

/* libcsv doesn't count lines: it is fed one at a time. */
static void parse(struct reader *reader, struct csv_parser *parser, FILE *file)
{
    char *line = NULL;
    size_t capacity = 0;
    ssize_t size;
    errno = 0;
    while (reader->status == RFADE_OK && (size = getline(&line, &capacity, file)) >= 0) {
        reader->line++;
        if (line[0] != '#' &&
            csv_parse(parser, line, (size_t)size, take_field, take_row, reader) != (size_t)size)
            reader->status = rfade_error_no_memory(reader->error);
    }
    if (reader->status == RFADE_OK && !feof(file))
        reader->status = rfade_error_system(reader->error, reader->path, errno,
                                            "name a readable text file", "can't read the file");
    if (reader->status == RFADE_OK)
        (void)csv_fini(parser, take_field, take_row, reader);
    if (reader->status == RFADE_OK && reader->count == 0) {
        reader->status =
            rfade_error_set(reader->error, RFADE_NO_DATA, remedy, "the file lists no noise");
        rfade_error_at(reader->error, reader->path, 0);
    }
    free(line);
}

enum rfade_status rfade_noise_list_read(const char *path, struct rfade_noise_line **lines,
                                        size_t *count, struct rfade_error *error)
{
    struct reader *reader = calloc(1, sizeof *reader);
    struct csv_parser parser;
    *lines = NULL;
    *count = 0;
    if (!reader || csv_init(&parser, CSV_APPEND_NULL) != 0) {
        free(reader);
        return rfade_error_no_memory(error);
    }
    reader->path = path;
    reader->error = error;
    FILE *file = fopen(path, "r");
    if (!file)
        reader->status = rfade_error_system(error, path, errno, "name a readable text file",
                                            "can't open the file");
    else
        parse(reader, &parser, file);
    if (file)
        (void)fclose(file);
    csv_free(&parser);
    enum rfade_status status = reader->status;
    if (status == RFADE_OK) {
        *lines = reader->lines;
        *count = reader->count;
    } else {
        free(reader->lines);
    }
    free(reader);
    return status;
}
