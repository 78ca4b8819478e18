/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a logger does to its readings, undone: clipping, lost packets, gaps, noise, steps. */
#include "survey/survey_fixture.h"

#include <gsl/gsl_errno.h>

#include "analyse/analyse.h"
#include "analyse/clipping.h"
#include "analyse/losses.h"
#include "analyse/receiver.h"
#include "analyse/results.h"
#include "route/geodesy.h"
#include "routefade/separate.h"
#include "routefade/simulate.h"
#include "survey/channel.h"
#include "survey/list.h"
#include "survey/read.h"
#include "survey/store.h"

static const struct rfade_place origin = {56.0, 3.0};
static const double azimuth_deg = 80.0;
static const int64_t start_us = INT64_C(1799784000000000);

static void check(enum rfade_status status, const struct rfade_error *error)
{
    if (status != RFADE_OK)
        fail_msg("%s; %s", error->what, error->remedy);
}

/* 600 m with a mean of -90 dBm, 5 readings a metre (0.3 wavelengths). */
static struct rfade_drive_settings drive_settings(uint64_t seed, const double *k)
{
    return (struct rfade_drive_settings){
        .seed = seed,
        .length_m = 600.0,
        .carrier_hz = 457e6,
        .speed_m_s = 10.0,
        .rate_hz = 50.0,
        .k = k,
        .k_count = 1,
        .stretch_m = 100.0,
        .ray_angle_deg = 90.0,
        .mean_level_dbm = -90.0,
        .decorrelation_m = 100.0,
        .shadowing = RFADE_SHADOWING_SMOOTH,
        .step_db = 1.0,
        .floor_dbm = NAN,
        .ceiling_dbm = NAN,
    };
}

/* The readings of a simulated drive, as the survey gives them. free() the array. */
static struct rfade_survey_reading *simulated(const struct rfade_drive_settings *settings,
                                              size_t *count)
{
    struct rfade_drive_reading *drive = NULL;
    assert_int_equal(rfade_simulate_drive(settings, &drive, count), RFADE_OK);
    struct rfade_survey_reading *readings = calloc(*count, sizeof *readings);
    assert_non_null(readings);
    for (size_t i = 0; i < *count; i++)
        readings[i] = (struct rfade_survey_reading){
            .time_us = llround(drive[i].time_s * 1e6),
            .level_cdb = (int32_t)lround(drive[i].level_dbm * 100.0),
            .snr_cdb = RFADE_NO_VALUE_CDB,
            .lost_before = RFADE_LOST_UNKNOWN};
    free(drive);
    return readings;
}

static struct rfade_clipping clipping_of(const struct rfade_drive_settings *settings)
{
    size_t count = 0;
    struct rfade_survey_reading *readings = simulated(settings, &count);
    struct rfade_clipping found =
        rfade_find_clipping(readings, count, (int32_t)lround(settings->step_db * 100.0));
    free(readings);
    return found;
}

static void floors_and_ceilings_are_found(void **state)
{
    (void)state;
    static const double ks[] = {0.0, 1.0};
    static const double steps_db[] = {1.0, 0.5, 0.1};
    for (size_t i = 0; i < 24; i++) {
        struct rfade_drive_settings settings = drive_settings(1 + i, &ks[i % 2]);
        settings.step_db = steps_db[i % 3];
        settings.shadowing_db = i % 4 < 2 ? 0.0 : 4.0;
        settings.floor_dbm = -98.0;
        struct rfade_clipping found = clipping_of(&settings);
        if (found.floor_cdb != -9800 || found.ceiling_cdb != RFADE_NO_CEILING_CDB)
            fail_msg("drive %zu: floor %d, ceiling %d", i, found.floor_cdb, found.ceiling_cdb);
        settings.floor_dbm = NAN;
        settings.ceiling_dbm = -88.0;
        found = clipping_of(&settings);
        if (found.floor_cdb != RFADE_NO_FLOOR_CDB || found.ceiling_cdb != -8800)
            fail_msg("drive %zu: floor %d, ceiling %d", i, found.floor_cdb, found.ceiling_cdb);
    }
}

static void no_floor_is_found_where_there_is_none(void **state)
{
    (void)state;
    static const double ks[] = {0.0, 1.0, 10.0, 1000.0};
    static const double steps_db[] = {1.0, 0.5, 0.1, 2.0};
    for (size_t i = 0; i < 200; i++) {
        struct rfade_drive_settings settings = drive_settings(100 + i, &ks[i % 4]);
        settings.step_db = steps_db[i / 4 % 4];
        settings.shadowing_db = i % 8 < 4 ? 0.0 : 4.0;
        settings.speed_m_s = i % 3 == 0 ? 1.0 : 10.0; /* readings close together */
        struct rfade_clipping found = clipping_of(&settings);
        if (found.floor_cdb != RFADE_NO_FLOOR_CDB || found.ceiling_cdb != RFADE_NO_CEILING_CDB)
            fail_msg("drive %zu: floor %d, ceiling %d", i, found.floor_cdb, found.ceiling_cdb);
    }
}

static void assert_no_clipping(const int32_t *levels_cdb, size_t count, size_t period)
{
    struct rfade_survey_reading readings[4000] = {{0}};
    for (size_t i = 0; i < count; i++)
        readings[i].level_cdb = levels_cdb[i % period];
    struct rfade_clipping found = rfade_find_clipping(readings, count, 100);
    assert_int_equal(found.floor_cdb, RFADE_NO_FLOOR_CDB);
    assert_int_equal(found.ceiling_cdb, RFADE_NO_CEILING_CDB);
}

static void levels_that_hardly_move_are_no_pile_up(void **state)
{
    (void)state;
    const int32_t constant[] = {-9000};
    const int32_t flicker[] = {-9000, -9000, -8900, -9000, -9000, -9000};
    const int32_t two[] = {-9000, -8000};
    assert_no_clipping(constant, 0, 1);
    assert_no_clipping(constant, 1, 1);
    assert_no_clipping(constant, 4000, 1);
    assert_no_clipping(flicker, 4000, 6);
    assert_no_clipping(two, 4000, 2);
    /* A clipped log of few readings tells nothing. */
    const int32_t clipped[] = {-9800, -9000, -8900, -9100, -8800, -8700, -9800, -9200};
    assert_no_clipping(clipped, 40, 8);
}

/* Ten minutes at a light, in the deepest fade of the night, are one run. */
static void standing_is_no_pile_up(void **state)
{
    (void)state;
    static const double k = 0.0;
    struct rfade_drive_settings settings = drive_settings(5, &k);
    size_t count = 0;
    struct rfade_survey_reading *moving = simulated(&settings, &count);
    struct rfade_survey_reading *all = calloc(count + 30000, sizeof *all);
    size_t lowest = 0;
    assert_non_null(all);
    for (size_t i = 0; i < count; i++)
        lowest = moving[i].level_cdb < moving[lowest].level_cdb ? i : lowest;
    memcpy(all, moving, (lowest + 1) * sizeof *all);
    for (size_t i = 1; i <= 30000; i++)
        all[lowest + i] = moving[lowest];
    memcpy(all + lowest + 30001, moving + lowest + 1, (count - lowest - 1) * sizeof *all);
    assert_int_equal(rfade_find_clipping(all, count + 30000, 100).floor_cdb,
                     RFADE_NO_FLOOR_CDB);
    free(all);
    free(moving);
}

static void lost_readings_are_spread_between_their_neighbours(void **state)
{
    (void)state;
    const struct rfade_survey_reading readings[] = {
        {100, -9000, 0, 7}, {200, -9100, 0, 0}, {600, -9200, 0, 3}, {601, -9300, 0, -1}};
    const int64_t times[] = {100, 200, 300, 400, 500, 600, 601};
    const int32_t levels[] = {-9000, -9100, -11000, -11000, -11000, -9200, -9300};
    struct rfade_survey_reading *filled = NULL;
    struct rfade_error error = {0};
    size_t count = 0;
    assert_int_equal(rfade_count_lost(readings, 4), 3); /* 7 lie before the trace */
    check(rfade_fill_losses(readings, 4, -11000, &filled, &count, &error), &error);
    assert_int_equal(count, 7);
    for (size_t i = 0; i < 7; i++) {
        assert_int_equal(filled[i].time_us, times[i]);
        assert_int_equal(filled[i].level_cdb, levels[i]);
    }
    free(filled);
    assert_int_equal(rfade_count_lost(readings + 3, 1), -1);
}

static int64_t missing_of(int64_t interval_us, int64_t jitter_us, size_t every)
{
    struct rfade_survey_reading readings[300] = {{0}};
    size_t count = 0;
    int64_t missing = 0;
    struct rfade_error error = {0};
    for (size_t i = 0; i < 300; i++)
        if (i % every != 1)
            readings[count++].time_us =
                (int64_t)i * interval_us + (int64_t)(i * 7919 % 101) * jitter_us / 100;
    check(rfade_count_missing(readings, count, &missing, &error), &error);
    return missing;
}

static void gaps_of_a_regular_log_are_counted(void **state)
{
    (void)state;
    assert_int_equal(missing_of(20000, 2000, 10), 30); /* i = 1, 11, ... 291 */
    assert_int_equal(missing_of(20000, 2000, 1000), 1);
    assert_int_equal(missing_of(1000, 100000, 10), -1); /* no clock to be seen */
    struct rfade_survey_reading few[2] = {{0}, {.time_us = 10}};
    int64_t missing = 0;
    struct rfade_error error = {0};
    check(rfade_count_missing(few, 2, &missing, &error), &error);
    assert_int_equal(missing, -1);
}

/* How a drive is logged. */
struct logging {
    double heard_from_dbm; /* weaker packets are lost; NaN: all are logged */
    bool numbered;
    double noise_dbm; /* added to the power; NaN: none */
};

static double logged_dbm(const struct rfade_drive_reading *reading,
                         const struct logging *logging)
{
    if (isnan(logging->noise_dbm))
        return reading->level_dbm;
    return round(10.0 * log10(pow(10.0, reading->power_dbm / 10.0) +
                              pow(10.0, logging->noise_dbm / 10.0)));
}

static void import_drive(struct rfade_survey *survey,
                         const struct rfade_drive_settings *settings,
                         const struct logging *logging)
{
    struct rfade_drive_reading *readings = NULL;
    size_t count = 0;
    assert_int_equal(rfade_simulate_drive(settings, &readings, &count), RFADE_OK);
    struct rfade_import *import = begin_file(survey, "night.csv", 1);
    struct rfade_sink sink = rfade_import_sink(import);
    struct rfade_error error = {0};
    for (size_t i = 0; i < count; i++) {
        int64_t time_us = start_us + llround(readings[i].time_s * 1e6);
        const struct rfade_ingest_reading level = {
            .time_us = time_us,
            .vehicle = "spreader-1",
            .channel = "telemetry",
            .campaign = "january",
            .level_cdb = (int32_t)lround(logged_dbm(&readings[i], logging) * 100.0),
            .snr_cdb = RFADE_NO_VALUE_CDB,
            .numbered = logging->numbered,
            .sequence = (int64_t)(i % 256),
            .modulus = 256,
        };
        if (!(level.level_cdb < logging->heard_from_dbm * 100.0))
            check(sink.reading(sink.context, &level, &error), &error);
        if (i % 50 != 0)
            continue;
        struct rfade_place place =
            rfade_geodesic_direct(&origin, azimuth_deg, readings[i].distance_m);
        const struct rfade_ingest_fix fix = {time_us, "spreader-1", place.latitude_deg,
                                             place.longitude_deg, readings[i].speed_m_s};
        check(sink.fix(sink.context, &fix, &error), &error);
    }
    (void)finish_file(import);
    free(readings);
}

static void prepare(struct rfade_survey *survey, double noise_floor_dbm)
{
    struct rfade_error error = {0};
    struct rfade_place places[2] = {origin, rfade_geodesic_direct(&origin, azimuth_deg, 600.0)};
    struct rfade_route *route = NULL;
    check(rfade_route_create(places, 2, &route, &error), &error);
    check(rfade_survey_route_add(survey, "valley-road", route, 100.0, 30.0, &error), &error);
    rfade_route_destroy(route);
    struct rfade_channel told = rfade_channel_undescribed();
    told.carrier_hz = 457e6;
    told.noise_floor_dbm = noise_floor_dbm;
    check(rfade_survey_channel_set(survey, "telemetry", &told, &error), &error);
}

/* Of the six segments, how many K intervals hold the truth; and the mean of the estimates. */
static int held(struct rfade_survey *survey, double margin_db, double k, double *mean_k)
{
    struct rfade_error error = {0};
    struct rfade_analysis_summary summary;
    struct rfade_analysis_settings settings = rfade_analysis_defaults();
    settings.noise_margin_db = margin_db;
    check(rfade_analyse(survey, &settings, false, &summary, &error), &error);
    struct rfade_segment_results results;
    const struct rfade_segment_filter filter = {.from_m = NAN, .to_m = NAN};
    check(rfade_results_read(survey, &filter, &results, &error), &error);
    assert_int_equal(results.count, 6);
    int count = 0;
    *mean_k = 0.0;
    for (size_t i = 0; i < results.count; i++) {
        const struct rfade_stored_fit *rice = rfade_result_fit(&results.rows[i], RFADE_RICE);
        assert_non_null(rice);
        count += rice->parameter_low <= k && k <= rice->parameter_high;
        *mean_k += rice->parameter / 6.0;
    }
    rfade_results_clear(&results);
    print_message("K %.3g: %d of 6 intervals hold it, mean %.3g\n", k, count, *mean_k);
    return count;
}

/* Packets below -97 dBm, 15 % of them, don't come through. */
static void lost_packets_count_where_they_are_numbered(void **state)
{
    struct fixture *fixture = *state;
    static const double k = 1.0;
    double mean_k = NAN;
    struct rfade_drive_settings settings = drive_settings(11, &k);
    struct logging logging = {-97.0, true, NAN};
    import_drive(fixture->survey, &settings, &logging);
    prepare(fixture->survey, NAN);
    assert_true(held(fixture->survey, 3.0, k, &mean_k) >= 5);
    assert_true(fabs(mean_k - k) < 0.25);

    struct rfade_stream_found *found = NULL;
    size_t count = 0;
    struct rfade_error error = {0};
    check(rfade_survey_found(fixture->survey, &found, &count, &error), &error);
    assert_int_equal(count, 1);
    assert_int_equal(found->lost_count + found->reading_count, 3001 - 0);
    assert_true(found->lost_count > 200);
    assert_int_equal(found->missing_count, -1);
    free(found);
    assert_int_equal(integer_of(fixture->survey, "SELECT floor_source = 'lost' AND"
                                                 " floor_dbm = -98 FROM trace"),
                     1);
}

static void lost_packets_without_numbers_are_reported(void **state)
{
    struct fixture *fixture = *state;
    static const double k = 1.0;
    double mean_k = NAN;
    struct rfade_drive_settings settings = drive_settings(11, &k);
    struct logging logging = {-97.0, false, NAN};
    import_drive(fixture->survey, &settings, &logging);
    prepare(fixture->survey, NAN);
    assert_true(held(fixture->survey, 3.0, k, &mean_k) <= 1); /* too steady by far */
    assert_true(mean_k > 2.0);
    struct rfade_stream_found *found = NULL;
    size_t count = 0;
    struct rfade_error error = {0};
    check(rfade_survey_found(fixture->survey, &found, &count, &error), &error);
    assert_int_equal(count, 1);
    assert_int_equal(found->missing_count + found->reading_count, 3001);
    assert_int_equal(found->lost_count, -1);
    free(found);
}

static void a_floor_that_nobody_told_does_no_harm(void **state)
{
    struct fixture *fixture = *state;
    static const double k = 1.0;
    double mean_k = NAN;
    struct rfade_drive_settings settings = drive_settings(13, &k);
    settings.floor_dbm = -95.0;
    struct logging logging = {NAN, false, NAN};
    import_drive(fixture->survey, &settings, &logging);
    prepare(fixture->survey, NAN);
    assert_true(held(fixture->survey, 3.0, k, &mean_k) >= 5);
    assert_int_equal(integer_of(fixture->survey, "SELECT floor_source = 'pile-up' AND"
                                                 " floor_dbm = -95 FROM trace"),
                     1);
    assert_int_equal(integer_of(fixture->survey, "SELECT ceiling_source IS NULL FROM trace"),
                     1);
}

/* Noise at -100 dBm in the reported level: as strong as the signal in one reading of ten. */
static void noise_is_taken_off_the_levels(void **state)
{
    struct fixture *fixture = *state;
    static const double k = 0.5;
    double mean_k = NAN;
    struct rfade_drive_settings settings = drive_settings(17, &k);
    struct logging logging = {NAN, false, -100.0};
    import_drive(fixture->survey, &settings, &logging);
    prepare(fixture->survey, -100.0);
    assert_true(held(fixture->survey, 0.0, k, &mean_k) <= 1); /* levels taken as they are */
    assert_true(mean_k > 1.2);
    assert_int_equal(integer_of(fixture->survey, "SELECT floor_source IS NULL FROM trace"), 1);
    assert_true(held(fixture->survey, 3.0, k, &mean_k) >= 5);
    assert_true(fabs(mean_k - k) < 0.15);
    /* The first edge from -97 dBm up is that at -96.5. */
    assert_int_equal(integer_of(fixture->survey, "SELECT floor_source = 'noise' AND"
                                                 " floor_dbm = -97 FROM trace"),
                     1);
}

/* Limits of the receiver stay limits when the noise is taken off. */
static void noise_and_limits_go_together(void **state)
{
    (void)state;
    struct rfade_survey_reading readings[64] = {{0}};
    struct rfade_channel told = rfade_channel_undescribed();
    struct rfade_analysis_settings settings = rfade_analysis_defaults();
    settings.noise_margin_db = 3.0;
    for (int i = 0; i < 64; i++)
        readings[i].level_cdb = -11000 + 100 * i;
    told.noise_floor_dbm = -110.0;
    told.floor_dbm = -104.0;
    told.ceiling_dbm = -60.0;
    struct rfade_trace_receiver known;
    assert_int_equal(rfade_trace_receiver(&told, NULL, &settings, readings, 64, &known),
                     RFADE_OK);
    assert_int_equal(known.floor_source, RFADE_LIMIT_CHANNEL);
    assert_int_equal(known.reported.floor_cdb, -10400);
    /* 10 lg(10^-10.35 - 10^-11) = -104.601 dBm; less half a step. */
    assert_int_equal(known.receiver.floor_cdb, -10510);
    assert_int_equal(rfade_trace_level_cdb(&known, -10400), known.receiver.floor_cdb);
    /* 10 lg(10^-10.3 - 10^-11) = -103.967 dBm: above it. */
    assert_int_equal(rfade_trace_level_cdb(&known, -10300), -10397);
    assert_true(rfade_trace_level_cdb(&known, -6000) >= known.receiver.ceiling_cdb);
    assert_true(rfade_trace_level_cdb(&known, -6100) < known.receiver.ceiling_cdb);
}

int main(void)
{
    gsl_set_error_handler_off();
#define WITH_SURVEY(test)                                                                      \
    cmocka_unit_test_setup_teardown(test, fixture_setup_open, fixture_teardown)
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(floors_and_ceilings_are_found),
        cmocka_unit_test(no_floor_is_found_where_there_is_none),
        cmocka_unit_test(levels_that_hardly_move_are_no_pile_up),
        cmocka_unit_test(standing_is_no_pile_up),
        cmocka_unit_test(lost_readings_are_spread_between_their_neighbours),
        cmocka_unit_test(gaps_of_a_regular_log_are_counted),
        WITH_SURVEY(lost_packets_count_where_they_are_numbered),
        WITH_SURVEY(lost_packets_without_numbers_are_reported),
        WITH_SURVEY(a_floor_that_nobody_told_does_no_harm),
        WITH_SURVEY(noise_is_taken_off_the_levels),
        cmocka_unit_test(noise_and_limits_go_together),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
