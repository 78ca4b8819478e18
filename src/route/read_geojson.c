/* SPDX-License-Identifier: GPL-3.0-or-later */
/* RFC 7946. SQLite's JSON functions do the reading, in a database in memory; the file's text is
 * only ever a bound value. */
#include <sqlite3.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "route/read_line_text.h"

static const char *const remedy =
    "give one LineString, or a Feature or FeatureCollection that holds one and nothing else";

static sqlite3_stmt *prepare(sqlite3 *database, const char *sql, const char *text, size_t size)
{
    sqlite3_stmt *statement = NULL;
    if (sqlite3_prepare_v2(database, sql, -1, &statement, NULL) != SQLITE_OK ||
        sqlite3_bind_text64(statement, 1, text, size, SQLITE_STATIC, SQLITE_UTF8) !=
            SQLITE_OK) {
        sqlite3_finalize(statement);
        return NULL;
    }
    return statement;
}

/* One text answer, cut to the buffer; "" for NULL. False if SQLite failed. */
static bool ask(sqlite3 *database, const char *sql, const char *text, size_t size,
                char answer[128])
{
    answer[0] = '\0';
    sqlite3_stmt *statement = prepare(database, sql, text, size);
    bool answered = statement && sqlite3_step(statement) == SQLITE_ROW;
    if (answered) {
        const unsigned char *column = sqlite3_column_text(statement, 0);
        (void)snprintf(answer, 128, "%s", column ? (const char *)column : "");
    }
    sqlite3_finalize(statement);
    return answered;
}

static enum rfade_status refuse(struct rfade_error *error, const char *what, const char *detail)
{
    return rfade_error_set(error, RFADE_INPUT, remedy, "%s%s", what, detail);
}

/* Only the whole world's longitude and latitude: an old file may name another system. */
static enum rfade_status check_reference_system(sqlite3 *database, const char *text,
                                                size_t size, struct rfade_error *error)
{
    char name[128];
    if (!ask(database, "SELECT coalesce(json_extract(?1, '$.crs.properties.name'), '')", text,
             size, name) ||
        name[0] == '\0' || strstr(name, "CRS84") || strstr(name, "4326"))
        return RFADE_OK;
    return rfade_error_set(error, RFADE_INPUT, "export it again as WGS 84 (EPSG:4326)",
                           "the coordinates are in another reference system: %s", name);
}

/* Where the LineString's coordinates stand in the file. */
static enum rfade_status find_coordinates(sqlite3 *database, const char *text, size_t size,
                                          const char **path, struct rfade_error *error)
{
    char type[128];
    char features[128];
    if (!ask(database, "SELECT json_valid(?1)", text, size, type) || strcmp(type, "1") != 0)
        return refuse(error, "the file is not valid JSON", "");
    if (!ask(database, "SELECT json_extract(?1, '$.type')", text, size, type))
        return refuse(error, "the file is not GeoJSON", "");
    *path = "$.coordinates";
    if (strcmp(type, "FeatureCollection") == 0) {
        if (!ask(database, "SELECT coalesce(json_array_length(?1, '$.features'), 0)", text,
                 size, features) ||
            strcmp(features, "1") != 0)
            return refuse(error,
                          "the file holds another number of features than one: ", features);
        *path = "$.features[0].geometry.coordinates";
        (void)ask(database, "SELECT json_extract(?1, '$.features[0].geometry.type')", text,
                  size, type);
    } else if (strcmp(type, "Feature") == 0) {
        *path = "$.geometry.coordinates";
        (void)ask(database, "SELECT json_extract(?1, '$.geometry.type')", text, size, type);
    }
    if (type[0] == '\0')
        return refuse(error, "the file is not GeoJSON: no geometry has a type", "");
    if (strcmp(type, "LineString") != 0)
        return refuse(error, "the file holds no LineString, but a ", type);
    return check_reference_system(database, text, size, error);
}

static bool is_number(sqlite3_stmt *statement, int column)
{
    const char *type = (const char *)sqlite3_column_text(statement, column);
    return type && (strcmp(type, "integer") == 0 || strcmp(type, "real") == 0);
}

static enum rfade_status read_coordinates(sqlite3 *database, const char *text, size_t size,
                                          const char *path, struct rfade_place_list *places,
                                          struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    /* The CASE keeps json_extract off what is no array. */
    sqlite3_stmt *statement =
        prepare(database,
                "SELECT json_type(pair, '$[0]'), json_type(pair, '$[1]'), "
                "json_extract(pair, '$[0]'), json_extract(pair, '$[1]') FROM "
                "(SELECT CASE type WHEN 'array' THEN value ELSE '[]' END AS pair "
                "FROM json_each(?1, ?2) ORDER BY id)",
                text, size);
    if (!statement || sqlite3_bind_text(statement, 2, path, -1, SQLITE_STATIC) != SQLITE_OK) {
        sqlite3_finalize(statement);
        return rfade_error_no_memory(error);
    }
    int code = SQLITE_DONE;
    while (status == RFADE_OK && (code = sqlite3_step(statement)) == SQLITE_ROW) {
        struct rfade_place place = {.latitude_deg = sqlite3_column_double(statement, 3),
                                    .longitude_deg = sqlite3_column_double(statement, 2)};
        char what[128];
        (void)snprintf(what, sizeof what, "position %zu is not two numbers", places->count + 1);
        status =
            is_number(statement, 0) && is_number(statement, 1)
                ? rfade_place_list_add(places, &place,
                                       "GeoJSON wants longitude first, then latitude, in "
                                       "degrees on WGS 84",
                                       error)
                : rfade_error_set(error, RFADE_INPUT,
                                  "give each position as [longitude, latitude]", "%s", what);
    }
    sqlite3_finalize(statement);
    if (status == RFADE_OK && code != SQLITE_DONE)
        status = refuse(error, "the coordinates can't be read", "");
    return status;
}

enum rfade_status rfade_line_from_geojson(const char *name, const char *text, size_t size,
                                          struct rfade_place **places, size_t *count,
                                          struct rfade_error *error)
{
    struct rfade_place_list list = {0};
    const char *path = NULL;
    sqlite3 *database = NULL;
    enum rfade_status status;
    if (sqlite3_open_v2(":memory:", &database, SQLITE_OPEN_READWRITE | SQLITE_OPEN_NOMUTEX,
                        NULL) != SQLITE_OK)
        status = rfade_error_no_memory(error);
    else
        status = find_coordinates(database, text, size, &path, error);
    if (status == RFADE_OK)
        status = read_coordinates(database, text, size, path, &list, error);
    (void)sqlite3_close(database);
    if (status != RFADE_OK)
        rfade_error_at(error, name, 0);
    *places = list.all;
    *count = list.count;
    return status;
}
