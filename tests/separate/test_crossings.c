/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Crossings of levels about the local mean: counted by hand, and against theory. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "routefade/fade_timing.h"
#include "routefade/separate.h"
#include "routefade/simulate.h"

/* Places of the levels in the list. */
enum { AT_5, AT_0, AT_M3, AT_M5, AT_M10, AT_M15, AT_M20, AT_M25, AT_M30 };

enum { READINGS = 2000, SPACING_MM = 100, INTERVAL_US = 10000 };

static const struct rfade_separate_settings settings = {
    .wavelength_m = 1.0, .window_wavelengths = 40.0, .block_wavelengths = 10.0};
static const struct rfade_receiver open_receiver = {
    .step_cdb = 100, .floor_cdb = RFADE_NO_FLOOR_CDB, .ceiling_cdb = RFADE_NO_CEILING_CDB};

/* A vehicle that reads -59.5 and -60.5 dBm in turn, every decimetre: a level that never changed
 * would be taken for one that is held. */
static void steady_drive(struct rfade_track_reading readings[READINGS])
{
    for (int i = 0; i < READINGS; i++)
        readings[i] = (struct rfade_track_reading){.time_us = (int64_t)i * INTERVAL_US,
                                                   .travel_mm = (int64_t)i * SPACING_MM,
                                                   .level_cdb = i % 2 ? -5950 : -6050};
}

static void dip(struct rfade_track_reading *readings, int from, int count, int depth_cdb)
{
    for (int i = from; i < from + count; i++)
        readings[i].level_cdb -= depth_cdb;
}

/* The crossings of the traversals added up. */
static struct rfade_crossings crossings(const struct rfade_track_reading *readings,
                                        size_t count, const struct rfade_receiver *receiver)
{
    struct rfade_separation separation;
    struct rfade_crossings sum = {0};
    assert_int_equal(rfade_separate(readings, count, receiver, &settings, &separation),
                     RFADE_OK);
    for (size_t i = 0; i < separation.count; i++)
        assert_int_equal(rfade_crossings_merge(&sum, &separation.traversals[i].crossings),
                         RFADE_OK);
    rfade_separation_clear(&separation);
    return sum;
}

static void fades_are_counted_with_their_length(void **state)
{
    (void)state;
    struct rfade_track_reading readings[READINGS];
    steady_drive(readings);
    dip(readings, 500, 5, 2200);
    dip(readings, 900, 2, 1200);
    const struct rfade_crossings sum = crossings(readings, READINGS, &open_receiver);
    assert_int_equal(sum.travel_mm, (READINGS - 1) * SPACING_MM);
    assert_int_equal(sum.moving_us, (READINGS - 1) * INTERVAL_US);
    assert_int_equal(sum.square_mm2, (READINGS - 1) * SPACING_MM * SPACING_MM);
    assert_int_equal(sum.level[AT_M5].crossings, 2);
    assert_int_equal(sum.level[AT_M5].below_mm, 700);
    assert_int_equal(sum.level[AT_M5].longest_mm, 500);
    assert_int_equal(sum.level[AT_M5].longest_us, 5 * INTERVAL_US);
    assert_int_equal(sum.level[AT_M15].crossings, 1);
    assert_int_equal(sum.level[AT_M20].below_mm, 500);
    assert_int_equal(sum.level[AT_M25].crossings, 0);
    assert_int_equal(sum.level[AT_M25].below_mm, 0);
    for (int i = 0; i < RFADE_CROSSING_LEVELS; i++) {
        assert_int_equal(sum.level[i].exposed_mm, sum.travel_mm);
        assert_int_equal(sum.level[i].hidden_mm, 0);
    }
}

/* Two segments: each step of travel counts in one of them, and sums stay the same. */
static void segments_add_up(void **state)
{
    (void)state;
    struct rfade_track_reading readings[READINGS];
    steady_drive(readings);
    dip(readings, 498, 5, 2200);
    const struct rfade_crossings whole = crossings(readings, READINGS, &open_receiver);
    for (int i = 500; i < READINGS; i++)
        readings[i].segment = 1;
    const struct rfade_crossings parts = crossings(readings, READINGS, &open_receiver);
    assert_int_equal(parts.travel_mm, whole.travel_mm);
    assert_int_equal(parts.square_mm2, whole.square_mm2);
    assert_int_equal(parts.level[AT_M10].crossings, 1);
    assert_int_equal(parts.level[AT_M10].below_mm, whole.level[AT_M10].below_mm);
    /* the part of it in the second segment */
    assert_int_equal(parts.level[AT_M10].longest_mm, 350);
}

/* A vehicle that stands in a fade, or on its edge, crosses nothing meanwhile. */
static void standing_does_not_count(void **state)
{
    (void)state;
    struct rfade_track_reading readings[READINGS];
    steady_drive(readings);
    dip(readings, 700, 5, 2200);
    const struct rfade_crossings moving = crossings(readings, READINGS, &open_receiver);
    /* 300 readings at the place of reading 702, every other one out of the fade */
    for (int i = 703; i < READINGS; i++) {
        const int steps = i < 1002 ? 702 : i - 300;
        readings[i].travel_mm = (int64_t)steps * SPACING_MM;
        readings[i].level_cdb = i < 1002
                                    ? (i % 2 ? -5950 : -8200)
                                    : (i < 1005 && i > 1002 ? -8200 : (i % 2 ? -5950 : -6050));
    }
    const struct rfade_crossings sum = crossings(readings, READINGS, &open_receiver);
    assert_int_equal(sum.level[AT_M10].crossings, moving.level[AT_M10].crossings);
    assert_int_equal(sum.travel_mm, (READINGS - 301) * SPACING_MM);
    assert_int_equal(sum.moving_us, (READINGS - 301) * INTERVAL_US);
    assert_true(sum.level[AT_M10].longest_us <= moving.level[AT_M10].longest_us);
}

/* What lies between readings more than a wavelength apart nobody saw. */
static void a_gap_ends_a_fade(void **state)
{
    (void)state;
    struct rfade_track_reading readings[READINGS];
    steady_drive(readings);
    dip(readings, 700, 6, 2200);
    for (int i = 703; i < READINGS; i++)
        readings[i].travel_mm += 1500;
    const struct rfade_crossings sum = crossings(readings, READINGS, &open_receiver);
    assert_int_equal(sum.level[AT_M10].crossings, 1);
    assert_int_equal(sum.level[AT_M10].longest_mm, 250);
    assert_int_equal(sum.level[AT_M10].below_mm, 500);
    assert_int_equal(sum.travel_mm, (READINGS - 2) * SPACING_MM);
}

/* Readings at a floor 10 dB down lie below -5 dB; whether below -15 dB nobody knows. */
static void censored_readings_keep_their_bound(void **state)
{
    (void)state;
    struct rfade_track_reading readings[READINGS];
    steady_drive(readings);
    for (int i = 700; i < 705; i++)
        readings[i].level_cdb = -7000;
    const struct rfade_receiver clipped = {
        .step_cdb = 100, .floor_cdb = -7000, .ceiling_cdb = RFADE_NO_CEILING_CDB};
    const struct rfade_crossings sum = crossings(readings, READINGS, &clipped);
    assert_int_equal(sum.level[AT_M5].crossings, 1);
    assert_int_equal(sum.level[AT_M5].below_mm, 500);
    assert_int_equal(sum.level[AT_M5].hidden_mm, 0);
    assert_int_equal(sum.level[AT_M15].crossings, 0);
    assert_int_equal(sum.level[AT_M15].below_mm, 0);
    assert_int_equal(sum.level[AT_M15].hidden_mm, 600);
    assert_int_equal(sum.level[AT_M15].exposed_mm, sum.travel_mm - 600);
    /* and so at a ceiling of -55 dBm */
    steady_drive(readings);
    for (int i = 700; i < 705; i++)
        readings[i].level_cdb = -5500;
    const struct rfade_receiver topped = {
        .step_cdb = 100, .floor_cdb = RFADE_NO_FLOOR_CDB, .ceiling_cdb = -5500};
    const struct rfade_crossings high = crossings(readings, READINGS, &topped);
    /* the ceiling's bound is 5.5 - 0.5 dB less the rise of the local mean */
    assert_int_equal(high.level[AT_5].hidden_mm, 600);
    assert_int_equal(high.level[AT_M3].hidden_mm, 0);
}

static void bytes_read_back_the_same(void **state)
{
    (void)state;
    struct rfade_crossings sums = {.travel_mm = 123456789012, .moving_us = 7, .square_mm2 = 3};
    sums.level[8].longest_us = INT64_MAX;
    sums.level[2] = (struct rfade_level_crossings){1, 2, 3, 4, 5, 6};
    uint8_t *bytes = NULL;
    size_t size = 0;
    assert_int_equal(rfade_crossings_encode(&sums, &bytes, &size), RFADE_OK);
    assert_int_equal(size, 8 * (3 + 6 * RFADE_CROSSING_LEVELS));
    assert_int_equal(bytes[8], 7);
    struct rfade_crossings back;
    assert_int_equal(rfade_crossings_decode(bytes, size, &back), RFADE_OK);
    assert_memory_equal(&back, &sums, sizeof sums);
    assert_int_equal(rfade_crossings_decode(bytes, size - 8, &back), RFADE_INPUT);
    assert_int_equal(back.travel_mm, 0);
    assert_int_equal(rfade_crossings_decode(NULL, 0, &back), RFADE_INPUT);
    free(bytes);
}

static void sums_add_and_maxima_do_not(void **state)
{
    (void)state;
    struct rfade_crossings sum = {.travel_mm = 5}, other = {.travel_mm = 7};
    sum.level[1] = (struct rfade_level_crossings){1, 10, 4, 1, 9, 20};
    other.level[1] = (struct rfade_level_crossings){2, 20, 5, 2, 8, 30};
    assert_int_equal(rfade_crossings_merge(&sum, &other), RFADE_OK);
    const struct rfade_level_crossings expected = {3, 30, 9, 3, 9, 30};
    assert_memory_equal(&sum.level[1], &expected, sizeof expected);
    assert_int_equal(sum.travel_mm, 12);
    const struct rfade_crossings before = sum;
    other.level[8].hidden_mm = INT64_MAX;
    sum.level[8].hidden_mm = 1;
    assert_int_equal(rfade_crossings_merge(&sum, &other), RFADE_OVERFLOW);
    assert_int_equal(sum.travel_mm, before.travel_mm);
    assert_memory_equal(&sum.level[1], &before.level[1], sizeof before.level[1]);
}

/* A drive of 200 wavelengths at a time, levels in whole dB, until there are enough crossings
 * of the deepest level asked for. */
static struct rfade_crossings drive_crossings(double k, double ray_angle_deg,
                                              double spacing_wavelengths)
{
    const struct rfade_drive_settings how = {.seed = 11,
                                             .length_m = 12000.0,
                                             .carrier_hz = 299792458.0,
                                             .speed_m_s = 10.0,
                                             .rate_hz = 10.0 / spacing_wavelengths,
                                             .k = &k,
                                             .k_count = 1,
                                             .stretch_m = 1e6,
                                             .ray_angle_deg = ray_angle_deg,
                                             .mean_level_dbm = -70.3,
                                             .shadowing_db = 3.0,
                                             .decorrelation_m = 400.0,
                                             .shadowing = RFADE_SHADOWING_SMOOTH,
                                             .step_db = 1.0,
                                             .floor_dbm = NAN,
                                             .ceiling_dbm = NAN};
    struct rfade_drive_reading *drive = NULL;
    size_t count = 0;
    assert_int_equal(rfade_simulate_drive(&how, &drive, &count), RFADE_OK);
    struct rfade_track_reading *readings = malloc(count * sizeof *readings);
    assert_non_null(readings);
    for (size_t i = 0; i < count; i++)
        readings[i] = (struct rfade_track_reading){
            .time_us = llround(1e6 * drive[i].time_s),
            .travel_mm = llround(1e3 * drive[i].distance_m),
            .level_cdb = (int32_t)lround(100.0 * drive[i].level_dbm),
            .segment = (int32_t)(drive[i].distance_m / 100.0)};
    const struct rfade_crossings sum = crossings(readings, count, &open_receiver);
    free(readings);
    free(drive);
    return sum;
}

static double observed_over_predicted(const struct rfade_crossings *sum, int level, double k,
                                      double *seen_share)
{
    struct rfade_fade_timing predicted;
    assert_int_equal(rfade_fade_timing(rfade_model(RFADE_RICE), k, 0.0,
                                       rfade_crossing_levels_cdb[level] / 100.0, &predicted),
                     RFADE_OK);
    const struct rfade_level_crossings *seen = &sum->level[level];
    const double spacing_m = (double)sum->square_mm2 / 1e3 / (double)sum->travel_mm;
    *seen_share = rfade_fades_seen_share(spacing_m, predicted.mean_fade_wavelengths,
                                         predicted.mean_gap_wavelengths);
    const double observed = (double)seen->crossings / (double)seen->exposed_mm * 1e3;
    print_message("K %g, spacing %.3f, level %g dB: %lld crossings, %.3f of predicted, "
                  "%.3f expected\n",
                  k, spacing_m, rfade_crossing_levels_cdb[level] / 100.0,
                  (long long)seen->crossings, observed / predicted.crossings_per_wavelength,
                  *seen_share);
    return observed / predicted.crossings_per_wavelength;
}

/* Observed within 5 % of predicted where the rule calls the level visible. */
static void visible_levels_are_crossed_as_predicted(void **state)
{
    (void)state;
    const double k[] = {0.0, 2.0};
    for (size_t i = 0; i < sizeof k / sizeof k[0]; i++) {
        const struct rfade_crossings tenth = drive_crossings(k[i], 90.0, 0.1);
        const struct rfade_crossings twentieth = drive_crossings(k[i], 90.0, 0.05);
        double share = NAN;
        for (int level = AT_0; level <= AT_M5; level++) {
            const double ratio = observed_over_predicted(&tenth, level, k[i], &share);
            assert_true(tenth.level[level].crossings >= 2000);
            assert_true(share >= 0.95);
            assert_true(fabs(ratio - 1.0) < 0.05);
        }
        const double ratio = observed_over_predicted(&twentieth, AT_M10, k[i], &share);
        assert_true(twentieth.level[AT_M10].crossings >= 2000);
        assert_true(share >= 0.95);
        assert_true(fabs(ratio - 1.0) < 0.05);
    }
}

/* What the rule calls not visible is missed about as often as it says. */
static void deep_fades_are_missed_as_the_rule_says(void **state)
{
    (void)state;
    const struct rfade_crossings tenth = drive_crossings(0.0, 90.0, 0.1);
    double share = NAN;
    double ratio = observed_over_predicted(&tenth, AT_M20, 0.0, &share);
    assert_true(share < 0.5 && fabs(ratio - 0.39) < 0.05);
    ratio = observed_over_predicted(&tenth, AT_M10, 0.0, &share);
    assert_true(share < 0.95 && fabs(ratio - share) < 0.04);
    ratio = observed_over_predicted(&tenth, AT_M30, 0.0, &share);
    assert_true(share < 0.2 && ratio < 0.2);
}

/* A ray along the road turns against the scatter: more crossings, by the factor given. */
static void a_ray_along_the_road_is_crossed_more_often(void **state)
{
    (void)state;
    const struct rfade_crossings along = drive_crossings(4.0, 0.0, 0.05);
    const int levels[] = {AT_0, AT_M5, AT_M10};
    for (size_t i = 0; i < sizeof levels / sizeof levels[0]; i++) {
        double share = NAN, factor = NAN;
        const double ratio = observed_over_predicted(&along, levels[i], 4.0, &share);
        assert_int_equal(rfade_ray_crossing_factor(
                             4.0, 1.0, rfade_crossing_levels_cdb[levels[i]] / 100.0, &factor),
                         RFADE_OK);
        print_message("factor %.3f\n", factor);
        assert_true(fabs(ratio / factor - 1.0) < 0.12);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(fades_are_counted_with_their_length),
        cmocka_unit_test(segments_add_up),
        cmocka_unit_test(standing_does_not_count),
        cmocka_unit_test(a_gap_ends_a_fade),
        cmocka_unit_test(censored_readings_keep_their_bound),
        cmocka_unit_test(bytes_read_back_the_same),
        cmocka_unit_test(sums_add_and_maxima_do_not),
        cmocka_unit_test(visible_levels_are_crossed_as_predicted),
        cmocka_unit_test(deep_fades_are_missed_as_the_rule_says),
        cmocka_unit_test(a_ray_along_the_road_is_crossed_more_often),
    };
    (void)gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
