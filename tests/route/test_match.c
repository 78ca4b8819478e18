/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "drive.h"

static void assert_truth(const struct drive *drive, double tolerance_m)
{
    for (size_t i = 0; i < drive->count; i++) {
        if (!drive->matches[i].matched)
            fail_msg("fix %zu at %g m didn't match", i, drive->truth_m[i]);
        if (!(fabs(drive->matches[i].chainage_m - drive->truth_m[i]) <= tolerance_m))
            fail_msg("fix %zu at %g m matched to %g m", i, drive->truth_m[i],
                     drive->matches[i].chainage_m);
    }
}

static void a_straight_drive_matches(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {3000, 0}, {3000, 2000}};
    struct drive *drive = drive_new(route_of(points, 3), 0, false);
    for (int i = 0; i <= 500; i++)
        drive_fix(drive, i, 10.0 * i, 10);
    drive_match(drive);
    assert_truth(drive, 0.02);
    assert_int_equal(drive->pass_count, 1);
    assert_int_equal(drive->passes[0].direction, 1);
    assert_int_equal(drive->passes[0].first, 0);
    assert_int_equal(drive->passes[0].last, 500);
    for (size_t i = 0; i < drive->count; i++)
        assert_true(drive->matches[i].offset_m < 0.02);
    drive_free(drive);
}

static void a_drive_against_the_chainage_is_one_pass(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {3000, 0}, {3000, 2000}};
    struct drive *drive = drive_new(route_of(points, 3), 5, false);
    for (int i = 0; i <= 160; i++)
        drive_fix(drive, 3.0 * i, 4900 - 30.0 * i, 10);
    drive_match(drive);
    assert_truth(drive, 25);
    assert_int_equal(drive->pass_count, 1);
    assert_int_equal(drive->passes[0].direction, -1);
    drive_free(drive);
}

static void fixes_outside_the_corridor_do_not_match(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {3000, 0}};
    struct drive *drive = drive_new(route_of(points, 2), 0, false);
    for (int i = 0; i <= 20; i++) {
        drive_fix(drive, i, 10.0 * i, 10);
        struct rfade_place aside = at_metres(10.0 * i, 3.0 * i);
        drive->positions[i].latitude_deg = aside.latitude_deg;
        drive->positions[i].longitude_deg = aside.longitude_deg;
    }
    drive_match(drive);
    for (int i = 0; i <= 20; i++) {
        if (i == 10)
            continue; /* at 30 m, the very edge */
        assert_int_equal(drive->matches[i].matched, i < 10);
        if (i < 10)
            assert_true(fabs(drive->matches[i].offset_m - 3.0 * i) < 0.05);
        else
            assert_true(isnan(drive->matches[i].chainage_m));
    }
    drive_free(drive);
}

/* A figure of eight: the line crosses itself in the middle at right angles. */
static void a_line_that_crosses_itself_does_not_jump(void **state)
{
    (void)state;
    const double points[][2] = {{-800, 0}, {800, 0}, {800, 600}, {0, 600}, {0, -800}};
    for (int way = 0; way < 2; way++) {
        struct drive *drive = drive_new(route_of(points, 5), 5, false);
        double length_m = rfade_route_length_m(drive->route);
        int steps = (int)(length_m / 8);
        for (int i = 0; i <= steps; i++)
            drive_fix(drive, i, way ? length_m - 8.0 * i : 8.0 * i, 8);
        drive_match(drive);
        assert_truth(drive, 35);
        assert_int_equal(drive->pass_count, 1);
        assert_int_equal(drive->passes[0].direction, way ? -1 : 1);
        drive_free(drive);
    }
}

/* Out and back on one road: two chainages for every place; the way driven decides. */
static void an_out_and_back_line_follows_the_drive(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {2000, 300}, {0, 0}};
    struct drive *drive = drive_new(route_of(points, 3), 5, false);
    double length_m = rfade_route_length_m(drive->route);
    for (int i = 0; 10.0 * i <= length_m; i++)
        drive_fix(drive, i, 10.0 * i, 10);
    drive_match(drive);
    /* At the turn the two chainages are as far apart as the scatter. */
    assert_truth(drive, 45);
    assert_int_equal(drive->pass_count, 1);
    drive_free(drive);
    /* The way back alone: with the chainage on the second half, not against it on the first. */
    drive = drive_new(route_of(points, 3), 5, false);
    for (int i = 0; i < 120; i++)
        drive_fix(drive, i, 2500 + 10.0 * i, 10);
    drive_match(drive);
    assert_truth(drive, 25);
    assert_int_equal(drive->passes[0].direction, 1);
    drive_free(drive);
}

/* Two stretches of one line side by side, 24 m apart: nearest would jump with the scatter. */
static void a_line_beside_itself_does_not_jump(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {1500, 0}, {1500, 24}, {0, 24}};
    struct drive *drive = drive_new(route_of(points, 4), 6, false);
    double length_m = rfade_route_length_m(drive->route);
    for (int i = 0; 12.0 * i <= length_m; i++)
        drive_fix(drive, i, 12.0 * i, 12);
    drive_match(drive);
    /* Round the turn itself the nearest point is as good as any. */
    for (size_t i = 0; i < drive->count; i++)
        if (fabs(drive->truth_m[i] - 1512) > 50)
            assert_true(fabs(drive->matches[i].chainage_m - drive->truth_m[i]) < 30);
    assert_int_equal(drive->pass_count, 1);
    drive_free(drive);
}

static void turning_round_begins_a_pass(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {3000, 0}};
    struct drive *drive = drive_new(route_of(points, 2), 3, false);
    int t = 0;
    for (int at_m = 100; at_m < 2000; at_m += 10)
        drive_fix(drive, t++, at_m, 10);
    for (int at_m = 2000; at_m > 500; at_m -= 10)
        drive_fix(drive, t++, at_m, 10);
    for (int at_m = 500; at_m < 2900; at_m += 10)
        drive_fix(drive, t++, at_m, 10);
    drive_match(drive);
    assert_int_equal(drive->pass_count, 3);
    const int directions[] = {1, -1, 1};
    for (size_t i = 0; i < 3; i++)
        assert_int_equal(drive->passes[i].direction, directions[i]);
    assert_int_equal(drive->passes[1].first, drive->passes[0].last);
    assert_true(fabs(drive->matches[drive->passes[0].last].chainage_m - 2000) < 20);
    assert_true(fabs(drive->matches[drive->passes[1].last].chainage_m - 500) < 20);
    drive_free(drive);
}

static void scatter_at_rest_is_no_turning_round(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {3000, 0}};
    struct drive *drive = drive_new(route_of(points, 2), 5, false);
    int t = 0;
    for (int at_m = 100; at_m < 1000; at_m += 10)
        drive_fix(drive, t++, at_m, 10);
    for (int i = 0; i < 600; i++)
        drive_fix(drive, t++, 1000, 0);
    for (int at_m = 1000; at_m < 2000; at_m += 10)
        drive_fix(drive, t++, at_m, 10);
    drive_match(drive);
    assert_int_equal(drive->pass_count, 1);
    drive_free(drive);
}

static void being_away_begins_a_pass(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {3000, 0}};
    struct drive *drive = drive_new(route_of(points, 2), 0, false);
    for (int i = 0; i < 50; i++)
        drive_fix(drive, i, 10.0 * i, 10);
    for (int i = 0; i < 50; i++) /* 59 s without a fix: the same pass */
        drive_fix(drive, 49 + 59 + i, 490 + 590 + 10.0 * i, 10);
    for (int i = 0; i < 50; i++) /* 61 s: another */
        drive_fix(drive, 49 + 59 + 49 + 61 + i, 1570 + 610 + 10.0 * i, 10);
    drive_match(drive);
    assert_int_equal(drive->pass_count, 2);
    assert_int_equal(drive->passes[0].last, 99);
    assert_int_equal(drive->passes[1].first, 100);
    drive_free(drive);
}

static void coming_back_elsewhere_begins_a_pass(void **state)
{
    (void)state;
    /* A loop that comes near its start: from one end straight over to the other. */
    const double points[][2] = {{0, 0}, {0, 1000}, {1000, 1000}, {1000, 0}, {100, 0}};
    struct drive *drive = drive_new(route_of(points, 5), 2, false);
    for (int i = 0; i <= 190; i++)
        drive_fix(drive, i, 20.0 * i, 20);
    for (int i = 1; i <= 50; i++)
        drive_fix(drive, 190 + 5 + i, 20.0 * i, 20);
    drive_match(drive);
    assert_int_equal(drive->pass_count, 2);
    assert_truth(drive, 15);
    assert_int_equal(drive->passes[1].first, 191);
    drive_free(drive);
}

static void a_wrong_position_is_left_out(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {9000, 0}};
    struct drive *drive = drive_new(route_of(points, 2), 2, false);
    for (int i = 0; i < 100; i++)
        drive_fix(drive, i, i == 50 ? 8000 : 10.0 * i, 10); /* a corrupted digit */
    drive_match(drive);
    assert_false(drive->matches[50].matched);
    assert_int_equal(drive->pass_count, 1);
    for (size_t i = 0; i < 100; i++)
        if (i != 50)
            assert_true(fabs(drive->matches[i].chainage_m - drive->truth_m[i]) < 12);
    drive_free(drive);
}

static void a_fix_gap_on_a_winding_road_keeps_the_pass(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0},      {500, 0},  {500, 300},
                                {1000, 300}, {1000, 0}, {2000, 0}};
    struct drive *drive = drive_new(route_of(points, 6), 3, false);
    for (int i = 0; i < 40; i++)
        drive_fix(drive, i, 10.0 * i, 10);
    for (int i = 90; i < 200; i++)
        drive_fix(drive, i, 10.0 * i, 10);
    drive_match(drive);
    assert_int_equal(drive->pass_count, 1);
    assert_truth(drive, 15);
    drive_free(drive);
}

static void a_line_across_the_date_line_matches(void **state)
{
    (void)state;
    const struct rfade_place places[] = {{-17, 179.99}, {-17, -179.99}};
    struct rfade_route *route = NULL;
    struct rfade_error error = {0};
    assert_int_equal(rfade_route_create(places, 2, &route, &error), RFADE_OK);
    assert_true(rfade_route_length_m(route) < 2200);
    struct drive *drive = drive_new(route, 3, false);
    for (int i = 0; i < 200; i++)
        drive_fix(drive, i, 10.0 * i, 10);
    drive_match(drive);
    assert_truth(drive, 15);
    assert_int_equal(drive->pass_count, 1);
    drive_free(drive);
}

static void nothing_matches_nothing(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {500, 0}};
    struct drive *drive = drive_new(route_of(points, 2), 0, false);
    drive_match(drive);
    assert_int_equal(drive->pass_count, 0);
    drive_fix(drive, 0, 100, 0);
    drive_match(drive);
    assert_int_equal(drive->pass_count, 1); /* one fix is a pass of its own */
    struct rfade_track *track = drive_track(drive, 0);
    rfade_track_destroy(track);
    drive_free(drive);
}

static void settings_out_of_range_are_refused(void **state)
{
    (void)state;
    const double points[][2] = {{0, 0}, {500, 0}};
    struct rfade_route *route = route_of(points, 2);
    for (int i = 0; i < 4; i++) {
        struct rfade_match_settings settings = rfade_match_defaults();
        double *const fields[] = {&settings.corridor_m, &settings.away_s, &settings.turn_m,
                                  &settings.fastest_m_s};
        *fields[i] = i % 2 ? NAN : 0;
        struct rfade_matcher *matcher = NULL;
        struct rfade_error error = {0};
        assert_int_equal(rfade_matcher_create(route, &settings, &matcher, &error),
                         RFADE_DOMAIN);
        assert_null(matcher);
    }
    rfade_route_destroy(route);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_straight_drive_matches),
        cmocka_unit_test(a_drive_against_the_chainage_is_one_pass),
        cmocka_unit_test(fixes_outside_the_corridor_do_not_match),
        cmocka_unit_test(a_line_that_crosses_itself_does_not_jump),
        cmocka_unit_test(an_out_and_back_line_follows_the_drive),
        cmocka_unit_test(a_line_beside_itself_does_not_jump),
        cmocka_unit_test(turning_round_begins_a_pass),
        cmocka_unit_test(scatter_at_rest_is_no_turning_round),
        cmocka_unit_test(being_away_begins_a_pass),
        cmocka_unit_test(coming_back_elsewhere_begins_a_pass),
        cmocka_unit_test(a_wrong_position_is_left_out),
        cmocka_unit_test(a_fix_gap_on_a_winding_road_keeps_the_pass),
        cmocka_unit_test(a_line_across_the_date_line_matches),
        cmocka_unit_test(nothing_matches_nothing),
        cmocka_unit_test(settings_out_of_range_are_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
