/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What simulated drives with known truth are called. */
#include <gsl/gsl_errno.h>
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

#include "routefade/separate.h"
#include "simulate/drives.h"

static const double wavelength_m = 299792458.0 / 457e6;
static const double four_k[] = {0.0, 1.0, 4.0, 10.0};

/* 2 km at 10 m/s and 457 MHz, K 0, 1, 4, 10 by 100 m, one reading every `spacing` wavelengths.
 */
static struct rfade_drive_settings road(double spacing_wavelengths)
{
    struct rfade_drive_settings settings = plain_drive();

    settings.length_m = 2000.0;
    settings.carrier_hz = 457e6;
    settings.rate_hz = settings.speed_m_s / (spacing_wavelengths * wavelength_m);
    settings.k = four_k;
    settings.k_count = 4;
    settings.step_db = 1.0;
    return settings;
}

struct track {
    struct rfade_track_reading *readings;
    size_t count;
};

static struct track drive(const struct rfade_drive_settings *settings)
{
    struct rfade_drive_reading *rows;
    struct track track;

    assert_int_equal(rfade_simulate_drive(settings, &rows, &track.count), RFADE_OK);
    track.readings = calloc(track.count, sizeof *track.readings);
    assert_non_null(track.readings);
    for (size_t i = 0; i < track.count; i++) {
        track.readings[i] = (struct rfade_track_reading){
            .time_us = llround(1e6 * rows[i].time_s),
            .travel_mm = llround(1000.0 * rows[i].distance_m),
            .level_cdb = (int32_t)lround(100.0 * rows[i].level_dbm),
            .segment = (int32_t)fmin(rows[i].distance_m, settings->length_m - 1.0) / 100};
    }
    free(rows);
    return track;
}

/* Share of the segments that get a label. Frees the track. */
static double share_of(enum rfade_sampling label, struct track track, double step_db)
{
    const struct rfade_separate_settings settings = {
        wavelength_m, RFADE_DEFAULT_WINDOW_WAVELENGTHS, RFADE_DEFAULT_BLOCK_WAVELENGTHS};
    const struct rfade_receiver receiver = {.step_cdb = (int32_t)lround(100.0 * step_db),
                                            .floor_cdb = RFADE_NO_FLOOR_CDB,
                                            .ceiling_cdb = RFADE_NO_CEILING_CDB};
    struct rfade_separation result;
    double labelled = 0.0;
    double segments;

    assert_int_equal(rfade_separate(track.readings, track.count, &receiver, &settings, &result),
                     RFADE_OK);
    for (size_t i = 0; i < result.count; i++) {
        labelled += rfade_sampling_label(&result.traversals[i].sampling) == label ? 1.0 : 0.0;
    }
    segments = (double)result.count;
    free(track.readings);
    rfade_separation_clear(&result);
    return labelled / segments;
}

static double share_over_seeds(enum rfade_sampling label, struct rfade_drive_settings settings)
{
    enum { SEEDS = 3 };
    double share = 0.0;

    for (settings.seed = 1; settings.seed <= SEEDS; settings.seed++) {
        share += share_of(label, drive(&settings), settings.step_db) / SEEDS;
    }
    return share;
}

static void steady_local_mean_is_resolved(void **state)
{
    const double spacings[] = {0.05, 0.15, 0.3};

    (void)state;
    for (int i = 0; i < 3; i++) {
        struct rfade_drive_settings settings = road(spacings[i]);

        assert_true(share_over_seeds(RFADE_RESOLVED, settings) >= 0.98);
        settings.step_db = 0.1;
        settings.ray_angle_deg = 0.0;
        assert_true(share_over_seeds(RFADE_RESOLVED, settings) >= 0.98);
    }
}

static void smooth_local_mean_is_resolved(void **state)
{
    struct rfade_drive_settings settings = road(0.15);

    (void)state;
    settings.shadowing_db = 4.0;
    settings.decorrelation_m = 60.0;
    assert_true(share_over_seeds(RFADE_RESOLVED, settings) >= 0.95);
    settings.decorrelation_m = 200.0;
    assert_true(share_over_seeds(RFADE_RESOLVED, settings) >= 0.95);
}

static void rough_local_mean_is_inseparable(void **state)
{
    struct rfade_drive_settings settings = road(0.15);

    (void)state;
    settings.shadowing_db = 4.0;
    settings.shadowing = RFADE_SHADOWING_EXPONENTIAL;
    settings.decorrelation_m = 20.0;
    assert_true(share_over_seeds(RFADE_INSEPARABLE, settings) >= 0.95);
    settings.decorrelation_m = 60.0;
    assert_true(share_over_seeds(RFADE_INSEPARABLE, settings) >= 0.8);
}

static void sparse_readings_are_undersampled(void **state)
{
    (void)state;
    assert_true(share_over_seeds(RFADE_UNDERSAMPLED, road(5.0)) == 1.0);
}

/* Each level is kept for `rows` rows. */
static struct track held_track(const struct rfade_drive_settings *settings, size_t rows)
{
    struct track track = drive(settings);

    for (size_t i = 0; i < track.count; i++) {
        track.readings[i].level_cdb = track.readings[i - i % rows].level_cdb;
    }
    return track;
}

/* 20 rows a second, a new level every 6.5 s and every 0.2 s (3 wavelengths). */
static void held_levels_are_held(void **state)
{
    struct rfade_drive_settings settings = road(0.15);
    struct track track;

    (void)state;
    settings.rate_hz = 20.0;
    assert_true(share_of(RFADE_HELD, held_track(&settings, 130), 1.0) == 1.0);
    assert_true(share_of(RFADE_HELD, held_track(&settings, 4), 1.0) == 1.0);

    /* No fading at all isn't a held level, nor is one that flickers between two steps. */
    track = drive(&settings);
    for (size_t i = 0; i < track.count; i++) {
        track.readings[i].level_cdb = -8000 + (i / 40 % 3 == 0 ? 100 : 0);
    }
    assert_true(share_of(RFADE_HELD, track, 1.0) == 0.0);
}

/* Of 4000 rows with 31 levels the tallies hold the 31. */
static void tallies_of_a_held_pass_count_updates(void **state)
{
    const struct rfade_separate_settings how = {wavelength_m, 40.0, 10.0};
    const struct rfade_receiver receiver = {
        .step_cdb = 100, .floor_cdb = RFADE_NO_FLOOR_CDB, .ceiling_cdb = RFADE_NO_CEILING_CDB};
    struct rfade_drive_settings settings = road(0.15);
    struct rfade_separation result;
    struct track track;
    int64_t readings = 0;
    int64_t rows = 0;
    int64_t updates = 0;

    (void)state;
    settings.rate_hz = 20.0;
    track = held_track(&settings, 130);
    assert_int_equal(rfade_separate(track.readings, track.count, &receiver, &how, &result),
                     RFADE_OK);
    for (size_t i = 0; i < result.count; i++) {
        const struct rfade_traversal_tally *traversal = &result.traversals[i];

        readings += rfade_tally_readings(traversal->level);
        rows += traversal->sampling.readings;
        updates += traversal->sampling.updates;
        assert_int_equal(traversal->sampling.held, traversal->sampling.readings);
    }
    assert_int_equal(rows, track.count);
    assert_int_equal(readings, updates + 1);
    assert_true(updates > 20 && updates <= 31);
    free(track.readings);
    rfade_separation_clear(&result);
}

/* Each level becomes the mean power of itself and the rows after it, to 1 dB. */
static void average_rows(struct track track, size_t rows)
{
    for (size_t i = 0; i < track.count; i++) {
        double sum = 0.0;
        size_t end = i + rows < track.count ? i + rows : track.count;

        for (size_t j = i; j < end; j++) {
            sum += pow(10.0, track.readings[j].level_cdb / 1000.0);
        }
        track.readings[i].level_cdb =
            100 * (int32_t)lround(10.0 * log10(sum / (double)(end - i)));
    }
}

static void averaging_is_recognised(void **state)
{
    const size_t rows[] = {14, 27}; /* over two and over four wavelengths */
    struct rfade_drive_settings settings = road(0.15);

    (void)state;
    settings.step_db = 0.0;
    for (int i = 0; i < 2; i++) {
        struct track track = drive(&settings);

        average_rows(track, rows[i]);
        assert_true(share_of(RFADE_AVERAGED, track, 1.0) >= 0.95);
    }
}

/* A long standstill amid travel leaves the labels alone; without any travel it is said. */
static void a_standstill_changes_no_label(void **state)
{
    const double place_m = 950.0;
    struct rfade_drive_settings settings = road(0.15);
    struct track track;

    (void)state;
    settings.standstill_at_m = &place_m;
    settings.standstill_count = 1;
    settings.standstill_s = 30.0;
    assert_true(share_over_seeds(RFADE_RESOLVED, settings) >= 0.98);

    track = drive(&settings);
    for (size_t i = 0; i < track.count; i++) {
        track.readings[i].travel_mm = 0;
        track.readings[i].segment = 0;
    }
    assert_true(share_of(RFADE_STATIONARY, track, 1.0) == 1.0);
}

static void labels_have_names(void **state)
{
    (void)state;
    assert_string_equal(rfade_sampling_name(RFADE_RESOLVED), "resolved");
    assert_string_equal(rfade_sampling_name(RFADE_INSEPARABLE), "inseparable");
    assert_string_equal(rfade_sampling_name(RFADE_UNDERSAMPLED), "undersampled");
    assert_string_equal(rfade_sampling_name(RFADE_AVERAGED), "averaged");
    assert_string_equal(rfade_sampling_name(RFADE_HELD), "held");
    assert_string_equal(rfade_sampling_name(RFADE_STATIONARY), "stationary");
}

static void sums_add_and_are_taken_away(void **state)
{
    struct rfade_sampling_sums sums = {
        .readings = 5, .fading_sum = -7, .curvature_mm = {1, 2, 3, 4}};
    struct rfade_sampling_sums total = {0};

    (void)state;
    assert_int_equal(rfade_sampling_merge(&total, &sums, 1), RFADE_OK);
    assert_int_equal(rfade_sampling_merge(&total, &sums, 1), RFADE_OK);
    assert_int_equal(total.readings, 10);
    assert_int_equal(total.fading_sum, -14);
    assert_int_equal(total.curvature_mm[3], 8);
    assert_int_equal(rfade_sampling_merge(&total, &sums, -1), RFADE_OK);
    assert_memory_equal(&total, &sums, sizeof sums);
    assert_int_equal(rfade_sampling_merge(&total, &sums, 2), RFADE_DOMAIN);
    sums.curvature_mm[3] = INT64_MAX;
    assert_int_equal(rfade_sampling_merge(&total, &sums, 1), RFADE_OVERFLOW);
    assert_int_equal(total.readings, 5);
}

static void sums_survive_their_byte_form(void **state)
{
    struct rfade_sampling_sums sums = {
        .readings = 0x0102, .standing = -2, .lag_mm = {[RFADE_LAGS - 1] = 9}};
    const uint8_t start[] = {2,    1,    0,    0,    0,    0,    0,    0,
                             0xfe, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff};
    struct rfade_sampling_sums decoded;
    uint8_t *bytes;
    size_t size;

    (void)state;
    assert_int_equal(rfade_sampling_encode(&sums, &bytes, &size), RFADE_OK);
    assert_int_equal(size, sizeof sums);
    assert_memory_equal(bytes, start, sizeof start);
    assert_int_equal(bytes[size - 8], 9);
    assert_int_equal(rfade_sampling_decode(bytes, size, &decoded), RFADE_OK);
    assert_memory_equal(&decoded, &sums, sizeof sums);
    assert_int_equal(rfade_sampling_decode(bytes, size - 1, &decoded), RFADE_INPUT);
    assert_int_equal(decoded.readings, 0);
    assert_int_equal(rfade_sampling_decode(NULL, 0, &decoded), RFADE_INPUT);
    free(bytes);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(steady_local_mean_is_resolved),
        cmocka_unit_test(smooth_local_mean_is_resolved),
        cmocka_unit_test(rough_local_mean_is_inseparable),
        cmocka_unit_test(sparse_readings_are_undersampled),
        cmocka_unit_test(held_levels_are_held),
        cmocka_unit_test(tallies_of_a_held_pass_count_updates),
        cmocka_unit_test(averaging_is_recognised),
        cmocka_unit_test(a_standstill_changes_no_label),
        cmocka_unit_test(labels_have_names),
        cmocka_unit_test(sums_add_and_are_taken_away),
        cmocka_unit_test(sums_survive_their_byte_form),
    };

    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
