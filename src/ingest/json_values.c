/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/json_values.h"

#include <sqlite3.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ingest/json_path.h"

/* "$." and the name. */
enum { PATH_SIZE = RFADE_NAME_SIZE + 2 };

/* A text without its quotes; -> gives a number as it is written, every digit of it. */
static const char column_sql[] = "%sCASE json_type(?1, ?%zu) WHEN 'text' THEN json_extract(?1, "
                                 "?%zu) WHEN 'null' THEN NULL ELSE ?1 -> ?%zu END";
enum { COLUMN_SQL_SIZE = 160 };

struct rfade_json_values {
    sqlite3 *database;
    sqlite3_stmt *statement;
    size_t count; /* of columns */
    size_t present;
    struct rfade_field fields[RFADE_MOST_ROLES];
};

static void make_path(const char *name, char path[PATH_SIZE])
{
    (void)snprintf(path, PATH_SIZE, "%s%s", name[0] == '$' ? "" : "$.", name);
}

static sqlite3 *open_memory(void)
{
    sqlite3 *database = NULL;
    if (sqlite3_open_v2(":memory:", &database, SQLITE_OPEN_READWRITE | SQLITE_OPEN_NOMUTEX,
                        NULL) == SQLITE_OK)
        return database;
    (void)sqlite3_close(database);
    return NULL;
}

bool rfade_json_column_valid(const char *name)
{
    char path[PATH_SIZE];
    make_path(name, path);
    return rfade_json_path_is_value(path);
}

void rfade_json_values_destroy(struct rfade_json_values *values)
{
    if (!values)
        return;
    sqlite3_finalize(values->statement);
    (void)sqlite3_close(values->database);
    free(values);
}

static bool prepare(struct rfade_json_values *values)
{
    char *sql = malloc(16 + values->count * COLUMN_SQL_SIZE);
    if (!sql)
        return false;
    size_t used = (size_t)sprintf(sql, "SELECT ");
    for (size_t i = 0; i < values->count; i++)
        used += (size_t)snprintf(sql + used, COLUMN_SQL_SIZE, column_sql, i ? ", " : "", i + 2,
                                 i + 2, i + 2);
    bool prepared = sqlite3_prepare_v2(values->database, sql, (int)used, &values->statement,
                                       NULL) == SQLITE_OK;
    free(sql);
    return prepared;
}

enum rfade_status rfade_json_values_create(const struct rfade_column_map *map,
                                           struct rfade_json_values **values,
                                           struct rfade_row_values *row_values,
                                           struct rfade_error *error)
{
    *row_values = (struct rfade_row_values){0};
    *values = calloc(1, sizeof **values);
    struct rfade_json_values *made = *values;
    bool good = made && (made->database = open_memory());
    size_t roles = RFADE_ROLE_LEVELS + 2 * map->level_count;
    for (size_t role = 0; good && role < roles; role++)
        if (rfade_column_given(rfade_map_column(map, role)))
            row_values->by_role[role] = &made->fields[made->count++];
    good = good && prepare(made);
    int parameter = 2; /* the first is the record */
    for (size_t role = 0; good && role < roles; role++) {
        char path[PATH_SIZE];
        if (!row_values->by_role[role])
            continue;
        make_path(rfade_map_column(map, role)->name, path);
        good = sqlite3_bind_text(made->statement, parameter++, path, -1, SQLITE_TRANSIENT) ==
               SQLITE_OK;
    }
    if (good)
        return RFADE_OK;
    rfade_json_values_destroy(made);
    *values = NULL;
    return rfade_error_no_memory(error);
}

static void keep_field(struct rfade_field *field, const char *text, size_t size)
{
    field->cut = size >= sizeof field->text;
    field->size = field->cut ? sizeof field->text - 1 : size;
    if (field->size > 0)
        memcpy(field->text, text, field->size);
    field->text[field->size] = '\0';
}

const char *rfade_json_values_read(struct rfade_json_values *values, const char *record,
                                   size_t size)
{
    sqlite3_stmt *statement = values->statement;
    const char *reason = NULL;
    values->present = 0;
    if (sqlite3_bind_text(statement, 1, record, (int)size, SQLITE_STATIC) != SQLITE_OK)
        return "the record found no memory";
    int code = sqlite3_step(statement);
    if (code != SQLITE_ROW)
        reason = code == SQLITE_NOMEM ? "the record found no memory"
                                      : "the record is not valid JSON";
    for (size_t i = 0; !reason && i < values->count; i++) {
        const unsigned char *text = sqlite3_column_text(statement, (int)i);
        size_t length = (size_t)sqlite3_column_bytes(statement, (int)i);
        keep_field(&values->fields[i], (const char *)text, text ? length : 0);
        values->present += length > 0;
    }
    (void)sqlite3_reset(statement);
    (void)sqlite3_bind_null(statement, 1);
    return reason;
}

size_t rfade_json_values_present(const struct rfade_json_values *values)
{
    return values->present;
}

static bool has_name(const struct rfade_header *header, const char *name)
{
    for (size_t i = 0; i < header->count; i++)
        if (strcmp(header->names[i], name) == 0)
            return true;
    return false;
}

/* Names that no path can hold, or that are too long, can't be columns. */
static void add_name(struct rfade_header *header, const char *name)
{
    if (!name || strlen(name) + 4 >= RFADE_NAME_SIZE || strchr(name, '"') ||
        header->count == RFADE_MOST_COLUMNS || has_name(header, name))
        return;
    (void)snprintf(header->names[header->count++], RFADE_NAME_SIZE, "%s", name);
}

bool rfade_json_names(const char *record, size_t size, struct rfade_header *header)
{
    sqlite3_stmt *statement = NULL;
    sqlite3 *database = open_memory();
    int code = SQLITE_NOMEM;
    if (database &&
        sqlite3_prepare_v2(database,
                           "SELECT key FROM json_each(CASE json_type(?1) WHEN 'object' THEN ?1 "
                           "ELSE '{}' END)",
                           -1, &statement, NULL) == SQLITE_OK &&
        sqlite3_bind_text(statement, 1, record, (int)size, SQLITE_STATIC) == SQLITE_OK)
        while ((code = sqlite3_step(statement)) == SQLITE_ROW)
            add_name(header, (const char *)sqlite3_column_text(statement, 0));
    sqlite3_finalize(statement);
    (void)sqlite3_close(database);
    return code != SQLITE_NOMEM;
}
