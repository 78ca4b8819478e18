/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/lines.h"

#include <stdlib.h>
#include <string.h>

static const char byte_order_mark[] = "\xEF\xBB\xBF";

struct rfade_line_reader {
    struct rfade_byte_source source;
    size_t start; /* of what is not read away */
    size_t end;
    size_t number; /* of the line before */
    char line_end;
    bool at_end; /* the source gave all it has */
    char buffer[2 * RFADE_BLOCK_SIZE + 1];
};

enum rfade_status rfade_byte_memory_read(void *context, char *buffer, size_t capacity,
                                         size_t *size, struct rfade_error *error)
{
    struct rfade_byte_memory *memory = context;
    (void)error;
    *size = memory->size < capacity ? memory->size : capacity;
    if (*size > 0)
        memcpy(buffer, memory->bytes, *size);
    memory->bytes += *size;
    memory->size -= *size;
    return RFADE_OK;
}

struct rfade_line_reader *rfade_line_reader_create(const struct rfade_byte_source *source)
{
    struct rfade_line_reader *reader = calloc(1, sizeof *reader);
    if (reader) {
        reader->source = *source;
        reader->line_end = '\n';
    }
    return reader;
}

void rfade_line_reader_destroy(struct rfade_line_reader *reader)
{
    free(reader);
}

/* Reads up to a block more behind what is there; less than a block may be there. */
static enum rfade_status fill(struct rfade_line_reader *reader, struct rfade_error *error)
{
    size_t left = reader->end - reader->start;
    memmove(reader->buffer, reader->buffer + reader->start, left);
    reader->start = 0;
    reader->end = left;
    size_t wanted = RFADE_BLOCK_SIZE;
    while (wanted > 0 && !reader->at_end) {
        size_t size = 0;
        enum rfade_status status = reader->source.read(
            reader->source.context, reader->buffer + reader->end, wanted, &size, error);
        if (status != RFADE_OK)
            return status;
        reader->at_end = size == 0;
        reader->end += size;
        wanted -= size;
    }
    return RFADE_OK;
}

enum rfade_status rfade_line_peek(struct rfade_line_reader *reader, const char **bytes,
                                  size_t *size, struct rfade_error *error)
{
    *bytes = reader->buffer;
    *size = 0;
    if (reader->end == 0 && !reader->at_end) {
        enum rfade_status status = fill(reader, error);
        if (status != RFADE_OK)
            return status;
        bool newline = memchr(reader->buffer, '\n', reader->end) != NULL;
        bool carriage_return = memchr(reader->buffer, '\r', reader->end) != NULL;
        if (carriage_return && !newline)
            reader->line_end = '\r';
        if (reader->end >= 3 && memcmp(reader->buffer, byte_order_mark, 3) == 0)
            reader->start = 3;
    }
    *bytes = reader->buffer + reader->start;
    *size = reader->end - reader->start;
    return RFADE_OK;
}

/* Reads away up to and with the next line end. */
static enum rfade_status skip_rest(struct rfade_line_reader *reader, struct rfade_error *error)
{
    for (;;) {
        char *from = reader->buffer + reader->start;
        char *found = memchr(from, reader->line_end, reader->end - reader->start);
        reader->start = found ? (size_t)(found + 1 - reader->buffer) : reader->end;
        if (found || reader->at_end)
            return RFADE_OK;
        enum rfade_status status = fill(reader, error);
        if (status != RFADE_OK)
            return status;
    }
}

enum rfade_status rfade_line_next(struct rfade_line_reader *reader, struct rfade_line *line,
                                  bool *more, struct rfade_error *error)
{
    const char *bytes = NULL;
    size_t size = 0;
    *line = (struct rfade_line){0};
    *more = false;
    enum rfade_status status =
        reader->number == 0 ? rfade_line_peek(reader, &bytes, &size, error) : RFADE_OK;
    if (status != RFADE_OK)
        return status;
    char *from = reader->buffer + reader->start;
    char *found = memchr(from, reader->line_end, reader->end - reader->start);
    if (!found && !reader->at_end && reader->end - reader->start < RFADE_BLOCK_SIZE) {
        status = fill(reader, error);
        if (status != RFADE_OK)
            return status;
        from = reader->buffer;
        found = memchr(from, reader->line_end, reader->end);
    }
    if (!found && reader->start == reader->end)
        return RFADE_OK;
    *more = true;
    size = found ? (size_t)(found - from) : reader->end - reader->start;
    *line = (struct rfade_line){from, size, ++reader->number, found != NULL, false};
    reader->start += size + (found != NULL);
    if (line->size > RFADE_LINE_SIZE) {
        line->size = RFADE_LINE_SIZE;
        line->too_long = true;
        return found ? RFADE_OK : skip_rest(reader, error);
    }
    if (line->size > 0 && from[line->size - 1] == '\r')
        line->size--;
    from[line->size] = '\n';
    return RFADE_OK;
}

enum rfade_status rfade_line_bytes(struct rfade_line_reader *reader, const char **bytes,
                                   size_t *size, struct rfade_error *error)
{
    enum rfade_status status = rfade_line_peek(reader, bytes, size, error);
    if (status == RFADE_OK && *size == 0 && !reader->at_end) {
        status = fill(reader, error);
        *bytes = reader->buffer;
        *size = reader->end;
    }
    reader->start = reader->end;
    return status;
}
