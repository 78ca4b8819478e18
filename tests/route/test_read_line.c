/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "drive.h"

#include <stdio.h>
#include <string.h>
#include <unistd.h>

#include "route/driven_line.h"
#include "route/read_line.h"

static char path[64];

static int make_path(void **state)
{
    (void)state;
    (void)snprintf(path, sizeof path, "/tmp/rfade_line_XXXXXX");
    int file = mkstemp(path);
    if (file < 0)
        return -1;
    return close(file);
}

static int remove_path(void **state)
{
    (void)state;
    return unlink(path);
}

static enum rfade_status read_bytes(const char *text, size_t size, struct rfade_place **places,
                                    size_t *count, struct rfade_error *error)
{
    FILE *file = fopen(path, "wbe");
    assert_non_null(file);
    assert_int_equal(fwrite(text, 1, size, file), size);
    assert_int_equal(fclose(file), 0);
    *error = (struct rfade_error){0};
    return rfade_read_line(path, places, count, error);
}

static void lines_of_text_are_read(void **state)
{
    (void)state;
    /* All of these say the same two places. */
    static const char *const texts[] = {
        "51.25,7.5\n-33.125,-70.0625\n",
        "51.25,7.5\r\n-33.125,-70.0625",
        "\xEF\xBB\xBFlatitude,longitude\n51.25,7.5\n-33.125,-70.0625\n",
        "# Marrowfen road 3\n\nlat,lon\n51.25,7.5\n# a bend\n\n-33.125,-70.0625\n",
        "name;LNG;height;Lat\nA;7,5;12;51,25\nB;-70,0625;13;-33,125\n",
        "51,25\t7,5\n-33,125\t-70,0625\n",
        "\"51.25\",\"7.5\",first\n\"-33.125\",\"-70.0625\",second\n",
        " 51.25 , 7.5\n -33.125, -70.0625\n",
    };
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++) {
        struct rfade_place *places = NULL;
        size_t count = 0;
        struct rfade_error error;
        if (read_bytes(texts[i], strlen(texts[i]), &places, &count, &error) != RFADE_OK)
            fail_msg("text %zu: %s", i, error.what);
        assert_int_equal(count, 2);
        assert_true(places[0].latitude_deg == 51.25 && places[0].longitude_deg == 7.5);
        assert_true(places[1].latitude_deg == -33.125 && places[1].longitude_deg == -70.0625);
        free(places);
    }
}

static void geojson_lines_are_read(void **state)
{
    (void)state;
#define LINE "{\"type\":\"LineString\",\"coordinates\":[[7.5,51.25],[-70.0625,-33.125,612.5]]}"
    static const char *const texts[] = {
        LINE,
        "\xEF\xBB\xBF\n" LINE "\n",
        "{\"type\":\"Feature\",\"properties\":{\"name\":\"'); DROP TABLE route; --\"},"
        "\"geometry\":" LINE "}",
        "{\"type\":\"FeatureCollection\",\"crs\":{\"type\":\"name\",\"properties\":{\"name\":"
        "\"urn:ogc:def:crs:OGC:1.3:CRS84\"}},\"features\":[{\"type\":\"Feature\","
        "\"properties\":null,\"geometry\":" LINE "}]}",
    };
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++) {
        struct rfade_place *places = NULL;
        size_t count = 0;
        struct rfade_error error;
        if (read_bytes(texts[i], strlen(texts[i]), &places, &count, &error) != RFADE_OK)
            fail_msg("text %zu: %s", i, error.what);
        assert_int_equal(count, 2);
        assert_true(places[0].latitude_deg == 51.25 && places[0].longitude_deg == 7.5);
        assert_true(places[1].latitude_deg == -33.125 && places[1].longitude_deg == -70.0625);
        free(places);
    }
}

#define TRACK_POINT(latitude, longitude)                                                       \
    "<trkpt lat=\"" latitude "\" lon=\"" longitude "\"><ele>3</ele></trkpt>"
#define ROUTE_POINT(latitude, longitude) "<rtept lat='" latitude "' lon='" longitude "'/>"

static void gpx_lines_are_read(void **state)
{
    (void)state;
    static const char *const texts[] = {
        "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n<gpx version=\"1.1\" "
        "xmlns=\"http://www.topografix.com/GPX/1/1\"><wpt lat=\"1\" lon=\"2\"/>"
        "<rte>" ROUTE_POINT("1", "2") "</rte><trk><trkseg>" TRACK_POINT(
            "51.25", "7.5") "</trkseg><trkseg>" TRACK_POINT("-33.125",
                                                            "-70.0625") "</trkseg></trk></gpx>",
        "\xEF\xBB\xBF<g:gpx xmlns:g='http://www.topografix.com/GPX/1/1'><g:rte>"
        "<g:rtept lat='51.25' lon='7.5'/><g:rtept lat='-33.125' lon='-70.0625'/>"
        "</g:rte></g:gpx>",
    };
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++) {
        struct rfade_place *places = NULL;
        size_t count = 0;
        struct rfade_error error;
        if (read_bytes(texts[i], strlen(texts[i]), &places, &count, &error) != RFADE_OK)
            fail_msg("text %zu: %s", i, error.what);
        assert_int_equal(count, 2);
        assert_true(places[0].latitude_deg == 51.25 && places[0].longitude_deg == 7.5);
        assert_true(places[1].latitude_deg == -33.125 && places[1].longitude_deg == -70.0625);
        free(places);
    }
}

static void what_is_no_line_is_refused(void **state)
{
    (void)state;
#define FEATURE "{\"type\":\"Feature\",\"properties\":{},\"geometry\":" LINE "}"
    static const struct {
        const char *text;
        size_t line;
        const char *says;
    } cases[] = {
        {"", 0, "empty"},
        {" \n\n", 0, "empty"},
        {"51.25,7.5\n", 0, "fewer than two"},
        {"lat,lon\n", 0, "fewer than two"},
        {"51.25,7.5\n51.3\n", 2, "too few columns"},
        {"51.25,7.5\n51.3,east\n", 2, "'51.3' and 'east'"},
        {"lat,lon\n51.25,7.5\n\n91,7\n", 4, "no place on earth"},
        {"51.25,7.5\n51,180.5\n", 2, "no place on earth"},
        {"51.25,7.5\nnan,7\n", 2, "not a latitude"},
        {"0x33,7.5\n51,7\n", 1, "not a latitude"},
        {"x,y\n51,7\n52,7\n", 1, "'x' and 'y'"},
        {"<?xml version=\"1.0\"?><gpx/>", 0, "fewer than two"},
        {"<kml>\n</kml>", 1, "no GPX"},
        {"<gpx>\n<trk><trkseg>" TRACK_POINT("51", "7"), 2, "cut off"},
        {"<gpx><trk><trkseg>\n" TRACK_POINT("51", "7") TRACK_POINT("east", "7"), 2,
         "no place on earth"},
        {"<gpx><trk>" TRACK_POINT("51", "7") "</trk>\n<trk>" TRACK_POINT("52", "7"), 2,
         "several tracks"},
        {"<gpx><rte>" ROUTE_POINT("51", "7") "</rte><rte>" ROUTE_POINT("52", "7"), 1,
         "several routes"},
        {"<!DOCTYPE gpx [<!ENTITY a \"aaaa\"><!ENTITY b \"&a;&a;\">]>\n<gpx>&b;</gpx>", 1,
         "document type declaration"},
        {"{\"type\":\"LineString\",\"coordinates\":[[7,51],[8,52]", 0, "not valid JSON"},
        {"{}", 0, "no geometry has a type"},
        {"[1,2]", 0, "no geometry has a type"},
        {"{\"type\":\"Point\",\"coordinates\":[7,51]}", 0, "but a Point"},
        {"{\"type\":\"MultiLineString\",\"coordinates\":[[[7,51],[8,52]]]}", 0,
         "but a MultiLineString"},
        {"{\"type\":\"Polygon\",\"coordinates\":[[[7,51],[8,52],[7,51]]]}", 0, "but a Polygon"},
        {"{\"type\":\"GeometryCollection\",\"geometries\":[" LINE "]}", 0,
         "but a GeometryCollection"},
        {"{\"type\":\"FeatureCollection\",\"features\":[" FEATURE "," FEATURE "]}", 0,
         "than one: 2"},
        {"{\"type\":\"FeatureCollection\",\"features\":[]}", 0, "than one: 0"},
        {"{\"type\":\"FeatureCollection\"}", 0, "than one: 0"},
        {"{\"type\":\"Feature\",\"properties\":{},\"geometry\":null}", 0, "no geometry"},
        {"{\"type\":\"LineString\",\"coordinates\":[[7,51],[8]]}", 0, "position 2"},
        {"{\"type\":\"LineString\",\"coordinates\":[[7,51],[\"8\",52]]}", 0, "position 2"},
        {"{\"type\":\"LineString\",\"coordinates\":[[7,51],null]}", 0, "position 2"},
        {"{\"type\":\"LineString\",\"coordinates\":[[7,51],\"x\"]}", 0, "position 2"},
        {"{\"type\":\"LineString\",\"coordinates\":[[51,7],[7,151]]}", 0, "no place on earth"},
        {"{\"type\":\"LineString\",\"coordinates\":[]}", 0, "fewer than two"},
        {"{\"type\":\"LineString\"}", 0, "fewer than two"},
        {"{\"type\":\"LineString\",\"crs\":{\"type\":\"name\",\"properties\":{\"name\":"
         "\"EPSG:25832\"}},\"coordinates\":[[7,51],[8,52]]}",
         0, "EPSG:25832"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_place *places = NULL;
        size_t count = 0;
        struct rfade_error error;
        if (read_bytes(cases[i].text, strlen(cases[i].text), &places, &count, &error) !=
            RFADE_INPUT)
            fail_msg("case %zu was not refused: %s", i, cases[i].text);
        if (!strstr(error.what, cases[i].says) || error.line != cases[i].line)
            fail_msg("case %zu, line %zu: %s", i, error.line, error.what);
        assert_string_equal(error.file, path);
        assert_true(error.remedy[0] != '\0');
        assert_null(places);
        assert_int_equal(count, 0);
    }
}

static void what_is_no_text_file_is_refused(void **state)
{
    (void)state;
    struct rfade_place *places = NULL;
    size_t count = 0;
    struct rfade_error error = {0};
    assert_int_equal(read_bytes("51,7\n\0,7\n", 9, &places, &count, &error), RFADE_INPUT);
    assert_int_equal(rfade_read_line("/tmp", &places, &count, &error), RFADE_STORAGE);
    assert_int_equal(rfade_read_line("/dev/null", &places, &count, &error), RFADE_STORAGE);
    assert_int_equal(rfade_read_line("/no/such.csv", &places, &count, &error), RFADE_STORAGE);
    assert_string_equal(error.file, "/no/such.csv");
    assert_true(error.remedy[0] != '\0');
}

/* A vehicle's own track with a standstill becomes a line close to the road, as long as it. */
static void a_driven_line_follows_the_road(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {2000, 0}, {2800, 900}, {2800, 2500}};
    struct drive *drive = drive_new(route_of(points, 4), 5, false);
    double length_m = rfade_route_length_m(drive->route);
    int t = 0;
    for (int at_m = 0; at_m < length_m; at_m += 10) {
        drive_fix(drive, t++, at_m, 10);
        for (int i = 0; at_m == 1500 && i < 300; i++)
            drive_fix(drive, t++, at_m, 0);
    }
    struct rfade_place *places = NULL;
    size_t count = 0;
    struct rfade_error error = {0};
    assert_int_equal(
        rfade_driven_line(drive->positions, drive->count, 5, &places, &count, &error),
        RFADE_OK);
    struct rfade_route *driven = NULL;
    assert_int_equal(rfade_route_create(places, count, &driven, &error), RFADE_OK);
    print_message("%zu places, %.1f m of %.1f m\n", count, rfade_route_length_m(driven),
                  length_m);
    assert_true(fabs(rfade_route_length_m(driven) / length_m - 1) < 0.01);
    assert_true(count < 40);
    /* Every place of it lies near the road. */
    for (size_t i = 0; i < count; i++)
        drive->positions[i] = (struct rfade_position){.time_us = (int64_t)i * 59000000,
                                                      .latitude_deg = places[i].latitude_deg,
                                                      .longitude_deg = places[i].longitude_deg,
                                                      .speed_m_s = NAN};
    drive->count = count;
    drive_match(drive);
    for (size_t i = 0; i < count; i++)
        assert_true(drive->matches[i].matched && drive->matches[i].offset_m < 12);
    free(places);
    rfade_route_destroy(driven);
    drive_free(drive);
}

static void the_longest_drive_is_taken(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {5000, 0}};
    struct drive *drive = drive_new(route_of(points, 2), 0, false);
    for (int i = 0; i < 20; i++)
        drive_fix(drive, i, 10.0 * i, 10);
    for (int i = 0; i < 200; i++)
        drive_fix(drive, 1000 + i, 1000 + 10.0 * i, 10);
    for (int i = 0; i < 30; i++)
        drive_fix(drive, 9000 + i, 4000 + 10.0 * i, 10);
    struct rfade_place *places = NULL;
    size_t count = 0;
    struct rfade_error error = {0};
    assert_int_equal(
        rfade_driven_line(drive->positions, drive->count, 1, &places, &count, &error),
        RFADE_OK);
    assert_int_equal(count, 2); /* a straight road */
    struct rfade_place first = at_metres(1000, 0);
    double azimuth_deg = NAN;
    assert_true(rfade_geodesic(&places[0], &first, &azimuth_deg) < 1);
    assert_true(fabs(rfade_geodesic(&places[0], &places[1], &azimuth_deg) - 1990) < 1);
    free(places);
    drive_free(drive);
}

static void a_vehicle_that_stood_gives_no_line(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {5000, 0}};
    struct drive *drive = drive_new(route_of(points, 2), 5, false);
    for (int i = 0; i < 300; i++)
        drive_fix(drive, i, 1000, 0);
    struct rfade_place *places = NULL;
    size_t count = 0;
    struct rfade_error error = {0};
    assert_int_equal(
        rfade_driven_line(drive->positions, drive->count, 1, &places, &count, &error),
        RFADE_NO_DATA);
    assert_int_equal(rfade_driven_line(drive->positions, 0, 1, &places, &count, &error),
                     RFADE_NO_DATA);
    assert_int_equal(
        rfade_driven_line(drive->positions, drive->count, 0, &places, &count, &error),
        RFADE_DOMAIN);
    assert_null(places);
    drive_free(drive);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(lines_of_text_are_read),
        cmocka_unit_test(geojson_lines_are_read),
        cmocka_unit_test(gpx_lines_are_read),
        cmocka_unit_test(what_is_no_line_is_refused),
        cmocka_unit_test(what_is_no_text_file_is_refused),
        cmocka_unit_test(a_driven_line_follows_the_road),
        cmocka_unit_test(the_longest_drive_is_taken),
        cmocka_unit_test(a_vehicle_that_stood_gives_no_line),
    };
    return cmocka_run_group_tests(tests, make_path, remove_path);
}
