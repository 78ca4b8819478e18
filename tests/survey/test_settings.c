/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey_fixture.h"

#include "survey/channel.h"
#include "survey/list.h"
#include "survey/store.h"
#include "survey/vehicle.h"

static int64_t generation(struct fixture *fixture)
{
    return integer_of(fixture->survey, "SELECT current FROM generation");
}

static void a_channel_is_told_bit_by_bit(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_error error = {0};
    struct rfade_channel told = rfade_channel_undescribed();
    int64_t before = generation(fixture);
    told.carrier_hz = 457e6;
    told.step_db = 1;
    assert_int_equal(rfade_survey_channel_set(fixture->survey, "salt", &told, &error),
                     RFADE_OK);
    assert_int_equal(generation(fixture), before + 1);
    told = rfade_channel_undescribed();
    told.floor_dbm = -117;
    told.step_db = 0.5;
    assert_int_equal(rfade_survey_channel_set(fixture->survey, "salt", &told, &error),
                     RFADE_OK);
    struct rfade_channel channel;
    assert_int_equal(rfade_survey_channel(fixture->survey, "salt", &channel, &error), RFADE_OK);
    assert_string_equal(channel.name, "salt");
    assert_true(channel.carrier_hz == 457e6 && channel.step_db == 0.5);
    assert_true(channel.floor_dbm == -117 && isnan(channel.ceiling_dbm));
    /* Saying the same again is no change. */
    assert_int_equal(rfade_survey_channel_set(fixture->survey, "salt", &told, &error),
                     RFADE_OK);
    assert_int_equal(generation(fixture), before + 2);

    told = rfade_channel_undescribed();
    assert_int_equal(rfade_survey_channel_set(fixture->survey, "plough", &told, &error),
                     RFADE_OK);
    struct rfade_channel *channels = NULL;
    size_t count = 0;
    assert_int_equal(rfade_survey_channels(fixture->survey, &channels, &count, &error),
                     RFADE_OK);
    assert_int_equal(count, 2);
    assert_string_equal(channels[0].name, "plough");
    assert_true(isnan(channels[0].carrier_hz));
    free(channels);
    assert_int_equal(rfade_survey_channel(fixture->survey, "slat", &channel, &error),
                     RFADE_INPUT);
    assert_true(strstr(error.what, "slat") && error.remedy[0] != '\0');
}

static void impossible_channels_are_refused(void **state)
{
    struct fixture *fixture = *state;
    static const struct {
        double
            values[8]; /* carrier, bandwidth, rate, figure, noise floor, step, floor, ceiling */
        const char *says;
    } cases[] = {
        {{99999, NAN, NAN, NAN, NAN, NAN, NAN, NAN}, "carrier"},
        {{3.1e11, NAN, NAN, NAN, NAN, NAN, NAN, NAN}, "carrier"},
        {{-457e6, NAN, NAN, NAN, NAN, NAN, NAN, NAN}, "carrier"},
        {{INFINITY, NAN, NAN, NAN, NAN, NAN, NAN, NAN}, "carrier"},
        {{NAN, 0, NAN, NAN, NAN, NAN, NAN, NAN}, "bandwidth"},
        {{NAN, NAN, -1, NAN, NAN, NAN, NAN, NAN}, "symbol rate"},
        {{NAN, NAN, NAN, -0.1, NAN, NAN, NAN, NAN}, "noise figure"},
        {{NAN, NAN, NAN, NAN, 200, NAN, NAN, NAN}, "noise floor"},
        {{NAN, NAN, NAN, NAN, NAN, 0, NAN, NAN}, "level step"},
        {{NAN, NAN, NAN, NAN, NAN, NAN, -300, NAN}, "receiver floor"},
        {{NAN, NAN, NAN, NAN, NAN, NAN, NAN, 101}, "receiver ceiling"},
        {{NAN, NAN, NAN, NAN, NAN, NAN, -90, -90}, "not above the floor"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        const double *v = cases[i].values;
        const struct rfade_channel told = {.carrier_hz = v[0],
                                           .bandwidth_hz = v[1],
                                           .symbol_rate_hz = v[2],
                                           .noise_figure_db = v[3],
                                           .noise_floor_dbm = v[4],
                                           .step_db = v[5],
                                           .floor_dbm = v[6],
                                           .ceiling_dbm = v[7]};
        struct rfade_error error = {0};
        assert_int_equal(rfade_survey_channel_set(fixture->survey, "salt", &told, &error),
                         RFADE_INPUT);
        if (!strstr(error.what, cases[i].says) || error.remedy[0] == '\0')
            fail_msg("case %zu: %s", i, error.what);
    }
    /* A ceiling below a floor that was told before. */
    struct rfade_error error = {0};
    struct rfade_channel told = rfade_channel_undescribed();
    told.floor_dbm = -110;
    assert_int_equal(rfade_survey_channel_set(fixture->survey, "salt", &told, &error),
                     RFADE_OK);
    told = rfade_channel_undescribed();
    told.ceiling_dbm = -111;
    assert_int_equal(rfade_survey_channel_set(fixture->survey, "salt", &told, &error),
                     RFADE_INPUT);
    assert_int_equal(integer_of(fixture->survey, "SELECT ceiling_dbm IS NULL FROM channel"), 1);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM channel"), 1);
}

static void bad_names_are_refused(void **state)
{
    struct fixture *fixture = *state;
    char long_name[202];
    memset(long_name, 'n', 201);
    long_name[201] = '\0';
    const char *const names[] = {"", "two\nlines", "\x1b[31mred", "\xff\xfe", long_name};
    const struct rfade_channel told = rfade_channel_undescribed();
    const struct rfade_place places[] = {{51, 7}, {51.1, 7}};
    struct rfade_route *route = NULL;
    struct rfade_error error = {0};
    assert_int_equal(rfade_route_create(places, 2, &route, &error), RFADE_OK);
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++) {
        error = (struct rfade_error){0};
        assert_int_equal(rfade_survey_channel_set(fixture->survey, names[i], &told, &error),
                         RFADE_INPUT);
        assert_true(error.remedy[0] != '\0');
        assert_null(strchr(error.what, '\x1b'));
        assert_int_equal(rfade_survey_calibrate(fixture->survey, names[i], 0, 0, 0, &error),
                         RFADE_INPUT);
        assert_int_equal(
            rfade_survey_route_add(fixture->survey, names[i], route, 100, 30, &error),
            RFADE_INPUT);
    }
    rfade_route_destroy(route);
    /* 200 bytes, letters beyond ASCII and SQL are fine. */
    const char *const good[] = {long_name + 1, "Räumfahrzeug 7 – süd",
                                "'; DROP TABLE route; --"};
    for (size_t i = 0; i < 3; i++)
        assert_int_equal(rfade_survey_channel_set(fixture->survey, good[i], &told, &error),
                         RFADE_OK);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM channel"), 3);
}

/* A log named a channel with a control character: it can still be described. */
static void a_channel_named_by_a_log_can_be_described(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
    put_reading(import, 0, "\x1b[1msalt", -9000, 0);
    (void)finish_file(import);
    struct rfade_channel told = rfade_channel_undescribed();
    told.carrier_hz = 457e6;
    struct rfade_error error = {0};
    assert_int_equal(rfade_survey_channel_set(fixture->survey, "\x1b[1msalt", &told, &error),
                     RFADE_OK);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM channel"), 1);
}

static void calibrations_hold_by_date(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_error error = {0};
    int64_t before = generation(fixture);
    assert_int_equal(
        rfade_survey_calibrate(fixture->survey, "spreader 4", 5000, 1.5, 0.5, &error),
        RFADE_OK);
    assert_int_equal(rfade_survey_calibrate(fixture->survey, "spreader 4", RFADE_SINCE_EVER_US,
                                            -2, 1, &error),
                     RFADE_OK);
    assert_int_equal(generation(fixture), before + 2);
    assert_int_equal(
        rfade_survey_calibrate(fixture->survey, "spreader 4", 5000, 1.5, 0.5, &error),
        RFADE_OK);
    assert_int_equal(generation(fixture), before + 2);
    assert_int_equal(
        rfade_survey_calibrate(fixture->survey, "spreader 4", 5000, 1.75, 0.5, &error),
        RFADE_OK);
    assert_int_equal(generation(fixture), before + 3);
    struct rfade_calibration *calibrations = NULL;
    size_t count = 0;
    assert_int_equal(rfade_survey_calibrations(fixture->survey, &calibrations, &count, &error),
                     RFADE_OK);
    assert_int_equal(count, 2);
    assert_true(calibrations[0].from_us == RFADE_SINCE_EVER_US);
    assert_true(calibrations[1].offset_db == 1.75);
    assert_string_equal(calibrations[1].vehicle, "spreader 4");
    free(calibrations);
    struct rfade_vehicle *vehicles = NULL;
    assert_int_equal(rfade_survey_vehicles(fixture->survey, &vehicles, &count, &error),
                     RFADE_OK);
    assert_int_equal(count, 1);
    free(vehicles);
    const double bad[][2] = {{201, 0}, {-201, 0}, {NAN, 0}, {0, -1}, {0, 51}, {0, NAN}};
    for (size_t i = 0; i < 6; i++) {
        assert_int_equal(rfade_survey_calibrate(fixture->survey, "plough 1", 0, bad[i][0],
                                                bad[i][1], &error),
                         RFADE_INPUT);
        assert_true(error.remedy[0] != '\0');
    }
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM vehicle"), 1);
}

static void a_route_comes_back_as_it_went_in(void **state)
{
    struct fixture *fixture = *state;
    const struct rfade_place places[] = {{51.2, 7.4}, {51.21, 7.41}, {51.21, 7.45}};
    struct rfade_route *route = NULL;
    struct rfade_error error = {0};
    assert_int_equal(rfade_route_create(places, 3, &route, &error), RFADE_OK);
    int64_t before = generation(fixture);
    assert_int_equal(
        rfade_survey_route_add(fixture->survey, "Marrowfen 3", route, 100, 30, &error),
        RFADE_OK);
    assert_int_equal(generation(fixture), before + 1);
    /* The same again: accepted, no change. */
    assert_int_equal(
        rfade_survey_route_add(fixture->survey, "Marrowfen 3", route, 100, 30, &error),
        RFADE_OK);
    assert_int_equal(generation(fixture), before + 1);

    struct rfade_route_row *routes = NULL;
    size_t count = 0;
    assert_int_equal(rfade_survey_routes(fixture->survey, &routes, &count, &error), RFADE_OK);
    assert_int_equal(count, 1);
    assert_string_equal(routes[0].name, "Marrowfen 3");
    assert_true(routes[0].length_m == rfade_route_length_m(route));
    assert_int_equal(routes[0].point_count, 3);
    assert_int_equal(routes[0].segment_count, rfade_segment_count(routes[0].length_m, 100));
    struct rfade_segment_row *segments = NULL;
    size_t segment_count = 0;
    assert_int_equal(rfade_survey_segments(fixture->survey, routes[0].route_id, &segments,
                                           &segment_count, &error),
                     RFADE_OK);
    assert_int_equal(segment_count, routes[0].segment_count);
    assert_true(segments[0].from_m == 0 && segments[0].to_m == 100);
    assert_true(segments[segment_count - 1].to_m == routes[0].length_m);
    assert_int_equal(segments[segment_count - 1].number, segment_count);
    struct rfade_route *loaded = NULL;
    assert_int_equal(
        rfade_survey_route_load(fixture->survey, routes[0].route_id, &loaded, &error),
        RFADE_OK);
    assert_true(rfade_route_length_m(loaded) == rfade_route_length_m(route));
    rfade_route_destroy(loaded);
    free(segments);
    free(routes);
    rfade_route_destroy(route);
}

static void a_contradicting_route_is_refused(void **state)
{
    struct fixture *fixture = *state;
    const struct rfade_place places[] = {{51.2, 7.4}, {51.21, 7.41}, {51.21, 7.45}};
    struct rfade_route *route = NULL;
    struct rfade_route *shorter = NULL;
    struct rfade_error error = {0};
    assert_int_equal(rfade_route_create(places, 3, &route, &error), RFADE_OK);
    assert_int_equal(rfade_route_create(places, 2, &shorter, &error), RFADE_OK);
    assert_int_equal(
        rfade_survey_route_add(fixture->survey, "Marrowfen 3", route, 100, 30, &error),
        RFADE_OK);
    const struct {
        const struct rfade_route *route;
        double segment_m;
        double corridor_m;
        enum rfade_status status;
    } cases[] = {
        {shorter, 100, 30, RFADE_CONFLICT}, {route, 200, 30, RFADE_CONFLICT},
        {route, 100, 31, RFADE_CONFLICT},   {route, 0, 30, RFADE_INPUT},
        {route, NAN, 30, RFADE_INPUT},      {route, 1e7, 30, RFADE_INPUT},
        {route, 100, 0, RFADE_INPUT},       {route, 100, 1001, RFADE_INPUT},
        {route, 100, NAN, RFADE_INPUT},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        error = (struct rfade_error){0};
        assert_int_equal(rfade_survey_route_add(fixture->survey, "Marrowfen 3", cases[i].route,
                                                cases[i].segment_m, cases[i].corridor_m,
                                                &error),
                         cases[i].status);
        assert_true(strstr(error.what, "Marrowfen 3") && error.remedy[0] != '\0');
    }
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM route"), 1);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM route_point"), 3);
    rfade_route_destroy(route);
    rfade_route_destroy(shorter);
}

static void a_route_of_too_many_segments_is_refused(void **state)
{
    struct fixture *fixture = *state;
    const struct rfade_place places[] = {{0, 0}, {10, 0}};
    struct rfade_route *route = NULL;
    struct rfade_error error = {0};
    assert_int_equal(rfade_route_create(places, 2, &route, &error), RFADE_OK);
    assert_int_equal(rfade_survey_route_add(fixture->survey, "meridian", route, 1, 30, &error),
                     RFADE_INPUT);
    assert_true(strstr(error.what, "segments") != NULL);
    rfade_route_destroy(route);
}

int main(void)
{
#define TEST(name) cmocka_unit_test_setup_teardown(name, fixture_setup_open, fixture_teardown)
    const struct CMUnitTest tests[] = {
        TEST(a_channel_is_told_bit_by_bit),
        TEST(impossible_channels_are_refused),
        TEST(bad_names_are_refused),
        TEST(a_channel_named_by_a_log_can_be_described),
        TEST(calibrations_hold_by_date),
        TEST(a_route_comes_back_as_it_went_in),
        TEST(a_contradicting_route_is_refused),
        TEST(a_route_of_too_many_segments_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
