/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Rows' positions thinned to fixes, and positions of every form. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ingest/collect.h"
#include "ingest/column_map_parts.h"
#include "ingest/position.h"

static struct collected got;

/* One row: milliseconds after 2026-01-15T20:15:00Z, and the place. */
struct place_at {
    int ms;
    double latitude_deg;
    double longitude_deg;
};

static void run(const struct place_at *places, size_t count, const char *keys)
{
    char map[512];
    char *text = malloc(64 + 96 * count);
    assert_non_null(text);
    (void)snprintf(map, sizeof map,
                   "[time]\ncolumn = t\n[position]\nlatitude_column = lat\n"
                   "longitude_column = lon\n%s[level]\ncolumn = l\n",
                   keys);
    size_t used = (size_t)sprintf(text, "t,lat,lon,l\n");
    for (size_t i = 0; i < count; i++)
        used +=
            (size_t)sprintf(text + used, "%lld,%.7f,%.7f,-80\n", 1768508100000LL + places[i].ms,
                            places[i].latitude_deg, places[i].longitude_deg);
    collect_text(&got, map, text);
    free(text);
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.reading_count, count);
}

static void assert_fixes(const int *ms, size_t count)
{
    if (got.fix_count != count)
        fail_msg("%zu fixes, not %zu", got.fix_count, count);
    for (size_t i = 0; i < count; i++)
        assert_int_equal(got.fixes[i].time_us, (1768508100000LL + ms[i]) * 1000);
}

/* Rows at 20 Hz, positions at 1 Hz: each position once, at its first row, so that a straight
 * line between fixes is what was driven. */
static void a_held_position_is_told_once(void **state)
{
    (void)state;
    struct place_at places[80];
    for (int i = 0; i < 80; i++) {
        int second = i / 20;
        places[i] = (struct place_at){50 * i, 54.1 + 0.0001 * second, -2.3};
    }
    run(places, 80, "");
    static const int ms[] = {0, 1000, 2000, 3000};
    assert_fixes(ms, 4);
}

/* 10 s at one place: told again every 2 s at the least, and at its end. */
static void a_standstill_is_told_to_its_end(void **state)
{
    (void)state;
    struct place_at places[12];
    for (int i = 0; i < 12; i++)
        places[i] = (struct place_at){1000 * i, 54.1, -2.3};
    places[11].latitude_deg = 54.1001;
    run(places, 12, "");
    static const int ms[] = {0, 3000, 6000, 9000, 10000, 11000};
    assert_fixes(ms, 6);
}

static void a_slow_receiver_holds_for_as_long_as_the_map_says(void **state)
{
    (void)state;
    struct place_at places[12];
    for (int i = 0; i < 12; i++) {
        int place = i / 5;
        places[i] = (struct place_at){1000 * i, 54.1 + 0.0001 * place, -2.3};
    }
    run(places, 12, "held_s = 5\n");
    static const int ms[] = {0, 5000, 10000};
    assert_fixes(ms, 3);
}

static void a_corrupted_position_is_refused(void **state)
{
    (void)state;
    static const struct place_at places[] = {{0, 54.1, -2.3},
                                             {1000, 54.1001, -2.3},
                                             {2000, 56.1002, -2.3}, /* a digit is wrong */
                                             {3000, 54.1003, -2.3},
                                             {4000, 54.1004, -2.8}}; /* the last row */
    run(places, 5, "");
    static const int ms[] = {0, 1000, 3000};
    assert_fixes(ms, 3);
    assert_int_equal(got.refusal_count, 2);
    assert_int_equal(got.refusals[0].line, 4);
    assert_string_equal(got.refusals[0].text, "1768508102000,56.1002000,-2.3000000,-80");
    assert_int_equal(got.refusals[1].line, 6);
}

static void a_corrupted_first_position_is_refused(void **state)
{
    (void)state;
    static const struct place_at places[] = {
        {0, 14.1, -2.3}, {1000, 54.1001, -2.3}, {2000, 54.1002, -2.3}, {3000, 54.1003, -2.3}};
    run(places, 4, "");
    static const int ms[] = {1000, 2000, 3000};
    assert_fixes(ms, 3);
    assert_one_refusal(&got, 2, "can't be reached");
}

/* A second session far away, right behind the first: both are kept. */
static void a_jump_that_lasts_is_kept(void **state)
{
    (void)state;
    static const struct place_at places[] = {
        {0, 54.1, -2.3}, {1000, 54.1001, -2.3}, {2000, 55.1, -2.3}, {3000, 55.1001, -2.3}};
    run(places, 4, "");
    static const int ms[] = {0, 1000, 2000, 3000};
    assert_fixes(ms, 4);
    assert_int_equal(got.refusal_count, 0);
}

/* 250 m in a second: allowed at 150 m/s with 200 m of scatter, not at 10 m/s. */
static void the_map_sets_what_is_reachable(void **state)
{
    (void)state;
    static const struct place_at places[] = {
        {0, 54.1, -2.3}, {1000, 54.10001, -2.3}, {2000, 54.10226, -2.3}, {3000, 54.1, -2.3}};
    run(places, 4, "");
    assert_int_equal(got.refusal_count, 0);
    run(places, 4, "max_speed = 10\n");
    assert_int_equal(got.refusal_count, 1);
}

static void the_date_line_is_no_jump(void **state)
{
    (void)state;
    static const struct place_at places[] = {
        {0, 54.1, 179.9999}, {1000, 54.1, -179.9999}, {2000, 54.1, 180.0}};
    run(places, 3, "");
    assert_int_equal(got.fix_count, 3);
    assert_int_equal(got.refusal_count, 0);
    assert_true(got.fixes[2].longitude_deg == -180);
}

static void falling_time_and_equal_times_are_taken(void **state)
{
    (void)state;
    static const struct place_at places[] = {{3000, 54.1, -2.3},
                                             {2000, 54.1001, -2.3},
                                             {2000, 54.1002, -2.3}, /* the same instant */
                                             {1000, 54.1003, -2.3}};
    run(places, 4, "");
    static const int ms[] = {3000, 2000, 1000};
    assert_fixes(ms, 3);
}

static void one_row_gives_its_position(void **state)
{
    (void)state;
    static const struct place_at places[] = {{0, 54.1, -2.3}};
    run(places, 1, "");
    static const int ms[] = {0};
    assert_fixes(ms, 1);
}

static void vehicles_have_their_own_tracks(void **state)
{
    (void)state;
    collect_text(
        &got,
        "[time]\ncolumn = t\n[position]\nlatitude_column = lat\nlongitude_column = lon\n"
        "[vehicle]\ncolumn = v\n",
        "t,v,lat,lon\n1768508100,a,54.1,-2.3\n1768508100,b,48.1,9.3\n"
        "1768508101,a,54.1001,-2.3\n1768508101,b,48.1001,9.3\n");
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.fix_count, 4);
    assert_int_equal(got.refusal_count, 0);
}

static void convert(const char *keys, double first, double second, double *latitude_deg,
                    double *longitude_deg)
{
    char text[512];
    (void)snprintf(text, sizeof text, "[time]\ncolumn = t\n[position]\n%s", keys);
    struct rfade_column_map *map = good_map(text);
    struct rfade_position_converter *converter = NULL;
    assert_int_equal(rfade_position_converter_create(&map->position, &converter, NULL),
                     RFADE_OK);
    (void)rfade_position_convert(converter, first, second, latitude_deg, longitude_deg);
    rfade_position_converter_destroy(converter);
    rfade_column_map_destroy(map);
}

/*
 * UTM: scale 0.9996 and easting 500 km on the central meridian (Snyder 1987, USGS Professional
 * Paper 1395, p. 57), where the northing is 0.9996 of the meridian's arc from the equator. On
 * WGS 84 that is 10001965.729 m to the pole and 4984944.378 m to 45 degrees (integral of Snyder
 * 3-21 by mpmath, 30 digits). An arc of 1e-7 degrees is 11 mm.
 */
static void a_grid_agrees_with_published_arcs(void **state)
{
    (void)state;
    static const char grid[] = "x_column = x\ny_column = y\nepsg = 32631\n";
    static const struct {
        double northing_m, latitude_deg;
    } cases[] = {{0, 0}, {0.9996 * 4984944.378, 45}, {0.9996 * 10001965.729, 90}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        double latitude_deg = NAN;
        double longitude_deg = NAN;
        convert(grid, 500000, cases[i].northing_m, &latitude_deg, &longitude_deg);
        assert_true(fabs(latitude_deg - cases[i].latitude_deg) < 1e-7);
        if (cases[i].latitude_deg < 90)
            assert_true(fabs(longitude_deg - 3) < 1e-9); /* zone 31: 0 to 6 east */
    }
}

/* EPSG:31467 counts northing first; x is the easting all the same. The datum is another than
 * WGS 84, by some 100 m: zone 3, central meridian 9 degrees. */
static void x_is_the_easting_whatever_the_order_of_axes(void **state)
{
    (void)state;
    double latitude_deg = NAN;
    double longitude_deg = NAN;
    convert("x_column = x\ny_column = y\nepsg = 31467\n", 3500000, 5540000, &latitude_deg,
            &longitude_deg);
    assert_true(fabs(latitude_deg - 50) < 0.1);
    assert_true(fabs(longitude_deg - 9) < 0.01);
}

/* WGS 84: radius of curvature of the meridian at the equator a(1-e^2) = 6335439.327 m, of the
 * equator a = 6378137 m (NIMA TR8350.2). */
static void local_metres_are_laid_off_from_the_origin(void **state)
{
    (void)state;
    static const char local[] = "x_column = x\ny_column = y\norigin_latitude = 0\n"
                                "origin_longitude = 20\n";
    double latitude_deg = NAN;
    double longitude_deg = NAN;
    convert(local, 0, 1000, &latitude_deg, &longitude_deg);
    assert_true(fabs(latitude_deg - 1000 / 6335439.327 * 57.29577951308232) < 1e-9);
    assert_true(fabs(longitude_deg - 20) < 1e-12);
    convert(local, -1000, 0, &latitude_deg, &longitude_deg);
    assert_true(fabs(latitude_deg) < 1e-9);
    assert_true(fabs(longitude_deg - (20 - 1000 / 6378137.0 * 57.29577951308232)) < 1e-12);
    convert(local, 0, 0, &latitude_deg, &longitude_deg);
    assert_true(latitude_deg == 0 && longitude_deg == 20); /* no sentinel here */
    convert(local, 0, 60000, &latitude_deg, &longitude_deg);
    assert_true(isnan(latitude_deg) && isnan(longitude_deg));
}

static void codes_that_are_no_grid_are_refused(void **state)
{
    (void)state;
    static const int codes[] = {4326, 4978, 9807, 32767};
    for (size_t i = 0; i < sizeof codes / sizeof codes[0]; i++) {
        char map[256];
        (void)snprintf(
            map, sizeof map,
            "[time]\ncolumn = t\n[position]\nx_column = x\ny_column = y\nepsg = %d\n",
            codes[i]);
        collect_text(&got, map, "t,x,y\n1768508100,500000,5000000\n");
        assert_int_equal(got.status, RFADE_INPUT);
        assert_non_null(strstr(got.error.what, "is not a grid"));
    }
}

static void a_place_off_the_grid_is_refused(void **state)
{
    (void)state;
    collect_text(&got,
                 "[time]\ncolumn = t\n[position]\nx_column = x\ny_column = y\nepsg = 32631\n",
                 "t,x,y\n1768508100,1e30,1e30\n1768508101,500000,5000000\n");
    assert_one_refusal(&got, 2, "no place on the earth");
    assert_int_equal(got.fix_count, 1);
}

static void what_stands_has_one_place(void **state)
{
    (void)state;
    collect_text(&got,
                 "[time]\ncolumn = t\n[position]\nlatitude = 54.1\nlongitude = -2.3\n"
                 "[level]\ncolumn = l\n",
                 "t,l\n1768508100,-80\n1768508101,-81\n1768508108,-81\n");
    assert_int_equal(got.fix_count, 2);
    assert_true(got.fixes[0].latitude_deg == 54.1 && got.fixes[1].longitude_deg == -2.3);
}

static void sentinels_of_a_grid_mean_no_position(void **state)
{
    (void)state;
    collect_text(&got,
                 "[time]\ncolumn = t\n[position]\nx_column = x\ny_column = y\nepsg = 32631\n"
                 "no_fix = 0, -1\n",
                 "t,x,y\n1768508100,0.00,5000000\n1768508101,500000,-1\n1768508102,,\n");
    assert_int_equal(got.fix_count, 0);
    assert_int_equal(got.refusal_count, 0);
    assert_int_equal(got.summary.no_position, 3);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_held_position_is_told_once),
        cmocka_unit_test(a_standstill_is_told_to_its_end),
        cmocka_unit_test(a_slow_receiver_holds_for_as_long_as_the_map_says),
        cmocka_unit_test(a_corrupted_position_is_refused),
        cmocka_unit_test(a_corrupted_first_position_is_refused),
        cmocka_unit_test(a_jump_that_lasts_is_kept),
        cmocka_unit_test(the_map_sets_what_is_reachable),
        cmocka_unit_test(the_date_line_is_no_jump),
        cmocka_unit_test(falling_time_and_equal_times_are_taken),
        cmocka_unit_test(one_row_gives_its_position),
        cmocka_unit_test(vehicles_have_their_own_tracks),
        cmocka_unit_test(a_grid_agrees_with_published_arcs),
        cmocka_unit_test(x_is_the_easting_whatever_the_order_of_axes),
        cmocka_unit_test(local_metres_are_laid_off_from_the_origin),
        cmocka_unit_test(codes_that_are_no_grid_are_refused),
        cmocka_unit_test(a_place_off_the_grid_is_refused),
        cmocka_unit_test(what_stands_has_one_place),
        cmocka_unit_test(sentinels_of_a_grid_mean_no_position),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
