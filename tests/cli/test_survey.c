/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Commands on a survey: channels, vehicles, routes, what it holds, and files that are no
 * survey. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <jansson.h>
#include <sqlite3.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "fixture.h"
#include "program.h"

static void channel_keeps_what_was_told(void **state)
{
    const struct fixture *fixture = *state;
    DONE("channel", "457-main", "--carrier-hz", "457.1e6", "--step-db", "1", "--survey",
         fixture->survey);
    DONE("channel", "457-main", "--floor-dbm", "-120", "--survey", fixture->survey);
    json_t *list = JSON_OF("channel", "--survey", fixture->survey);
    assert_int_equal(json_array_size(list), 1);
    json_t *channel = json_array_get(list, 0);
    assert_string_equal(json_string_value(json_object_get(channel, "channel")), "457-main");
    assert_true(json_real_value(json_object_get(channel, "carrier_hz")) == 457.1e6);
    assert_true(json_real_value(json_object_get(channel, "step_db")) == 1);
    assert_true(json_real_value(json_object_get(channel, "floor_dbm")) == -120);
    assert_true(json_is_null(json_object_get(channel, "bandwidth_hz")));
    json_decref(list);
}

static void channel_refuses_what_can_not_be(void **state)
{
    const struct fixture *fixture = *state;
    REFUSED(1, "there is no such survey", "channel", "--survey", fixture->survey);
    REFUSED(2, "give NAME", "channel", "--carrier-hz", "457e6", "--survey", fixture->survey);
    REFUSED(2, "option --carrier-hz needs a number", "channel", "a", "--carrier-hz", "457 MHz",
            "--survey", fixture->survey);
    assert_int_equal(access(fixture->survey, F_OK), -1); /* a refusal makes no survey */
    DONE("channel", "a", "--floor-dbm", "-120", "--survey", fixture->survey);
    REFUSED(1, "ceiling", "channel", "a", "--ceiling-dbm", "-130", "--survey", fixture->survey);
    REFUSED(1, "no channel 'b'", "channel", "b", "--survey", fixture->survey);
}

static void vehicle_lists_its_calibrations(void **state)
{
    const struct fixture *fixture = *state;
    DONE("vehicle", "plough-2", "--offset-db", "1.5", "--from", "2027-01-12", "--survey",
         fixture->survey);
    DONE("vehicle", "plough-2", "--offset-db", "-0.5", "--offset-uncertainty-db", "0.3",
         "--survey", fixture->survey);
    json_t *list = JSON_OF("vehicle", "--survey", fixture->survey);
    assert_int_equal(json_array_size(list), 2);
    json_t *first = json_array_get(list, 0), *second = json_array_get(list, 1);
    assert_true(json_is_null(json_object_get(first, "from")));
    assert_true(json_real_value(json_object_get(first, "offset_db")) == -0.5);
    assert_true(json_real_value(json_object_get(first, "offset_uncertainty_db")) == 0.3);
    assert_string_equal(json_string_value(json_object_get(second, "from")),
                        "2027-01-12T00:00:00Z");
    assert_true(json_real_value(json_object_get(second, "offset_db")) == 1.5);
    json_decref(list);
    REFUSED(1, "spreader-9", "vehicle", "spreader-9", "--survey", fixture->survey);
    REFUSED(2, "a calibration needs --offset-db", "vehicle", "a", "--from", "2027-01-12",
            "--survey", fixture->survey);
    REFUSED(2, "give NAME", "vehicle", "--offset-db", "1", "--survey", fixture->survey);
    REFUSED(2, "option --from needs a time", "vehicle", "a", "--offset-db", "1", "--from",
            "yesterday", "--survey", fixture->survey);
}

static const char line[] = "{\"type\":\"LineString\",\"coordinates\":"
                           "[[-24.5,60.5],[-24.5,60.505],[-24.5,60.51]]}";

/* A meridian's arc from 60.5 to 60.51 degrees on WGS 84: M dphi with M = a(1-e^2)/
 * (1-e^2 sin^2 phi)^1.5 = 6383943 m at 60.505 degrees gives 1114.21 m. */
static void route_is_added_and_listed(void **state)
{
    const struct fixture *fixture = *state;
    const char *path = file_create(fixture->folder, "fen.geojson", line);
    DONE("route", "fen", path, "--survey", fixture->survey);
    DONE("route", "fen", path, "--survey", fixture->survey); /* the same again: no harm */
    json_t *list = JSON_OF("route", "--survey", fixture->survey);
    assert_int_equal(json_array_size(list), 1);
    json_t *route = json_array_get(list, 0);
    assert_string_equal(json_string_value(json_object_get(route, "route")), "fen");
    double length_m = json_real_value(json_object_get(route, "length_m"));
    assert_true(length_m > 1114.1 && length_m < 1114.3);
    assert_true(json_real_value(json_object_get(route, "segment_m")) == 100);
    assert_int_equal(json_integer_value(json_object_get(route, "segments")), 12);
    assert_int_equal(json_integer_value(json_object_get(route, "points")), 3);
    json_decref(list);
    REFUSED(1, "fen", "route", "fen", path, "--segment-m", "50", "--survey", fixture->survey);
}

static void route_refuses_what_can_not_be(void **state)
{
    const struct fixture *fixture = *state;
    char path[256];
    (void)snprintf(path, sizeof path, "%s",
                   file_create(fixture->folder, "point.geojson",
                               "{\"type\":\"Point\",\"coordinates\":[-24.5,60.5]}"));
    REFUSED(1, "point.geojson", "route", "fen", path, "--survey", fixture->survey);
    REFUSED(1, "nothing.csv: there is no such file", "route", "fen", "nothing.csv", "--survey",
            fixture->survey);
    REFUSED(2, "option --segment-m needs a number from 1", "route", "fen", path, "--segment-m",
            "0", "--survey", fixture->survey);
    REFUSED(2, "a new route needs NAME and FILE", "route", "fen", "--segment-m", "50",
            "--survey", fixture->survey);
    REFUSED(2, "give a FILE or --from-vehicle, not both", "route", "fen", path,
            "--from-vehicle", "a", "--survey", fixture->survey);
    REFUSED(2, "--from-vehicle needs the route's NAME", "route", "--from-vehicle", "a",
            "--survey", fixture->survey);
    assert_int_equal(access(fixture->survey, F_OK), -1);
    REFUSED(1, "there is no such survey", "route", "fen", "--from-vehicle", "a", "--survey",
            fixture->survey);
    DONE("channel", "a", "--carrier-hz", "457e6", "--survey", fixture->survey);
    REFUSED(1, "no vehicle 'a'", "route", "fen", "--from-vehicle", "a", "--survey",
            fixture->survey);
    REFUSED(1, "no route 'fen'", "route", "fen", "--survey", fixture->survey);
}

/* A vehicle that drove 400 m straight on gives a route of 400 m. */
static void route_follows_a_vehicle(void **state)
{
    const struct fixture *fixture = *state;
    char log[128];
    struct program program = {0};
    (void)snprintf(log, sizeof log, "%s/drive.csv", fixture->folder);
    DONE("simulate", "--length-m", "400", "--rate-hz", "10", "--vehicle", "plough-2",
         "--output", log);
    RUN(&program, "import", log, "--survey", fixture->survey);
    assert_int_equal(program.status, 0);
    program_clear(&program);
    DONE("route", "own", "--from-vehicle", "plough-2", "--survey", fixture->survey);
    json_t *list = JSON_OF("route", "own", "--survey", fixture->survey);
    double length_m = json_real_value(json_object_get(json_array_get(list, 0), "length_m"));
    assert_true(length_m > 396 && length_m < 404);
    json_decref(list);
}

static void status_counts(void **state)
{
    const struct fixture *fixture = *state;
    DONE("channel", "a", "--carrier-hz", "457e6", "--survey", fixture->survey);
    json_t *holdings = JSON_OF("status", "--survey", fixture->survey);
    assert_int_equal(json_integer_value(json_object_get(holdings, "channels")), 1);
    assert_int_equal(json_integer_value(json_object_get(holdings, "logger_files")), 0);
    assert_true(json_is_false(json_object_get(holdings, "fitted")));
    assert_int_equal(json_array_size(json_object_get(holdings, "streams")), 0);
    json_decref(holdings);
}

/* Commands that only read a survey, which none of the files below is. */
static const char *const readers[] = {"channel", "vehicle", "route", "status"};
enum { READERS = sizeof readers / sizeof readers[0] };

static void assert_no_survey(const char *path, const char *part)
{
    for (size_t i = 0; i < READERS; i++)
        REFUSED(1, part, readers[i], "--survey", path);
    REFUSED(1, part, "channel", "a", "--carrier-hz", "457e6", "--survey", path);
}

static void files_that_are_no_survey_are_left_alone(void **state)
{
    const struct fixture *fixture = *state;
    assert_no_survey(fixture->folder, "this is a folder, not a survey");
    const char *text = "time,rssi\n1,-90\n";
    const char *path = file_create(fixture->folder, "log.csv", text);
    assert_no_survey(path, "log.csv: this is not a survey");
    char *after = file_text(path);
    assert_string_equal(after, text);
    free(after);
    REFUSED(1, "there is no such survey", "status", "--survey", "/nonexistent/a.routefade");
}

static void change_version(const char *path, const char *sql)
{
    sqlite3 *database = NULL;
    assert_int_equal(sqlite3_open(path, &database), SQLITE_OK);
    assert_int_equal(sqlite3_exec(database, sql, NULL, NULL, NULL), SQLITE_OK);
    assert_int_equal(sqlite3_close(database), SQLITE_OK);
}

static void a_survey_of_a_newer_version_is_left_alone(void **state)
{
    const struct fixture *fixture = *state;
    DONE("channel", "a", "--carrier-hz", "457e6", "--survey", fixture->survey);
    change_version(fixture->survey, "PRAGMA user_version = 999");
    assert_no_survey(fixture->survey, "written by a newer version");
    change_version(fixture->survey, "PRAGMA user_version = 1; PRAGMA application_id = 7");
    assert_no_survey(fixture->survey, "not a survey");
}

static void an_unreadable_survey_is_an_error(void **state)
{
    const struct fixture *fixture = *state;
    if (geteuid() == 0) /* root reads everything */
        skip();
    DONE("channel", "a", "--carrier-hz", "457e6", "--survey", fixture->survey);
    assert_int_equal(chmod(fixture->survey, 0), 0);
    REFUSED(1, fixture->survey, "status", "--survey", fixture->survey);
}

static void a_cut_survey_is_an_error(void **state)
{
    const struct fixture *fixture = *state;
    DONE("channel", "a", "--carrier-hz", "457e6", "--survey", fixture->survey);
    assert_int_equal(truncate(fixture->survey, 20000), 0);
    REFUSED(1, fixture->survey, "status", "--survey", fixture->survey);
    REFUSED(1, fixture->survey, "channel", "--survey", fixture->survey);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test_setup_teardown(channel_keeps_what_was_told, fixture_setup,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(channel_refuses_what_can_not_be, fixture_setup,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(vehicle_lists_its_calibrations, fixture_setup,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(route_is_added_and_listed, fixture_setup,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(route_refuses_what_can_not_be, fixture_setup,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(route_follows_a_vehicle, fixture_setup,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(status_counts, fixture_setup, fixture_teardown),
        cmocka_unit_test_setup_teardown(files_that_are_no_survey_are_left_alone, fixture_setup,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(a_survey_of_a_newer_version_is_left_alone,
                                        fixture_setup, fixture_teardown),
        cmocka_unit_test_setup_teardown(an_unreadable_survey_is_an_error, fixture_setup,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(a_cut_survey_is_an_error, fixture_setup,
                                        fixture_teardown),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
