/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * A table for people: columns aligned, numbers to the right and rounded to what their
 * interval supports. Widths are found on the first rows and only grow, so that any number
 * of rows needs the memory of one page. Width is counted in characters, not bytes.
 *
 * To fit a screen, what is the same in every row stands once, above the table; and long
 * column names are broken at their underscores.
 */
#include <inttypes.h>
#include <stdlib.h>
#include <string.h>

#include "output/format.h"
#include "output/number.h"

enum { PAGE_ROWS = 2000, DEFAULT_PROBABILITY_DIGITS = 3 };

/* In a table wider than a usual screen, a name is broken so that its lines are no wider than
 * this, or than the column's cells. */
enum { SCREEN_WIDTH = 100, NARROW_NAME = 10 };

struct table {
    char **cells; /* PAGE_ROWS x column_count, owned */
    size_t rows;
    size_t *widths;
    bool *stands_above; /* the column's one value is written above the table */
    bool header_written;
};

/* Characters of valid UTF-8: bytes that don't continue one. */
static size_t width_of(const char *text)
{
    size_t width = 0;
    for (; *text; text++)
        width += ((unsigned char)*text & 0xC0) != 0x80;
    return width;
}

static void write_cell(FILE *stream, const char *text, size_t width, bool right, bool last)
{
    size_t used = width_of(text);
    int padding = used < width ? (int)(width - used) : 0;
    if (right)
        (void)fprintf(stream, "%*s%s", padding, "", text);
    else if (last)
        (void)fputs(text, stream);
    else
        (void)fprintf(stream, "%s%*s", text, padding, "");
}

/* Where the line of a name ends that begins at `start`: behind the last underscore that fits
 * into the width, or behind the first one, or at the name's end. */
static size_t name_line_end(const char *name, size_t start, size_t width)
{
    size_t end = start;
    for (size_t i = start; name[i]; i++)
        if (name[i] == '_' && (end == start || i + 1 - start <= width))
            end = i + 1;
    bool rest_fits = strlen(name + start) <= width;
    return end == start || rest_fits ? start + strlen(name + start) : end;
}

/* The name's line number `line`, cut out into `text`; empty past the last. */
static void name_line(const char *name, size_t width, size_t line, char *text, size_t size)
{
    size_t start = 0, end = name_line_end(name, 0, width);
    for (; line > 0 && name[start]; line--) {
        start = end;
        end = name_line_end(name, start, width);
    }
    (void)snprintf(text, size, "%.*s", (int)(end - start), name + start);
}

static size_t name_lines(const char *name, size_t width)
{
    size_t count = 1;
    for (size_t end = name_line_end(name, 0, width); name[end]; count++)
        end = name_line_end(name, end, width);
    return count;
}

/* Widest line of a broken name. */
static size_t name_width(const char *name, size_t width)
{
    size_t widest = 0;
    for (size_t line = 0; line < name_lines(name, width); line++) {
        char text[64];
        name_line(name, width, line, text, sizeof text);
        widest = width_of(text) > widest ? width_of(text) : widest;
    }
    return widest;
}

static bool same_in_all_rows(const struct rfade_rows *rows, size_t column)
{
    const struct table *table = rows->state;
    for (size_t r = 1; r < table->rows; r++)
        if (strcmp(table->cells[r * rows->column_count + column], table->cells[column]) != 0)
            return false;
    return true;
}

/* Text that all rows share; only where all rows are at hand, and columns are left over. */
static void write_shared(struct rfade_rows *rows)
{
    struct table *table = rows->state;
    bool any = false;
    if (table->rows < 2 || table->rows == PAGE_ROWS)
        return;
    for (size_t i = 0; i < rows->column_count; i++) {
        table->stands_above[i] = rows->columns[i].shared_above && same_in_all_rows(rows, i);
        /* What is missing in every row need not be named. */
        if (!table->stands_above[i] || strcmp(table->cells[i], "-") == 0)
            continue;
        (void)fprintf(rows->stream, "%s%s %s", any ? ", " : "", rows->columns[i].name,
                      table->cells[i]);
        any = true;
    }
    if (any)
        (void)fputc('\n', rows->stream);
}

static void write_line(const struct rfade_rows *rows, char *const *cells,
                       size_t name_line_number)
{
    const struct table *table = rows->state;
    bool first = true;
    for (size_t i = 0; i < rows->column_count; i++) {
        char name[64];
        if (table->stands_above[i])
            continue;
        name_line(rows->columns[i].name, table->widths[i], name_line_number, name, sizeof name);
        if (!first)
            (void)fputs("  ", rows->stream);
        first = false;
        write_cell(rows->stream, cells ? cells[i] : name, table->widths[i],
                   rows->columns[i].kind != RFADE_COLUMN_TEXT, i + 1 == rows->column_count);
    }
    (void)fputc('\n', rows->stream);
}

/* How wide a line of a column's name may be, for the table to fit the screen. */
static size_t name_limit(const struct rfade_rows *rows)
{
    const struct table *table = rows->state;
    size_t total = 0;
    for (size_t i = 0; i < rows->column_count; i++) {
        size_t name = width_of(rows->columns[i].name);
        if (!table->stands_above[i])
            total += 2 + (name > table->widths[i] ? name : table->widths[i]);
    }
    return total > SCREEN_WIDTH ? NARROW_NAME : SCREEN_WIDTH;
}

static void write_header(struct rfade_rows *rows)
{
    struct table *table = rows->state;
    size_t lines = 1;
    write_shared(rows);
    size_t limit = name_limit(rows);
    for (size_t i = 0; i < rows->column_count; i++) {
        const char *name = rows->columns[i].name;
        size_t widest = table->widths[i] > limit ? table->widths[i] : limit;
        size_t needed = name_width(name, widest);
        table->widths[i] = needed > table->widths[i] ? needed : table->widths[i];
        size_t count = name_lines(name, table->widths[i]);
        if (!table->stands_above[i] && count > lines)
            lines = count;
    }
    for (size_t line = 0; line < lines; line++)
        write_line(rows, NULL, line);
    table->header_written = true;
}

static void write_page(struct rfade_rows *rows)
{
    struct table *table = rows->state;
    if (!table->header_written)
        write_header(rows);
    for (size_t r = 0; r < table->rows; r++) {
        char **cells = table->cells + r * rows->column_count;
        write_line(rows, cells, 0);
        for (size_t i = 0; i < rows->column_count; i++) {
            free(cells[i]);
            cells[i] = NULL;
        }
    }
    table->rows = 0;
}

/* The column whose interval governs this one's rounding; itself if none does. */
static size_t governing_column(const struct rfade_rows *rows, size_t column)
{
    for (size_t back = 0; back <= 2 && back <= column; back++)
        if (rows->columns[column - back].interval_follows)
            return column - back;
    return column;
}

/* A limit is no end of an interval that could be rounded by. */
static double number_at(const struct rfade_rows *rows, size_t column)
{
    const struct rfade_value *value = &rows->values[column];
    if (value->type == RFADE_VALUE_LIMIT)
        return INFINITY;
    return value->type == RFADE_VALUE_NUMBER ? value->number : NAN;
}

/* Decimal place of the last digit shown of a number. */
static int place_of(const struct rfade_rows *rows, size_t column)
{
    size_t governing = governing_column(rows, column);
    const struct rfade_column *description = &rows->columns[governing];
    double value = number_at(rows, governing);
    int fallback = -description->decimals;
    if (description->kind == RFADE_COLUMN_PROBABILITY) {
        int digits = description->decimals ? description->decimals : DEFAULT_PROBABILITY_DIGITS;
        fallback = (value > 0 && value <= 1 ? (int)floor(log10(value)) : 0) - digits + 1;
    }
    if (!description->interval_follows || governing + 2 >= rows->column_count)
        return fallback;
    double low = number_at(rows, governing + 1), high = number_at(rows, governing + 2);
    int place = rfade_number_place(value, low, high, fallback);
    /* A wide interval must not round an end to nothing; nor the estimate, unless it is the
     * interval that says that it may be nothing. */
    bool whole = column == governing && low < 0 && high > 0;
    return whole ? place : rfade_number_second_digit(number_at(rows, column), place);
}

static char *cell_text(const struct rfade_rows *rows, size_t column)
{
    const struct rfade_value *value = &rows->values[column];
    char number[RFADE_NUMBER_SIZE] = "-";
    switch (value->type) {
    case RFADE_VALUE_TEXT:
        return strdup(value->text);
    case RFADE_VALUE_INTEGER:
        (void)snprintf(number, sizeof number, "%" PRId64, value->integer);
        break;
    case RFADE_VALUE_NUMBER:
        if (rows->columns[column].kind == RFADE_COLUMN_PROBABILITY)
            rfade_probability_rounded(value->number, place_of(rows, column), number);
        else
            rfade_number_rounded(value->number, place_of(rows, column), number);
        break;
    case RFADE_VALUE_LIMIT:
        rfade_number_limit(value->number, number);
        break;
    case RFADE_VALUE_MISSING:
        break;
    }
    return strdup(number);
}

static enum rfade_status begin(struct rfade_rows *rows)
{
    struct table *table = calloc(1, sizeof *table);
    rows->state = table;
    if (!table)
        return RFADE_NO_MEMORY;
    table->cells = calloc(PAGE_ROWS * (rows->column_count + 1), sizeof *table->cells);
    table->widths = calloc(rows->column_count + 1, sizeof *table->widths);
    table->stands_above = calloc(rows->column_count + 1, sizeof *table->stands_above);
    bool enough = table->cells && table->widths && table->stands_above;
    return enough ? RFADE_OK : RFADE_NO_MEMORY;
}

static enum rfade_status row(struct rfade_rows *rows)
{
    struct table *table = rows->state;
    char **cells = table->cells + table->rows * rows->column_count;
    for (size_t i = 0; i < rows->column_count; i++) {
        free(cells[i]);
        cells[i] = cell_text(rows, i);
        if (!cells[i])
            return RFADE_NO_MEMORY;
        size_t width = width_of(cells[i]);
        if (width > table->widths[i])
            table->widths[i] = width;
    }
    table->rows++;
    if (table->rows == PAGE_ROWS)
        write_page(rows);
    return RFADE_OK;
}

static enum rfade_status end(struct rfade_rows *rows)
{
    write_page(rows);
    return RFADE_OK;
}

static void destroy(struct rfade_rows *rows)
{
    struct table *table = rows->state;
    if (!table)
        return;
    if (table->cells)
        for (size_t i = 0; i < PAGE_ROWS * rows->column_count; i++)
            free(table->cells[i]);
    free(table->cells);
    free(table->widths);
    free(table->stands_above);
    free(table);
    rows->state = NULL;
}

const struct rfade_rows_format rfade_rows_table = {"table", begin, row, end, destroy};
