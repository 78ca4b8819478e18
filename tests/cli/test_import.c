/* SPDX-License-Identifier: GPL-3.0-or-later */
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

struct fixture {
    char folder[64];
    char survey[96];
};

static int setup(void **state)
{
    struct fixture *fixture = calloc(1, sizeof *fixture);
    (void)snprintf(fixture->folder, sizeof fixture->folder, "%s", folder_create());
    (void)snprintf(fixture->survey, sizeof fixture->survey, "%s.routefade", fixture->folder);
    *state = fixture;
    return 0;
}

static int teardown(void **state)
{
    struct fixture *fixture = *state;
    folder_remove(fixture->folder);
    (void)unlink(fixture->survey);
    free(fixture);
    return 0;
}

static const char good[] = "time,latitude,longitude,vehicle,channel,rssi_dbm\n"
                           "2027-01-12T20:00:00Z,60.5,-24.5,plough-2,main,-90\n"
                           "2027-01-12T20:00:01Z,60.5001,-24.5,plough-2,main,-91\n"
                           "2027-01-12T20:00:02Z,,,plough-2,main,-92\n";

/* Runs import with JSON rows; *status is the exit status. json_decref the rows. */
static json_t *imported(const struct fixture *fixture, const char *path, int status,
                        const char *errors)
{
    struct program program = {0};
    RUN(&program, "import", path, "--survey", fixture->survey, "--format", "json");
    assert_int_equal(program.status, status);
    if (errors)
        assert_non_null(strstr(program.errors, errors));
    else
        assert_string_equal(program.errors, "");
    json_t *rows = json_loads(program.output, 0, NULL);
    assert_non_null(rows);
    program_clear(&program);
    return rows;
}

static json_int_t integer_of(const json_t *rows, size_t row, const char *name)
{
    return json_integer_value(json_object_get(json_array_get(rows, row), name));
}

static json_int_t readings_held(const struct fixture *fixture)
{
    struct program program = {0};
    RUN(&program, "status", "--survey", fixture->survey, "--format", "json");
    assert_int_equal(program.status, 0);
    json_t *holdings = json_loads(program.output, 0, NULL);
    json_int_t readings = json_integer_value(json_object_get(holdings, "readings"));
    json_decref(holdings);
    program_clear(&program);
    return readings;
}

static void a_file_is_imported_once(void **state)
{
    const struct fixture *fixture = *state;
    const char *path = file_create(fixture->folder, "night.csv", good);
    json_t *rows = imported(fixture, path, 0, NULL);
    assert_int_equal(json_array_size(rows), 1);
    assert_string_equal(text_at(rows, 0, "file"), path);
    assert_string_equal(text_at(rows, 0, "state"), "imported");
    assert_int_equal(integer_of(rows, 0, "readings"), 3);
    assert_int_equal(integer_of(rows, 0, "fixes"), 2);
    assert_int_equal(integer_of(rows, 0, "refused"), 0);
    json_decref(rows);
    path = file_create(fixture->folder, "renamed.csv", good);
    rows = imported(fixture, path, 0, NULL);
    assert_string_equal(text_at(rows, 0, "state"), "known");
    json_decref(rows);
    assert_int_equal(readings_held(fixture), 3);
}

static void refused_lines_are_counted_and_the_first_is_shown(void **state)
{
    const struct fixture *fixture = *state;
    const char *path = file_create(fixture->folder, "dirt.csv",
                                   "time,vehicle,channel,rssi_dbm\n"
                                   "2027-01-12T20:00:00Z,plough-2,main,-90\n"
                                   "2027-01-12T20:00:01Z,plough-2,main,-9x\n"
                                   "not a time,plough-2,main,-91\n"
                                   "2027-01-12T20:00:02Z,plough-2,main,-92\n");
    json_t *rows = imported(fixture, path, 0, NULL);
    assert_int_equal(integer_of(rows, 0, "readings"), 2);
    assert_int_equal(integer_of(rows, 0, "refused"), 2);
    assert_int_equal(strncmp(text_at(rows, 0, "why"), "first: line 3: ", 15), 0);
    json_decref(rows);
}

/* A folder with a good file, an empty one and one of another kind. */
static void refused_files_do_not_stop_the_rest(void **state)
{
    const struct fixture *fixture = *state;
    (void)file_create(fixture->folder, "a.csv", "");
    (void)file_create(fixture->folder, "b.csv", good);
    (void)file_create(fixture->folder, "c.txt", "Dear diary,\nit snowed.\n");
    json_t *rows = imported(fixture, fixture->folder, 3, "routefade: ");
    assert_int_equal(json_array_size(rows), 3);
    assert_string_equal(text_at(rows, 0, "state"), "refused");
    assert_string_equal(text_at(rows, 1, "state"), "imported");
    assert_string_equal(text_at(rows, 2, "state"), "refused");
    assert_non_null(text_at(rows, 0, "why"));
    assert_non_null(text_at(rows, 2, "why"));
    json_decref(rows);
    assert_int_equal(readings_held(fixture), 3);
}

static void an_empty_log_says_so_in_one_line(void **state)
{
    const struct fixture *fixture = *state;
    struct program program = {0};
    const char *path = file_create(fixture->folder, "empty.csv", "");
    RUN(&program, "import", path, "--survey", fixture->survey);
    assert_int_equal(program.status, 3);
    assert_int_equal(strncmp(program.errors, "routefade: ", 11), 0);
    assert_non_null(strstr(program.errors, "empty.csv"));
    assert_non_null(strstr(program.errors, "empty"));
    assert_ptr_equal(strchr(program.errors, '\n'), program.errors + strlen(program.errors) - 1);
    program_clear(&program);
}

static void a_column_map_and_names_are_taken(void **state)
{
    const struct fixture *fixture = *state;
    char map[256], log[256];
    (void)snprintf(map, sizeof map, "%s",
                   file_create(fixture->folder, "map.ini",
                               "[file]\nseparator = semicolon\ndecimal = comma\n"
                               "[time]\ncolumn = at\nzone = +01:00\n"
                               "[level main]\ncolumn = dbm\n"));
    (void)snprintf(log, sizeof log, "%s",
                   file_create(fixture->folder, "log.txt",
                               "at;dbm\n2027-01-12 21:00:00;-90,5\n2027-01-12 21:00:01;-91\n"));
    struct program program = {0};
    RUN(&program, "import", log, "--columns", map, "--vehicle", "spreader-1", "--campaign",
        "winter", "--survey", fixture->survey, "--format", "json");
    assert_string_equal(program.errors, "");
    assert_int_equal(program.status, 0);
    RUN(&program, "status", "--survey", fixture->survey, "--format", "csv");
    assert_string_equal(
        program.output,
        "vehicle,channel,campaign,readings,start,end\r\n"
        "spreader-1,main,winter,2,2027-01-12T20:00:00Z,2027-01-12T20:00:01Z\r\n");
    program_clear(&program);
}

static void nothing_is_touched_when_the_command_is_wrong(void **state)
{
    const struct fixture *fixture = *state;
    char log[256];
    (void)snprintf(log, sizeof log, "%s", file_create(fixture->folder, "night.csv", good));
    const char *map = file_create(fixture->folder, "map.ini", "[file]\nseparatr = comma\n");
    REFUSED(1, "map.ini:2: ", "import", log, "--columns", map, "--survey", fixture->survey);
    REFUSED(1, "/nonexistent.ini", "import", log, "--columns", "/nonexistent.ini", "--survey",
            fixture->survey);
    REFUSED(1, "/nonexistent.csv", "import", log, "/nonexistent.csv", "--survey",
            fixture->survey);
    REFUSED(1, "vehicle", "import", log, "--vehicle", "a\x1b[2J", "--survey", fixture->survey);
    REFUSED(2, "'import' needs PATH...", "import", "--survey", fixture->survey);
    REFUSED(2, "unknown option '--colums'; did you mean '--columns'?", "import", log,
            "--colums", map, "--survey", fixture->survey);
    assert_int_equal(access(fixture->survey, F_OK), -1);
    REFUSED(1, "this is not a survey", "import", log, "--survey", map);
    REFUSED(1, "not a survey", "import", log, "--survey", fixture->folder);
}

static void names_out_of_a_log_are_never_interpreted(void **state)
{
    const struct fixture *fixture = *state;
    const char *path = file_create(fixture->folder, "evil.csv",
                                   "time,vehicle,channel,rssi_dbm\n"
                                   "2027-01-12T20:00:00Z,'); DROP TABLE reading; --,%n%s,-90\n"
                                   "2027-01-12T20:00:01Z,plough-2,=1+1,-90\n"
                                   "2027-01-12T20:00:02Z,\x1b[31mred,main,-90\n");
    json_t *rows = imported(fixture, path, 0, NULL);
    assert_int_equal(integer_of(rows, 0, "readings"), 2);
    assert_int_equal(integer_of(rows, 0, "refused"), 1);
    assert_non_null(strstr(text_at(rows, 0, "why"), "?[31mred"));
    json_decref(rows);
    assert_int_equal(readings_held(fixture), 2);
    static const char *const formats[] = {"table", "csv", "json"};
    for (size_t i = 0; i < 3; i++) {
        struct program program = {0};
        RUN(&program, "status", "--survey", fixture->survey, "--format", formats[i]);
        assert_int_equal(program.status, 0);
        assert_non_null(strstr(program.output, "%n%s"));
        assert_non_null(strstr(program.output, "'); DROP TABLE reading; --"));
        assert_non_null(strstr(program.output, i == 1 ? ",'=1+1," : "=1+1"));
        assert_null(strchr(program.output, '\x1b'));
        program_clear(&program);
    }
}

/* The three layouts that simulate writes come in: the comma one without a map. */
static void a_simulated_drive_comes_in(void **state)
{
    const struct fixture *fixture = *state;
    char log[128];
    struct program program = {0};
    (void)snprintf(log, sizeof log, "%s/drive.csv", fixture->folder);
    RUN(&program, "simulate", "--length-m", "200", "--output", log);
    assert_int_equal(program.status, 0);
    program_clear(&program);
    json_t *rows = imported(fixture, log, 0, NULL);
    assert_int_equal(integer_of(rows, 0, "readings"), 2001);
    assert_int_equal(integer_of(rows, 0, "fixes"), 21);
    assert_int_equal(integer_of(rows, 0, "refused"), 0);
    json_decref(rows);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test_setup_teardown(a_file_is_imported_once, setup, teardown),
        cmocka_unit_test_setup_teardown(refused_lines_are_counted_and_the_first_is_shown, setup,
                                        teardown),
        cmocka_unit_test_setup_teardown(refused_files_do_not_stop_the_rest, setup, teardown),
        cmocka_unit_test_setup_teardown(an_empty_log_says_so_in_one_line, setup, teardown),
        cmocka_unit_test_setup_teardown(a_column_map_and_names_are_taken, setup, teardown),
        cmocka_unit_test_setup_teardown(nothing_is_touched_when_the_command_is_wrong, setup,
                                        teardown),
        cmocka_unit_test_setup_teardown(names_out_of_a_log_are_never_interpreted, setup,
                                        teardown),
        cmocka_unit_test_setup_teardown(a_simulated_drive_comes_in, setup, teardown),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
