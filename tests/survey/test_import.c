/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey_fixture.h"

#include "survey/list.h"
#include "survey/read.h"

static void read_all(struct rfade_survey *survey, struct rfade_survey_reading **readings,
                     size_t *count, size_t *repeated)
{
    struct rfade_error error = {0};
    assert_int_equal(rfade_survey_trace_readings(survey, 1, 1, 1, INT64_MIN, INT64_MAX,
                                                 readings, count, repeated, &error),
                     RFADE_OK);
}

static void readings_come_back_in_time_order(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
    put_reading(import, 3000000, "salt", -9050, 1200);
    put_reading(import, 1000000, "salt", -8000, RFADE_NO_VALUE_CDB);
    put_reading(import, 3000000, "salt", -9100, 1300); /* same time: after the first */
    put_reading(import, -2000000, "salt", RFADE_NO_VALUE_CDB, 700);
    put_reading(import, 1500000, "plough", -7000, 5);
    struct rfade_import_counts counts = finish_file(import);
    assert_int_equal(counts.readings, 5);
    assert_int_equal(counts.extents, 2);

    struct rfade_survey_reading *readings = NULL;
    size_t count = 0;
    size_t repeated = 0;
    read_all(fixture->survey, &readings, &count, &repeated);
    assert_int_equal(count, 4);
    assert_int_equal(repeated, 0);
    const int64_t times[] = {-2000000, 1000000, 3000000, 3000000};
    const int32_t levels[] = {RFADE_NO_VALUE_CDB, -8000, -9050, -9100};
    const int32_t snrs[] = {700, RFADE_NO_VALUE_CDB, 1200, 1300};
    for (size_t i = 0; i < 4; i++) {
        assert_int_equal(readings[i].time_us, times[i]);
        assert_int_equal(readings[i].level_cdb, levels[i]);
        assert_int_equal(readings[i].snr_cdb, snrs[i]);
    }
    free(readings);
}

static void a_time_range_narrows_what_is_read(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
    for (int i = 0; i < 10; i++)
        put_reading(import, (int64_t)i * 1000, "salt", -9000 - i, 0);
    (void)finish_file(import);
    struct rfade_survey_reading *readings = NULL;
    size_t count = 0;
    size_t repeated = 0;
    struct rfade_error error = {0};
    assert_int_equal(rfade_survey_trace_readings(fixture->survey, 1, 1, 1, 3000, 5000,
                                                 &readings, &count, &repeated, &error),
                     RFADE_OK);
    assert_int_equal(count, 3);
    assert_int_equal(readings[0].level_cdb, -9003);
    assert_int_equal(readings[2].level_cdb, -9005);
    free(readings);
}

static void extents_hold_at_most_65536_readings(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "long.csv", 1);
    for (int i = 0; i < 70000; i++)
        put_reading(import, (int64_t)i * 10000, "salt", -9000 + i % 100, RFADE_NO_VALUE_CDB);
    struct rfade_import_counts counts = finish_file(import);
    assert_int_equal(counts.extents, 2);
    assert_int_equal(integer_of(fixture->survey, "SELECT max(reading_count) FROM extent"),
                     65536);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM reading"), 70000);
    assert_int_equal(
        integer_of(fixture->survey,
                   "SELECT count(*) FROM extent JOIN reading ON reading_id BETWEEN "
                   "first_reading_id AND first_reading_id + reading_count - 1"),
        70000);
    assert_int_equal(
        integer_of(fixture->survey, "SELECT first_reading_id FROM extent WHERE ordinal = 1"),
        65537);
}

static void many_streams_flush_the_largest(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "hopping.csv", 1);
    char channel[32];
    /* 40 channels of 30,000 readings each pass the bound of buffered readings. */
    for (int i = 0; i < 30000; i++)
        for (int c = 0; c < 40; c++) {
            (void)snprintf(channel, sizeof channel, "hop %d", c);
            put_reading(import, (int64_t)i * 1000, channel, -9000, RFADE_NO_VALUE_CDB);
        }
    struct rfade_import_counts counts = finish_file(import);
    assert_int_equal(counts.readings, 1200000);
    assert_true(counts.extents > 40);
    assert_int_equal(integer_of(fixture->survey, "SELECT sum(reading_count) FROM extent"),
                     1200000);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM reading"), 1200000);
}

static void a_reading_takes_about_20_bytes(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "long.csv", 1);
    unsigned noise = 1;
    for (int i = 0; i < 200000; i++) {
        noise = noise * 1664525U + 1013904223U;
        put_reading(import, 1700000000000000 + (int64_t)i * 10000, "salt",
                    -9000 - 100 * (int)(noise >> 27), (int)(noise >> 22));
    }
    (void)finish_file(import);
    int64_t bytes =
        integer_of(fixture->survey, "SELECT page_count * page_size FROM pragma_page_count, "
                                    "pragma_page_size");
    print_message("%.2f bytes a reading\n", (double)bytes / 200000);
    assert_true(bytes < INT64_C(23) * 200000);
}

static void the_same_bytes_are_known_under_any_name(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 7);
    put_reading(import, 0, "salt", -9000, 0);
    (void)finish_file(import);
    unsigned char sha256[32];
    bool known = false;
    struct rfade_error error = {0};
    fill_sha256(sha256, 7);
    assert_int_equal(rfade_import_begin(fixture->survey, "copy of a.csv", sha256, 1000, &import,
                                        &known, &error),
                     RFADE_OK);
    assert_true(known);
    assert_null(import);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM reading"), 1);
    /* Nothing was left open: another file can begin. */
    (void)finish_file(begin_file(fixture->survey, "b.csv", 8));
}

static void a_reading_in_two_files_counts_once(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "merged.csv", 9);
    put_reading(import, 1000, "salt", -9000, 10);
    put_reading(import, 2000, "salt", -9100, 10);
    put_reading(import, 2000, "salt", -9100, 10); /* twice in one file: two readings */
    put_reading(import, 3000, "salt", -9200, 10);
    (void)finish_file(import);
    import = begin_file(fixture->survey, "part.csv", 3);
    put_reading(import, 2000, "salt", -9100, 10); /* has it once */
    put_reading(import, 2000, "salt", -9150, 10); /* another level: another reading */
    put_reading(import, 3000, "salt", -9200, 11); /* another SNR: another reading */
    (void)finish_file(import);

    struct rfade_survey_reading *readings = NULL;
    size_t count = 0;
    size_t repeated = 0;
    read_all(fixture->survey, &readings, &count, &repeated);
    assert_int_equal(count, 6);
    assert_int_equal(repeated, 1);
    /* At equal times the file with the smaller SHA-256 goes first. */
    const int32_t levels[] = {-9000, -9150, -9100, -9100, -9200, -9200};
    const int32_t snrs[] = {10, 10, 10, 10, 11, 10};
    for (size_t i = 0; i < 6; i++) {
        assert_int_equal(readings[i].level_cdb, levels[i]);
        assert_int_equal(readings[i].snr_cdb, snrs[i]);
    }
    free(readings);
}

static void fixes_are_stored_once_a_position(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
    for (int i = 0; i < 100; i++) /* one position beside a hundred rows */
        put_fix(import, (int64_t)i * 10000, 51.0, 7.0);
    put_fix(import, 1000000, 51.1, 7.0);
    put_fix(import, 1000000, 51.2, 7.0); /* differs: the first stays */
    put_fix(import, 1000000, 51.1, 7.0); /* repeats */
    put_fix(import, 5000000, 51.1, 7.0); /* the same place, long after: still there */
    struct rfade_import_counts counts = finish_file(import);
    assert_int_equal(counts.fixes, 3);
    assert_int_equal(counts.repeated_fixes, 100);
    assert_int_equal(counts.differing_fixes, 1);
    struct rfade_position *fixes = NULL;
    size_t count = 0;
    struct rfade_error error = {0};
    assert_int_equal(
        rfade_survey_fixes(fixture->survey, 1, 0, INT64_MAX, &fixes, &count, &error), RFADE_OK);
    assert_int_equal(count, 3);
    assert_float_equal(fixes[1].latitude_deg, 51.1, 0);
    assert_true(isnan(fixes[1].speed_m_s));
    free(fixes);
}

static void of_two_files_fixes_the_smaller_sha256_wins(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 9);
    put_fix(import, 1000000, 51.9, 7.0);
    (void)finish_file(import);
    import = begin_file(fixture->survey, "b.csv", 2);
    put_fix(import, 1000000, 51.2, 7.0);
    (void)finish_file(import);
    struct rfade_position *fixes = NULL;
    size_t count = 0;
    struct rfade_error error = {0};
    assert_int_equal(
        rfade_survey_fixes(fixture->survey, 1, 0, INT64_MAX, &fixes, &count, &error), RFADE_OK);
    assert_int_equal(count, 1);
    assert_float_equal(fixes[0].latitude_deg, 51.2, 0);
    free(fixes);
}

static void text_of_a_log_is_data(void **state)
{
    struct fixture *fixture = *state;
    static const char hostile[] = "'); DROP TABLE reading; --\x1b[2J\0%s%n<script>\xff\xfe";
    struct rfade_import *import =
        begin_file(fixture->survey, "a'; DROP TABLE fix; --\x1b[31m.csv", 1);
    put_reading(import, 0, "'\x1b]0;x\x07\"; DROP TABLE channel; --\xff", -9000, 0);
    struct rfade_sink sink = rfade_import_sink(import);
    const struct rfade_ingest_refusal refusal = {.line = 3,
                                                 .reason = "the time isn't one",
                                                 .text = hostile,
                                                 .text_size = sizeof hostile};
    struct rfade_error error = {0};
    assert_int_equal(sink.refused(sink.context, &refusal, &error), RFADE_OK);
    struct rfade_import_counts counts = finish_file(import);
    assert_int_equal(counts.refused, 1);

    sqlite3_stmt *statement = NULL;
    bool row = false;
    assert_int_equal(rfade_survey_prepare(fixture->survey, &statement, &error,
                                          "SELECT text, name FROM refused_line, channel", ""),
                     RFADE_OK);
    assert_int_equal(rfade_survey_step(fixture->survey, statement, &row, &error), RFADE_OK);
    assert_true(row);
    assert_int_equal(sqlite3_column_bytes(statement, 0), (int)sizeof hostile);
    assert_memory_equal(sqlite3_column_blob(statement, 0), hostile, sizeof hostile);
    assert_string_equal((const char *)sqlite3_column_text(statement, 1),
                        "'\x1b]0;x\x07\"; DROP TABLE channel; --\xff");
    sqlite3_finalize(statement);
}

static void a_refused_line_keeps_its_first_200_bytes(void **state)
{
    struct fixture *fixture = *state;
    char text[500];
    memset(text, 'x', sizeof text);
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
    struct rfade_sink sink = rfade_import_sink(import);
    struct rfade_error error = {0};
    const struct rfade_ingest_refusal long_line = {
        .line = 1, .reason = "too long", .text = text, .text_size = sizeof text};
    const struct rfade_ingest_refusal empty_line = {.line = 2, .reason = "empty"};
    assert_int_equal(sink.refused(sink.context, &long_line, &error), RFADE_OK);
    assert_int_equal(sink.refused(sink.context, &empty_line, &error), RFADE_OK);
    (void)finish_file(import);
    assert_int_equal(integer_of(fixture->survey, "SELECT length(text) FROM refused_line "
                                                 "ORDER BY line"),
                     200);
    assert_int_equal(integer_of(fixture->survey, "SELECT length(text) FROM refused_line "
                                                 "WHERE line = 2"),
                     0);
}

static void bad_names_stop_the_file(void **state)
{
    struct fixture *fixture = *state;
    char long_name[300];
    memset(long_name, 'n', sizeof long_name - 1);
    long_name[sizeof long_name - 1] = '\0';
    const char *const names[] = {"", long_name};
    for (size_t i = 0; i < 2; i++) {
        struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
        struct rfade_sink sink = rfade_import_sink(import);
        struct rfade_error error = {0};
        const struct rfade_ingest_reading reading = {
            .vehicle = "v", .channel = names[i], .campaign = "c", .level_cdb = 0};
        assert_int_equal(sink.reading(sink.context, &reading, &error), RFADE_INPUT);
        assert_true(strlen(error.remedy) > 0);
        const struct rfade_ingest_fix fix = {.vehicle = names[i], .speed_m_s = NAN};
        assert_int_equal(sink.fix(sink.context, &fix, &error), RFADE_INPUT);
        rfade_import_abort(import);
    }
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM logger_file"), 0);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM vehicle"), 0);
}

static void a_reading_without_values_is_refused(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
    struct rfade_sink sink = rfade_import_sink(import);
    struct rfade_error error = {0};
    const struct rfade_ingest_reading reading = {.vehicle = "v",
                                                 .channel = "c",
                                                 .campaign = "k",
                                                 .level_cdb = RFADE_NO_VALUE_CDB,
                                                 .snr_cdb = RFADE_NO_VALUE_CDB};
    assert_int_equal(sink.reading(sink.context, &reading, &error), RFADE_DOMAIN);
    rfade_import_abort(import);
}

static void a_fix_off_the_earth_is_refused(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
    struct rfade_sink sink = rfade_import_sink(import);
    const double bad[][2] = {{91, 0}, {0, 181}, {NAN, 0}, {0, NAN}};
    for (size_t i = 0; i < 4; i++) {
        struct rfade_error error = {0};
        const struct rfade_ingest_fix fix = {.time_us = (int64_t)i,
                                             .vehicle = "v",
                                             .latitude_deg = bad[i][0],
                                             .longitude_deg = bad[i][1],
                                             .speed_m_s = NAN};
        assert_int_equal(sink.fix(sink.context, &fix, &error), RFADE_CONFLICT);
    }
    rfade_import_abort(import);
}

static void streams_and_counts_are_listed(void **state)
{
    struct fixture *fixture = *state;
    int64_t generation = integer_of(fixture->survey, "SELECT current FROM generation");
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
    put_reading(import, 5000, "zinc", -9000, 0);
    put_reading(import, 7000, "salt", -9000, 0);
    put_reading(import, 9000, "salt", -9000, 0);
    put_fix(import, 5000, 51, 7);
    (void)finish_file(import);
    struct rfade_stream *streams = NULL;
    size_t count = 0;
    struct rfade_error error = {0};
    assert_int_equal(rfade_survey_streams(fixture->survey, &streams, &count, &error), RFADE_OK);
    assert_int_equal(count, 2);
    assert_string_equal(streams[0].channel, "salt"); /* by name, not by id */
    assert_int_equal(streams[0].reading_count, 2);
    assert_int_equal(streams[0].start_us, 7000);
    assert_int_equal(streams[0].end_us, 9000);
    free(streams);
    struct rfade_survey_counts counts;
    assert_int_equal(rfade_survey_count(fixture->survey, &counts, &error), RFADE_OK);
    assert_int_equal(counts.readings, 3);
    assert_int_equal(counts.fixes, 1);
    assert_int_equal(counts.channels, 2);
    assert_int_equal(counts.generation, generation + 1);
    assert_int_equal(counts.fitted_generation, 0);
    struct rfade_logger_file *files = NULL;
    assert_int_equal(rfade_survey_logger_files(fixture->survey, &files, &count, &error),
                     RFADE_OK);
    assert_int_equal(count, 1);
    assert_string_equal(files[0].name, "a.csv");
    assert_int_equal(files[0].reading_count, 3);
    assert_int_equal(files[0].line_count, 10);
    free(files);
}

static void an_extent_takes_its_readings_along(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
    put_reading(import, 1, "salt", -9000, 0);
    put_fix(import, 1, 51, 7);
    (void)finish_file(import);
    import = begin_file(fixture->survey, "b.csv", 2);
    put_reading(import, 2, "salt", -9100, 0);
    (void)finish_file(import);
    struct rfade_error error = {0};
    assert_int_equal(rfade_survey_execute(fixture->survey,
                                          "DELETE FROM logger_file WHERE name = 'a.csv'",
                                          &error),
                     RFADE_OK);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM reading"), 1);
    assert_int_equal(integer_of(fixture->survey, "SELECT level_cdb FROM reading"), -9100);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM fix"), 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test_setup_teardown(readings_come_back_in_time_order, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(a_time_range_narrows_what_is_read, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(extents_hold_at_most_65536_readings, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(many_streams_flush_the_largest, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(a_reading_takes_about_20_bytes, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(the_same_bytes_are_known_under_any_name,
                                        fixture_setup_open, fixture_teardown),
        cmocka_unit_test_setup_teardown(a_reading_in_two_files_counts_once, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(fixes_are_stored_once_a_position, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(of_two_files_fixes_the_smaller_sha256_wins,
                                        fixture_setup_open, fixture_teardown),
        cmocka_unit_test_setup_teardown(text_of_a_log_is_data, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(a_refused_line_keeps_its_first_200_bytes,
                                        fixture_setup_open, fixture_teardown),
        cmocka_unit_test_setup_teardown(bad_names_stop_the_file, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(a_reading_without_values_is_refused, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(a_fix_off_the_earth_is_refused, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(streams_and_counts_are_listed, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(an_extent_takes_its_readings_along, fixture_setup_open,
                                        fixture_teardown),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
