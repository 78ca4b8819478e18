/* SPDX-License-Identifier: GPL-3.0-or-later */
/* From imported drives to fits by segment: what changed is made again, and only that. */
#include "survey/survey_fixture.h"

#include <gsl/gsl_errno.h>

#include "analyse/analyse.h"
#include "analyse/results.h"
#include "route/geodesy.h"
#include "routefade/simulate.h"
#include "survey/channel.h"
#include "survey/store.h"
#include "survey/vehicle.h"

static const struct rfade_place origin = {56.0, 3.0};
static const double azimuth_deg = 80.0;
static const double length_m = 600.0;
static const double ks[] = {0.0, 4.0};

/* One night's drive: who, when, and the seed that makes it. */
struct night {
    const char *vehicle;
    int64_t start_s;
    uint64_t seed;
};
static const struct night first_night = {"spreader-1", 1799784000, 7};
static const struct night second_night = {"plough-2", 1799870400, 8};

static void check(enum rfade_status status, const struct rfade_error *error)
{
    if (status != RFADE_OK)
        fail_msg("%s; %s", error->what, error->remedy);
}

static void emit(const struct rfade_sink *sink, const struct night *night,
                 const struct rfade_drive_reading *reading, bool with_fix)
{
    struct rfade_error error = {0};
    int64_t time_us = night->start_s * 1000000 + llround(reading->time_s * 1e6);
    const struct rfade_ingest_reading level = {
        .time_us = time_us,
        .vehicle = night->vehicle,
        .channel = "telemetry",
        .campaign = "january",
        .level_cdb = (int32_t)lround(reading->level_dbm * 100.0),
        .snr_cdb = RFADE_NO_VALUE_CDB,
    };
    check(sink->reading(sink->context, &level, &error), &error);
    if (!with_fix)
        return;
    struct rfade_place place = rfade_geodesic_direct(&origin, azimuth_deg, reading->distance_m);
    const struct rfade_ingest_fix fix = {time_us, night->vehicle, place.latitude_deg,
                                         place.longitude_deg, reading->speed_m_s};
    check(sink->fix(sink->context, &fix, &error), &error);
}

static struct rfade_drive_settings drive_settings(uint64_t seed)
{
    return (struct rfade_drive_settings){
        .seed = seed,
        .length_m = length_m,
        .carrier_hz = 457e6,
        .speed_m_s = 10.0,
        .rate_hz = 50.0,
        .k = ks,
        .k_count = 2,
        .stretch_m = 100.0,
        .ray_angle_deg = 90.0,
        .mean_level_dbm = -90.0,
        .shadowing_db = 3.0,
        .decorrelation_m = 100.0,
        .shadowing = RFADE_SHADOWING_SMOOTH,
        .step_db = 1.0,
        .floor_dbm = NAN,
        .ceiling_dbm = NAN,
    };
}

/* Imports a night; its seed stands for the file's SHA-256. */
static void import_night(struct rfade_survey *survey, const struct night *night)
{
    struct rfade_drive_settings settings = drive_settings(night->seed);
    struct rfade_drive_reading *readings = NULL;
    size_t count = 0;
    assert_int_equal(rfade_simulate_drive(&settings, &readings, &count), RFADE_OK);
    struct rfade_error error = {0};
    struct rfade_import *import = NULL;
    bool known = false;
    unsigned char sha256[32] = {(unsigned char)night->seed};
    check(rfade_import_begin(survey, "night.csv", sha256, 1, &import, &known, &error), &error);
    assert_false(known);
    struct rfade_sink sink = rfade_import_sink(import);
    for (size_t i = 0; i < count; i++)
        emit(&sink, night, &readings[i], i % 50 == 0);
    struct rfade_import_counts counts;
    check(rfade_import_finish(import, (int64_t)count, &counts, &error), &error);
    free(readings);
}

static void add_route(struct rfade_survey *survey)
{
    struct rfade_error error = {0};
    struct rfade_place places[2] = {origin,
                                    rfade_geodesic_direct(&origin, azimuth_deg, length_m)};
    struct rfade_route *route = NULL;
    check(rfade_route_create(places, 2, &route, &error), &error);
    check(rfade_survey_route_add(survey, "valley-road", route, 100.0, 30.0, &error), &error);
    rfade_route_destroy(route);
}

static void describe_channel(struct rfade_survey *survey)
{
    struct rfade_error error = {0};
    struct rfade_channel told = rfade_channel_undescribed();
    told.carrier_hz = 457e6;
    check(rfade_survey_channel_set(survey, "telemetry", &told, &error), &error);
}

static struct rfade_analysis_summary analyse(struct rfade_survey *survey, bool all)
{
    struct rfade_error error = {0};
    struct rfade_analysis_summary summary;
    struct rfade_analysis_settings settings = rfade_analysis_defaults();
    check(rfade_analyse(survey, &settings, all, &summary, &error), &error);
    return summary;
}

/* All results as text, by natural keys and with every digit. free() it. */
static char *results_text(struct rfade_survey *survey)
{
    static const char *const sql =
        "SELECT group_concat(line, char(10)) FROM (SELECT route.name || segment.number ||"
        " channel.name || campaign.name || hex(fading.fingerprint) || sampling || pass_count ||"
        " reading_count || printf('%!.17g %!.17g %!.17g %!.17g', travel_m, mean_power_dbm,"
        " local_mean_dbm, local_sigma_db) || hex(level_tally) || hex(local_mean_tally) ||"
        " ifnull((SELECT group_concat(model || preferred || printf('%!.17g %!.17g %!.17g"
        " %!.17g', parameter, parameter_low, parameter_high, log_likelihood)) FROM (SELECT *"
        " FROM fit WHERE fit.fading_id = fading.fading_id ORDER BY model)), '') AS line"
        " FROM fading JOIN segment USING (segment_id) JOIN route USING (route_id)"
        " JOIN channel USING (channel_id) JOIN campaign USING (campaign_id) ORDER BY line)";
    sqlite3_stmt *statement = NULL;
    struct rfade_error error = {0};
    bool row = false;
    check(rfade_survey_prepare(survey, &statement, &error, sql, ""), &error);
    check(rfade_survey_step(survey, statement, &row, &error), &error);
    assert_true(row);
    char *text = strdup((const char *)sqlite3_column_text(statement, 0));
    sqlite3_finalize(statement);
    assert_non_null(text);
    return text;
}

static void assert_same_results(struct rfade_survey *left, struct rfade_survey *right)
{
    char *left_text = results_text(left), *right_text = results_text(right);
    assert_string_equal(left_text, right_text);
    free(left_text);
    free(right_text);
}

static void a_drive_becomes_fits_near_the_truth(void **state)
{
    struct fixture *fixture = *state;
    import_night(fixture->survey, &first_night);
    import_night(fixture->survey, &second_night);
    describe_channel(fixture->survey);
    add_route(fixture->survey);
    struct rfade_analysis_summary summary = analyse(fixture->survey, false);
    assert_int_equal(summary.streams_made, 2);
    assert_int_equal(summary.segments_fitted, 6);

    struct rfade_error error = {0};
    struct rfade_segment_results results;
    const struct rfade_segment_filter filter = {.from_m = NAN, .to_m = NAN};
    check(rfade_results_read(fixture->survey, &filter, &results, &error), &error);
    assert_int_equal(results.count, 6);
    int held = 0;
    for (size_t i = 0; i < results.count; i++) {
        const struct rfade_segment_result *row = &results.rows[i];
        assert_int_equal(row->segment, i + 1);
        assert_int_equal(row->passes, 2);
        assert_true(row->readings > 980 && row->readings < 1020); /* 2 x 100 m, 5 a metre */
        const struct rfade_stored_fit *rice = rfade_result_fit(row, RFADE_RICE);
        assert_non_null(rice);
        held += rice->parameter_low <= ks[i % 2] && ks[i % 2] <= rice->parameter_high;
    }
    assert_true(held >= 5); /* 95 % intervals: one of six may miss */
    rfade_results_clear(&results);
}

static void nothing_new_is_said_and_changes_nothing(void **state)
{
    struct fixture *fixture = *state;
    import_night(fixture->survey, &first_night);
    describe_channel(fixture->survey);
    add_route(fixture->survey);
    assert_false(analyse(fixture->survey, false).nothing_new);
    char *before = results_text(fixture->survey);
    assert_true(analyse(fixture->survey, false).nothing_new);
    describe_channel(fixture->survey); /* the same again */
    assert_true(analyse(fixture->survey, false).nothing_new);
    char *after = results_text(fixture->survey);
    assert_string_equal(before, after);
    free(before);
    free(after);
}

static void a_step_at_a_time_equals_everything_at_once(void **state)
{
    struct fixture *fixture = *state;
    char other_path[160];
    (void)snprintf(other_path, sizeof other_path, "%s/other.survey", fixture->folder);
    struct rfade_survey *other = open_new(other_path);

    import_night(fixture->survey, &first_night);
    describe_channel(fixture->survey);
    add_route(fixture->survey);
    (void)analyse(fixture->survey, false);
    import_night(fixture->survey, &second_night);
    struct rfade_analysis_summary summary = analyse(fixture->survey, false);
    assert_int_equal(summary.streams_made, 1);
    assert_int_equal(summary.streams_kept, 1);

    add_route(other);
    import_night(other, &second_night);
    import_night(other, &first_night);
    describe_channel(other);
    (void)analyse(other, true);
    assert_same_results(fixture->survey, other);
    rfade_survey_close(other);
}

static void a_changed_description_makes_results_again(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_error error = {0};
    import_night(fixture->survey, &first_night);
    import_night(fixture->survey, &second_night);
    describe_channel(fixture->survey);
    add_route(fixture->survey);
    (void)analyse(fixture->survey, false);
    check(rfade_survey_calibrate(fixture->survey, "plough-2", INT64_MIN, 2.0, 0.5, &error),
          &error);
    struct rfade_analysis_summary summary = analyse(fixture->survey, false);
    assert_int_equal(summary.streams_made, 1); /* the other vehicle's stands */
    assert_int_equal(summary.streams_kept, 1);
    assert_int_equal(summary.segments_fitted, 6);
    char *changed = results_text(fixture->survey);
    (void)analyse(fixture->survey, true);
    char *again = results_text(fixture->survey);
    assert_string_equal(changed, again);
    free(changed);
    free(again);
}

static void assert_refused(struct rfade_survey *survey, enum rfade_status expected,
                           const char *word)
{
    struct rfade_error error = {0};
    struct rfade_analysis_summary summary;
    struct rfade_analysis_settings settings = rfade_analysis_defaults();
    assert_int_equal(rfade_analyse(survey, &settings, false, &summary, &error), expected);
    assert_non_null(strstr(error.what, word));
    assert_true(error.remedy[0] != '\0');
}

static void what_is_missing_is_named(void **state)
{
    struct fixture *fixture = *state;
    assert_refused(fixture->survey, RFADE_NO_DATA, "no readings");
    import_night(fixture->survey, &first_night);
    assert_refused(fixture->survey, RFADE_NO_DATA, "no route");
    add_route(fixture->survey);
    assert_refused(fixture->survey, RFADE_INPUT, "carrier of channel 'telemetry'");
    describe_channel(fixture->survey);
    (void)analyse(fixture->survey, false);
}

static void unknown_names_are_refused_in_filters(void **state)
{
    struct fixture *fixture = *state;
    struct rfade_error error = {0};
    struct rfade_segment_results results;
    const struct rfade_segment_filter filters[] = {
        {.route = "nowhere", .from_m = NAN, .to_m = NAN},
        {.channel = "nothing", .from_m = NAN, .to_m = NAN},
        {.campaign = "never", .from_m = NAN, .to_m = NAN}};
    for (size_t i = 0; i < 3; i++) {
        assert_int_equal(rfade_results_read(fixture->survey, &filters[i], &results, &error),
                         RFADE_INPUT);
        assert_int_equal(results.count, 0);
    }
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test_setup_teardown(a_drive_becomes_fits_near_the_truth, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(nothing_new_is_said_and_changes_nothing,
                                        fixture_setup_open, fixture_teardown),
        cmocka_unit_test_setup_teardown(a_step_at_a_time_equals_everything_at_once,
                                        fixture_setup_open, fixture_teardown),
        cmocka_unit_test_setup_teardown(a_changed_description_makes_results_again,
                                        fixture_setup_open, fixture_teardown),
        cmocka_unit_test_setup_teardown(what_is_missing_is_named, fixture_setup_open,
                                        fixture_teardown),
        cmocka_unit_test_setup_teardown(unknown_names_are_refused_in_filters,
                                        fixture_setup_open, fixture_teardown),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
