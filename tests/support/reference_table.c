/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "support/reference_table.h"

/* cmocka.h wants these before it */
#include <setjmp.h>
#include <stdarg.h>
#include <stdint.h>

#include <cmocka.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

/* Cuts a line at its tabs, keeping empty fields. */
static size_t split(char *line, char **fields)
{
    size_t count = 0;
    line[strcspn(line, "\r\n")] = '\0';
    for (char *field = line; field != NULL;) {
        assert_true(count < REFERENCE_COLUMNS_MAX);
        fields[count++] = field;
        field = strchr(field, '\t');
        if (field != NULL) {
            *field++ = '\0';
        }
    }
    return count;
}

/* The next line that is no comment; false at the end. */
static bool read_line(struct reference_table *table, char *line)
{
    while (fgets(line, REFERENCE_LINE_MAX, table->file) != NULL) {
        table->line++;
        if (strchr(line, '\n') == NULL) {
            fail_msg("%s:%zu: line too long", table->file_name, table->line);
        }
        if (line[0] != '#') {
            return true;
        }
    }
    return false;
}

void reference_open(struct reference_table *table, const char *file_name)
{
    char path[1024];
    memset(table, 0, sizeof *table);
    table->file_name = file_name;
    (void)snprintf(path, sizeof path, "%s/%s", ROUTEFADE_REFERENCE_DIR, file_name);
    table->file = fopen(path, "r");
    if (table->file == NULL) {
        fail_msg("%s: can't be opened", path);
    }
    assert_true(read_line(table, table->header));
    table->column_count = split(table->header, table->columns);
}

bool reference_next(struct reference_table *table)
{
    if (!read_line(table, table->row)) {
        (void)fclose(table->file);
        table->file = NULL;
        return false;
    }
    if (split(table->row, table->fields) != table->column_count) {
        fail_msg("%s:%zu: not as many fields as columns", table->file_name, table->line);
    }
    table->row_count++;
    return true;
}

const char *reference_text(const struct reference_table *table, const char *column)
{
    for (size_t i = 0; i < table->column_count; i++) {
        if (strcmp(table->columns[i], column) == 0) {
            return table->fields[i];
        }
    }
    fail_msg("%s: no column %s", table->file_name, column);
    return "";
}

double reference_number(const struct reference_table *table, const char *column)
{
    const char *text = reference_text(table, column);
    if (strcmp(text, "-") == 0) {
        return NAN;
    }
    char *end = NULL;
    const double value = strtod(text, &end);
    if (end == text || *end != '\0') {
        fail_msg("%s:%zu: %s is no number", table->file_name, table->line, text);
    }
    return value;
}

void reference_assert_close(const struct reference_table *table, const char *what,
                            double actual, double expected, double relative)
{
    const bool close =
        actual == expected || fabs(actual - expected) <= relative * fabs(expected);
    if (!close) {
        fail_msg("%s:%zu: %s is %.17g, not %.17g (%.2g relative)", table->file_name,
                 table->line, what, actual, expected, fabs(actual / expected - 1.0));
    }
}

void reference_assert_column(const struct reference_table *table, const char *column,
                             double actual, double relative)
{
    const double expected = reference_number(table, column);
    const double range_end = 1e-300;
    if (fabs(expected) >= range_end) {
        reference_assert_close(table, column, actual, expected, relative);
    } else if (!(fabs(actual) <= 1.001 * range_end)) {
        fail_msg("%s:%zu: %s is %.17g, not %s", table->file_name, table->line, column, actual,
                 reference_text(table, column));
    }
}
