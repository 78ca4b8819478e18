/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "route/route.h"

#include <stdlib.h>
#include <string.h>

#include "cli/command.h"
#include "route/driven_line.h"
#include "route/read_line.h"
#include "survey/read.h"
#include "survey/store.h"

struct route_options {
    const char *from_vehicle;
    double segment_m, corridor_m;
};

static const struct route_options defaults = {.segment_m = 100, .corridor_m = 30};

/* A vehicle's own track is drawn as a line that no position leaves by more than this. */
static const double track_tolerance_m = 3;

#define TARGET(member) offsetof(struct route_options, member)

static const struct rfade_option options[] = {
    {"from-vehicle", "NAME", RFADE_OPTION_TEXT, TARGET(from_vehicle), 0, 0, NULL,
     "instead of FILE: the longest drive of this vehicle in the survey"},
    {"segment-m", "M", RFADE_OPTION_NUMBER, TARGET(segment_m), 1, 1e6, NULL,
     "length of the segments, default 100"},
    {"corridor-m", "M", RFADE_OPTION_NUMBER, TARGET(corridor_m), 1, 1000, NULL,
     "positions further off the line are not on the route, default 30"},
};

static const struct rfade_column columns[] = {
    {"route", RFADE_COLUMN_TEXT, 0, false, false},
    {"length_m", RFADE_COLUMN_NUMBER, 1, false, false},
    {"segment_m", RFADE_COLUMN_NUMBER, 1, false, false},
    {"corridor_m", RFADE_COLUMN_NUMBER, 1, false, false},
    {"points", RFADE_COLUMN_INTEGER, 0, false, false},
    {"segments", RFADE_COLUMN_INTEGER, 0, false, false},
};
enum { COLUMNS = sizeof columns / sizeof columns[0] };

static enum rfade_status write_routes(const struct rfade_run *run,
                                      const struct rfade_route_row *routes, size_t count,
                                      const char *name, struct rfade_error *error)
{
    struct rfade_rows *rows = NULL;
    enum rfade_status status = rfade_rows_begin(run->common->format, run->output, NULL, columns,
                                                COLUMNS, &rows, error);
    for (size_t i = 0; status == RFADE_OK && i < count; i++) {
        if (name && strcmp(name, routes[i].name) != 0)
            continue;
        const struct rfade_value values[COLUMNS] = {
            rfade_value_text(routes[i].name),
            rfade_value_number(routes[i].length_m),
            rfade_value_number(routes[i].segment_m),
            rfade_value_number(routes[i].corridor_m),
            rfade_value_integer(routes[i].point_count),
            rfade_value_integer(routes[i].segment_count),
        };
        status = rfade_rows_row(rows, values, error);
    }
    if (status == RFADE_OK)
        status = rfade_rows_end(rows, error);
    rfade_rows_destroy(rows);
    return status;
}

/* All routes, or the one of that name. */
static enum rfade_status list_routes(const struct rfade_run *run, struct rfade_survey *survey,
                                     const char *name, struct rfade_error *error)
{
    struct rfade_route_row *routes = NULL;
    size_t count = 0;
    int64_t id = 0;
    enum rfade_status status = RFADE_OK;
    if (name)
        status = rfade_name_require(survey, RFADE_NAMED_ROUTE, name, &id, error);
    if (status == RFADE_OK)
        status = rfade_survey_routes(survey, &routes, &count, error);
    if (status == RFADE_OK)
        status = write_routes(run, routes, count, name, error);
    free(routes);
    return status;
}

/* The line that a vehicle drove, from its fixes. */
static enum rfade_status driven_places(struct rfade_survey *survey, const char *vehicle,
                                       struct rfade_place **places, size_t *place_count,
                                       struct rfade_error *error)
{
    struct rfade_position *positions = NULL;
    size_t count = 0;
    int64_t id = 0;
    enum rfade_status status =
        rfade_name_require(survey, RFADE_NAMED_VEHICLE, vehicle, &id, error);
    if (status == RFADE_OK)
        status =
            rfade_survey_fixes(survey, id, INT64_MIN, INT64_MAX, &positions, &count, error);
    if (status == RFADE_OK)
        status =
            rfade_driven_line(positions, count, track_tolerance_m, places, place_count, error);
    free(positions);
    return status;
}

static enum rfade_status add_route(const struct rfade_run *run, struct rfade_survey *survey,
                                   const char *name, const struct rfade_place *places,
                                   size_t count, struct rfade_error *error)
{
    const struct route_options *given = run->options;
    struct rfade_route *route = NULL;
    enum rfade_status status = rfade_route_create(places, count, &route, error);
    if (status == RFADE_OK)
        status = rfade_survey_route_add(survey, name, route, given->segment_m,
                                        given->corridor_m, error);
    rfade_route_destroy(route);
    return status;
}

static enum rfade_status route_from_file(const struct rfade_run *run, const char *name,
                                         const char *path, struct rfade_error *error)
{
    struct rfade_place *places = NULL;
    struct rfade_survey *survey = NULL;
    size_t count = 0;
    enum rfade_status status = rfade_read_line(path, &places, &count, error);
    if (status == RFADE_OK)
        status = rfade_survey_open(run->common->survey, RFADE_SURVEY_CREATE, &survey, error);
    if (status == RFADE_OK)
        status = add_route(run, survey, name, places, count, error);
    rfade_survey_close(survey);
    free(places);
    return status;
}

static enum rfade_status route_from_vehicle(const struct rfade_run *run, const char *name,
                                            struct rfade_error *error)
{
    const struct route_options *given = run->options;
    struct rfade_place *places = NULL;
    struct rfade_survey *survey = NULL;
    size_t count = 0;
    enum rfade_status status =
        rfade_survey_open(run->common->survey, RFADE_SURVEY_WRITE, &survey, error);
    if (status == RFADE_OK)
        status = driven_places(survey, given->from_vehicle, &places, &count, error);
    if (status == RFADE_OK)
        status = add_route(run, survey, name, places, count, error);
    rfade_survey_close(survey);
    free(places);
    return status;
}

static enum rfade_status run_route(struct rfade_run *run, struct rfade_error *error)
{
    const struct route_options *given = run->options;
    const struct rfade_texts *arguments = &run->arguments;
    const char *name = arguments->count > 0 ? arguments->items[0] : NULL;
    const char *path = arguments->count > 1 ? arguments->items[1] : NULL;
    struct rfade_survey *survey = NULL;
    enum rfade_status status = RFADE_OK;
    if (given->from_vehicle && path)
        return rfade_usage(error, &rfade_command_route,
                           "give a FILE or --from-vehicle, not both");
    if (given->from_vehicle && !name)
        return rfade_usage(error, &rfade_command_route,
                           "--from-vehicle needs the route's NAME");
    bool adding = given->from_vehicle || path;
    bool told =
        given->segment_m != defaults.segment_m || given->corridor_m != defaults.corridor_m;
    if (!adding && told)
        return rfade_usage(error, &rfade_command_route,
                           "a new route needs NAME and FILE, or NAME and --from-vehicle");
    if (adding)
        status = rfade_name_check(RFADE_NAMED_ROUTE, name, error);
    if (status != RFADE_OK)
        return status;
    if (path)
        return route_from_file(run, name, path, error);
    if (adding)
        return route_from_vehicle(run, name, error);
    status = rfade_survey_open(run->common->survey, RFADE_SURVEY_READ, &survey, error);
    if (status == RFADE_OK)
        status = list_routes(run, survey, name, error);
    rfade_survey_close(survey);
    return status;
}

const struct rfade_command rfade_command_route = {
    .name = "route",
    .arguments = "[NAME [FILE]]",
    .summary = "add a reference line cut into segments; without FILE, list routes",
    .details =
        "FILE is a GeoJSON LineString, a GPX track or route, or text with a latitude and a "
        "longitude a line.",
    .arguments_max = 2,
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_route,
};
