/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The receiver's step, floor and ceiling; standstills; settings that are refused. */
#include <gsl/gsl_errno.h>
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>

#include <cmocka.h>

#include "simulate/drives.h"

static void levels_are_rounded_and_clipped(void **state)
{
    struct rfade_drive_settings settings = plain_drive();
    struct rfade_drive_reading *readings;
    size_t count;
    size_t at_floor = 0;
    size_t at_ceiling = 0;

    (void)state;
    settings.step_db = 0.5;
    settings.floor_dbm = -85.0;
    settings.ceiling_dbm = -77.0;
    assert_int_equal(rfade_simulate_drive(&settings, &readings, &count), RFADE_OK);
    for (size_t i = 0; i < count; i++) {
        double level = readings[i].level_dbm;
        double power = readings[i].power_dbm;

        assert_true(level == round(2.0 * level) / 2.0);
        if (power < -84.75) {
            assert_true(level == -85.0);
            at_floor++;
        } else if (power > -77.25) {
            assert_true(level == -77.0);
            at_ceiling++;
        } else {
            assert_true(fabs(level - power) <= 0.25);
        }
    }
    assert_true(at_floor > 0 && at_ceiling > 0 && at_floor + at_ceiling < count);
    free(readings);
}

static void without_a_step_the_level_is_the_power(void **state)
{
    struct rfade_drive_settings settings = plain_drive();
    struct rfade_drive_reading *readings;
    size_t count;

    (void)state;
    assert_int_equal(rfade_simulate_drive(&settings, &readings, &count), RFADE_OK);
    for (size_t i = 0; i < count; i++) {
        assert_true(readings[i].level_dbm == readings[i].power_dbm);
        assert_true(readings[i].local_mean_dbm == -80.0);
    }
    free(readings);
}

/* 100 m at 10 m/s and 100 readings/s; 3 s at 20 m and 3 s at 50 m: 16 s in all. */
static void a_standing_vehicle_reads_one_level(void **state)
{
    const double places_m[] = {20.0, 50.0};
    struct rfade_drive_settings settings = plain_drive();
    struct rfade_drive_reading *readings;
    size_t count;
    size_t standing = 0;

    (void)state;
    settings.shadowing_db = 4.0;
    settings.shadowing = RFADE_SHADOWING_EXPONENTIAL;
    settings.standstill_at_m = places_m;
    settings.standstill_count = 2;
    settings.standstill_s = 3.0;
    assert_int_equal(rfade_simulate_drive(&settings, &readings, &count), RFADE_OK);
    assert_int_equal(count, 1601);
    for (size_t i = 1; i < count; i++) {
        double step_m = readings[i].distance_m - readings[i - 1].distance_m;

        assert_true(readings[i].time_s == (double)i / 100.0);
        if (readings[i].speed_m_s == 0.0) {
            standing++;
        } else if (readings[i - 1].speed_m_s > 0.0) {
            assert_true(fabs(step_m - 0.1) < 1e-9);
        }
    }
    assert_int_equal(standing, 600);
    assert_true(readings[300].distance_m == 20.0 && readings[450].distance_m == 20.0);
    assert_true(readings[300].power_dbm == readings[450].power_dbm);
    assert_true(readings[900].distance_m == 50.0);
    assert_true(fabs(readings[count - 1].distance_m - 100.0) < 1e-9);
    free(readings);
}

/* Standing changes when the readings come, not what the channel is. */
static void the_channel_is_a_function_of_place(void **state)
{
    const double place_m = 20.0;
    struct rfade_drive_settings settings = plain_drive();
    struct rfade_drive_reading *through;
    struct rfade_drive_reading *stopping;
    size_t through_count;
    size_t stopping_count;

    (void)state;
    assert_int_equal(rfade_simulate_drive(&settings, &through, &through_count), RFADE_OK);
    settings.standstill_at_m = &place_m;
    settings.standstill_count = 1;
    settings.standstill_s = 3.0;
    assert_int_equal(rfade_simulate_drive(&settings, &stopping, &stopping_count), RFADE_OK);
    assert_int_equal(stopping_count, through_count + 300);
    for (size_t i = 0; i < through_count; i++) {
        double there = stopping[i <= 200 ? i : i + 300].power_dbm;

        assert_true(fabs(through[i].power_dbm - there) < 1e-6);
    }
    free(through);
    free(stopping);
}

static void assert_refused(struct rfade_drive_settings settings)
{
    struct rfade_drive_reading *readings = &(struct rfade_drive_reading){0};
    size_t count = 1;

    assert_int_equal(rfade_simulate_drive(&settings, &readings, &count), RFADE_DOMAIN);
    assert_null(readings);
    assert_int_equal(count, 0);
}

#define ASSERT_REFUSED(field, value)                                                           \
    do {                                                                                       \
        struct rfade_drive_settings wrong = plain_drive();                                     \
        wrong.field = (value);                                                                 \
        assert_refused(wrong);                                                                 \
    } while (0)

static void wrong_settings_are_refused(void **state)
{
    static const double negative[] = {1.0, -0.5};
    static const double falling[] = {50.0, 20.0};
    struct rfade_drive_settings settings = plain_drive();

    (void)state;
    ASSERT_REFUSED(length_m, 0.0);
    ASSERT_REFUSED(length_m, NAN);
    ASSERT_REFUSED(length_m, 1e7); /* more wavelengths than the grid holds */
    ASSERT_REFUSED(carrier_hz, -1.0);
    ASSERT_REFUSED(carrier_hz, NAN);
    ASSERT_REFUSED(speed_m_s, 0.0);
    ASSERT_REFUSED(rate_hz, 0.0);
    ASSERT_REFUSED(rate_hz, 1e9); /* more readings than allowed */
    ASSERT_REFUSED(k, NULL);
    ASSERT_REFUSED(k_count, 0);
    ASSERT_REFUSED(k, &negative[1]);
    ASSERT_REFUSED(stretch_m, 0.0);
    ASSERT_REFUSED(ray_angle_deg, NAN);
    ASSERT_REFUSED(mean_level_dbm, INFINITY);
    ASSERT_REFUSED(shadowing_db, -1.0);
    ASSERT_REFUSED(step_db, -0.5);
    ASSERT_REFUSED(step_db, NAN);
    ASSERT_REFUSED(floor_dbm, -INFINITY);
    ASSERT_REFUSED(ceiling_dbm, INFINITY);
    ASSERT_REFUSED(standstill_count, 1); /* of which no place is given */

    settings.floor_dbm = -60.0;
    settings.ceiling_dbm = -60.0;
    assert_refused(settings);
    settings = plain_drive();
    settings.shadowing_db = 4.0;
    settings.decorrelation_m = 0.0;
    assert_refused(settings);
    settings.decorrelation_m = 60.0;
    settings.shadowing = (enum rfade_shadowing)2;
    assert_refused(settings);
    settings = plain_drive();
    settings.standstill_at_m = falling;
    settings.standstill_count = 2;
    settings.standstill_s = 1.0;
    assert_refused(settings);
    settings.standstill_count = 1;
    settings.standstill_s = -1.0;
    assert_refused(settings);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(levels_are_rounded_and_clipped),
        cmocka_unit_test(without_a_step_the_level_is_the_power),
        cmocka_unit_test(a_standing_vehicle_reads_one_level),
        cmocka_unit_test(the_channel_is_a_function_of_place),
        cmocka_unit_test(wrong_settings_are_refused),
    };

    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
