/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Missing sequence numbers: what counts as lost, and how it comes back with the readings. */
#include "survey_fixture.h"

#include "survey/read.h"
#include "survey/sequence.h"

enum { UNKNOWN = RFADE_LOST_UNKNOWN, NONE = -100 };

/* One stream's numbers (NONE: a reading without) and what is lost before each. */
struct run {
    int64_t modulus;
    size_t count;
    int64_t numbers[8];
    int32_t lost[8];
};

static void losses_follow_from_the_numbers(void **state)
{
    (void)state;
    static const struct run runs[] = {
        {0, 4, {5, 6, 9, 10}, {UNKNOWN, 0, 2, 0}},
        {0, 4, {5, 5, 5, 7}, {UNKNOWN, 0, 0, 1}},                      /* duplicates */
        {0, 3, {500, 0, 2}, {UNKNOWN, UNKNOWN, 1}},                    /* restart */
        {0, 4, {0, 1001, 2002, 3004}, {UNKNOWN, 1000, 1000, UNKNOWN}}, /* plausible or not */
        {65536, 4, {65533, 65535, 2, 3}, {UNKNOWN, 1, 2, 0}},          /* wrap */
        {256, 4, {10, 138, 10, 9}, {UNKNOWN, 127, 127, UNKNOWN}},      /* half of it */
        {0, 5, {7, NONE, 9, NONE, 12}, {UNKNOWN, UNKNOWN, 0, UNKNOWN, 1}},
        {0, 3, {NONE, NONE, 4}, {UNKNOWN, UNKNOWN, UNKNOWN}},
    };
    for (size_t i = 0; i < sizeof runs / sizeof runs[0]; i++) {
        struct rfade_sequence sequence = {.modulus = runs[i].modulus};
        for (size_t j = 0; j < runs[i].count; j++) {
            bool numbered = runs[i].numbers[j] != NONE;
            int32_t lost = rfade_sequence_lost(&sequence, numbered, runs[i].numbers[j]);
            if (lost != runs[i].lost[j])
                fail_msg("run %zu, number %zu: %d lost", i, j, lost);
        }
    }
}

static void put_numbered(struct rfade_import *import, int64_t time_us, int64_t number,
                         int32_t level_cdb)
{
    struct rfade_sink sink = rfade_import_sink(import);
    struct rfade_error error = {0};
    const struct rfade_ingest_reading reading = {.time_us = time_us,
                                                 .vehicle = "spreader 4",
                                                 .channel = "salt",
                                                 .campaign = "first frost",
                                                 .level_cdb = level_cdb,
                                                 .snr_cdb = RFADE_NO_VALUE_CDB,
                                                 .numbered = true,
                                                 .sequence = number};
    assert_int_equal(sink.reading(sink.context, &reading, &error), RFADE_OK);
}

static void assert_lost(struct rfade_survey *survey, size_t count, const int32_t *lost)
{
    struct rfade_survey_reading *readings = NULL;
    size_t read = 0, repeated = 0;
    struct rfade_error error = {0};
    assert_int_equal(rfade_survey_trace_readings(survey, 1, 1, 1, INT64_MIN, INT64_MAX,
                                                 &readings, &read, &repeated, &error),
                     RFADE_OK);
    assert_int_equal(read, count);
    for (size_t i = 0; i < count; i++)
        assert_int_equal(readings[i].lost_before, lost[i]);
    free(readings);
}

static void losses_are_stored_in_the_order_of_time(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
    put_numbered(import, 3000, 13, -9300);
    put_numbered(import, 1000, 11, -9100); /* logged late */
    put_numbered(import, 5000, 15, RFADE_NO_VALUE_CDB);
    put_numbered(import, 6000, 17, -9700);
    struct rfade_import_counts counts = finish_file(import);
    assert_int_equal(counts.readings, 3); /* 15 only told its number */
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM reading"), 3);
    assert_lost(fixture->survey, 3, (const int32_t[]){UNKNOWN, 1, 1});
}

static void a_channel_of_numbers_without_levels_leaves_nothing(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "a.csv", 1);
    put_numbered(import, 1000, 1, RFADE_NO_VALUE_CDB);
    assert_int_equal(finish_file(import).readings, 0);
    assert_int_equal(integer_of(fixture->survey, "SELECT count(*) FROM extent"), 0);
}

/* The same readings in an extract of the log: what the extract lacks was not lost. */
static void an_extract_adds_no_losses(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_import *import = begin_file(fixture->survey, "whole.csv", 1);
    for (int64_t i = 0; i < 6; i++)
        put_numbered(import, 1000 * i, i < 4 ? i : i + 2, -9000);
    (void)finish_file(import);
    import = begin_file(fixture->survey, "extract.csv", 2);
    for (int64_t i = 0; i < 6; i += 2)
        put_numbered(import, 1000 * i, i < 4 ? i : i + 2, -9000);
    (void)finish_file(import);
    assert_lost(fixture->survey, 6, (const int32_t[]){UNKNOWN, 0, 0, 0, 2, 0});
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(losses_follow_from_the_numbers),
        cmocka_unit_test_setup_teardown(losses_are_stored_in_the_order_of_time,
                                        fixture_setup_open, fixture_teardown),
        cmocka_unit_test_setup_teardown(a_channel_of_numbers_without_levels_leaves_nothing,
                                        fixture_setup_open, fixture_teardown),
        cmocka_unit_test_setup_teardown(an_extract_adds_no_losses, fixture_setup_open,
                                        fixture_teardown),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
