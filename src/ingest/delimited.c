/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/delimited.h"

#include <string.h>

#include "ingest/emit.h"
#include "ingest/row.h"

struct delimited {
    const struct rfade_column_map *map;
    const struct rfade_layout *layout;
    struct rfade_ingest_summary *summary;
    struct rfade_splitter *splitter;
    struct rfade_row_values values;
    struct rfade_row_maker *maker;
    struct rfade_emitter *emitter;
    size_t last_size; /* of the last value of the row before */
};

/* Blank lines, comments, header lines and what the map skips. */
static bool is_no_row(const struct delimited *delimited, const struct rfade_line *line)
{
    const struct rfade_layout *layout = delimited->layout;
    if (line->number < layout->first_line || rfade_is_separator_line(line))
        return true;
    size_t i = 0;
    while (i < line->size && (line->text[i] == ' ' || line->text[i] == '\t'))
        i++;
    if (i == line->size)
        return true;
    char comment = delimited->map->file.comment;
    if (comment && line->text[i] == comment)
        return true;
    return layout->header_size > 0 && line->size == layout->header_size &&
           memcmp(line->text, layout->header, line->size) == 0;
}

/*
 * A last line without line end may have been cut off. It can be trusted if it has all values
 * and the last one is not shorter than in the row before.
 */
static bool is_whole(struct delimited *delimited, const struct rfade_line *line)
{
    size_t last_size = rfade_split_last_size(delimited->splitter);
    bool whole = line->ended || last_size >= delimited->last_size;
    delimited->last_size = last_size;
    return whole;
}

static bool take_apart(struct delimited *delimited, const struct rfade_line *line,
                       struct rfade_row *row)
{
    const char *reason = rfade_split(delimited->splitter, line);
    if (reason)
        return rfade_row_refuse(row, "%s", reason);
    size_t count = rfade_split_count(delimited->splitter);
    size_t usual = delimited->layout->value_count;
    size_t needed = delimited->layout->last_column;
    bool trailing = count == usual + 1 && rfade_split_last_size(delimited->splitter) == 0;
    if (count < needed)
        return rfade_row_refuse(row, "the row has %zu values, and column %zu is needed", count,
                                needed);
    if (count != usual && !trailing && !delimited->map->file.ragged)
        return rfade_row_refuse(
            row, "the row has %zu values where most have %zu: columns may be shifted", count,
            usual);
    if (!is_whole(delimited, line))
        return rfade_row_refuse(
            row, "the file stops inside the line: its last value may be cut off");
    return true;
}

static enum rfade_status read_lines(struct delimited *delimited,
                                    struct rfade_line_reader *lines, struct rfade_error *error)
{
    struct rfade_row row;
    for (;;) {
        struct rfade_line line;
        bool more = false;
        enum rfade_status status = rfade_line_next(lines, &line, &more, error);
        if (status != RFADE_OK || !more)
            return status;
        delimited->summary->lines++;
        if (is_no_row(delimited, &line))
            continue;
        rfade_row_begin(&row);
        bool usable =
            take_apart(delimited, &line, &row) && rfade_row_make(delimited->maker, &row);
        status = rfade_emitter_row(delimited->emitter, &row, usable, &line, error);
        if (status != RFADE_OK)
            return status;
    }
}

/* Asks the splitter for the columns that the file has, each at the place of its role. */
static enum rfade_status want_columns(struct delimited *delimited, struct rfade_error *error)
{
    delimited->splitter = rfade_splitter_create(&delimited->map->file);
    if (!delimited->splitter)
        return rfade_error_no_memory(error);
    for (size_t role = 0; role < RFADE_MOST_ROLES; role++) {
        size_t column = delimited->layout->columns[role];
        if (column > 0)
            delimited->values.by_role[role] = rfade_split_field(
                delimited->splitter, rfade_splitter_want(delimited->splitter, column));
    }
    return RFADE_OK;
}

enum rfade_status
rfade_delimited_read(struct rfade_line_reader *lines, const struct rfade_column_map *map,
                     const struct rfade_layout *layout, const struct rfade_ingest_names *names,
                     const struct rfade_sink *sink, struct rfade_ingest_summary *summary,
                     struct rfade_error *error)
{
    struct delimited delimited = {.map = map, .layout = layout, .summary = summary};
    enum rfade_status status = want_columns(&delimited, error);
    if (status == RFADE_OK)
        status = rfade_row_maker_create(map, &delimited.values, names, &delimited.maker, error);
    if (status == RFADE_OK)
        status = rfade_emitter_create(map, sink, summary, &delimited.emitter, error);
    if (status == RFADE_OK)
        status = read_lines(&delimited, lines, error);
    if (status == RFADE_OK)
        status = rfade_emitter_finish(delimited.emitter, error);
    rfade_emitter_destroy(delimited.emitter);
    rfade_row_maker_destroy(delimited.maker);
    rfade_splitter_destroy(delimited.splitter);
    return status;
}
