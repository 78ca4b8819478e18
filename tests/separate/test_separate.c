/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Separation of passes small enough to be worked out by hand. */
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

/* Half a wavelength 1000 mm, window 8000 mm, blocks of 2000 mm. */
static const struct rfade_separate_settings metres = {
    .wavelength_m = 2.0, .window_wavelengths = 4.0, .block_wavelengths = 1.0};
static const struct rfade_receiver open_receiver = {
    .step_cdb = 100, .floor_cdb = RFADE_NO_FLOOR_CDB, .ceiling_cdb = RFADE_NO_CEILING_CDB};

/*
 * Gaps 400, 600, 4000 mm, the last cut to 1000 mm on each side: weights 200, 500, 1300, 1000.
 * Powers over -80 dBm are 1, 10, 1, 1. Window means: (200 + 5000 + 1300)/2000 = 3.25 (5.119 dB)
 * at the first two, (6500 + 1000)/3000 = 2.5 (3.979 dB) at the third, 1 at the last.
 */
static const struct rfade_track_reading four[] = {
    {.time_us = 10, .travel_mm = 0, .level_cdb = -8000},
    {.time_us = 20, .travel_mm = 400, .level_cdb = -7000},
    {.time_us = 30, .travel_mm = 1000, .level_cdb = -8000},
    {.time_us = 40, .travel_mm = 5000, .level_cdb = -8000}};

static void assert_cells(struct rfade_tally *tally, const struct rfade_tally_cell *expected,
                         size_t expected_count)
{
    const struct rfade_tally_cell *cells = NULL;
    size_t count = 0;

    assert_int_equal(rfade_tally_cells(tally, &cells, &count), RFADE_OK);
    assert_int_equal(count, expected_count);
    for (size_t i = 0; i < expected_count; i++) {
        assert_int_equal(cells[i].key.step_cdb, expected[i].key.step_cdb);
        assert_int_equal(cells[i].key.kind, expected[i].key.kind);
        assert_int_equal(cells[i].key.centre_cdb, expected[i].key.centre_cdb);
        assert_int_equal(cells[i].key.window_class, expected[i].key.window_class);
        assert_int_equal(cells[i].weight, expected[i].weight);
        assert_int_equal(cells[i].readings, expected[i].readings);
    }
}

static void four_readings_by_hand(void **state)
{
    /* 2000 to 3000 mm of travel in the window, and as many readings: class 1 (2 or 3). */
    const struct rfade_tally_cell fading[] = {{{100, RFADE_INTERVAL, -510, 1}, 200, 1},
                                              {{100, RFADE_INTERVAL, -400, 1}, 1300, 1},
                                              {{100, RFADE_INTERVAL, 0, 1}, 1000, 1},
                                              {{100, RFADE_INTERVAL, 490, 1}, 500, 1}};
    const struct rfade_tally_cell level[] = {{{100, RFADE_INTERVAL, -8000, 0}, 2500, 3},
                                             {{100, RFADE_INTERVAL, -7000, 0}, 500, 1}};
    const struct rfade_tally_cell local_mean[] = {{{10, RFADE_INTERVAL, -8000, 0}, 1000, 1},
                                                  {{10, RFADE_INTERVAL, -7600, 0}, 1300, 1},
                                                  {{10, RFADE_INTERVAL, -7490, 0}, 700, 2}};
    struct rfade_separation result;

    (void)state;
    assert_int_equal(rfade_separate(four, 4, &open_receiver, &metres, &result), RFADE_OK);
    assert_int_equal(result.count, 1);
    assert_int_equal(result.traversals[0].segment, 0);
    assert_int_equal(result.traversals[0].first_time_us, 10);
    assert_int_equal(result.traversals[0].last_time_us, 40);
    assert_cells(result.traversals[0].fading, fading, 4);
    assert_cells(result.traversals[0].level, level, 2);
    assert_cells(result.traversals[0].local_mean, local_mean, 3);
    rfade_separation_clear(&result);
    assert_null(result.traversals);
}

/*
 * Weights as above: 200, 500, 1300, 1000 mm. The first has no SNR, the third lies at the
 * ceiling of 20 dB, whose interval begins at 19.5 dB, and tells nothing of the noise; the
 * others say -70 - 15 = -85 dBm and -80 - 4 = -84 dBm.
 */
static void snr_and_noise_by_hand(void **state)
{
    struct rfade_track_reading readings[4];
    const int32_t snr_cdb[] = {RFADE_NO_SNR_CDB, 1500, 2000, 400};
    struct rfade_receiver receiver = open_receiver;
    const struct rfade_tally_cell snr[] = {{{0, RFADE_ABOVE, 1950, 0}, 1300, 1},
                                           {{100, RFADE_INTERVAL, 400, 0}, 1000, 1},
                                           {{100, RFADE_INTERVAL, 1500, 0}, 500, 1}};
    const struct rfade_tally_cell noise[] = {{{10, RFADE_INTERVAL, -8500, 0}, 500, 1},
                                             {{10, RFADE_INTERVAL, -8400, 0}, 1000, 1}};
    struct rfade_separation result;

    (void)state;
    for (size_t i = 0; i < 4; i++) {
        readings[i] = four[i];
        readings[i].snr_cdb = snr_cdb[i];
    }
    receiver.snr_step_cdb = 100;
    receiver.snr_ceiling_cdb = 2000;
    assert_int_equal(rfade_separate(readings, 4, &receiver, &metres, &result), RFADE_OK);
    assert_cells(result.traversals[0].snr, snr, 3);
    assert_cells(result.traversals[0].noise, noise, 2);
    rfade_separation_clear(&result);

    /* A reading at the floor says nothing of the noise either; its SNR counts. */
    receiver.floor_cdb = -8000;
    assert_int_equal(rfade_separate(readings, 4, &receiver, &metres, &result), RFADE_OK);
    assert_cells(result.traversals[0].snr, snr, 3);
    assert_cells(result.traversals[0].noise, noise, 1);
    rfade_separation_clear(&result);

    readings[1].snr_cdb = 1000001;
    assert_int_equal(rfade_separate(readings, 4, &receiver, &metres, &result), RFADE_DOMAIN);
    receiver.snr_step_cdb = 0; /* reports none: not looked at */
    assert_int_equal(rfade_separate(readings, 4, &receiver, &metres, &result), RFADE_OK);
    assert_cells(result.traversals[0].snr, NULL, 0);
    rfade_separation_clear(&result);
}

static void windows_of_four_readings(void **state)
{
    struct rfade_separation result;
    const struct rfade_sampling_sums *sums;

    (void)state;
    assert_int_equal(rfade_separate(four, 4, &open_receiver, &metres, &result), RFADE_OK);
    sums = &result.traversals[0].sampling;
    assert_int_equal(sums->readings, 4);
    assert_int_equal(sums->standing, 0);
    assert_int_equal(sums->held, 0);
    assert_int_equal(sums->moving_intervals, 3);
    assert_int_equal(sums->updates, 2);
    assert_int_equal(sums->jump_square_cdb2, 2 * 1000 * 1000);
    assert_int_equal(sums->step_square_cdb2, 2 * 100 * 100);
    assert_int_equal(sums->travel_mm, 5000);
    assert_int_equal(sums->window_count, 4);
    assert_int_equal(sums->windows_mm, 1000 + 1000 + 5000 + 4000);
    assert_int_equal(sums->window_readings, 3 + 3 + 4 + 2);
    assert_int_equal(sums->wavelength_um_readings, 4 * 2000000);
    assert_int_equal(sums->fading_mm, 3000);
    assert_int_equal(sums->fading_sum, -510 * 200 + 490 * 500 - 400 * 1300);
    assert_int_equal(sums->near_mm, 200 + 1300); /* 0 to 1000 mm; 1000 to 5000 mm */
    assert_int_equal(sums->near_square, 0);
    assert_int_equal(sums->far_mm, 200 + 500 + 1300);
    assert_int_equal(sums->far_square, INT64_C(500) * 1000 * 1000);
    rfade_separation_clear(&result);
}

static int64_t table_sum(int64_t table[RFADE_COARSE_BINS][RFADE_COARSE_BINS])
{
    int64_t sum = 0;

    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        for (int j = 0; j < RFADE_COARSE_BINS; j++) {
            sum += table[i][j];
        }
    }
    return sum;
}

/* 2000 mm in the first block, none in the second, 1000 mm in the third. */
static void blocks_of_four_readings(void **state)
{
    struct rfade_separation result;
    struct rfade_blocks *blocks;
    int64_t square = 0;

    (void)state;
    assert_int_equal(rfade_separate(four, 4, &open_receiver, &metres, &result), RFADE_OK);
    blocks = &result.traversals[0].blocks;
    assert_int_equal(blocks->blocks, 2);
    assert_int_equal(table_sum(blocks->same), 2000 * 2000 + 1000 * 1000);
    assert_int_equal(table_sum(blocks->next), 0);
    assert_int_equal(table_sum(blocks->second), 2000 * 1000);
    assert_int_equal(blocks->total[rfade_coarse_bin(-5.1)], 200);
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        square += blocks->square[i];
    }
    assert_int_equal(square, 200 * 200 + 500 * 500 + 1300 * 1300 + 1000 * 1000);
    rfade_separation_clear(&result);
}

/* Far apart or not, blocks more than two apart have no product, and no memory either. */
static void a_long_gap_costs_nothing(void **state)
{
    struct rfade_track_reading readings[4];
    struct rfade_separation result;

    (void)state;
    memcpy(readings, four, sizeof readings);
    readings[3].travel_mm = INT64_C(9000000000);
    assert_int_equal(rfade_separate(readings, 4, &open_receiver, &metres, &result), RFADE_OK);
    assert_int_equal(result.traversals[0].blocks.blocks, 2);
    assert_int_equal(table_sum(result.traversals[0].blocks.second), 0);
    rfade_separation_clear(&result);
}

/* The floor at -80 dBm stands for all below -79.5 dBm, 5.619 and 4.479 dB under the window's
 * mean; the ceiling at -70 dBm for all above -70.5 dBm, 4.381 dB over it. */
static void censored_readings_keep_their_own_bounds(void **state)
{
    const struct rfade_receiver receiver = {
        .step_cdb = 100, .floor_cdb = -8000, .ceiling_cdb = -7000};
    const struct rfade_tally_cell fading[] = {{{0, RFADE_BELOW, -460, 1}, 200, 1},
                                              {{0, RFADE_BELOW, -350, 1}, 1300, 1},
                                              {{0, RFADE_BELOW, 50, 1}, 1000, 1},
                                              {{0, RFADE_ABOVE, 440, 1}, 500, 1}};
    const struct rfade_tally_cell level[] = {{{0, RFADE_BELOW, -7950, 0}, 2500, 3},
                                             {{0, RFADE_ABOVE, -7050, 0}, 500, 1}};
    struct rfade_separation result;

    (void)state;
    assert_int_equal(rfade_separate(four, 4, &receiver, &metres, &result), RFADE_OK);
    assert_cells(result.traversals[0].fading, fading, 4);
    assert_cells(result.traversals[0].level, level, 2);
    rfade_separation_clear(&result);
}

/* Twenty rows at the second place: their travel is the one reading's travel. */
static void a_standing_vehicle_adds_nothing(void **state)
{
    struct rfade_track_reading readings[23];
    struct rfade_separation moving;
    struct rfade_separation standing;
    const struct rfade_tally_cell *cells;
    const struct rfade_tally_cell *other;
    size_t count;
    size_t other_count;

    (void)state;
    readings[0] = four[0];
    for (int i = 1; i <= 20; i++) {
        readings[i] = four[1];
    }
    readings[21] = four[2];
    readings[22] = four[3];
    assert_int_equal(rfade_separate(four, 4, &open_receiver, &metres, &moving), RFADE_OK);
    assert_int_equal(rfade_separate(readings, 23, &open_receiver, &metres, &standing),
                     RFADE_OK);
    assert_int_equal(rfade_tally_cells(moving.traversals[0].fading, &cells, &count), RFADE_OK);
    assert_int_equal(rfade_tally_cells(standing.traversals[0].fading, &other, &other_count),
                     RFADE_OK);
    assert_int_equal(count, other_count);
    for (size_t i = 0; i < count; i++) {
        assert_memory_equal(&cells[i].key, &other[i].key, sizeof cells[i].key);
        assert_int_equal(cells[i].weight, other[i].weight);
    }
    assert_memory_equal(&moving.traversals[0].blocks.same, &standing.traversals[0].blocks.same,
                        sizeof moving.traversals[0].blocks.same);
    assert_int_equal(standing.traversals[0].sampling.standing, 19);
    assert_int_equal(standing.traversals[0].sampling.travel_mm, 5000);
    rfade_separation_clear(&moving);
    rfade_separation_clear(&standing);
}

enum { LONG = 3000 };

/* Levels that look like fading, from a fixed linear congruence; 0.1 m apart. */
static void long_pass(struct rfade_track_reading readings[LONG], int segments)
{
    uint32_t random = 12345;

    for (int i = 0; i < LONG; i++) {
        random = random * 1664525U + 1013904223U;
        readings[i] =
            (struct rfade_track_reading){.time_us = INT64_C(1000) * i,
                                         .travel_mm = INT64_C(100) * i,
                                         .level_cdb = -9000 + 100 * (int32_t)(random >> 28),
                                         .segment = i * segments / LONG};
    }
}

static void assert_same_bytes(struct rfade_tally *tally, struct rfade_tally *other)
{
    uint8_t *bytes;
    uint8_t *other_bytes;
    size_t size;
    size_t other_size;

    assert_int_equal(rfade_tally_encode(tally, &bytes, &size), RFADE_OK);
    assert_int_equal(rfade_tally_encode(other, &other_bytes, &other_size), RFADE_OK);
    assert_int_equal(size, other_size);
    assert_memory_equal(bytes, other_bytes, size);
    free(bytes);
    free(other_bytes);
}

/* Seven segments added up in reverse order are the whole, to the last digit. */
static void segments_add_up_to_the_whole(void **state)
{
    struct rfade_track_reading readings[LONG];
    struct rfade_separation whole;
    struct rfade_separation parts;
    struct rfade_tally *sum;

    (void)state;
    long_pass(readings, 1);
    assert_int_equal(rfade_separate(readings, LONG, &open_receiver, &metres, &whole), RFADE_OK);
    assert_int_equal(whole.count, 1);
    long_pass(readings, 7);
    assert_int_equal(rfade_separate(readings, LONG, &open_receiver, &metres, &parts), RFADE_OK);
    assert_int_equal(parts.count, 7);
    assert_int_equal(rfade_tally_create(&sum), RFADE_OK);
    for (size_t i = 7; i-- > 0;) {
        assert_int_equal(parts.traversals[i].segment, i);
        assert_int_equal(rfade_tally_merge(sum, parts.traversals[i].fading, 1), RFADE_OK);
    }
    assert_same_bytes(sum, whole.traversals[0].fading);
    assert_int_equal(rfade_tally_weight(sum), 100 * (LONG - 1));
    rfade_tally_destroy(sum);
    rfade_separation_clear(&whole);
    rfade_separation_clear(&parts);
}

static void each_run_of_a_segment_is_one_traversal(void **state)
{
    struct rfade_track_reading readings[4];
    struct rfade_separation result;

    (void)state;
    memcpy(readings, four, sizeof readings);
    readings[1].segment = 8;
    readings[2].segment = 8;
    assert_int_equal(rfade_separate(readings, 4, &open_receiver, &metres, &result), RFADE_OK);
    assert_int_equal(result.count, 3);
    assert_int_equal(result.traversals[0].segment, 0);
    assert_int_equal(result.traversals[1].segment, 8);
    assert_int_equal(result.traversals[2].segment, 0);
    assert_int_equal(rfade_tally_weight(result.traversals[1].fading), 1800);
    assert_int_equal(result.traversals[1].sampling.travel_mm, 1000);
    assert_int_equal(result.traversals[2].sampling.travel_mm, 4000);
    rfade_separation_clear(&result);
}

static void the_window_slides_evenly(void **state)
{
    struct rfade_track_reading readings[LONG];
    struct rfade_separation result;
    const struct rfade_tally_cell *cells;
    size_t count;

    (void)state;
    long_pass(readings, 1);
    for (int i = 0; i < LONG; i++) {
        readings[i].level_cdb = i < LONG / 2 ? -8000 : -7900;
    }
    assert_int_equal(rfade_separate(readings, LONG, &open_receiver, &metres, &result),
                     RFADE_OK);
    assert_int_equal(rfade_tally_cells(result.traversals[0].local_mean, &cells, &count),
                     RFADE_OK);
    /* Steady up to 4 m before the step and from 4 m after it on. Three of the window's 81
     * readings across the step move its mean by 10 log10(1 + 3/81 0.2589) = 0.041 dB, a fourth
     * beyond half of 0.1 dB; from above, four move it by 0.044 dB. */
    assert_int_equal(cells[0].key.centre_cdb, -8000);
    assert_int_equal(cells[0].weight, 100 * (LONG / 2 - 40) - 50 + 300);
    assert_int_equal(cells[count - 1].key.centre_cdb, -7900);
    assert_int_equal(cells[count - 1].weight, 100 * (LONG / 2 - 40) - 50 + 400);
    rfade_separation_clear(&result);
}

static void assert_refused(const struct rfade_track_reading *readings, size_t count,
                           struct rfade_receiver receiver,
                           struct rfade_separate_settings settings, enum rfade_status expected)
{
    struct rfade_separation result = {.count = 5};

    assert_int_equal(rfade_separate(readings, count, &receiver, &settings, &result), expected);
    assert_null(result.traversals);
    assert_int_equal(result.count, 0);
}

static void wrong_settings_are_refused(void **state)
{
    struct rfade_separate_settings settings = metres;
    struct rfade_receiver receiver = open_receiver;

    (void)state;
    assert_refused(four, 0, receiver, settings, RFADE_NO_DATA);
    settings.wavelength_m = 0.0;
    assert_refused(four, 4, receiver, settings, RFADE_DOMAIN);
    settings.wavelength_m = NAN;
    assert_refused(four, 4, receiver, settings, RFADE_DOMAIN);
    settings = metres;
    settings.window_wavelengths = 1.0;
    assert_refused(four, 4, receiver, settings, RFADE_DOMAIN);
    settings = metres;
    settings.block_wavelengths = 0.0;
    assert_refused(four, 4, receiver, settings, RFADE_DOMAIN);
    receiver.step_cdb = 0;
    assert_refused(four, 4, receiver, metres, RFADE_DOMAIN);
    receiver = open_receiver;
    receiver.floor_cdb = -7000;
    receiver.ceiling_cdb = -7000;
    assert_refused(four, 4, receiver, metres, RFADE_DOMAIN);
}

static void wrong_readings_are_refused(void **state)
{
    struct rfade_track_reading readings[4];

    (void)state;
    memcpy(readings, four, sizeof readings);
    readings[2].travel_mm = 399; /* backwards */
    assert_refused(readings, 4, open_receiver, metres, RFADE_DOMAIN);
    memcpy(readings, four, sizeof readings);
    readings[0].travel_mm = -1;
    assert_refused(readings, 4, open_receiver, metres, RFADE_DOMAIN);
    memcpy(readings, four, sizeof readings);
    readings[3].travel_mm = INT64_C(10000000001);
    assert_refused(readings, 4, open_receiver, metres, RFADE_DOMAIN);
    memcpy(readings, four, sizeof readings);
    readings[3].level_cdb = 16001; /* 240.01 dB above the lowest */
    assert_refused(readings, 4, open_receiver, metres, RFADE_DOMAIN);
    readings[3].level_cdb = INT32_MIN;
    assert_refused(readings, 4, open_receiver, metres, RFADE_DOMAIN);
}

/* The largest range and travel that are allowed: the exact sums still hold them. */
static void extremes_stay_exact(void **state)
{
    struct rfade_separate_settings settings = {
        .wavelength_m = 1e4, .window_wavelengths = 2000.0, .block_wavelengths = 1.0};
    struct rfade_track_reading readings[1500];
    struct rfade_separation result;
    const struct rfade_tally_cell *cells;
    size_t count;

    (void)state;
    for (int i = 0; i < 1500; i++) {
        readings[i] = (struct rfade_track_reading){.travel_mm = INT64_C(6600000) * i,
                                                   .level_cdb = i == 0 ? -8000 : 15999 + i % 2};
    }
    assert_int_equal(rfade_separate(readings, 1500, &open_receiver, &settings, &result),
                     RFADE_OK);
    assert_int_equal(rfade_tally_cells(result.traversals[0].local_mean, &cells, &count),
                     RFADE_OK);
    assert_int_equal(count, 1);
    assert_int_equal(cells[0].key.centre_cdb, 16000);
    rfade_separation_clear(&result);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(four_readings_by_hand),
        cmocka_unit_test(snr_and_noise_by_hand),
        cmocka_unit_test(windows_of_four_readings),
        cmocka_unit_test(blocks_of_four_readings),
        cmocka_unit_test(a_long_gap_costs_nothing),
        cmocka_unit_test(censored_readings_keep_their_own_bounds),
        cmocka_unit_test(a_standing_vehicle_adds_nothing),
        cmocka_unit_test(segments_add_up_to_the_whole),
        cmocka_unit_test(each_run_of_a_segment_is_one_traversal),
        cmocka_unit_test(the_window_slides_evenly),
        cmocka_unit_test(wrong_settings_are_refused),
        cmocka_unit_test(wrong_readings_are_refused),
        cmocka_unit_test(extremes_stay_exact),
    };

    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
