/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * JSON after RFC 8259. jansson makes and escapes the values; it would print every number
 * with one precision, so objects and arrays are walked here and each number is given the
 * fewest digits that read back to the same double. Rows are written one at a time.
 */
#include "output/json.h"

#include <errno.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "common/text.h"
#include "output/format.h"
#include "output/number.h"

json_t *rfade_json_number(double value)
{
    return isfinite(value) ? json_real(value) : json_null();
}

json_t *rfade_json_text(const char *text)
{
    if (!text)
        return json_null();
    char *printable = strdup(text);
    if (!printable)
        return NULL;
    rfade_text_printable(printable);
    json_t *made = json_string(printable);
    free(printable);
    return made;
}

json_t *rfade_json_value(const struct rfade_value *value)
{
    switch (value->type) {
    case RFADE_VALUE_TEXT:
        return json_string(value->text);
    case RFADE_VALUE_INTEGER:
        return json_integer(value->integer);
    case RFADE_VALUE_NUMBER:
    case RFADE_VALUE_LIMIT:
        return rfade_json_number(value->number);
    case RFADE_VALUE_MISSING:
        break;
    }
    return json_null();
}

json_t *rfade_json_join(json_t *object, json_t *part)
{
    bool joined = object && part && json_object_update(object, part) == 0;
    json_decref(part);
    if (joined)
        return object;
    json_decref(object);
    return NULL;
}

static enum rfade_status write_scalar(FILE *stream, const json_t *value)
{
    int digits = json_is_real(value) ? rfade_number_exact_digits(json_real_value(value)) : 0;
    size_t flags = JSON_ENCODE_ANY | JSON_REAL_PRECISION((size_t)digits);
    char *text = json_dumps(value, flags);
    if (!text)
        return RFADE_NO_MEMORY;
    (void)fputs(text, stream);
    free(text);
    return RFADE_OK;
}

static enum rfade_status write_key(FILE *stream, const char *key)
{
    json_t *text = json_string(key);
    if (!text)
        return RFADE_NO_MEMORY;
    enum rfade_status status = write_scalar(stream, text);
    json_decref(text);
    (void)fputs(": ", stream);
    return status;
}

/* Our documents are a few levels deep: the recursion is bounded by how they are built. */
static enum rfade_status write_object(FILE *stream, const json_t *object)
{
    json_t *walked = json_incref((json_t *)object);
    enum rfade_status status = RFADE_OK;
    bool first = true;
    (void)fputc('{', stream);
    for (void *at = json_object_iter(walked); at && status == RFADE_OK;
         at = json_object_iter_next(walked, at)) {
        if (!first)
            (void)fputs(", ", stream);
        first = false;
        status = write_key(stream, json_object_iter_key(at));
        if (status == RFADE_OK)
            status = rfade_json_write(stream, json_object_iter_value(at));
    }
    (void)fputc('}', stream);
    json_decref(walked);
    return status;
}

static enum rfade_status write_array(FILE *stream, const json_t *array)
{
    (void)fputc('[', stream);
    for (size_t i = 0; i < json_array_size(array); i++) {
        if (i)
            (void)fputs(", ", stream);
        enum rfade_status status = rfade_json_write(stream, json_array_get(array, i));
        if (status != RFADE_OK)
            return status;
    }
    (void)fputc(']', stream);
    return RFADE_OK;
}

enum rfade_status rfade_json_write(FILE *stream, const json_t *value)
{
    if (json_is_object(value))
        return write_object(stream, value);
    if (json_is_array(value))
        return write_array(stream, value);
    return write_scalar(stream, value);
}

enum rfade_status rfade_json_document(FILE *stream, const char *stream_name, json_t *document,
                                      struct rfade_error *error)
{
    enum rfade_status status = document ? rfade_json_write(stream, document) : RFADE_NO_MEMORY;
    json_decref(document);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, NULL, "can't write JSON: %s",
                               rfade_status_text(status));
    (void)fputc('\n', stream);
    return rfade_stream_flush(stream, stream_name, error);
}

static enum rfade_status begin(struct rfade_rows *rows)
{
    (void)fputc('[', rows->stream);
    return RFADE_OK;
}

static enum rfade_status row(struct rfade_rows *rows)
{
    json_t *object = json_object();
    enum rfade_status status = object ? RFADE_OK : RFADE_NO_MEMORY;
    for (size_t i = 0; i < rows->column_count && status == RFADE_OK; i++)
        if (json_object_set_new(object, rows->columns[i].name,
                                rfade_json_value(&rows->values[i])))
            status = RFADE_NO_MEMORY;
    if (status == RFADE_OK) {
        (void)fputs(rows->row_count ? ",\n" : "\n", rows->stream);
        status = rfade_json_write(rows->stream, object);
    }
    json_decref(object);
    return status;
}

static enum rfade_status end(struct rfade_rows *rows)
{
    (void)fputs(rows->row_count ? "\n]\n" : "]\n", rows->stream);
    return RFADE_OK;
}

const struct rfade_rows_format rfade_rows_json = {"json", begin, row, end, NULL};
