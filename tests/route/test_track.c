/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "drive.h"

#include "route/smooth.h"

/* Chainage driven: 10 m/s, braking and starting at 1.5 m/s^2 round a standstill of 30 s at
 * 2000 m. Time 0 at chainage 0. */
static double profile(double t, double *speed_m_s)
{
    const double v = 10;
    const double a = 1.5;
    const double brake_s = v / a;
    const double t1 = (2000 - v * v / (2 * a)) / v;
    double u = t - t1;
    *speed_m_s = v;
    if (u < 0)
        return v * t;
    if (u < brake_s) {
        *speed_m_s = v - a * u;
        return v * t1 + v * u - a * u * u / 2;
    }
    u -= brake_s;
    *speed_m_s = 0;
    if (u < 30)
        return 2000;
    u -= 30;
    if (u < brake_s) {
        *speed_m_s = a * u;
        return 2000 + a * u * u / 2;
    }
    *speed_m_s = v;
    return 2000 + v * brake_s / 2 + v * (u - brake_s);
}

static struct drive *drive_profile(double scatter_m, bool with_speed, unsigned long seed,
                                   double rate_hz)
{
    const double points[][2] = {{0, 0}, {2500, 0}, {2500, 2500}};
    struct drive *drive = drive_new(route_of(points, 3), scatter_m, with_speed);
    gsl_rng_set(drive->generator, seed);
    for (int i = 0; i <= (int)(430 * rate_hz); i++) {
        double speed_m_s = 0;
        double at_m = profile(i / rate_hz, &speed_m_s);
        drive_fix(drive, i / rate_hz, at_m, speed_m_s);
    }
    drive_match(drive);
    return drive;
}

struct quality {
    double worst_m; /* chainage against the truth */
    double rms_m;
    double stand_m;         /* travel during the true standstill */
    double stood_s;         /* how long it was found standing, in the true standstill */
    double falsely_stood_s; /* and elsewhere */
    double length_error_m;  /* travel over the whole drive */
};

static struct quality judge(const struct drive *drive)
{
    struct quality quality = {0};
    assert_int_equal(drive->pass_count, 1);
    struct rfade_track *track = drive_track(drive, 0);
    int64_t previous_mm = -1;
    int64_t stand_from_mm = -1;
    int64_t first_mm = -1;
    size_t count = 0;
    const double stand_s = 200 - 10 / 3.0 + 10 / 1.5; /* when it begins */
    for (int i = 0; i < 43000; i++) {
        double t = i * 0.01;
        double speed_m_s = 0;
        double truth_m = profile(t, &speed_m_s);
        int64_t chainage_mm = 0;
        int64_t travel_mm = 0;
        int64_t time_us = 1700000000000000 + (int64_t)i * 10000;
        assert_true(rfade_track_at(track, time_us, &chainage_mm, &travel_mm));
        assert_true(travel_mm >= previous_mm);
        bool stands = travel_mm == previous_mm;
        previous_mm = travel_mm;
        if (first_mm < 0)
            first_mm = travel_mm;
        double error_m = (double)chainage_mm / 1000 - truth_m;
        quality.worst_m = fmax(quality.worst_m, fabs(error_m));
        quality.rms_m += error_m * error_m;
        count++;
        if (t > stand_s && t < stand_s + 30) {
            if (stand_from_mm < 0)
                stand_from_mm = travel_mm;
            quality.stand_m = (double)(travel_mm - stand_from_mm) / 1000;
            quality.stood_s += stands ? 0.01 : 0;
        } else if (speed_m_s > 2) {
            quality.falsely_stood_s += stands ? 0.01 : 0;
        }
        quality.length_error_m = (double)(travel_mm - first_mm) / 1000 - truth_m;
    }
    quality.rms_m = sqrt(quality.rms_m / (double)count);
    rfade_track_destroy(track);
    return quality;
}

static void print_quality(const char *what, const struct quality *quality)
{
    print_message("%s: rms %.2f m, worst %.2f m, length %.2f m; standstill of 30 s: %.2f m "
                  "travel, %.1f s found; %.1f s falsely\n",
                  what, quality->rms_m, quality->worst_m, quality->length_error_m,
                  quality->stand_m, quality->stood_s, quality->falsely_stood_s);
}

static void a_standstill_with_speeds_is_exact(void **state)
{
    (void)state;
    for (unsigned long seed = 1; seed <= 5; seed++) {
        struct drive *drive = drive_profile(5, true, seed, 1);
        struct quality quality = judge(drive);
        print_quality("with speeds", &quality);
        assert_true(quality.worst_m < 6);
        assert_true(quality.rms_m < 2.5);
        assert_true(fabs(quality.length_error_m) < 8);
        assert_true(quality.stood_s > 28);
        assert_true(quality.stand_m < 1);
        assert_true(quality.falsely_stood_s == 0);
        drive_free(drive);
    }
}

static void a_standstill_without_speeds_is_found(void **state)
{
    (void)state;
    for (unsigned long seed = 1; seed <= 5; seed++) {
        struct drive *drive = drive_profile(5, false, seed, 1);
        struct quality quality = judge(drive);
        print_quality("without speeds", &quality);
        assert_true(quality.worst_m < 14);
        assert_true(quality.rms_m < 4);
        assert_true(quality.stood_s > 18);
        assert_true(quality.stand_m < 8);
        assert_true(quality.falsely_stood_s < 2.5);
        drive_free(drive);
    }
}

static void exact_positions_give_exact_travel(void **state)
{
    (void)state;
    struct drive *drive = drive_profile(0, false, 1, 10);
    struct quality quality = judge(drive);
    print_quality("exact", &quality);
    assert_true(quality.worst_m < 0.7);
    assert_true(quality.stood_s > 24);
    assert_true(quality.stand_m < 0.3);
    drive_free(drive);
}

/* What raw fix-to-fix distances would say, so that the numbers above mean something. */
static void raw_positions_would_travel_at_rest(void **state)
{
    (void)state;
    struct drive *drive = drive_profile(5, false, 1, 1);
    double raw_m = 0;
    for (size_t i = 204; i < 232; i++)
        raw_m += fabs(drive->matches[i + 1].chainage_m - drive->matches[i].chainage_m);
    print_message("raw: %.0f m at rest\n", raw_m);
    assert_true(raw_m > 60);
    drive_free(drive);
}

/* A speed column that is stuck at 0, or in a wrong unit, is not believed. */
static void wrong_speeds_are_not_believed(void **state)
{
    (void)state;
    for (int wrong = 0; wrong < 2; wrong++) {
        struct drive *drive = drive_profile(5, true, 3, 1);
        for (size_t i = 0; i < drive->count; i++)
            drive->positions[i].speed_m_s *= wrong ? 3.6 : 0;
        struct quality quality = judge(drive);
        assert_true(quality.worst_m < 14);
        assert_true(quality.falsely_stood_s < 2.5);
        drive_free(drive);
    }
}

static void gaps_and_ends_have_no_place(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {9000, 0}};
    struct drive *drive = drive_new(route_of(points, 2), 0, false);
    int64_t mm = 0;
    int64_t travel_mm = 0;
    for (int i = 0; i <= 20; i++)
        drive_fix(drive, i, 100 + 10.0 * i, 10);
    drive_fix(drive, 50, 100 + 500, 10); /* 30 s: filled */
    drive_fix(drive, 81, 100 + 810, 10); /* 31 s: not */
    for (int i = 82; i <= 100; i++)
        drive_fix(drive, i, 100 + 10.0 * i, 10);
    drive_match(drive);
    assert_int_equal(drive->pass_count, 1);
    struct rfade_track *track = drive_track(drive, 0);
    const int64_t start_us = 1700000000000000;
    static const struct {
        double time_s;
        bool located;
    } cases[] = {{-2.1, false}, {-1.9, true}, {0, true},     {20, true},
                 {35, true},    {50, true},   {50.1, false}, {80.9, false},
                 {81, true},    {100, true},  {101.9, true}, {102.1, false}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        bool located =
            rfade_track_at(track, start_us + llround(cases[i].time_s * 1e6), &mm, &travel_mm);
        if (located != cases[i].located)
            fail_msg("at %g s: located %d", cases[i].time_s, located);
        if (located && !(fabs((double)mm / 1000 - (100 + 10 * cases[i].time_s)) < 1.5))
            fail_msg("at %g s: %g m", cases[i].time_s, (double)mm / 1000);
    }
    assert_int_equal(rfade_track_start_us(track), start_us - 2000000);
    rfade_track_destroy(track);
    drive_free(drive);
}

static void off_the_route_there_is_no_place(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {9000, 0}};
    struct drive *drive = drive_new(route_of(points, 2), 0, false);
    int64_t mm = 0;
    int64_t travel_mm = 0;
    for (int i = 0; i <= 60; i++) {
        drive_fix(drive, i, 10.0 * i, 10);
        if (i > 20 && i < 40) {
            struct rfade_place aside = at_metres(10.0 * i, 100); /* on another road */
            drive->positions[i].latitude_deg = aside.latitude_deg;
            drive->positions[i].longitude_deg = aside.longitude_deg;
        }
        if (i == 50) /* one bad fix: the track goes on */
            drive->positions[i].latitude_deg = drive->positions[25].latitude_deg;
    }
    drive_match(drive);
    assert_int_equal(drive->pass_count, 1);
    struct rfade_track *track = drive_track(drive, 0);
    const int64_t start_us = 1700000000000000;
    assert_true(rfade_track_at(track, start_us + 20000000, &mm, &travel_mm));
    assert_false(rfade_track_at(track, start_us + 30000000, &mm, &travel_mm));
    assert_int_equal(mm, 0);
    assert_true(rfade_track_at(track, start_us + 50000000, &mm, &travel_mm));
    assert_true(fabs((double)mm / 1000 - 500) < 1);
    rfade_track_destroy(track);
    drive_free(drive);
}

static void against_the_chainage_travel_still_grows(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {3000, 0}};
    struct drive *drive = drive_new(route_of(points, 2), 5, false);
    int t = 0;
    for (int at_m = 0; at_m < 1500; at_m += 10)
        drive_fix(drive, t++, at_m, 10);
    for (int at_m = 1500; at_m >= 0; at_m -= 10)
        drive_fix(drive, t++, at_m, 10);
    drive_match(drive);
    assert_int_equal(drive->pass_count, 2);
    struct rfade_track *there = drive_track(drive, 0);
    struct rfade_track *back = drive_track(drive, 1);
    /* No fix is in both, and no time beyond the turn. */
    assert_int_equal(rfade_track_end_us(there), rfade_track_start_us(back));
    int64_t last_mm = INT64_MAX;
    int64_t last_travel_mm = -1;
    for (int64_t time_us = rfade_track_start_us(back); time_us <= rfade_track_end_us(back);
         time_us += 10000) {
        int64_t mm = 0;
        int64_t travel_mm = 0;
        assert_true(rfade_track_at(back, time_us, &mm, &travel_mm));
        assert_true(mm <= last_mm && travel_mm >= last_travel_mm);
        last_mm = mm;
        last_travel_mm = travel_mm;
    }
    assert_true(llabs(last_travel_mm - 1500000) < 15000);
    rfade_track_destroy(there);
    rfade_track_destroy(back);
    drive_free(drive);
}

static void what_goes_back_is_made_level(void **state)
{
    (void)state;
    enum { COUNT = 500 };
    struct rfade_node nodes[COUNT];
    gsl_rng *generator = gsl_rng_alloc(gsl_rng_mt19937);
    double sum_m = 0;
    double last_m = 0;
    for (int i = 0; i < COUNT; i++) {
        nodes[i] = (struct rfade_node){.time_s = i,
                                       .travel_m = 2 * i + gsl_ran_gaussian(generator, 20),
                                       .speed_m_s = gsl_ran_gaussian(generator, 5),
                                       .standing = i >= 200 && i < 260};
        sum_m += nodes[i].travel_m;
    }
    assert_true(rfade_make_monotone(nodes, COUNT));
    for (int i = 0; i < COUNT; i++) {
        if (i > 0)
            assert_true(nodes[i].travel_m >= nodes[i - 1].travel_m);
        if (i > 200 && i < 260)
            assert_true(nodes[i].travel_m == nodes[200].travel_m && nodes[i].speed_m_s == 0);
        assert_true(nodes[i].speed_m_s >= 0);
        last_m += nodes[i].travel_m;
    }
    assert_true(fabs(last_m - sum_m) < 1e-6); /* pooling keeps the mean */
    gsl_rng_free(generator);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_standstill_with_speeds_is_exact),
        cmocka_unit_test(a_standstill_without_speeds_is_found),
        cmocka_unit_test(exact_positions_give_exact_travel),
        cmocka_unit_test(raw_positions_would_travel_at_rest),
        cmocka_unit_test(wrong_speeds_are_not_believed),
        cmocka_unit_test(gaps_and_ends_have_no_place),
        cmocka_unit_test(off_the_route_there_is_no_place),
        cmocka_unit_test(against_the_chainage_travel_still_grows),
        cmocka_unit_test(what_goes_back_is_made_level),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
