/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/fields.h"

#include <csv.h>
#include <stdlib.h>
#include <string.h>

/* libcsv always has a quotation mark: for `none` a byte that no UTF-8 text holds. */
enum { NO_QUOTE = 0xFF };

struct rfade_splitter {
    struct csv_parser parser;
    bool blanks; /* runs of blanks and tabs separate */
    char quote;
    size_t count;
    size_t last_size;
    size_t row_count;
    struct rfade_header *header; /* while a header is taken apart */
    size_t slot_count;
    uint16_t slot_of[RFADE_MOST_COLUMNS];
    struct rfade_field fields[RFADE_MOST_SLOTS];
    char folded[RFADE_LINE_SIZE + 2];
};

struct rfade_splitter *rfade_splitter_create(const struct rfade_file_map *file)
{
    struct rfade_splitter *splitter = calloc(1, sizeof *splitter);
    if (!splitter || csv_init(&splitter->parser, 0) != 0) {
        free(splitter);
        return NULL;
    }
    csv_set_delim(&splitter->parser, (unsigned char)file->separator);
    csv_set_quote(&splitter->parser, file->quote ? (unsigned char)file->quote : NO_QUOTE);
    splitter->blanks = file->separator == RFADE_SEPARATOR_BLANKS;
    splitter->quote = file->quote;
    for (size_t i = 0; i < RFADE_MOST_COLUMNS; i++)
        splitter->slot_of[i] = RFADE_NO_SLOT;
    return splitter;
}

void rfade_splitter_destroy(struct rfade_splitter *splitter)
{
    if (splitter)
        csv_free(&splitter->parser);
    free(splitter);
}

uint16_t rfade_splitter_want(struct rfade_splitter *splitter, size_t column)
{
    uint16_t *slot = &splitter->slot_of[column - 1];
    if (*slot == RFADE_NO_SLOT)
        *slot = (uint16_t)splitter->slot_count++;
    return *slot;
}

static void keep(char *target, size_t capacity, const void *text, size_t size)
{
    size_t kept = size < capacity ? size : capacity - 1;
    if (kept > 0)
        memcpy(target, text, kept);
    target[kept] = '\0';
}

static void take_value(void *text, size_t size, void *context)
{
    struct rfade_splitter *splitter = context;
    size_t column = splitter->count++;
    splitter->last_size = size;
    if (column >= RFADE_MOST_COLUMNS || splitter->slot_of[column] == RFADE_NO_SLOT)
        return;
    struct rfade_field *field = &splitter->fields[splitter->slot_of[column]];
    keep(field->text, sizeof field->text, text, size);
    field->cut = size >= sizeof field->text;
    field->size = field->cut ? sizeof field->text - 1 : size;
}

static void take_name(void *text, size_t size, void *context)
{
    struct rfade_splitter *splitter = context;
    size_t column = splitter->count++;
    if (column < RFADE_MOST_COLUMNS)
        keep(splitter->header->names[column], RFADE_NAME_SIZE, text, size);
}

static void take_row(int end, void *context)
{
    struct rfade_splitter *splitter = context;
    (void)end;
    splitter->row_count++;
}

/* Makes one blank of every run outside quotes, none at the ends. Returns the new size. */
static size_t fold_blanks(struct rfade_splitter *splitter, const char *text, size_t size)
{
    char *to = splitter->folded;
    bool quoted = false;
    bool gap = false;
    for (size_t i = 0; i < size; i++) {
        bool blank = text[i] == ' ' || text[i] == '\t';
        if (blank && !quoted) {
            gap = to > splitter->folded;
            continue;
        }
        if (gap)
            *to++ = ' ';
        gap = false;
        if (splitter->quote && text[i] == splitter->quote)
            quoted = !quoted;
        *to++ = text[i];
    }
    *to = '\n';
    return (size_t)(to - splitter->folded);
}

static const char *split(struct rfade_splitter *splitter, const struct rfade_line *line,
                         void (*take)(void *, size_t, void *))
{
    const char *text = line->text;
    size_t size = line->size;
    splitter->count = 0;
    splitter->last_size = 0;
    splitter->row_count = 0;
    if (line->too_long)
        return "the line is longer than 65534 bytes";
    if (splitter->blanks) {
        size = fold_blanks(splitter, text, size);
        text = splitter->folded;
    }
    /* The line end that follows the text ends the row. */
    if (csv_parse(&splitter->parser, text, size + 1, take, take_row, splitter) != size + 1)
        return "the line found no memory";
    if (splitter->row_count == 0) {
        (void)csv_fini(&splitter->parser, take, take_row, splitter);
        return "a quotation mark is not closed on its line";
    }
    return splitter->row_count == 1 ? NULL : "a carriage return stands inside the line";
}

const char *rfade_split(struct rfade_splitter *splitter, const struct rfade_line *line)
{
    for (size_t i = 0; i < splitter->slot_count; i++) {
        splitter->fields[i].size = 0;
        splitter->fields[i].cut = false;
        splitter->fields[i].text[0] = '\0';
    }
    return split(splitter, line, take_value);
}

const char *rfade_split_header(struct rfade_splitter *splitter, const struct rfade_line *line,
                               struct rfade_header *header)
{
    splitter->header = header;
    const char *reason = split(splitter, line, take_name);
    header->count = splitter->count < RFADE_MOST_COLUMNS ? splitter->count : RFADE_MOST_COLUMNS;
    splitter->header = NULL;
    return reason;
}

size_t rfade_split_count(const struct rfade_splitter *splitter)
{
    return splitter->count;
}

size_t rfade_split_last_size(const struct rfade_splitter *splitter)
{
    return splitter->last_size;
}

const struct rfade_field *rfade_split_field(const struct rfade_splitter *splitter,
                                            uint16_t slot)
{
    return &splitter->fields[slot];
}
