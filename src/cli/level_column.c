/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/level_column.h"

#include <csv.h>
#include <ctype.h>
#include <errno.h>
#include <math.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "common/text.h"

enum { FIELD_SIZE = 256, NO_COLUMN = 0 };

/* Levels that no receiver reports: beyond them the unit is wrong. */
static const double lowest_level_dbm = -400;
static const double highest_level_dbm = 400;

struct reader {
    const char *name; /* of the file, for errors */
    const char *column;
    enum rfade_level_unit unit;
    struct csv_parser parser;
    bool parser_ready;
    size_t line;           /* being read, from 1 */
    size_t wanted;         /* column number from 1; NO_COLUMN until the header has told */
    bool first_row_seen;   /* the header or the first data row is past */
    size_t field;          /* columns of the row seen so far */
    bool named;            /* the row holds the name of the wanted column */
    bool found;            /* the row has the wanted column */
    bool whole;            /* and it fits `text` */
    bool row_ended;        /* the line ended its row */
    char text[FIELD_SIZE]; /* the wanted column */
    double *levels_dbm;
    size_t count, capacity;
    enum rfade_status status;
    struct rfade_error *error;
};

static void refuse(struct reader *reader, enum rfade_status status, const char *remedy,
                   const char *what, const char *value)
{
    if (reader->status != RFADE_OK)
        return;
    reader->status = status;
    (void)rfade_error_set(reader->error, status, remedy, "%s%s%s%s", what, value ? " '" : "",
                          value ? value : "", value ? "'" : "");
    rfade_error_at(reader->error, reader->name, reader->line);
}

static void take_field(void *bytes, size_t size, void *context)
{
    struct reader *reader = context;
    const char *text = bytes;
    reader->field++;
    bool is_name = reader->column && !reader->first_row_seen && reader->wanted == NO_COLUMN &&
                   strlen(reader->column) == size && memcmp(reader->column, text, size) == 0;
    if (is_name && !reader->named) {
        reader->named = true;
        reader->wanted = reader->field;
        return;
    }
    if (reader->field != (reader->wanted ? reader->wanted : 1))
        return;
    reader->found = true;
    reader->whole = size < FIELD_SIZE && !memchr(text, '\0', size);
    size_t kept = size < FIELD_SIZE ? size : FIELD_SIZE - 1;
    memcpy(reader->text, text, kept);
    reader->text[kept] = '\0';
}

static bool to_dbm(enum rfade_level_unit unit, double value, double *level_dbm)
{
    switch (unit) {
    case RFADE_LEVEL_DBM:
        *level_dbm = value;
        break;
    case RFADE_LEVEL_MW:
        *level_dbm = 10 * log10(value);
        break;
    case RFADE_LEVEL_AMPLITUDE:
        *level_dbm = 20 * log10(value);
        break;
    }
    return *level_dbm >= lowest_level_dbm && *level_dbm <= highest_level_dbm;
}

static void keep_level(struct reader *reader, double level_dbm)
{
    if (reader->count == reader->capacity) {
        size_t capacity = reader->capacity ? reader->capacity * 2 : 4096;
        double *grown = realloc(reader->levels_dbm, capacity * sizeof *grown);
        if (!grown) {
            refuse(reader, RFADE_NO_MEMORY, NULL, "out of memory", NULL);
            return;
        }
        reader->levels_dbm = grown;
        reader->capacity = capacity;
    }
    reader->levels_dbm[reader->count++] = level_dbm;
}

/* A header's name begins with a letter; words that stand for a missing level are none. */
static bool looks_like_name(const char *text)
{
    static const char *const missing[] = {"nan", "inf", "na", "n/a", "null", "none"};
    for (size_t i = 0; i < sizeof missing / sizeof missing[0]; i++)
        if (strcasecmp(text, missing[i]) == 0)
            return false;
    return isalpha((unsigned char)text[0]) || (unsigned char)text[0] >= 0x80;
}

/* The first row may be a header. */
static bool is_header(struct reader *reader)
{
    if (reader->named)
        return true;
    if (reader->wanted == NO_COLUMN && reader->column) {
        refuse(reader, RFADE_INPUT, "give --column one of the header's names, or a number",
               "the header has no column", reader->column);
        return true;
    }
    return reader->found && looks_like_name(reader->text);
}

static void take_level(struct reader *reader)
{
    double value, level_dbm = NAN;
    if (!reader->column && reader->field > 1)
        refuse(reader, RFADE_INPUT, "name the level's column with --column",
               "the file has several columns", NULL);
    else if (!reader->found)
        refuse(reader, RFADE_INPUT, "mend or remove the line", "the line has no such column",
               reader->column);
    else if (!reader->whole || !rfade_text_to_double(reader->text, &value))
        refuse(reader, RFADE_INPUT, "mend or remove the line", "not a number:", reader->text);
    else if (!to_dbm(reader->unit, value, &level_dbm))
        refuse(reader, RFADE_INPUT, "check --unit; powers and amplitudes are above 0",
               "no level of a receiver:", reader->text);
    else
        keep_level(reader, level_dbm);
}

static void take_row(int terminator, void *context)
{
    struct reader *reader = context;
    (void)terminator;
    bool header = !reader->first_row_seen && is_header(reader);
    reader->first_row_seen = true;
    if (!header && reader->status == RFADE_OK)
        take_level(reader);
    reader->row_ended = true;
    reader->field = 0;
    reader->found = reader->named = false;
}

static bool start_parser(struct reader *reader, const char *line, size_t size)
{
    if (csv_init(&reader->parser, CSV_APPEND_NULL) != 0)
        return false;
    reader->parser_ready = true;
    unsigned char separator = CSV_COMMA;
    if (memchr(line, '\t', size))
        separator = CSV_TAB;
    else if (memchr(line, ';', size))
        separator = ';';
    csv_set_delim(&reader->parser, separator);
    return true;
}

/* The first line of some spreadsheets' files: sep= and the separator, quoted or not. */
static bool is_separator_line(const char *line, size_t size)
{
    while (size > 0 && (line[size - 1] == '\n' || line[size - 1] == '\r'))
        size--;
    if (size >= 2 && line[0] == '"' && line[size - 1] == '"') {
        line++;
        size -= 2;
    }
    return size == 5 && strncasecmp(line, "sep=", 4) == 0;
}

static bool is_data(const char *line, size_t size)
{
    size_t at = 0;
    while (at < size && (line[at] == ' ' || line[at] == '\t' || line[at] == '\r'))
        at++;
    return at < size && line[at] != '\n' && line[0] != '#';
}

static void take_line(struct reader *reader, const char *line, size_t size)
{
    static const char byte_order_mark[] = "\xEF\xBB\xBF";
    reader->line++;
    if (reader->line == 1 && size >= 3 && memcmp(line, byte_order_mark, 3) == 0) {
        line += 3;
        size -= 3;
    }
    if (!is_data(line, size) || (reader->line == 1 && is_separator_line(line, size)))
        return;
    if (!reader->parser_ready && !start_parser(reader, line, size)) {
        refuse(reader, RFADE_NO_MEMORY, NULL, "out of memory", NULL);
        return;
    }
    reader->row_ended = false;
    if (csv_parse(&reader->parser, line, size, take_field, take_row, reader) != size)
        refuse(reader, RFADE_NO_MEMORY, NULL, "out of memory", NULL);
    if (line[size - 1] == '\n' && !reader->row_ended)
        refuse(reader, RFADE_INPUT, "mend or remove the line", "a quote is not closed", NULL);
}

static void read_lines(struct reader *reader, FILE *file)
{
    char *line = NULL;
    size_t capacity = 0;
    ssize_t size;
    errno = 0;
    while (reader->status == RFADE_OK && (size = getline(&line, &capacity, file)) >= 0)
        take_line(reader, line, (size_t)size);
    if (reader->status == RFADE_OK && !feof(file))
        reader->status = rfade_error_system(reader->error, reader->name, errno,
                                            "name a readable text file", "can't read the file");
    if (reader->status == RFADE_OK && reader->parser_ready)
        (void)csv_fini(&reader->parser, take_field, take_row, reader);
    free(line);
    if (reader->status == RFADE_OK && reader->count == 0) {
        reader->status =
            rfade_error_set(reader->error, RFADE_NO_DATA,
                            "name a file with a level on each line", "no levels in the file");
        rfade_error_at(reader->error, reader->name, 0);
    }
}

/* A column given by number; NO_COLUMN if it is a name. */
static size_t column_number(const char *column)
{
    if (!column)
        return 1;
    if (strspn(column, "0123456789") != strlen(column) || strlen(column) > 6)
        return NO_COLUMN;
    return (size_t)strtoul(column, NULL, 10);
}

enum rfade_status rfade_level_column_read(const char *path, const char *column,
                                          enum rfade_level_unit unit, double **levels_dbm,
                                          size_t *count, struct rfade_error *error)
{
    bool standard_input = strcmp(path, "-") == 0;
    struct reader reader = {.name = standard_input ? "standard input" : path,
                            .column = column,
                            .unit = unit,
                            .wanted = column_number(column),
                            .error = error};
    *levels_dbm = NULL;
    *count = 0;
    FILE *file = standard_input ? stdin : fopen(path, "r");
    if (!file)
        return rfade_error_system(error, path, errno, "name a readable text file",
                                  "can't open the file");
    read_lines(&reader, file);
    if (!standard_input)
        (void)fclose(file);
    if (reader.parser_ready)
        csv_free(&reader.parser);
    if (reader.status != RFADE_OK) {
        free(reader.levels_dbm);
        return reader.status;
    }
    *levels_dbm = reader.levels_dbm;
    *count = reader.count;
    return RFADE_OK;
}
