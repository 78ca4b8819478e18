/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A survey that a file came into and was taken out of again is the one that never had it. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "common/error.h"
#include "program.h"
#include "survey/dump.h"
#include "survey/survey.h"

struct fixture {
    char folder[64];
    char survey[96];
    char first[128];
    char second[128];
};

/* Two drives that overlap in time by half: one by the same vehicle on a second channel, of
 * which nothing else knows. */
static int setup(void **state)
{
    struct fixture *fixture = calloc(1, sizeof *fixture);
    (void)snprintf(fixture->folder, sizeof fixture->folder, "%s", folder_create());
    (void)snprintf(fixture->survey, sizeof fixture->survey, "%s/night.routefade",
                   fixture->folder);
    (void)snprintf(fixture->first, sizeof fixture->first, "%s/first.csv", fixture->folder);
    (void)snprintf(fixture->second, sizeof fixture->second, "%s/second.csv", fixture->folder);
    DONE("simulate", "--length-m", "300", "--seed", "2", "--vehicle", "spreader-4", "--channel",
         "telemetry", "--output", fixture->first);
    DONE("simulate", "--length-m", "300", "--seed", "3", "--start", "2027-01-12T20:00:15Z",
         "--vehicle", "spreader-4", "--channel", "spare", "--output", fixture->second);
    DONE("channel", "telemetry", "--carrier-hz", "457e6", "--survey", fixture->survey);
    DONE("import", fixture->first, "--survey", fixture->survey);
    DONE("route", "fen", "--from-vehicle", "spreader-4", "--survey", fixture->survey);
    DONE("fit", "--survey", fixture->survey);
    *state = fixture;
    return 0;
}

static int teardown(void **state)
{
    struct fixture *fixture = *state;
    folder_remove(fixture->folder);
    free(fixture);
    return 0;
}

static char *dump_of(const char *path)
{
    struct rfade_survey *survey = NULL;
    struct rfade_error error = {0};
    char *text = NULL;
    size_t size = 0;
    FILE *out = open_memstream(&text, &size);
    assert_non_null(out);
    assert_int_equal(rfade_survey_open(path, RFADE_SURVEY_READ, &survey, &error), RFADE_OK);
    assert_int_equal(rfade_survey_dump(survey, out, &error), RFADE_OK);
    rfade_survey_close(survey);
    assert_int_equal(fclose(out), 0);
    return text;
}

static void import_second(const struct fixture *fixture)
{
    DONE("import", fixture->second, "--survey", fixture->survey);
    DONE("channel", "spare", "--carrier-hz", "457e6", "--survey", fixture->survey);
    DONE("fit", "--survey", fixture->survey);
}

/* The second file changed the first one's positions in time, too. */
static void withdrawn_is_as_if_never_imported(void **state)
{
    const struct fixture *fixture = *state;
    char *before = dump_of(fixture->survey);
    DONE("import", fixture->second, "--survey", fixture->survey);
    char *between = dump_of(fixture->survey);
    assert_string_not_equal(before, between);
    DONE("withdraw", fixture->second, "--survey", fixture->survey);
    DONE("fit", "--survey", fixture->survey);
    char *after = dump_of(fixture->survey);
    assert_string_equal(before, after);
    assert_null(strstr(after, "spare"));
    free(before);
    free(between);
    free(after);
}

/* A channel that somebody described stays; results and readings go. */
static void results_go_with_the_file(void **state)
{
    const struct fixture *fixture = *state;
    char *before = dump_of(fixture->survey);
    import_second(fixture);
    char *both = dump_of(fixture->survey);
    DONE("withdraw", fixture->second, "--survey", fixture->survey);
    char *withdrawn = dump_of(fixture->survey);
    assert_non_null(strstr(both, "\"spare\""));
    assert_true(strlen(withdrawn) < strlen(both));
    struct program program = {0};
    program_run(&program,
                (const char *const[]){"outage", "--threshold-dbm", "-95", "--channel", "spare",
                                      "--survey", fixture->survey, "--format", "csv", NULL});
    assert_int_equal(program.status, 0);
    assert_non_null(strstr(program.errors, "run `routefade fit`"));
    assert_null(strstr(program.output, "\nfen,")); /* no row but the header */
    program_clear(&program);
    DONE("import", fixture->second, "--survey", fixture->survey);
    DONE("fit", "--survey", fixture->survey);
    char *again = dump_of(fixture->survey);
    assert_string_equal(both, again);
    free(before);
    free(both);
    free(withdrawn);
    free(again);
}

static void a_file_is_known_by_name_and_by_hash(void **state)
{
    const struct fixture *fixture = *state;
    char *before = dump_of(fixture->survey);
    DONE("import", fixture->second, "--survey", fixture->survey);
    char *name = strdup(fixture->second);
    assert_int_equal(remove(fixture->second), 0);
    DONE("withdraw", name, "--survey", fixture->survey);
    DONE("fit", "--survey", fixture->survey);
    char *after = dump_of(fixture->survey);
    assert_string_equal(before, after);
    free(before);
    free(after);
    REFUSED(1, "holds no logger file", "withdraw", name, "--survey", fixture->survey);
    REFUSED(1, "holds no logger file", "withdraw", "00000000", "--survey", fixture->survey);
    free(name);
    const char *other = file_create(fixture->folder, "other.csv", "time,rssi_dbm\n");
    REFUSED(1, "does not hold these bytes", "withdraw", other, "--survey", fixture->survey);
    REFUSED(2, "", "withdraw", "--survey", fixture->survey);
}

#define TEST(test) cmocka_unit_test_setup_teardown(test, setup, teardown)

int main(void)
{
    const struct CMUnitTest tests[] = {
        TEST(withdrawn_is_as_if_never_imported),
        TEST(results_go_with_the_file),
        TEST(a_file_is_known_by_name_and_by_hash),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
