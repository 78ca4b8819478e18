/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/delimited.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ingest/row.h"
#include "ingest/track.h"

struct delimited {
    const struct rfade_column_map *map;
    const struct rfade_layout *layout;
    const struct rfade_sink *sink;
    struct rfade_ingest_summary *summary;
    struct rfade_row_maker *maker;
    struct rfade_tracks *tracks;
    bool any_time;
    size_t first_refused_line;
    char first_refused[256];
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

static enum rfade_status refuse(struct delimited *delimited, const struct rfade_line *line,
                                const char *reason, struct rfade_error *error)
{
    if (delimited->summary->refused++ == 0) {
        delimited->first_refused_line = line->number;
        (void)snprintf(delimited->first_refused, sizeof delimited->first_refused, "%s", reason);
    }
    struct rfade_ingest_refusal refusal = {line->number, reason, line->text, line->size};
    return delimited->sink->refused(delimited->sink->context, &refusal, error);
}

static void note_time(struct delimited *delimited, int64_t time_us)
{
    struct rfade_ingest_summary *summary = delimited->summary;
    if (!delimited->any_time || time_us < summary->first_us)
        summary->first_us = time_us;
    if (!delimited->any_time || time_us > summary->last_us)
        summary->last_us = time_us;
    delimited->any_time = true;
}

/* What the readings of a row have in common; no level yet. */
static struct rfade_ingest_reading row_reading(const struct delimited *delimited,
                                               const struct rfade_row *row, const char *channel)
{
    return (struct rfade_ingest_reading){
        .time_us = row->time_us,
        .vehicle = row->vehicle,
        .channel = channel,
        .campaign = row->campaign,
        .level_cdb = RFADE_NO_VALUE_CDB,
        .snr_cdb = RFADE_NO_VALUE_CDB,
        .numbered = row->numbered,
        .sequence = row->sequence,
        .modulus = (int64_t)delimited->map->sequence_modulus,
    };
}

/* A number that came without a level that can be used was not lost. */
static enum rfade_status emit_numbers(struct delimited *delimited, const struct rfade_row *row,
                                      struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    size_t count = row->numbered ? row->valueless_count : 0;
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        struct rfade_ingest_reading reading = row_reading(delimited, row, row->valueless[i]);
        status = delimited->sink->reading(delimited->sink->context, &reading, error);
    }
    return status;
}

static enum rfade_status emit(struct delimited *delimited, const struct rfade_row *row,
                              const struct rfade_line *line, struct rfade_error *error)
{
    struct rfade_ingest_summary *summary = delimited->summary;
    enum rfade_status status = RFADE_OK;
    if (row->has_place) {
        struct rfade_ingest_fix fix = {row->time_us, row->vehicle, row->latitude_deg,
                                       row->longitude_deg, row->speed_m_s};
        status = rfade_tracks_add(delimited->tracks, &fix, line, error);
    }
    for (size_t i = 0; i < row->level_count && status == RFADE_OK; i++) {
        const struct rfade_row_level *level = &row->levels[i];
        struct rfade_ingest_reading reading = row_reading(delimited, row, level->channel);
        reading.level_cdb = level->level_cdb;
        reading.snr_cdb = level->snr_cdb;
        status = delimited->sink->reading(delimited->sink->context, &reading, error);
        summary->readings++;
    }
    summary->no_reading += row->no_reading;
    summary->no_position += row->no_place;
    note_time(delimited, row->time_us);
    return status;
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
        delimited->summary->rows++;
        if (rfade_row_make(delimited->maker, &line, &row))
            status = emit(delimited, &row, &line, error);
        if (status == RFADE_OK)
            status = emit_numbers(delimited, &row, error);
        if (status == RFADE_OK && row.refused[0])
            status = refuse(delimited, &line, row.refused, error);
        if (status != RFADE_OK)
            return status;
    }
}

/* A file out of which nothing came is of another kind than the map says. */
static enum rfade_status check_yield(const struct delimited *delimited,
                                     struct rfade_error *error)
{
    const struct rfade_ingest_summary *summary = delimited->summary;
    if (summary->rows == 0)
        return rfade_error_set(error, RFADE_INPUT, "check that the file is complete",
                               "the file holds no row of data");
    if (delimited->any_time)
        return RFADE_OK;
    enum rfade_status status = rfade_error_set(
        error, RFADE_INPUT, "check that the column map describes this file",
        "none of %zu rows can be used; the first: %s", summary->rows, delimited->first_refused);
    rfade_error_at(error, NULL, delimited->first_refused_line);
    return status;
}

enum rfade_status
rfade_delimited_read(struct rfade_line_reader *lines, const struct rfade_column_map *map,
                     const struct rfade_layout *layout, const struct rfade_ingest_names *names,
                     const struct rfade_sink *sink, struct rfade_ingest_summary *summary,
                     struct rfade_error *error)
{
    struct delimited delimited = {
        .map = map, .layout = layout, .sink = sink, .summary = summary};
    enum rfade_status status =
        rfade_row_maker_create(map, layout, names, &delimited.maker, error);
    if (status != RFADE_OK)
        goto out;
    delimited.tracks = rfade_tracks_create(&map->position, sink);
    if (!delimited.tracks) {
        status = rfade_error_no_memory(error);
        goto out;
    }
    status = read_lines(&delimited, lines, error);
    if (status == RFADE_OK)
        status = rfade_tracks_finish(delimited.tracks, error);
    summary->fixes = rfade_tracks_fixes(delimited.tracks);
    summary->refused += rfade_tracks_refused(delimited.tracks);
    if (status == RFADE_OK)
        status = check_yield(&delimited, error);
out:
    rfade_tracks_destroy(delimited.tracks);
    rfade_row_maker_destroy(delimited.maker);
    return status;
}
