/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey_fixture.h"

/* A row of each table that the statements below refer to. */
static const char *const ground =
    "INSERT INTO campaign VALUES (1, 'first frost');"
    "INSERT INTO vehicle VALUES (1, 'spreader 4');"
    "INSERT INTO channel (channel_id, name) VALUES (1, 'salt');"
    "INSERT INTO logger_file VALUES (1, zeroblob(32), 'a.csv', 10, 1, 1, 1, 0, 0);"
    "INSERT INTO extent VALUES (1, 1, 1, 1, 1, 0, 1, 1, 1000, 1000);"
    "INSERT INTO reading VALUES (1, 0, -9000, NULL, NULL);"
    "INSERT INTO route VALUES (1, 'R3', 1000, 100, 30);"
    "INSERT INTO segment VALUES (1, 1, 1, 0, 100);";

/* One statement a constraint. */
static const char *const refused[] = {
    "INSERT INTO campaign (name) VALUES ('first frost')",
    "INSERT INTO campaign (name) VALUES ('')",
    "INSERT INTO campaign (name) VALUES (NULL)",
    "INSERT INTO campaign (name) VALUES (x'00')",
    "INSERT INTO vehicle (name) VALUES ('spreader 4')",
    "INSERT INTO vehicle (name) VALUES ('')",
    "INSERT INTO channel (name) VALUES ('salt')",
    "INSERT INTO channel (name) VALUES ('')",
    "UPDATE channel SET carrier_hz = 99999",
    "UPDATE channel SET carrier_hz = 4e11",
    "UPDATE channel SET carrier_hz = 'often'",
    "UPDATE channel SET bandwidth_hz = 0",
    "UPDATE channel SET symbol_rate_hz = 0",
    "UPDATE channel SET noise_figure_db = -1",
    "UPDATE channel SET noise_figure_db = 101",
    "UPDATE channel SET noise_floor_dbm = 101",
    "UPDATE channel SET step_db = 0",
    "UPDATE channel SET step_db = 21",
    "UPDATE channel SET floor_dbm = -251",
    "UPDATE channel SET floor_dbm = -90, ceiling_dbm = -90",
    "INSERT INTO calibration VALUES (1, 0, 201, 0)",
    "INSERT INTO calibration VALUES (1, 0, 0, -1)",
    "INSERT INTO calibration VALUES (1, 0, 0, 51)",
    "INSERT INTO calibration VALUES (1, 0, NULL, 0)",
    "INSERT INTO calibration VALUES (2, 0, 0, 0)",
    "INSERT INTO logger_file VALUES (2, zeroblob(32), 'b.csv', 1, 1, 1, 1, 0, 0)",
    "INSERT INTO logger_file VALUES (2, zeroblob(31), 'b.csv', 1, 1, 1, 1, 0, 0)",
    "INSERT INTO logger_file VALUES (2, randomblob(32), 'b.csv', -1, 1, 1, 1, 0, 0)",
    "INSERT INTO logger_file VALUES (2, randomblob(32), 'b.csv', 1, -1, 1, 1, 0, 0)",
    "INSERT INTO logger_file VALUES (2, randomblob(32), 'b.csv', 1, 1, -1, 1, 0, 0)",
    "INSERT INTO logger_file VALUES (2, randomblob(32), 'b.csv', 1, 1, 1, -1, 0, 0)",
    "INSERT INTO logger_file VALUES (2, randomblob(32), 'b.csv', 1, 1, 1, 1, -1, 0)",
    "INSERT INTO logger_file VALUES (2, randomblob(32), 'b.csv', 1, 1, 1, 1, 0, -1)",
    "INSERT INTO refused_line VALUES (2, 1, 'why', x'41')",
    "INSERT INTO refused_line VALUES (1, 0, 'why', x'41')",
    "INSERT INTO refused_line VALUES (1, 1, NULL, x'41')",
    "INSERT INTO refused_line VALUES (1, 1, 'why', 'text')",
    "INSERT INTO refused_line VALUES (1, 1, 'why', zeroblob(201))",
    "INSERT INTO fix VALUES (2, 0, 1, 51, 7, NULL)",
    "INSERT INTO fix VALUES (1, 0, 2, 51, 7, NULL)",
    "INSERT INTO fix VALUES (1, 0, 1, 90.1, 7, NULL)",
    "INSERT INTO fix VALUES (1, 0, 1, 51, -180.1, NULL)",
    "INSERT INTO fix VALUES (1, 0, 1, NULL, 7, NULL)",
    "INSERT INTO fix VALUES (1, 0, 1, 51, 7, -1)",
    "INSERT INTO fix VALUES (1, 0.5, 1, 51, 7, NULL)",
    "INSERT INTO extent VALUES (2, 2, 1, 1, 1, 0, 2, 1, 0, 0)",
    "INSERT INTO extent VALUES (2, 1, 2, 1, 1, 0, 2, 1, 0, 0)",
    "INSERT INTO extent VALUES (2, 1, 1, 2, 1, 0, 2, 1, 0, 0)",
    "INSERT INTO extent VALUES (2, 1, 1, 1, 2, 0, 2, 1, 0, 0)",
    "INSERT INTO extent VALUES (2, 1, 1, 1, 1, 0, 1, 1, 0, 0)",
    "INSERT INTO extent VALUES (2, 1, 1, 1, 1, 0, 2, 0, 0, 0)",
    "INSERT INTO extent VALUES (2, 1, 1, 1, 1, 0, 2, 65537, 0, 0)",
    "INSERT INTO extent VALUES (2, 1, 1, 1, 1, 0, 2, 1, 1, 0)",
    "INSERT INTO reading VALUES (2, NULL, -9000, NULL, NULL)",
    "INSERT INTO reading VALUES (2, 0, NULL, NULL, NULL)",
    "INSERT INTO reading VALUES (2, 0, -90.5, NULL, NULL)",
    "INSERT INTO reading VALUES (1, 0, -9000, NULL, NULL)",
    "INSERT INTO reading VALUES (2, 0, -9000, NULL, -1)",
    "INSERT INTO route VALUES (2, 'R3', 1000, 100, 30)",
    "INSERT INTO route VALUES (2, '', 1000, 100, 30)",
    "INSERT INTO route VALUES (2, 'R4', 0, 100, 30)",
    "INSERT INTO route VALUES (2, 'R4', 1000, 0, 30)",
    "INSERT INTO route VALUES (2, 'R4', 1000, 100, 0)",
    "INSERT INTO route_point VALUES (2, 0, 51, 7, 0)",
    "INSERT INTO route_point VALUES (1, 0, 91, 7, 0)",
    "INSERT INTO route_point VALUES (1, 0, 51, 181, 0)",
    "INSERT INTO route_point VALUES (1, 0, 51, 7, -1)",
    "INSERT INTO segment VALUES (2, 2, 1, 0, 100)",
    "INSERT INTO segment VALUES (2, 1, 1, 0, 100)",
    "INSERT INTO segment VALUES (2, 1, 0, 0, 100)",
    "INSERT INTO segment VALUES (2, 1, 2, -1, 100)",
    "INSERT INTO segment VALUES (2, 1, 2, 100, 100)",
    "INSERT INTO generation VALUES (2, 1)",
    "DELETE FROM vehicle",
    "DELETE FROM channel",
    "DELETE FROM campaign",
    "INSERT INTO derived_object VALUES ('x', 'index', zeroblob(32))",
    "INSERT INTO derived_object VALUES ('x', 'view', zeroblob(31))",
};

static void every_constraint_holds(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_error error = {0};
    if (rfade_survey_execute(fixture->survey, ground, &error) != RFADE_OK)
        fail_msg("%s", error.what);
    for (size_t i = 0; i < sizeof refused / sizeof refused[0]; i++)
        if (rfade_survey_execute(fixture->survey, refused[i], &error) != RFADE_CONFLICT)
            fail_msg("not refused: %s", refused[i]);
}

static void the_edges_are_inside(void **state)
{
    struct fixture *fixture = *state;
    static const char *const accepted[] = {
        "UPDATE channel SET carrier_hz = 1e5",
        "UPDATE channel SET carrier_hz = 3e11",
        "UPDATE channel SET floor_dbm = -90",
        "UPDATE channel SET ceiling_dbm = -20",
        "INSERT INTO fix VALUES (1, -1, 1, -90, -180, 0)",
        "INSERT INTO fix VALUES (1, 0, 1, 90, 180, NULL)",
        "INSERT INTO extent VALUES (2, 1, 1, 1, 1, 1, 2, 65536, 0, 0)",
        "INSERT INTO reading VALUES (2, 0, NULL, 100, NULL)",
        "INSERT INTO refused_line VALUES (1, 1, 'why', zeroblob(200))",
    };
    struct rfade_error error = {0};
    assert_int_equal(rfade_survey_execute(fixture->survey, ground, &error), RFADE_OK);
    for (size_t i = 0; i < sizeof accepted / sizeof accepted[0]; i++)
        if (rfade_survey_execute(fixture->survey, accepted[i], &error) != RFADE_OK)
            fail_msg("%s: %s", accepted[i], error.what);
}

static void the_views_read_in_any_client(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_error error = {0};
    assert_int_equal(rfade_survey_execute(fixture->survey, ground, &error), RFADE_OK);
    assert_int_equal(rfade_survey_execute(fixture->survey,
                                          "UPDATE extent SET start_us = 1700000000123456, "
                                          "end_us = 1700000000123456",
                                          &error),
                     RFADE_OK);
    /* A plain connection, as any client makes it. */
    sqlite3 *client = NULL;
    sqlite3_stmt *statement = NULL;
    assert_int_equal(sqlite3_open_v2(fixture->path, &client, SQLITE_OPEN_READONLY, NULL),
                     SQLITE_OK);
    assert_int_equal(sqlite3_prepare_v2(client,
                                        "SELECT time_utc, level_dbm, snr_db, vehicle, channel, "
                                        "campaign, logger_file FROM reading_as_logged",
                                        -1, &statement, NULL),
                     SQLITE_OK);
    assert_int_equal(sqlite3_step(statement), SQLITE_ROW);
    /* date -u -d @1700000000 is 2023-11-14 22:13:20 */
    assert_string_equal((const char *)sqlite3_column_text(statement, 0),
                        "2023-11-14T22:13:20.123456Z");
    assert_true(sqlite3_column_double(statement, 1) == -90.0);
    assert_int_equal(sqlite3_column_type(statement, 2), SQLITE_NULL);
    assert_string_equal((const char *)sqlite3_column_text(statement, 3), "spreader 4");
    assert_int_equal(sqlite3_step(statement), SQLITE_DONE);
    sqlite3_finalize(statement);
    assert_int_equal(sqlite3_prepare_v2(client,
                                        "SELECT sha256, reading_count FROM logger_file_summary",
                                        -1, &statement, NULL),
                     SQLITE_OK);
    assert_int_equal(sqlite3_step(statement), SQLITE_ROW);
    assert_int_equal(sqlite3_column_bytes(statement, 0), 64);
    assert_int_equal(sqlite3_column_int(statement, 1), 1);
    sqlite3_finalize(statement);
    assert_int_equal(sqlite3_close(client), SQLITE_OK);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test_setup_teardown(every_constraint_holds, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(the_edges_are_inside, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(the_views_read_in_any_client, fixture_setup_open,
                                        fixture_teardown),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
