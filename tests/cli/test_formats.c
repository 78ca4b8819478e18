/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Levels and positions in files of their own, of several kinds, joined by vehicle and time. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <jansson.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "program.h"

enum { SECONDS = 120, READINGS_PER_S = 20, TEXT_SIZE = SECONDS * READINGS_PER_S * 64 };

/* A vehicle that drives north on a meridian, one millionth of a degree of arc in 0.01 s: about
 * 11 m/s. The route is the same meridian. */
static char folder[64];
static char levels_path[128];
static char nmea_path[128];
static char gpx_path[128];
static char route_path[128];

static void write_file(char path[128], const char *name, const char *text)
{
    (void)snprintf(path, 128, "%s", file_create(folder, name, text));
}

static void write_levels(char *text)
{
    size_t used = (size_t)sprintf(text, "[");
    uint32_t random = 1; /* Numerical Recipes' quick and dirty generator */
    for (int i = 0; i < SECONDS * READINGS_PER_S; i++) {
        random = random * 1664525U + 1013904223U;
        int millisecond = i * 1000 / READINGS_PER_S;
        used += (size_t)snprintf(text + used, 64, "%s{\"time\":%d.%03d,\"rssi\":-%d}",
                                 i ? "," : "", 1800000000 + millisecond / 1000,
                                 millisecond % 1000, 80 + (int)(random >> 28));
    }
    (void)sprintf(text + used, "]\n");
    write_file(levels_path, "levels.json", text);
}

/* 1800000000 is 2027-01-15T08:00:00Z (Python 3.11 datetime). */
static void write_positions(char *nmea, char *gpx)
{
    size_t nmea_used = 0;
    size_t gpx_used = (size_t)sprintf(
        gpx, "<gpx version=\"1.1\" xmlns=\"http://www.topografix.com/GPX/1/1\"><trk><trkseg>");
    for (int s = 0; s < SECONDS; s++) {
        char body[128];
        unsigned sum = 0;
        /* 60.5 degrees and 0.0001 a second: 30 minutes and 0.006 */
        (void)snprintf(body, sizeof body,
                       "GNRMC,08%02d%02d.00,A,6030.%03d,N,02430.000,W,,,150127"
                       ",,,A",
                       s / 60, s % 60, 6 * s);
        for (const char *c = body; *c; c++)
            sum ^= (unsigned char)*c;
        nmea_used += (size_t)snprintf(nmea + nmea_used, 128, "$%s*%02X\r\n", body, sum);
        gpx_used += (size_t)snprintf(gpx + gpx_used, 128,
                                     "<trkpt lat=\"60.%04d\" lon=\"-24.5\"><time>2027-01-15T08:"
                                     "%02d:%02dZ</time></trkpt>\n",
                                     5000 + s, s / 60, s % 60);
    }
    (void)sprintf(gpx + gpx_used, "</trkseg></trk></gpx>");
    write_file(nmea_path, "positions.nmea", nmea);
    write_file(gpx_path, "positions.gpx", gpx);
}

static int setup(void **state)
{
    (void)state;
    char *text = malloc(TEXT_SIZE);
    char *other = malloc(TEXT_SIZE);
    if (!text || !other)
        return -1;
    (void)snprintf(folder, sizeof folder, "%s", folder_create());
    write_levels(text);
    write_positions(text, other);
    write_file(route_path, "road.gpx",
               "<gpx><rte><rtept lat=\"60.5\" lon=\"-24.5\"/><rtept lat=\"60.512\" "
               "lon=\"-24.5\"/></rte></gpx>");
    free(text);
    free(other);
    return 0;
}

static int teardown(void **state)
{
    (void)state;
    folder_remove(folder);
    return 0;
}

/* What `fading` says after two files came in this order. free() it. */
static char *fading_after(const char *survey, const char *first, const char *second)
{
    struct program program = {0};
    char path[160];
    (void)snprintf(path, sizeof path, "%s/%s", folder, survey);
    DONE("import", first, "--survey", path, "--vehicle", "plough-2");
    DONE("import", second, "--survey", path, "--vehicle", "plough-2");
    DONE("channel", "1", "--carrier-hz", "457e6", "--survey", path);
    DONE("route", "road", route_path, "--segment-m", "400", "--survey", path);
    DONE("fit", "--survey", path);
    RUN(&program, "fading", "--format", "json", "--survey", path);
    assert_int_equal(program.status, 0);
    char *output = program.output;
    program.output = NULL;
    program_clear(&program);
    return output;
}

static json_int_t readings_of(const char *output)
{
    json_t *rows = json_loads(output, 0, NULL);
    assert_non_null(rows);
    json_int_t readings = 0;
    for (size_t i = 0; i < json_array_size(rows); i++)
        readings += json_integer_value(json_object_get(json_array_get(rows, i), "readings"));
    json_decref(rows);
    return readings;
}

static void levels_find_their_positions_in_either_order(void **state)
{
    (void)state;
    char *levels_first = fading_after("a", levels_path, nmea_path);
    char *positions_first = fading_after("b", nmea_path, levels_path);
    char *from_gpx = fading_after("c", gpx_path, levels_path);
    assert_string_equal(levels_first, positions_first);
    /* All but those after the last position and beyond the line's end. */
    json_int_t readings = readings_of(levels_first);
    assert_in_range(readings, (SECONDS - 2) * READINGS_PER_S, SECONDS * READINGS_PER_S);
    assert_int_equal(readings_of(from_gpx), readings);
    free(levels_first);
    free(positions_first);
    free(from_gpx);
}

static void other_vehicles_positions_do_not_count(void **state)
{
    (void)state;
    struct program program = {0};
    char path[160];
    (void)snprintf(path, sizeof path, "%s/d", folder);
    DONE("import", levels_path, "--survey", path, "--vehicle", "plough-2");
    DONE("import", nmea_path, "--survey", path, "--vehicle", "plough-3");
    DONE("channel", "1", "--carrier-hz", "457e6", "--survey", path);
    DONE("route", "road", route_path, "--segment-m", "400", "--survey", path);
    DONE("fit", "--survey", path);
    RUN(&program, "fading", "--format", "json", "--survey", path);
    assert_true(program.status != 0 || readings_of(program.output) == 0);
    program_clear(&program);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(levels_find_their_positions_in_either_order),
        cmocka_unit_test(other_vehicles_positions_do_not_count),
    };
    return cmocka_run_group_tests(tests, setup, teardown);
}
