/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/position.h"

#include <geodesic.h>
#include <math.h>
#include <proj.h>
#include <stdio.h>
#include <stdlib.h>

static const double degrees_per_radian = 57.295779513082320877;

/* Further from its origin a local system is a mistake: the distance is half a degree. */
static const double most_local_m = 50000;

struct rfade_position_converter {
    const struct rfade_position_map *map;
    struct geod_geodesic ellipsoid; /* local form */
    PJ_CONTEXT *context;            /* grid form */
    PJ *transformation;
    double latitude_deg;
    double longitude_deg;
};

void rfade_position_converter_destroy(struct rfade_position_converter *converter)
{
    if (!converter)
        return;
    proj_destroy(converter->transformation);
    if (converter->context)
        proj_context_destroy(converter->context);
    free(converter);
}

static enum rfade_status no_grid(int epsg, struct rfade_error *error)
{
    return rfade_error_set(error, RFADE_INPUT,
                           "set `epsg` to the code of a projected system in metres, such as "
                           "32633 for UTM zone 33 north",
                           "EPSG:%d is not a grid that can be used", epsg);
}

static bool is_projected(PJ_CONTEXT *context, const char *code)
{
    PJ *system = proj_create(context, code);
    bool projected = system && proj_get_type(system) == PJ_TYPE_PROJECTED_CRS;
    proj_destroy(system);
    return projected;
}

/* From easting, northing to longitude, latitude, whatever the order of the axes in EPSG. */
static enum rfade_status open_grid(struct rfade_position_converter *converter,
                                   struct rfade_error *error)
{
    char code[32];
    (void)snprintf(code, sizeof code, "EPSG:%d", converter->map->epsg);
    converter->context = proj_context_create();
    if (!converter->context)
        return rfade_error_no_memory(error);
    proj_log_level(converter->context, PJ_LOG_NONE);
    (void)proj_context_set_enable_network(converter->context, 0);
    if (!is_projected(converter->context, code))
        return no_grid(converter->map->epsg, error);
    PJ *found = proj_create_crs_to_crs(converter->context, code, "EPSG:4326", NULL);
    if (!found)
        return no_grid(converter->map->epsg, error);
    converter->transformation = proj_normalize_for_visualization(converter->context, found);
    proj_destroy(found);
    return converter->transformation ? RFADE_OK : no_grid(converter->map->epsg, error);
}

enum rfade_status rfade_position_converter_create(const struct rfade_position_map *map,
                                                  struct rfade_position_converter **converter,
                                                  struct rfade_error *error)
{
    *converter = NULL;
    struct rfade_position_converter *made = calloc(1, sizeof *made);
    if (!made)
        return rfade_error_no_memory(error);
    made->map = map;
    geod_init(&made->ellipsoid, 6378137, 1 / 298.257223563); /* WGS 84 */
    enum rfade_status status =
        map->form == RFADE_POSITION_GRID ? open_grid(made, error) : RFADE_OK;
    if (status == RFADE_OK)
        *converter = made;
    else
        rfade_position_converter_destroy(made);
    return status;
}

static void from_grid(struct rfade_position_converter *converter, double easting,
                      double northing)
{
    PJ_COORD from = proj_coord(easting, northing, 0, 0);
    PJ_COORD to = proj_trans(converter->transformation, PJ_FWD, from);
    converter->longitude_deg = to.xy.x;
    converter->latitude_deg = to.xy.y;
    if (proj_errno_reset(converter->transformation) != 0)
        converter->latitude_deg = NAN;
}

static void from_origin(struct rfade_position_converter *converter, double east_m,
                        double north_m)
{
    double azimuth_deg = atan2(east_m, north_m) * degrees_per_radian;
    double distance_m = hypot(east_m, north_m);
    converter->latitude_deg = NAN;
    if (distance_m <= most_local_m)
        geod_direct(&converter->ellipsoid, converter->map->latitude_deg,
                    converter->map->longitude_deg, azimuth_deg, distance_m,
                    &converter->latitude_deg, &converter->longitude_deg, NULL);
}

static void convert(struct rfade_position_converter *converter, double first, double second)
{
    const struct rfade_position_map *map = converter->map;
    switch (map->form) {
    case RFADE_POSITION_GRID:
        from_grid(converter, first, second);
        break;
    case RFADE_POSITION_LOCAL:
        from_origin(converter, first, second);
        break;
    case RFADE_POSITION_FIXED:
        converter->latitude_deg = map->latitude_deg;
        converter->longitude_deg = map->longitude_deg;
        break;
    case RFADE_POSITION_DEGREES:
    case RFADE_POSITION_NONE:
        converter->latitude_deg = first;
        converter->longitude_deg = second;
        break;
    }
}

const char *rfade_position_convert(struct rfade_position_converter *converter, double first,
                                   double second, double *latitude_deg, double *longitude_deg)
{
    convert(converter, first, second);
    if (converter->longitude_deg == 180)
        converter->longitude_deg = -180;
    bool valid = converter->latitude_deg >= -90 && converter->latitude_deg <= 90 &&
                 converter->longitude_deg >= -180 && converter->longitude_deg < 180;
    *latitude_deg = valid ? converter->latitude_deg : NAN;
    *longitude_deg = valid ? converter->longitude_deg : NAN;
    return valid ? NULL : "is no place on the earth";
}
