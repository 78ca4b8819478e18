/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey_fixture.h"

#include "survey/channel.h"
#include "survey/dump.h"
#include "survey/list.h"
#include "survey/read.h"
#include "survey/store.h"
#include "survey/vehicle.h"

/* Overlapping files, two channels, equal times, fixes of one time in two files. */
static void import_file(struct rfade_survey *survey, int number)
{
    char name[32];
    (void)snprintf(name, sizeof name, "night %d.csv", number);
    struct rfade_import *import = begin_file(survey, name, (unsigned char)(200 - number * 37));
    for (int i = 0; i < 200; i++) {
        int tick = number * 100 + i;
        int64_t time_us = (int64_t)(tick - tick % 3) * 10000;
        put_reading(import, time_us, tick % 2 ? "salt" : "plough", -9000 - tick % 7 * 100,
                    tick % 5);
        put_fix(import, time_us, 51 + number * 0.001, 7 + i * 0.0001);
    }
    struct rfade_sink sink = rfade_import_sink(import);
    const struct rfade_ingest_refusal refusal = {
        .line = 7, .reason = "no time", .text = name, .text_size = strlen(name)};
    struct rfade_error error = {0};
    assert_int_equal(sink.refused(sink.context, &refusal, &error), RFADE_OK);
    (void)finish_file(import);
}

static void settings(struct rfade_survey *survey, bool backwards)
{
    struct rfade_error error = {0};
    const struct rfade_place places[] = {{51.2, 7.4}, {51.21, 7.41}, {51.21, 7.45}};
    for (int i = 0; i < 2; i++) {
        struct rfade_route *route = NULL;
        int which = backwards ? 1 - i : i;
        assert_int_equal(rfade_route_create(places, 2 + (size_t)which, &route, &error),
                         RFADE_OK);
        assert_int_equal(
            rfade_survey_route_add(survey, which ? "long" : "short", route, 100, 30, &error),
            RFADE_OK);
        rfade_route_destroy(route);
        struct rfade_channel told = rfade_channel_undescribed();
        told.carrier_hz = 457e6;
        assert_int_equal(
            rfade_survey_channel_set(survey, which ? "salt" : "plough", &told, &error),
            RFADE_OK);
        assert_int_equal(rfade_survey_calibrate(survey, which ? "spreader 4" : "spreader 5", 0,
                                                1, 0.5, &error),
                         RFADE_OK);
    }
}

static char *dump_of(struct rfade_survey *survey)
{
    char *text = NULL;
    size_t size = 0;
    struct rfade_error error = {0};
    FILE *out = open_memstream(&text, &size);
    assert_non_null(out);
    assert_int_equal(rfade_survey_dump(survey, out, &error), RFADE_OK);
    assert_int_equal(fclose(out), 0);
    return text;
}

static void the_order_of_import_does_not_show(void **state)
{
    struct fixture *fixture = *state;
    char other_path[160];
    (void)snprintf(other_path, sizeof other_path, "%s/other.survey", fixture->folder);
    struct rfade_survey *other = open_new(other_path);
    settings(fixture->survey, false);
    for (int i = 0; i < 4; i++)
        import_file(fixture->survey, i);
    for (int i = 3; i >= 0; i--)
        import_file(other, i);
    settings(other, true);

    char *one = dump_of(fixture->survey);
    char *two = dump_of(other);
    assert_true(strlen(one) > 50000);
    assert_string_equal(one, two);
    free(one);
    free(two);

    struct rfade_stream *streams[2];
    struct rfade_survey *const surveys[] = {fixture->survey, other};
    struct rfade_survey_reading *readings[2];
    struct rfade_position *fixes[2];
    unsigned char prints[2][2][32];
    size_t counts[2][3];
    size_t repeated[2];
    struct rfade_error error = {0};
    for (int i = 0; i < 2; i++) {
        assert_int_equal(rfade_survey_streams(surveys[i], &streams[i], &counts[i][0], &error),
                         RFADE_OK);
        const struct rfade_stream *stream = &streams[i][1];
        assert_string_equal(stream->channel, "salt");
        assert_int_equal(rfade_survey_trace_readings(surveys[i], stream->vehicle_id,
                                                     stream->channel_id, stream->campaign_id,
                                                     INT64_MIN, INT64_MAX, &readings[i],
                                                     &counts[i][1], &repeated[i], &error),
                         RFADE_OK);
        assert_int_equal(rfade_survey_fixes(surveys[i], stream->vehicle_id, 0, 3000000,
                                            &fixes[i], &counts[i][2], &error),
                         RFADE_OK);
        assert_int_equal(rfade_survey_readings_fingerprint(
                             surveys[i], stream->vehicle_id, stream->channel_id,
                             stream->campaign_id, 0, 3000000, prints[i][0], &error),
                         RFADE_OK);
        assert_int_equal(rfade_survey_fixes_fingerprint(surveys[i], stream->vehicle_id, 0,
                                                        3000000, prints[i][1], &error),
                         RFADE_OK);
    }
    assert_memory_equal(counts[0], counts[1], sizeof counts[0]);
    assert_int_equal(repeated[0], repeated[1]);
    assert_true(repeated[0] > 0);
    for (size_t i = 0; i < counts[0][1]; i++) {
        assert_int_equal(readings[0][i].time_us, readings[1][i].time_us);
        assert_int_equal(readings[0][i].level_cdb, readings[1][i].level_cdb);
        assert_int_equal(readings[0][i].snr_cdb, readings[1][i].snr_cdb);
        assert_int_equal(readings[0][i].lost_before, readings[1][i].lost_before);
    }
    for (size_t i = 0; i < counts[0][2]; i++) {
        assert_int_equal(fixes[0][i].time_us, fixes[1][i].time_us);
        assert_true(fixes[0][i].latitude_deg == fixes[1][i].latitude_deg);
        assert_true(i == 0 || fixes[0][i].time_us > fixes[0][i - 1].time_us);
    }
    assert_memory_equal(prints[0], prints[1], sizeof prints[0]);
    for (int i = 0; i < 2; i++) {
        free(streams[i]);
        free(readings[i]);
        free(fixes[i]);
    }
    rfade_survey_close(other);
}

static void another_reading_shows(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_error error = {0};
    unsigned char before[32];
    unsigned char after[32];
    import_file(fixture->survey, 1);
    char *one = dump_of(fixture->survey);
    assert_int_equal(rfade_survey_readings_fingerprint(fixture->survey, 1, 1, 1, INT64_MIN,
                                                       INT64_MAX, before, &error),
                     RFADE_OK);
    assert_int_equal(rfade_survey_execute(
                         fixture->survey,
                         "UPDATE reading SET level_cdb = level_cdb + 1 WHERE reading_id = 5",
                         &error),
                     RFADE_OK);
    char *two = dump_of(fixture->survey);
    assert_string_not_equal(one, two);
    import_file(fixture->survey, 2);
    assert_int_equal(rfade_survey_readings_fingerprint(fixture->survey, 1, 1, 1, INT64_MIN,
                                                       INT64_MAX, after, &error),
                     RFADE_OK);
    assert_memory_not_equal(before, after, 32);
    /* Outside the time range of the second file nothing has changed. */
    assert_int_equal(
        rfade_survey_readings_fingerprint(fixture->survey, 1, 1, 1, 0, 1500000, after, &error),
        RFADE_OK);
    assert_memory_equal(before, after, 32);
    free(one);
    free(two);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test_setup_teardown(the_order_of_import_does_not_show, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(another_reading_shows, fixture_setup_open,
                                        fixture_teardown),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
