/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/store.h"

#include <stdlib.h>

#include "survey/rows.h"

static enum rfade_status check(const char *name, const struct rfade_route *route,
                               double segment_m, double corridor_m, struct rfade_error *error)
{
    enum { SEGMENTS_MAX = 1000000 };
    enum rfade_status status = rfade_name_check(RFADE_NAMED_ROUTE, name, error);
    if (status != RFADE_OK)
        return status;
    if (!(segment_m >= 1 && segment_m <= 1e6))
        return rfade_error_set(error, RFADE_INPUT, "give --segment-m from 1 to 1000000",
                               "route %s: segments of %g m are impossible", name, segment_m);
    if (!(corridor_m >= 1 && corridor_m <= 1000))
        return rfade_error_set(error, RFADE_INPUT, "give a distance from 1 to 1000 m",
                               "route %s: a corridor of %g m is impossible", name, corridor_m);
    size_t segments = rfade_segment_count(rfade_route_length_m(route), segment_m);
    if (segments > SEGMENTS_MAX)
        return rfade_error_set(error, RFADE_INPUT, "give a larger --segment-m",
                               "route %s would have %zu segments; %d are the most", name,
                               segments, SEGMENTS_MAX);
    return RFADE_OK;
}

static void read_place(sqlite3_stmt *statement, void *row)
{
    struct rfade_place *place = row;
    place->latitude_deg = sqlite3_column_double(statement, 0);
    place->longitude_deg = sqlite3_column_double(statement, 1);
}

static enum rfade_status load_places(struct rfade_survey *survey, int64_t route_id,
                                     struct rfade_place **places, size_t *count,
                                     struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status =
        rfade_rows_query(survey, sizeof **places, read_place, &rows, count, error,
                         "SELECT latitude_deg, longitude_deg FROM route_point "
                         "WHERE route_id = ?1 ORDER BY ordinal",
                         "i", route_id);
    *places = rows;
    return status;
}

/* Whether the survey's route of that id says the same, to the last digit. */
static enum rfade_status compare(struct rfade_survey *survey, int64_t route_id,
                                 const struct rfade_route *route, double segment_m,
                                 double corridor_m, bool *same, struct rfade_error *error)
{
    int64_t ignored = 0;
    struct rfade_place *places = NULL;
    size_t count = 0;
    size_t point_count = 0;
    const struct rfade_route_point *points = rfade_route_points(route, &point_count);
    enum rfade_status status =
        rfade_survey_integer(survey, &ignored, same, error,
                             "SELECT 1 FROM route WHERE route_id = ?1 AND segment_m = ?2 AND "
                             "corridor_m = ?3",
                             "idd", route_id, segment_m, corridor_m);
    if (status == RFADE_OK)
        status = load_places(survey, route_id, &places, &count, error);
    *same = *same && count == point_count;
    for (size_t i = 0; *same && i < count; i++)
        *same = places[i].latitude_deg == points[i].place.latitude_deg &&
                places[i].longitude_deg == points[i].place.longitude_deg;
    free(places);
    return status;
}

static enum rfade_status insert_points(struct rfade_survey *survey, int64_t route_id,
                                       const struct rfade_route *route,
                                       struct rfade_error *error)
{
    size_t count = 0;
    const struct rfade_route_point *points = rfade_route_points(route, &count);
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; status == RFADE_OK && i < count; i++)
        status = rfade_survey_run(survey, error,
                                  "INSERT INTO route_point VALUES (?1, ?2, ?3, ?4, ?5)",
                                  "iiddd", route_id, (int64_t)i, points[i].place.latitude_deg,
                                  points[i].place.longitude_deg, points[i].chainage_m);
    return status;
}

static enum rfade_status insert_segments(struct rfade_survey *survey, int64_t route_id,
                                         double length_m, double segment_m,
                                         struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    size_t count = rfade_segment_count(length_m, segment_m);
    for (size_t number = 1; status == RFADE_OK && number <= count; number++) {
        double from_m = 0;
        double to_m = 0;
        rfade_segment_bounds(length_m, segment_m, number, &from_m, &to_m);
        status = rfade_survey_run(survey, error,
                                  "INSERT INTO segment (route_id, number, from_m, to_m) "
                                  "VALUES (?1, ?2, ?3, ?4)",
                                  "iidd", route_id, (int64_t)number, from_m, to_m);
    }
    return status;
}

static enum rfade_status add_inside(struct rfade_survey *survey, const char *name,
                                    const struct rfade_route *route, double segment_m,
                                    double corridor_m, struct rfade_error *error)
{
    int64_t id = 0;
    bool found = false;
    bool same = false;
    double length_m = rfade_route_length_m(route);
    enum rfade_status status =
        rfade_name_find(survey, RFADE_NAMED_ROUTE, name, &id, &found, error);
    if (status == RFADE_OK && found)
        status = compare(survey, id, route, segment_m, corridor_m, &same, error);
    if (status != RFADE_OK || same)
        return status;
    if (found) {
        rfade_error_set(error, RFADE_CONFLICT, "give the new line another name",
                        "the survey has another route %s already", name);
        rfade_error_at(error, rfade_survey_path(survey), 0);
        return RFADE_CONFLICT;
    }
    status = rfade_survey_run(survey, error,
                              "INSERT INTO route (name, length_m, segment_m, corridor_m) "
                              "VALUES (?1, ?2, ?3, ?4)",
                              "tddd", name, length_m, segment_m, corridor_m);
    if (status != RFADE_OK)
        return status;
    id = sqlite3_last_insert_rowid(rfade_survey_database(survey));
    status = insert_points(survey, id, route, error);
    if (status == RFADE_OK)
        status = insert_segments(survey, id, length_m, segment_m, error);
    if (status == RFADE_OK)
        status = rfade_survey_changed(survey, error);
    return status;
}

enum rfade_status rfade_survey_route_add(struct rfade_survey *survey, const char *name,
                                         const struct rfade_route *route, double segment_m,
                                         double corridor_m, struct rfade_error *error)
{
    enum rfade_status status = check(name, route, segment_m, corridor_m, error);
    if (status != RFADE_OK)
        return status;
    status = rfade_survey_begin(survey, error);
    if (status == RFADE_OK)
        status = add_inside(survey, name, route, segment_m, corridor_m, error);
    if (status == RFADE_OK)
        status = rfade_survey_commit(survey, error);
    rfade_survey_rollback(survey);
    return status;
}

static void read_route(sqlite3_stmt *statement, void *row)
{
    struct rfade_route_row *route = row;
    route->route_id = sqlite3_column_int64(statement, 0);
    rfade_name_copy(route->name, statement, 1);
    route->length_m = sqlite3_column_double(statement, 2);
    route->segment_m = sqlite3_column_double(statement, 3);
    route->corridor_m = sqlite3_column_double(statement, 4);
    route->point_count = sqlite3_column_int64(statement, 5);
    route->segment_count = sqlite3_column_int64(statement, 6);
}

enum rfade_status rfade_survey_routes(struct rfade_survey *survey,
                                      struct rfade_route_row **routes, size_t *count,
                                      struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status = rfade_rows_query(
        survey, sizeof **routes, read_route, &rows, count, error,
        "SELECT route_id, name, length_m, segment_m, corridor_m, "
        "(SELECT count(*) FROM route_point WHERE route_point.route_id = route.route_id), "
        "(SELECT count(*) FROM segment WHERE segment.route_id = route.route_id) "
        "FROM route ORDER BY name",
        "");
    *routes = rows;
    return status;
}

enum rfade_status rfade_survey_route_load(struct rfade_survey *survey, int64_t route_id,
                                          struct rfade_route **route, struct rfade_error *error)
{
    *route = NULL;
    struct rfade_place *places = NULL;
    size_t count = 0;
    enum rfade_status status = load_places(survey, route_id, &places, &count, error);
    if (status == RFADE_OK)
        status = rfade_route_create(places, count, route, error);
    free(places);
    return status;
}

static void read_segment(sqlite3_stmt *statement, void *row)
{
    struct rfade_segment_row *segment = row;
    segment->segment_id = sqlite3_column_int64(statement, 0);
    segment->number = sqlite3_column_int64(statement, 1);
    segment->from_m = sqlite3_column_double(statement, 2);
    segment->to_m = sqlite3_column_double(statement, 3);
}

enum rfade_status rfade_survey_segments(struct rfade_survey *survey, int64_t route_id,
                                        struct rfade_segment_row **segments, size_t *count,
                                        struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status =
        rfade_rows_query(survey, sizeof **segments, read_segment, &rows, count, error,
                         "SELECT segment_id, number, from_m, to_m FROM segment "
                         "WHERE route_id = ?1 ORDER BY number",
                         "i", route_id);
    *segments = rows;
    return status;
}
