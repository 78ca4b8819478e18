/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Comma-separated rows after RFC 4180: CRLF ends a line, a field with a comma or a double
 * quote stands in double quotes. Numbers read back to the same double; a missing value is an
 * empty field.
 *
 * A text that begins like a spreadsheet formula (= + - @) and is no number gets an
 * apostrophe in front, by which spreadsheets know text: a name out of a log must not be
 * computed. JSON has no such reader and keeps the name as it is.
 */
#include <csv.h>
#include <inttypes.h>
#include <stdlib.h>
#include <string.h>

#include "common/text.h"
#include "output/format.h"
#include "output/number.h"

static bool looks_like_formula(const char *text)
{
    double number;
    return text[0] != '\0' && strchr("=+-@", text[0]) && !rfade_text_to_double(text, &number);
}

static enum rfade_status write_plain_text(FILE *stream, const char *text)
{
    if (strpbrk(text, ",\"\r\n"))
        return csv_fwrite(stream, text, strlen(text)) == 0 ? RFADE_OK : RFADE_STORAGE;
    (void)fputs(text, stream);
    return RFADE_OK;
}

static enum rfade_status write_text(FILE *stream, const char *text)
{
    if (!looks_like_formula(text))
        return write_plain_text(stream, text);
    size_t size = strlen(text) + 2;
    char *guarded = malloc(size);
    if (!guarded)
        return RFADE_NO_MEMORY;
    (void)snprintf(guarded, size, "'%s", text);
    enum rfade_status status = write_plain_text(stream, guarded);
    free(guarded);
    return status;
}

static enum rfade_status write_value(FILE *stream, const struct rfade_value *value)
{
    char number[RFADE_NUMBER_SIZE];
    switch (value->type) {
    case RFADE_VALUE_MISSING:
        return RFADE_OK;
    case RFADE_VALUE_TEXT:
        return write_text(stream, value->text);
    case RFADE_VALUE_INTEGER:
        (void)fprintf(stream, "%" PRId64, value->integer);
        return RFADE_OK;
    case RFADE_VALUE_NUMBER:
    case RFADE_VALUE_LIMIT:
        rfade_number_exact(value->number, number);
        (void)fputs(number, stream);
        return RFADE_OK;
    }
    return RFADE_DOMAIN;
}

static enum rfade_status begin(struct rfade_rows *rows)
{
    for (size_t i = 0; i < rows->column_count; i++)
        (void)fprintf(rows->stream, "%s%s", i ? "," : "", rows->columns[i].name);
    (void)fputs("\r\n", rows->stream);
    return RFADE_OK;
}

static enum rfade_status row(struct rfade_rows *rows)
{
    for (size_t i = 0; i < rows->column_count; i++) {
        if (i)
            (void)fputc(',', rows->stream);
        enum rfade_status status = write_value(rows->stream, &rows->values[i]);
        if (status != RFADE_OK)
            return status;
    }
    (void)fputs("\r\n", rows->stream);
    return RFADE_OK;
}

static enum rfade_status end(struct rfade_rows *rows)
{
    (void)rows;
    return RFADE_OK;
}

const struct rfade_rows_format rfade_rows_csv = {"csv", begin, row, end, NULL};
