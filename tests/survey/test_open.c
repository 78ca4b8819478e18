/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey_fixture.h"

#include <signal.h>
#include <sys/wait.h>

#include "survey/layout.h"

static void write_file(const char *path, const char *bytes, size_t size)
{
    FILE *file = fopen(path, "wbe");
    assert_non_null(file);
    assert_int_equal(fwrite(bytes, 1, size, file), size);
    assert_int_equal(fclose(file), 0);
}

static char *read_file(const char *path, size_t *size)
{
    FILE *file = fopen(path, "rbe");
    assert_non_null(file);
    assert_int_equal(fseek(file, 0, SEEK_END), 0);
    *size = (size_t)ftell(file);
    rewind(file);
    char *bytes = malloc(*size + 1);
    assert_non_null(bytes);
    assert_int_equal(fread(bytes, 1, *size, file), *size);
    assert_int_equal(fclose(file), 0);
    return bytes;
}

static void assert_same_file(const char *path, const char *bytes, size_t size)
{
    size_t now_size = 0;
    char *now = read_file(path, &now_size);
    assert_int_equal(now_size, size);
    assert_memory_equal(now, bytes, size);
    free(now);
}

/* Refused with one line and a remedy, and the file stays as it was. */
static void assert_refused(const char *path, enum rfade_survey_mode mode,
                           enum rfade_status expected, const char *says)
{
    struct rfade_survey *survey = NULL;
    struct rfade_error error = {0};
    enum rfade_status status = rfade_survey_open(path, mode, &survey, &error);
    if (status != expected || !strstr(error.what, says))
        fail_msg("%s: status %d, %s", path, (int)status, error.what);
    assert_null(survey);
    assert_true(error.remedy[0] != '\0');
    assert_null(strchr(error.what, '\n'));
    assert_string_equal(error.file, path);
}

static void a_new_survey_is_what_it_says(void **state)
{
    struct fixture *fixture = *state;
    fixture->survey = open_new(fixture->path);
    assert_int_equal(integer_of(fixture->survey, "PRAGMA application_id"),
                     RFADE_APPLICATION_ID);
    assert_int_equal(integer_of(fixture->survey, "PRAGMA user_version"), RFADE_SCHEMA_VERSION);
    assert_int_equal(integer_of(fixture->survey, "PRAGMA page_size"), RFADE_PAGE_SIZE);
    assert_int_equal(integer_of(fixture->survey, "PRAGMA foreign_keys"), 1);
    assert_int_equal(integer_of(fixture->survey, "PRAGMA trusted_schema"), 0);
    assert_int_equal(
        integer_of(fixture->survey, "SELECT journal_mode = 'delete' FROM pragma_journal_mode"),
        1);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM pragma_integrity_check "
                                                 "WHERE integrity_check = 'ok'"),
                     1);
    /* Every table is STRICT. */
    assert_int_equal(
        integer_of(fixture->survey,
                   "SELECT count(*) FROM pragma_table_list WHERE schema = 'main' "
                   "AND type = 'table' AND name NOT LIKE 'sqlite%' AND NOT strict"),
        0);
    assert_string_equal(rfade_survey_path(fixture->survey), fixture->path);
}

static void all_modes_open_a_survey(void **state)
{
    struct fixture *fixture = *state;
    rfade_survey_close(open_new(fixture->path));
    size_t size = 0;
    char *bytes = read_file(fixture->path, &size);
    for (enum rfade_survey_mode mode = RFADE_SURVEY_READ; mode <= RFADE_SURVEY_CREATE; mode++) {
        struct rfade_survey *survey = NULL;
        struct rfade_error error = {0};
        assert_int_equal(rfade_survey_open(fixture->path, mode, &survey, &error), RFADE_OK);
        rfade_survey_close(survey);
    }
    assert_same_file(fixture->path, bytes, size); /* opening writes nothing */
    free(bytes);
}

static void reading_never_writes(void **state)
{
    struct fixture *fixture = *state;
    rfade_survey_close(open_new(fixture->path));
    struct rfade_error error = {0};
    assert_int_equal(
        rfade_survey_open(fixture->path, RFADE_SURVEY_READ, &fixture->survey, &error),
        RFADE_OK);
    assert_int_equal(rfade_survey_run(fixture->survey, &error,
                                      "INSERT INTO vehicle (name) VALUES ('x')", ""),
                     RFADE_STORAGE);
    assert_true(error.remedy[0] != '\0');
}

static void what_is_no_survey_is_refused(void **state)
{
    struct fixture *fixture = *state;
    char plain[160];
    (void)snprintf(plain, sizeof plain, "%s/plain", fixture->folder);
    for (enum rfade_survey_mode mode = RFADE_SURVEY_READ; mode <= RFADE_SURVEY_CREATE; mode++) {
        const char text[] =
            "time,level\n1,-90\nThis is a log, and longer than a page header is. "
            "It goes on for more than a hundred bytes, to be sure of that.\n";
        write_file(plain, text, sizeof text - 1);
        assert_refused(plain, mode, RFADE_INPUT, "not a survey");
        assert_same_file(plain, text, sizeof text - 1);
        assert_refused(fixture->folder, mode, RFADE_STORAGE, "folder");
        assert_refused("/dev/null", mode, RFADE_STORAGE, "not an ordinary file");
    }
    for (enum rfade_survey_mode mode = RFADE_SURVEY_READ; mode <= RFADE_SURVEY_WRITE; mode++) {
        write_file(plain, "", 0);
        assert_refused(plain, mode, RFADE_STORAGE, "empty");
        assert_refused("/no/such/survey", mode, RFADE_STORAGE, "no such survey");
    }
    assert_refused("/no/such/survey", RFADE_SURVEY_CREATE, RFADE_STORAGE, "can't be opened");
    assert_refused("", RFADE_SURVEY_CREATE, RFADE_STORAGE, "no name");
    /* An empty file is as good as none where a survey is made. */
    rfade_survey_close(open_new(plain));
}

static void another_database_is_refused(void **state)
{
    struct fixture *fixture = *state;
    char plain[160];
    (void)snprintf(plain, sizeof plain, "%s/plain", fixture->folder);
    sqlite3 *database = NULL;
    assert_int_equal(sqlite3_open(plain, &database), SQLITE_OK);
    assert_int_equal(sqlite3_exec(database, "CREATE TABLE vehicle (name)", NULL, NULL, NULL),
                     SQLITE_OK);
    assert_int_equal(sqlite3_close(database), SQLITE_OK);
    size_t size = 0;
    char *bytes = read_file(plain, &size);
    for (enum rfade_survey_mode mode = RFADE_SURVEY_READ; mode <= RFADE_SURVEY_CREATE; mode++)
        assert_refused(plain, mode, RFADE_INPUT, "not a survey");
    assert_same_file(plain, bytes, size);
    free(bytes);
}

static void a_newer_survey_is_refused(void **state)
{
    struct fixture *fixture = *state;
    fixture->survey = open_new(fixture->path);
    struct rfade_error error = {0};
    assert_int_equal(
        rfade_survey_execute(fixture->survey, "PRAGMA user_version = 4711", &error), RFADE_OK);
    rfade_survey_close(fixture->survey);
    fixture->survey = NULL;
    size_t size = 0;
    char *bytes = read_file(fixture->path, &size);
    for (enum rfade_survey_mode mode = RFADE_SURVEY_READ; mode <= RFADE_SURVEY_CREATE; mode++)
        assert_refused(fixture->path, mode, RFADE_INPUT, "newer version");
    assert_same_file(fixture->path, bytes, size);
    free(bytes);
}

static void a_damaged_survey_is_refused(void **state)
{
    struct fixture *fixture = *state;
    rfade_survey_close(open_new(fixture->path));
    size_t size = 0;
    char *bytes = read_file(fixture->path, &size);
    write_file(fixture->path, bytes, size / 3); /* cut off */
    struct rfade_survey *survey = NULL;
    struct rfade_error error = {0};
    assert_int_equal(rfade_survey_open(fixture->path, RFADE_SURVEY_READ, &survey, &error),
                     RFADE_STORAGE);
    assert_true(strstr(error.what, "damaged") != NULL);
    free(bytes);
}

/* In a process of its own, which gives up root's right to read and write everything. */
static bool is_refused_to_nobody(const char *path, enum rfade_survey_mode mode,
                                 const char *says)
{
    pid_t child = fork();
    assert_true(child >= 0);
    if (child == 0) {
        struct rfade_survey *survey = NULL;
        struct rfade_error error = {0};
        if (geteuid() == 0 && setuid(65534) != 0)
            _exit(2);
        bool refused =
            rfade_survey_open(path, mode, &survey, &error) == RFADE_STORAGE && !survey;
        _exit(refused && strstr(error.what, says) && error.remedy[0] != '\0' ? 0 : 1);
    }
    int how = 0;
    assert_int_equal(waitpid(child, &how, 0), child);
    return WIFEXITED(how) && WEXITSTATUS(how) == 0;
}

static void unreadable_and_unwritable_are_refused(void **state)
{
    struct fixture *fixture = *state;
    rfade_survey_close(open_new(fixture->path));
    assert_int_equal(chmod(fixture->folder, 0755), 0);
    assert_int_equal(chmod(fixture->path, 0444), 0);
    assert_true(is_refused_to_nobody(fixture->path, RFADE_SURVEY_WRITE, "can't be written"));
    assert_int_equal(chmod(fixture->path, 0000), 0);
    assert_true(is_refused_to_nobody(fixture->path, RFADE_SURVEY_READ, "can't be read"));
    assert_int_equal(chmod(fixture->folder, 0000), 0);
    assert_true(is_refused_to_nobody(fixture->path, RFADE_SURVEY_READ, "can't be reached"));
    assert_int_equal(chmod(fixture->folder, 0700), 0);
}

static void a_name_with_a_meaning_is_a_file(void **state)
{
    struct fixture *fixture = *state;
    char before[1024];
    assert_non_null(getcwd(before, sizeof before));
    assert_int_equal(chdir(fixture->folder), 0);
    rfade_survey_close(open_new(":memory:"));
    assert_int_equal(access("./:memory:", F_OK), 0);
    assert_int_equal(chdir(before), 0);
}

/* The next version of a layout that only this test has: a column more, and other results. */
enum { NEXT = RFADE_SCHEMA_VERSION + 1, AFTER_NEXT };
static const char add_column[] = "ALTER TABLE vehicle ADD COLUMN antenna TEXT;";
static const char rebuild_table[] =
    "CREATE TABLE vehicle_new (vehicle_id INTEGER PRIMARY KEY, name TEXT NOT NULL UNIQUE, "
    "antenna TEXT, mast_m REAL) STRICT;"
    "INSERT INTO vehicle_new SELECT vehicle_id, name, antenna, 2.5 FROM vehicle;"
    "DROP TABLE vehicle; ALTER TABLE vehicle_new RENAME TO vehicle;";
static const char breaks[] = "ALTER TABLE vehicle ADD COLUMN other TEXT; SELECT no_such();";
static const char orphans[] = "DELETE FROM vehicle;";
static const char other_results[] = "CREATE TABLE verdict (verdict_id INTEGER PRIMARY KEY) "
                                    "STRICT;";

static struct rfade_layout later_layout(const struct rfade_sql *migrations, int version)
{
    struct rfade_layout layout = rfade_layout_current();
    layout.version = version;
    layout.migrations = migrations;
    return layout;
}

static void fill_one_calibration(const char *path)
{
    struct rfade_survey *survey = open_new(path);
    struct rfade_error error = {0};
    assert_int_equal(rfade_survey_execute(survey,
                                          "INSERT INTO vehicle VALUES (5, 'spreader 4');"
                                          "INSERT INTO calibration VALUES (5, 0, 1.5, 0.5);",
                                          &error),
                     RFADE_OK);
    rfade_survey_close(survey);
}

static void an_older_survey_is_migrated(void **state)
{
    struct fixture *fixture = *state;
    static const struct rfade_sql migrations[] = {
        {NEXT, add_column, sizeof add_column - 1},
        {AFTER_NEXT, rebuild_table, sizeof rebuild_table - 1},
        {0, NULL, 0}};
    static const struct rfade_sql results = {0, other_results, sizeof other_results - 1};
    struct rfade_layout layout = later_layout(migrations, AFTER_NEXT);
    layout.derived = &results;
    fill_one_calibration(fixture->path);
    struct rfade_error error = {0};

    /* Reading does not migrate. */
    size_t size = 0;
    char *bytes = read_file(fixture->path, &size);
    assert_int_equal(rfade_survey_open_as(fixture->path, RFADE_SURVEY_READ, &layout,
                                          &fixture->survey, &error),
                     RFADE_INPUT);
    assert_true(strstr(error.what, "older version") != NULL);
    assert_true(strstr(error.remedy, "routefade fit") != NULL);
    assert_same_file(fixture->path, bytes, size);
    free(bytes);

    assert_int_equal(rfade_survey_open_as(fixture->path, RFADE_SURVEY_WRITE, &layout,
                                          &fixture->survey, &error),
                     RFADE_OK);
    assert_int_equal(integer_of(fixture->survey, "PRAGMA user_version"), AFTER_NEXT);
    assert_int_equal(integer_of(fixture->survey, "SELECT mast_m = 2.5 FROM vehicle"), 1);
    /* What referred to the table that was made anew is still there, and keys hold again. */
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM calibration"), 1);
    assert_int_equal(integer_of(fixture->survey, "PRAGMA foreign_keys"), 1);
    /* Results were dropped and made as the new version wants them. */
    assert_int_equal(integer_of(fixture->survey,
                                "SELECT count(*) FROM sqlite_schema WHERE name = 'traversal'"),
                     0);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM verdict"), 0);
    rfade_survey_close(fixture->survey);
    fixture->survey = NULL;
    assert_int_equal(rfade_survey_open_as(fixture->path, RFADE_SURVEY_READ, &layout,
                                          &fixture->survey, &error),
                     RFADE_OK);
}

/* A survey of version 1 had no listed noise; migrated, it has the table of a new one. */
static void a_survey_of_version_1_becomes_a_current_one(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_error error = {0};
    struct rfade_survey *survey = open_new(fixture->path);
    assert_int_equal(rfade_survey_execute(survey,
                                          "CREATE TABLE kept AS SELECT sql FROM sqlite_schema "
                                          "WHERE name = 'noise'; DROP TABLE noise; "
                                          "PRAGMA user_version = 1;",
                                          &error),
                     RFADE_OK);
    rfade_survey_close(survey);
    assert_int_equal(
        rfade_survey_open(fixture->path, RFADE_SURVEY_WRITE, &fixture->survey, &error),
        RFADE_OK);
    assert_int_equal(integer_of(fixture->survey, "PRAGMA user_version"), RFADE_SCHEMA_VERSION);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM kept JOIN sqlite_schema "
                                                 "USING (sql) WHERE name = 'noise'"),
                     1);
}

static void a_failed_migration_changes_nothing(void **state)
{
    struct fixture *fixture = *state;
    static const struct rfade_sql failing[] = {{NEXT, add_column, sizeof add_column - 1},
                                               {AFTER_NEXT, breaks, sizeof breaks - 1},
                                               {0, NULL, 0}};
    static const struct rfade_sql orphaning[] = {{NEXT, orphans, sizeof orphans - 1},
                                                 {0, NULL, 0}};
    static const struct rfade_sql missing[] = {{NEXT, add_column, sizeof add_column - 1},
                                               {0, NULL, 0}};
    const struct rfade_layout layouts[] = {later_layout(failing, AFTER_NEXT),
                                           later_layout(orphaning, NEXT),
                                           later_layout(missing, AFTER_NEXT)};
    fill_one_calibration(fixture->path);
    size_t size = 0;
    char *bytes = read_file(fixture->path, &size);
    for (size_t i = 0; i < 3; i++) {
        struct rfade_error error = {0};
        assert_int_not_equal(rfade_survey_open_as(fixture->path, RFADE_SURVEY_WRITE,
                                                  &layouts[i], &fixture->survey, &error),
                             RFADE_OK);
        assert_null(fixture->survey);
        assert_same_file(fixture->path, bytes, size);
    }
    free(bytes);
}

static void results_of_another_version_are_made_again(void **state)
{
    struct fixture *fixture = *state;
    static const struct rfade_sql results = {0, other_results, sizeof other_results - 1};
    struct rfade_layout other = rfade_layout_current();
    other.derived = &results;
    struct rfade_error error = {0};
    fill_one_calibration(fixture->path);
    assert_int_equal(rfade_survey_open_as(fixture->path, RFADE_SURVEY_WRITE, &other,
                                          &fixture->survey, &error),
                     RFADE_OK);
    assert_int_equal(integer_of(fixture->survey,
                                "SELECT count(*) FROM sqlite_schema WHERE name IN "
                                "('trace', 'traversal', 'fading', 'fit')"),
                     0);
    rfade_survey_close(fixture->survey);
    fixture->survey = NULL;
    assert_refused(fixture->path, RFADE_SURVEY_READ, RFADE_INPUT, "results");
    assert_int_equal(
        rfade_survey_open(fixture->path, RFADE_SURVEY_WRITE, &fixture->survey, &error),
        RFADE_OK);
    assert_int_equal(integer_of(fixture->survey,
                                "SELECT count(*) FROM sqlite_schema WHERE name IN "
                                "('trace', 'traversal', 'fading', 'fit', 'verdict')"),
                     4);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM calibration"), 1);
}

static void an_abort_leaves_the_survey_as_it_was(void **state)
{
    struct fixture *fixture = *state;
    fixture->survey = open_new(fixture->path);
    struct rfade_import *import = begin_file(fixture->survey, "first.csv", 1);
    put_reading(import, 0, "salt", -9000, 0);
    (void)finish_file(import);
    size_t size = 0;
    char *bytes = read_file(fixture->path, &size);
    import = begin_file(fixture->survey, "second.csv", 2);
    /* More than the page cache holds, so that pages were written to the file already. */
    for (int i = 0; i < 1500000; i++)
        put_reading(import, (int64_t)i * 1000, "salt", -9000 - i % 50, i % 30);
    put_fix(import, 0, 51, 7);
    rfade_import_abort(import);
    assert_same_file(fixture->path, bytes, size);
    free(bytes);
    /* The survey goes on working. */
    (void)finish_file(begin_file(fixture->survey, "second.csv", 2));
}

/* A process that dies in the middle of an import: the next writer undoes what it left. */
static void a_killed_import_leaves_the_survey_as_it_was(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_survey *survey = open_new(fixture->path);
    struct rfade_import *import = begin_file(survey, "first.csv", 1);
    put_reading(import, 0, "salt", -9000, 0);
    (void)finish_file(import);
    rfade_survey_close(survey);
    size_t size = 0;
    char *bytes = read_file(fixture->path, &size);
    pid_t child = fork();
    assert_true(child >= 0);
    if (child == 0) {
        struct rfade_survey *doomed = NULL;
        if (rfade_survey_open(fixture->path, RFADE_SURVEY_WRITE, &doomed, NULL) != RFADE_OK)
            _exit(1);
        import = begin_file(doomed, "second.csv", 2);
        for (int i = 0; i < 1500000; i++)
            put_reading(import, (int64_t)i * 1000, "salt", -9000 - i % 50, i % 30);
        (void)raise(SIGKILL); /* no rollback, no close */
        _exit(2);
    }
    int how = 0;
    assert_int_equal(waitpid(child, &how, 0), child);
    assert_true(WIFSIGNALED(how) && WTERMSIG(how) == SIGKILL);
    struct stat about;
    assert_int_equal(stat(fixture->path, &about), 0);
    assert_true((size_t)about.st_size > size); /* it did write */
    /* A reader may not undo it, and says who may. */
    struct rfade_error error = {0};
    assert_int_equal(
        rfade_survey_open(fixture->path, RFADE_SURVEY_READ, &fixture->survey, &error),
        RFADE_STORAGE);
    assert_true(strstr(error.remedy, "routefade fit") != NULL);
    assert_int_equal(
        rfade_survey_open(fixture->path, RFADE_SURVEY_WRITE, &fixture->survey, &error),
        RFADE_OK);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM logger_file"), 1);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM reading"), 1);
    assert_same_file(fixture->path, bytes, size);
    free(bytes);
}

static void readers_see_the_survey_before_or_after(void **state)
{
    struct fixture *fixture = *state;
    fixture->survey = open_new(fixture->path);
    struct rfade_survey *reader = NULL;
    struct rfade_error error = {0};
    assert_int_equal(rfade_survey_open(fixture->path, RFADE_SURVEY_READ, &reader, &error),
                     RFADE_OK);
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
    for (int i = 0; i < 70000; i++)
        put_reading(import, i, "salt", -9000, 0);
    assert_int_equal(integer_of(reader, "SELECT count(*) FROM reading"), 0);
    assert_int_equal(integer_of(reader, "SELECT count(*) FROM logger_file"), 0);
    (void)finish_file(import);
    assert_int_equal(integer_of(reader, "SELECT count(*) FROM reading"), 70000);
    rfade_survey_close(reader);
}

static void a_second_writer_is_told_to_wait(void **state)
{
    struct fixture *fixture = *state;
    fixture->survey = open_new(fixture->path);
    struct rfade_survey *second = open_new(fixture->path);
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
    assert_int_equal(sqlite3_busy_timeout(rfade_survey_database(second), 10), SQLITE_OK);
    struct rfade_error error = {0};
    assert_int_equal(rfade_survey_begin(second, &error), RFADE_STORAGE);
    assert_true(strstr(error.what, "another program") != NULL);
    assert_true(error.remedy[0] != '\0');
    rfade_import_abort(import);
    assert_int_equal(rfade_survey_begin(second, &error), RFADE_OK);
    rfade_survey_rollback(second);
    rfade_survey_rollback(second); /* of no transaction: harmless */
    rfade_survey_close(second);
}

static void statements_bind_by_letter(void **state)
{
    struct fixture *fixture = *state;
    fixture->survey = open_new(fixture->path);
    struct rfade_error error = {0};
    sqlite3_stmt *statement = NULL;
    bool row = false;
    assert_int_equal(rfade_survey_prepare(fixture->survey, &statement, &error,
                                          "SELECT ?1, ?2, ?3, ?4, ?5, ?6", "idtbdt",
                                          INT64_C(-5), 2.5, "a'b", (const void *)"x\0y",
                                          (size_t)3, (double)NAN, (const char *)NULL),
                     RFADE_OK);
    assert_int_equal(rfade_survey_step(fixture->survey, statement, &row, &error), RFADE_OK);
    assert_true(row);
    assert_int_equal(sqlite3_column_int64(statement, 0), -5);
    assert_true(sqlite3_column_double(statement, 1) == 2.5);
    assert_string_equal((const char *)sqlite3_column_text(statement, 2), "a'b");
    assert_int_equal(sqlite3_column_bytes(statement, 3), 3);
    assert_int_equal(sqlite3_column_type(statement, 4), SQLITE_NULL);
    assert_int_equal(sqlite3_column_type(statement, 5), SQLITE_NULL);
    assert_int_equal(rfade_survey_step(fixture->survey, statement, &row, &error), RFADE_OK);
    assert_false(row);
    sqlite3_finalize(statement);
    assert_int_not_equal(
        rfade_survey_prepare(fixture->survey, &statement, &error, "SELEC 1", ""), RFADE_OK);
    assert_null(statement);
    assert_int_not_equal(
        rfade_survey_prepare(fixture->survey, &statement, &error, "SELECT 1", "i", INT64_C(1)),
        RFADE_OK);
    assert_null(statement);
}

int main(void)
{
#define TEST(name) cmocka_unit_test_setup_teardown(name, fixture_setup, fixture_teardown)
    const struct CMUnitTest tests[] = {
        TEST(a_new_survey_is_what_it_says),
        TEST(all_modes_open_a_survey),
        TEST(reading_never_writes),
        TEST(what_is_no_survey_is_refused),
        TEST(another_database_is_refused),
        TEST(a_newer_survey_is_refused),
        TEST(a_damaged_survey_is_refused),
        TEST(unreadable_and_unwritable_are_refused),
        TEST(a_name_with_a_meaning_is_a_file),
        TEST(an_older_survey_is_migrated),
        TEST(a_survey_of_version_1_becomes_a_current_one),
        TEST(a_failed_migration_changes_nothing),
        TEST(results_of_another_version_are_made_again),
        TEST(an_abort_leaves_the_survey_as_it_was),
        TEST(a_killed_import_leaves_the_survey_as_it_was),
        TEST(readers_see_the_survey_before_or_after),
        TEST(a_second_writer_is_told_to_wait),
        TEST(statements_bind_by_letter),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
