/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/json.h"

#include <stdlib.h>

#include "ingest/built_in_map.h"
#include "ingest/emit.h"
#include "ingest/json_scan.h"
#include "ingest/json_values.h"

/* Records of one file, whole or its first bytes. */
struct records {
    struct rfade_byte_memory head;
    struct rfade_line_reader *reader; /* owned, for a head only */
    struct rfade_json_scanner *scanner;
};

static enum rfade_status open_records(struct records *records, struct rfade_line_reader *reader,
                                      const char *path_text, struct rfade_error *error)
{
    struct rfade_json_path path;
    bool given = path_text[0] && rfade_json_path_read(path_text, &path);
    return rfade_json_scanner_create(reader, given ? &path : NULL, &records->scanner, error);
}

static enum rfade_status open_head(struct records *records, const char *head, size_t size,
                                   const char *path_text, struct rfade_error *error)
{
    records->head = (struct rfade_byte_memory){head, size};
    struct rfade_byte_source source = {&records->head, rfade_byte_memory_read};
    records->reader = rfade_line_reader_create(&source);
    if (!records->reader)
        return rfade_error_no_memory(error);
    return open_records(records, records->reader, path_text, error);
}

static void close_records(struct records *records)
{
    rfade_json_scanner_destroy(records->scanner);
    rfade_line_reader_destroy(records->reader);
}

/* Whether the record just read has a time, and a level or a position. */
static bool is_useful(const struct rfade_column_map *map, const struct rfade_row_values *values)
{
    bool useful = map->position.form == RFADE_POSITION_FIXED;
    for (size_t role = 0; role < RFADE_MOST_ROLES && !useful; role++)
        useful = (role == RFADE_ROLE_FIRST || role >= RFADE_ROLE_LEVELS) &&
                 values->by_role[role] && values->by_role[role]->size > 0;
    return useful && values->by_role[RFADE_ROLE_TIME]->size > 0;
}

/* The largest number of columns that a useful record of the head has. */
static enum rfade_status count_columns(const struct rfade_column_map *map,
                                       struct records *records,
                                       struct rfade_json_values *values,
                                       const struct rfade_row_values *row_values,
                                       size_t *columns)
{
    for (;;) {
        struct rfade_json_record record;
        bool more = false;
        enum rfade_status status = rfade_json_next(records->scanner, &record, &more, NULL);
        if (status == RFADE_NO_MEMORY)
            return status;
        if (status != RFADE_OK || !more) /* damage is told when the file is read */
            return RFADE_OK;
        if (record.reason || rfade_json_values_read(values, record.line.text, record.line.size))
            continue;
        size_t present = rfade_json_values_present(values);
        if (present > *columns && is_useful(map, row_values))
            *columns = present;
    }
}

enum rfade_status rfade_json_fit(const struct rfade_column_map *map, const char *head,
                                 size_t head_size, size_t *columns, struct rfade_error *error)
{
    struct records records = {.reader = NULL};
    struct rfade_json_values *values = NULL;
    struct rfade_row_values row_values;
    *columns = 0;
    enum rfade_status status = rfade_json_values_create(map, &values, &row_values, error);
    if (status == RFADE_OK)
        status = open_head(&records, head, head_size, map->file.records, error);
    if (status == RFADE_OK)
        status = count_columns(map, &records, values, &row_values, columns);
    if (status == RFADE_OK && *columns == 0)
        status = rfade_error_set(error, RFADE_INPUT,
                                 "check `records` and the paths of the map's columns",
                                 "no record has a time, and a level or a position, where %s "
                                 "looks for them",
                                 map->name);
    close_records(&records);
    rfade_json_values_destroy(values);
    return status;
}

enum rfade_status rfade_json_built_in(const char *head, size_t head_size,
                                      struct rfade_column_map **map, struct rfade_error *error)
{
    struct records records = {.reader = NULL};
    *map = NULL;
    struct rfade_header *header = calloc(1, sizeof *header);
    enum rfade_status status =
        header ? open_head(&records, head, head_size, "", error) : rfade_error_no_memory(error);
    bool more = status == RFADE_OK;
    while (more) {
        struct rfade_json_record record;
        if (rfade_json_next(records.scanner, &record, &more, NULL) != RFADE_OK)
            break; /* damage is told when the file is read */
        if (more && !record.reason &&
            !rfade_json_names(record.line.text, record.line.size, header)) {
            status = rfade_error_no_memory(error);
            break;
        }
    }
    if (status == RFADE_OK)
        status = rfade_built_in_json_map(header, map, error);
    close_records(&records);
    free(header);
    return status;
}

struct json {
    struct records records;
    struct rfade_json_values *values;
    struct rfade_row_values row_values;
    struct rfade_row_maker *maker;
    struct rfade_emitter *emitter;
    size_t level_count; /* that a record may have */
};

/* A record that has none of the columns tells that there was nothing to receive. */
static enum rfade_status take_record(struct json *json, const struct rfade_json_record *record,
                                     struct rfade_error *error)
{
    struct rfade_row row;
    rfade_row_begin(&row);
    const char *reason = record->reason;
    if (!reason)
        reason = rfade_json_values_read(json->values, record->line.text, record->line.size);
    if (reason)
        return rfade_emitter_refuse(json->emitter, &record->line, reason, error);
    bool any = rfade_json_values_present(json->values) > 0;
    row.no_reading = any ? 0 : json->level_count;
    bool usable = any && rfade_row_make(json->maker, &row);
    return rfade_emitter_row(json->emitter, &row, usable, &record->line, error);
}

static enum rfade_status read_records(struct json *json, struct rfade_ingest_summary *summary,
                                      struct rfade_error *error)
{
    for (;;) {
        struct rfade_json_record record;
        bool more = false;
        enum rfade_status status =
            rfade_json_next(json->records.scanner, &record, &more, error);
        summary->lines = rfade_json_lines(json->records.scanner);
        if (status != RFADE_OK || !more)
            return status;
        status = take_record(json, &record, error);
        if (status != RFADE_OK)
            return status;
    }
}

enum rfade_status
rfade_json_read(struct rfade_line_reader *lines, const struct rfade_column_map *map,
                const struct rfade_ingest_names *names, const struct rfade_sink *sink,
                struct rfade_ingest_summary *summary, struct rfade_error *error)
{
    struct json json = {.level_count = map->level_count};
    enum rfade_status status =
        rfade_json_values_create(map, &json.values, &json.row_values, error);
    if (status == RFADE_OK)
        status = rfade_row_maker_create(map, &json.row_values, names, &json.maker, error);
    if (status == RFADE_OK)
        status = rfade_emitter_create(map, sink, summary, &json.emitter, error);
    if (status == RFADE_OK)
        status = open_records(&json.records, lines, map->file.records, error);
    if (status == RFADE_OK)
        status = read_records(&json, summary, error);
    if (status == RFADE_OK)
        status = rfade_emitter_finish(json.emitter, error);
    close_records(&json.records);
    rfade_emitter_destroy(json.emitter);
    rfade_row_maker_destroy(json.maker);
    rfade_json_values_destroy(json.values);
    return status;
}
