/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "drive.h"

static void geodesics_match_published_ones(void **state)
{
    (void)state;
    /* C. F. F. Karney's test set for geodesic routines on WGS 84 (testcases[] of
     * GeographicLib and of PROJ's geodtest.c), written from memory and confirmed by agreement
     * to the last printed digits. */
    static const struct {
        struct rfade_place from;
        double azimuth_deg;
        struct rfade_place to;
        double distance_m;
        double tolerance_m;
        double azimuth_tolerance_deg;
    } lines[] = {
        {{35.60777, -139.44815},
         111.098748429560326,
         {-11.17491, -69.95921},
         8935244.5604818305,
         1e-6,
         1e-9},
        {{55.52454, 106.05087},
         22.020059880982801,
         {77.03196, 197.18234},
         4105086.1713924406,
         1e-6,
         1e-9},
        {{-21.97856, 142.59065},
         -32.44456876433189,
         {41.84138, 98.56635},
         8394328.894657671,
         1e-6,
         1e-9},
        {{-66.99028, 112.2363},
         173.73491240878403,
         {-12.70631, 285.90344},
         11150344.2312080241,
         1e-6,
         1e-9},
    };
    for (size_t i = 0; i < sizeof lines / sizeof lines[0]; i++) {
        double azimuth_deg = NAN;
        double distance_m = rfade_geodesic(&lines[i].from, &lines[i].to, &azimuth_deg);
        assert_true(fabs(distance_m - lines[i].distance_m) <= lines[i].tolerance_m);
        assert_true(fabs(azimuth_deg - lines[i].azimuth_deg) <= lines[i].azimuth_tolerance_deg);
        struct rfade_place to =
            rfade_geodesic_direct(&lines[i].from, lines[i].azimuth_deg, lines[i].distance_m);
        assert_true(fabs(to.latitude_deg - lines[i].to.latitude_deg) < 1e-9);
        assert_true(fabs(remainder(to.longitude_deg - lines[i].to.longitude_deg, 360)) < 1e-9);
    }
}

static void the_plane_agrees_with_geodesics_nearby(void **state)
{
    (void)state;
    for (int latitude_deg = -75; latitude_deg <= 75; latitude_deg += 15)
        for (int azimuth_deg = 0; azimuth_deg < 360; azimuth_deg += 20) {
            const struct rfade_place origin = {latitude_deg, 179.9999};
            struct rfade_place to = rfade_geodesic_direct(&origin, azimuth_deg, 500);
            struct rfade_plane plane = rfade_plane_at(&origin);
            struct rfade_offset offset = rfade_plane_offset(&plane, &to);
            double stated = 500.0 / 6e6 * fmax(1, fabs(tan(latitude_deg / 57.3)));
            assert_true(fabs(hypot(offset.east_m, offset.north_m) - 500) < 500 * stated);
        }
}

static void chainage_is_the_sum_of_geodesics(void **state)
{
    (void)state;
    const struct rfade_place places[] = {
        {51.2, 7.4}, {51.21, 7.4}, {51.21, 7.4}, {51.21, 7.45}, {51.19, 7.45}};
    struct rfade_route *route = NULL;
    struct rfade_error error = {0};
    assert_int_equal(rfade_route_create(places, 5, &route, &error), RFADE_OK);
    size_t point_count = 0;
    const struct rfade_route_point *points = rfade_route_points(route, &point_count);
    assert_int_equal(point_count, 4); /* the repeated one is left out */
    double sum_m = 0;
    double azimuth_deg = NAN;
    for (size_t i = 1; i < point_count; i++) {
        sum_m += rfade_geodesic(&points[i - 1].place, &points[i].place, &azimuth_deg);
        assert_true(fabs(points[i].chainage_m - sum_m) < 1e-6);
    }
    assert_true(fabs(rfade_route_length_m(route) - sum_m) < 1e-6);
    size_t leg_count = 0;
    const struct rfade_leg *legs = rfade_route_legs(route, &leg_count);
    for (size_t i = 0; i < leg_count; i++) {
        assert_true(legs[i].to_m - legs[i].from_m <= 500 + 1e-6);
        assert_true(fabs(rfade_geodesic(&legs[i].from, &legs[i].to, &azimuth_deg) -
                         (legs[i].to_m - legs[i].from_m)) < 1e-6);
        if (i > 0)
            assert_true(legs[i].from_m == legs[i - 1].to_m);
    }
    /* A place by chainage lies where the geodesic from the point before says. */
    struct rfade_place place =
        rfade_route_place(route, points[1].chainage_m + 1234, &azimuth_deg);
    assert_true(fabs(rfade_geodesic(&points[1].place, &place, &azimuth_deg) - 1234) < 1e-4);
    rfade_route_destroy(route);
}

static void a_line_that_is_none_is_refused(void **state)
{
    (void)state;
    struct rfade_route *route = NULL;
    struct rfade_error error = {0};
    const struct rfade_place same[] = {{51, 7}, {51, 7}};
    assert_int_equal(rfade_route_create(same, 2, &route, &error), RFADE_INPUT);
    assert_int_equal(rfade_route_create(same, 0, &route, &error), RFADE_INPUT);
    const struct rfade_place bad[][2] = {{{51, 7}, {91, 7}},
                                         {{51, 7}, {51, 181}},
                                         {{51, 7}, {NAN, 7}},
                                         {{51, 7}, {51, INFINITY}}};
    for (size_t i = 0; i < 4; i++) {
        assert_int_equal(rfade_route_create(bad[i], 2, &route, &error), RFADE_INPUT);
        assert_null(route);
        assert_true(error.remedy[0] != '\0');
    }
}

static void segments_cover_the_line(void **state)
{
    (void)state;
    static const struct {
        double length_m;
        double segment_m;
        size_t count;
        double last_from_m;
    } cases[] = {
        {4000, 100, 40, 3900}, {4030, 100, 41, 4000}, {4009.5, 100, 40, 3900},
        {4010, 100, 41, 4000}, {30, 100, 1, 0},       {0.5, 100, 1, 0},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        size_t count = rfade_segment_count(cases[i].length_m, cases[i].segment_m);
        assert_int_equal(count, cases[i].count);
        double end_m = 0;
        for (size_t number = 1; number <= count; number++) {
            double from_m = NAN;
            double to_m = NAN;
            rfade_segment_bounds(cases[i].length_m, cases[i].segment_m, number, &from_m, &to_m);
            assert_true(from_m == end_m && to_m > from_m);
            if (number == count)
                assert_true(from_m == cases[i].last_from_m && to_m == cases[i].length_m);
            end_m = to_m;
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(geodesics_match_published_ones),
        cmocka_unit_test(the_plane_agrees_with_geodesics_nearby),
        cmocka_unit_test(chainage_is_the_sum_of_geodesics),
        cmocka_unit_test(a_line_that_is_none_is_refused),
        cmocka_unit_test(segments_cover_the_line),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
