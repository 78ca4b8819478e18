/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/layout.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ingest/lines.h"
#include "ingest/time.h"

/* Rows looked at to learn how many values a row has and whether its time can be read. */
enum { LOOKED_AT = 500 };

struct look {
    const struct rfade_column_map *map;
    struct rfade_layout *layout;
    struct rfade_splitter *splitter;
    struct rfade_line_reader *reader;
    struct rfade_byte_memory head;
    bool whole;
    struct rfade_line line;
    struct rfade_header header;
    char comment[RFADE_LINE_SIZE + 1]; /* latest comment line, which may be the header */
    size_t comment_size;
};

const struct rfade_column *rfade_map_column(const struct rfade_column_map *map, size_t role)
{
    switch (role) {
    case RFADE_ROLE_TIME:
        return &map->time_column;
    case RFADE_ROLE_DATE:
        return &map->date_column;
    case RFADE_ROLE_SUBSECOND:
        return &map->subsecond_column;
    case RFADE_ROLE_FIRST:
        return &map->position.first;
    case RFADE_ROLE_SECOND:
        return &map->position.second;
    case RFADE_ROLE_SPEED:
        return &map->speed_column;
    case RFADE_ROLE_VEHICLE:
        return &map->vehicle.column;
    case RFADE_ROLE_CHANNEL:
        return &map->channel.column;
    case RFADE_ROLE_CAMPAIGN:
        return &map->campaign.column;
    case RFADE_ROLE_SEQUENCE:
        return &map->sequence_column;
    case RFADE_ROLE_GNSS:
        return &map->gnss_column;
    default:
        break;
    }
    const struct rfade_level_map *level = &map->levels[(role - RFADE_ROLE_LEVELS) / 2];
    return (role - RFADE_ROLE_LEVELS) % 2 ? &level->snr.column : &level->level.column;
}

void rfade_plain_name(const char *name, char *plain)
{
    int depth = 0;
    char *to = plain;
    for (; *name && to - plain < RFADE_NAME_SIZE - 1; name++) {
        if (*name == '(' || *name == '[')
            depth++;
        else if ((*name == ')' || *name == ']') && depth > 0)
            depth--;
        else if (depth == 0 && *name != ' ' && *name != '\t' && *name != '_' && *name != '\r')
            *to++ = rfade_lower(*name);
    }
    *to = '\0';
}

bool rfade_is_separator_line(const struct rfade_line *line)
{
    const char *text = line->text;
    size_t size = line->size;
    if (line->number == 1 && size >= 2 && text[0] == '"' && text[size - 1] == '"') {
        text++;
        size -= 2;
    }
    return line->number == 1 && size == 5 &&
           (memcmp(text, "sep=", 4) == 0 || memcmp(text, "SEP=", 4) == 0);
}

/* Number of the column with a name, from 1; 0 if there is none, RFADE_MOST_COLUMNS + 1 if
 * several would do. */
static size_t find_name(const struct rfade_header *header, const char *name)
{
    char wanted[RFADE_NAME_SIZE];
    char plain[RFADE_NAME_SIZE];
    size_t exact = 0;
    size_t similar = 0;
    rfade_plain_name(name, wanted);
    for (size_t i = 0; i < header->count; i++) {
        rfade_plain_name(header->names[i], plain);
        if (strcmp(header->names[i], name) == 0)
            exact = exact ? RFADE_MOST_COLUMNS + 1 : i + 1;
        if (strcmp(plain, wanted) == 0)
            similar = similar ? RFADE_MOST_COLUMNS + 1 : i + 1;
    }
    return exact ? exact : similar;
}

/* The header's names as a list for a remedy. */
static void list_names(const struct rfade_header *header, char *text, size_t size)
{
    size_t used = 0;
    text[0] = '\0';
    for (size_t i = 0; i < header->count; i++) {
        int added = snprintf(text + used, size - used, "%s%s", i ? ", " : "", header->names[i]);
        if (added < 0 || (size_t)added >= size - used) {
            (void)snprintf(text + size - 4, 4, "...");
            return;
        }
        used += (size_t)added;
    }
}

static enum rfade_status no_column(const struct look *look, const char *name, size_t found,
                                   struct rfade_error *error)
{
    char names[400];
    char remedy[512];
    list_names(&look->header, names, sizeof names);
    (void)snprintf(remedy, sizeof remedy, "the header has: %s", names);
    return rfade_error_set(error, RFADE_INPUT, remedy,
                           found ? "the header has several columns that could be '%.100s' of %s"
                                 : "the header has no column '%.100s', which %s asks for",
                           name, look->map->name);
}

/* Columns by role from the header's names. */
static enum rfade_status resolve(struct look *look, struct rfade_error *error)
{
    struct rfade_layout *layout = look->layout;
    size_t roles = RFADE_ROLE_LEVELS + 2 * look->map->level_count;
    layout->column_count = 0;
    layout->last_column = 0;
    for (size_t role = 0; role < roles; role++) {
        const struct rfade_column *column = rfade_map_column(look->map, role);
        size_t number = column->number;
        if (!rfade_column_given(column))
            continue;
        if (number == 0)
            number = find_name(&look->header, column->name);
        if (number == 0 || number > RFADE_MOST_COLUMNS)
            return no_column(look, column->name, number, error);
        layout->columns[role] = number;
        layout->column_count++;
        if (number > layout->last_column)
            layout->last_column = number;
    }
    return RFADE_OK;
}

/* The next line that is all there. */
static bool next_line(struct look *look)
{
    bool more = false;
    if (rfade_line_next(look->reader, &look->line, &more, NULL) != RFADE_OK || !more)
        return false;
    return look->line.ended || look->whole;
}

static bool is_blank(const struct rfade_line *line)
{
    size_t i = 0;
    while (i < line->size && (line->text[i] == ' ' || line->text[i] == '\t'))
        i++;
    return i == line->size;
}

static bool is_comment(const struct look *look)
{
    size_t i = 0;
    while (i < look->line.size && (look->line.text[i] == ' ' || look->line.text[i] == '\t'))
        i++;
    return look->map->file.comment && i < look->line.size &&
           look->line.text[i] == look->map->file.comment;
}

/* Keeps a comment line without its sign, ready to be taken apart. */
static void keep_comment(struct look *look)
{
    const char *sign = memchr(look->line.text, look->map->file.comment, look->line.size);
    size_t skipped = (size_t)(sign + 1 - look->line.text);
    look->comment_size = look->line.size - skipped;
    memcpy(look->comment, sign + 1, look->comment_size);
    look->comment[look->comment_size] = '\n';
}

static enum rfade_status take_header(struct look *look, const struct rfade_line *line,
                                     struct rfade_error *error)
{
    if (rfade_split_header(look->splitter, line, &look->header))
        look->header.count = 0;
    return resolve(look, error);
}

static enum rfade_status take_comment(struct look *look, struct rfade_error *error)
{
    struct rfade_line line = {
        .text = look->comment, .size = look->comment_size, .number = look->line.number};
    return take_header(look, &line, error);
}

/* The header is the line just read, or the comment before it, or there is none. */
static enum rfade_status settle_header(struct look *look, struct rfade_error *error)
{
    struct rfade_layout *layout = look->layout;
    layout->first_line = look->line.number;
    if (look->map->file.header == RFADE_HEADER_NONE)
        return resolve(look, error);
    if (is_comment(look)) { /* only where the map says that the header is this line */
        keep_comment(look);
        layout->first_line++;
        return take_comment(look, error);
    }
    enum rfade_status status = take_header(look, &look->line, error);
    if (status == RFADE_OK) {
        layout->first_line++;
        layout->header_size = look->line.size;
        memcpy(layout->header, look->line.text, look->line.size);
    } else if (look->comment_size > 0 && take_comment(look, NULL) == RFADE_OK) {
        status = RFADE_OK;
    }
    return status;
}

/* Goes to the line at which the header is decided, and decides. */
static enum rfade_status find_header(struct look *look, struct rfade_error *error)
{
    const struct rfade_file_map *file = &look->map->file;
    while (next_line(look)) {
        if (look->line.number <= file->skip || rfade_is_separator_line(&look->line) ||
            look->line.too_long)
            continue;
        if (file->header == RFADE_HEADER_LINE) {
            if (look->line.number == file->header_line)
                return settle_header(look, error);
            continue;
        }
        if (is_blank(&look->line))
            continue;
        if (!is_comment(look))
            return settle_header(look, error);
        keep_comment(look);
    }
    return rfade_error_set(error, RFADE_INPUT, "check that the file is complete",
                           "the file has no header and no data where %s expects them",
                           look->map->name);
}

/* Whether the row just taken apart has a time that can be read. */
static bool has_time(const struct look *look, uint16_t time_slot, uint16_t date_slot)
{
    const struct rfade_field *time = rfade_split_field(look->splitter, time_slot);
    struct rfade_time_reader reader = {.format = &look->map->time};
    int64_t time_us = 0;
    if (date_slot == RFADE_NO_SLOT)
        return !rfade_time_read(&reader, time->text, time->size, &time_us);
    char joined[2 * RFADE_NAME_SIZE];
    const struct rfade_field *date = rfade_split_field(look->splitter, date_slot);
    int size = snprintf(joined, sizeof joined, "%s %s", date->text, time->text);
    return size > 0 && !rfade_time_read(&reader, joined, (size_t)size, &time_us);
}

/* The commonest number of values among the rows that have all columns; of two the larger.
 * False if no row has them all. */
static bool settle_value_count(struct rfade_layout *layout,
                               const size_t counts[RFADE_MOST_COLUMNS + 1])
{
    size_t most = 0;
    for (size_t i = layout->last_column; i <= RFADE_MOST_COLUMNS; i++)
        if (counts[i] > 0 && counts[i] >= most) {
            layout->value_count = i;
            most = counts[i];
        }
    return most > 0;
}

/* Counts the values of the first rows. `line` is the first that can be data. */
static enum rfade_status look_at_rows(struct look *look, struct rfade_error *error)
{
    struct rfade_layout *layout = look->layout;
    size_t counts[RFADE_MOST_COLUMNS + 1] = {0};
    size_t rows = 0;
    size_t timed = 0;
    uint16_t time_slot = rfade_splitter_want(look->splitter, layout->columns[RFADE_ROLE_TIME]);
    uint16_t date_slot = RFADE_NO_SLOT;
    if (layout->columns[RFADE_ROLE_DATE] > 0)
        date_slot = rfade_splitter_want(look->splitter, layout->columns[RFADE_ROLE_DATE]);
    bool more = layout->first_line <= look->line.number || next_line(look);
    for (; more && rows < LOOKED_AT; more = next_line(look)) {
        if (is_blank(&look->line) || is_comment(look) ||
            rfade_split(look->splitter, &look->line))
            continue;
        size_t count = rfade_split_count(look->splitter);
        counts[count < RFADE_MOST_COLUMNS ? count : RFADE_MOST_COLUMNS]++;
        rows++;
        timed += has_time(look, time_slot, date_slot);
    }
    if (rows > 0 && !settle_value_count(layout, counts))
        return rfade_error_set(error, RFADE_INPUT,
                               "check the map's separator and its column numbers",
                               "%s asks for column %zu, and no row has so many values",
                               look->map->name, layout->last_column);
    if (rows > 0 && timed == 0 && look->map->file.header == RFADE_HEADER_NONE)
        return rfade_error_set(error, RFADE_INPUT, "check the map's time column and format",
                               "no row has a time as %s describes it", look->map->name);
    return RFADE_OK;
}

enum rfade_status rfade_layout_create(const struct rfade_column_map *map, const char *head,
                                      size_t head_size, bool whole,
                                      struct rfade_layout **layout, struct rfade_error *error)
{
    *layout = NULL;
    enum rfade_status status = RFADE_NO_MEMORY;
    struct rfade_layout *made = calloc(1, sizeof *made);
    struct look *look = calloc(1, sizeof *look);
    if (!made || !look)
        goto out;
    look->map = map;
    look->layout = made;
    look->head = (struct rfade_byte_memory){head, head_size};
    look->whole = whole;
    struct rfade_byte_source source = {&look->head, rfade_byte_memory_read};
    look->splitter = rfade_splitter_create(&map->file);
    look->reader = rfade_line_reader_create(&source);
    if (!look->splitter || !look->reader)
        goto out;
    status = find_header(look, error);
    if (status == RFADE_OK)
        status = look_at_rows(look, error);
out:
    if (status == RFADE_NO_MEMORY)
        rfade_error_no_memory(error);
    if (status == RFADE_OK)
        *layout = made;
    else
        free(made);
    if (look) {
        rfade_splitter_destroy(look->splitter);
        rfade_line_reader_destroy(look->reader);
    }
    free(look);
    return status;
}
