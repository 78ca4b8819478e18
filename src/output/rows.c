/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/rows.h"

#include <errno.h>
#include <stdlib.h>
#include <string.h>

#include "common/text.h"
#include "output/format.h"

static const struct rfade_rows_format *const formats[] = {
    &rfade_rows_table,
    &rfade_rows_csv,
    &rfade_rows_json,
};
enum { FORMAT_COUNT = sizeof formats / sizeof formats[0] };

const struct rfade_rows_format *rfade_rows_format(const char *name)
{
    for (size_t i = 0; i < FORMAT_COUNT; i++)
        if (strcmp(formats[i]->name, name) == 0)
            return formats[i];
    return NULL;
}

const char *rfade_rows_format_name(size_t index)
{
    return index < FORMAT_COUNT ? formats[index]->name : NULL;
}

static enum rfade_status write_failed(const char *stream_name, int reason,
                                      struct rfade_error *error)
{
    return rfade_error_system(error, stream_name ? stream_name : "standard output", reason,
                              "check that the disk has room and that nothing closed the output",
                              "can't write all of the output");
}

enum rfade_status rfade_stream_flush(FILE *stream, const char *stream_name,
                                     struct rfade_error *error)
{
    if (ferror(stream)) /* whoever wrote stopped there: errno is still that write's */
        return write_failed(stream_name, errno, error);
    errno = 0;
    if (fflush(stream) != 0)
        return write_failed(stream_name, errno, error);
    return RFADE_OK;
}

/* What a format's function returned, and whether its writing went through. */
static enum rfade_status finish_step(const struct rfade_rows *rows, enum rfade_status status,
                                     struct rfade_error *error)
{
    int reason = errno;
    if (ferror(rows->stream))
        return write_failed(rows->stream_name, reason, error);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, NULL, "can't write rows: %s",
                               rfade_status_text(status));
    return RFADE_OK;
}

static bool type_fits(enum rfade_value_type type, enum rfade_column_kind kind)
{
    switch (type) {
    case RFADE_VALUE_MISSING:
        return true;
    case RFADE_VALUE_TEXT:
        return kind == RFADE_COLUMN_TEXT;
    case RFADE_VALUE_INTEGER:
        return kind == RFADE_COLUMN_INTEGER;
    case RFADE_VALUE_NUMBER:
    case RFADE_VALUE_LIMIT:
        return kind == RFADE_COLUMN_NUMBER || kind == RFADE_COLUMN_PROBABILITY;
    }
    return false;
}

enum rfade_status rfade_rows_begin(const struct rfade_rows_format *format, FILE *stream,
                                   const char *stream_name, const struct rfade_column *columns,
                                   size_t column_count, struct rfade_rows **rows,
                                   struct rfade_error *error)
{
    *rows = NULL;
    struct rfade_rows *made = calloc(1, sizeof *made);
    if (!made)
        return rfade_error_no_memory(error);
    *made = (struct rfade_rows){.format = format,
                                .stream = stream,
                                .stream_name = stream_name,
                                .columns = columns,
                                .column_count = column_count};
    made->values = calloc(column_count ? column_count : 1, sizeof *made->values);
    made->texts = calloc(column_count ? column_count : 1, sizeof *made->texts);
    enum rfade_status status = RFADE_NO_MEMORY;
    errno = 0;
    if (made->values && made->texts)
        status = format->begin(made);
    status = finish_step(made, status, error);
    if (status != RFADE_OK) {
        rfade_rows_destroy(made);
        return status;
    }
    *rows = made;
    return RFADE_OK;
}

/* Copies one value; a text becomes a printable copy that the rows own. */
static enum rfade_status take_value(struct rfade_rows *rows, size_t column,
                                    const struct rfade_value *value, struct rfade_error *error)
{
    if (!type_fits(value->type, rows->columns[column].kind))
        return rfade_error_set(error, RFADE_DOMAIN, NULL,
                               "a value of column %s has the wrong type",
                               rows->columns[column].name);
    rows->values[column] = *value;
    free(rows->texts[column]);
    rows->texts[column] = NULL;
    if (value->type != RFADE_VALUE_TEXT)
        return RFADE_OK;
    rows->texts[column] = strdup(value->text);
    if (!rows->texts[column])
        return rfade_error_no_memory(error);
    rfade_text_printable(rows->texts[column]);
    rows->values[column].text = rows->texts[column];
    return RFADE_OK;
}

enum rfade_status rfade_rows_row(struct rfade_rows *rows, const struct rfade_value *values,
                                 struct rfade_error *error)
{
    for (size_t i = 0; i < rows->column_count; i++) {
        enum rfade_status status = take_value(rows, i, &values[i], error);
        if (status != RFADE_OK)
            return status;
    }
    errno = 0;
    enum rfade_status status = rows->format->row(rows);
    rows->row_count++;
    return finish_step(rows, status, error);
}

enum rfade_status rfade_rows_end(struct rfade_rows *rows, struct rfade_error *error)
{
    errno = 0;
    enum rfade_status status = finish_step(rows, rows->format->end(rows), error);
    if (status != RFADE_OK)
        return status;
    return rfade_stream_flush(rows->stream, rows->stream_name, error);
}

void rfade_rows_destroy(struct rfade_rows *rows)
{
    if (!rows)
        return;
    if (rows->format->destroy)
        rows->format->destroy(rows);
    if (rows->texts)
        for (size_t i = 0; i < rows->column_count; i++)
            free(rows->texts[i]);
    free(rows->texts);
    free(rows->values);
    free(rows);
}

enum rfade_status rfade_rows_single(const struct rfade_rows_format *format, FILE *stream,
                                    const struct rfade_column *columns, size_t column_count,
                                    const struct rfade_value *values, struct rfade_error *error)
{
    struct rfade_rows *rows = NULL;
    enum rfade_status status =
        rfade_rows_begin(format, stream, NULL, columns, column_count, &rows, error);
    if (!rows)
        return status;
    status = rfade_rows_row(rows, values, error);
    if (status == RFADE_OK)
        status = rfade_rows_end(rows, error);
    rfade_rows_destroy(rows);
    return status;
}
