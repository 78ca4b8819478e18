/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Segments taken together: outage of the whole route, and how much of it meets a target. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "analyse/acceptance.h"
#include "analyse/whole_route.h"
#include "support/reference_table.h"

enum { ROWS_MAX = 16 };
static const double db_per_neper = 4.342944819032518;
static const double z95 = 1.959963984540054;

/* Rayleigh segments, each over a constant local mean. */
struct route {
    struct rfade_segment_result rows[ROWS_MAX];
    struct rfade_stored_fit fits[ROWS_MAX];
    struct rfade_segment_result *pointers[ROWS_MAX];
    struct rfade_threshold thresholds[ROWS_MAX];
    struct rfade_route_span span;
    struct rfade_route_group group;
};

static struct rfade_tally *tally_at(double level_dbm)
{
    struct rfade_tally *tally = NULL;
    const struct rfade_tally_key key = {.step_cdb = 100,
                                        .kind = RFADE_INTERVAL,
                                        .centre_cdb = (int32_t)lround(100.0 * level_dbm)};
    assert_int_equal(rfade_tally_create(&tally), RFADE_OK);
    assert_int_equal(rfade_tally_add(tally, &key, 1000, 100000), RFADE_OK);
    return tally;
}

/* A segment whose level is known to uncertainty_db: by calibration, or by so much fading. */
static void add_row(struct route *route, double length_m, double level_dbm,
                    double uncertainty_db, bool by_calibration)
{
    static char name[] = "valley-road", channel[] = "telemetry", campaign[] = "january";
    static char resolved[] = "resolved";
    const size_t i = route->group.count++;
    const double from_m = i ? route->rows[i - 1].to_m : 0.0;
    route->fits[i] = (struct rfade_stored_fit){.model = rfade_model(RFADE_RAYLEIGH),
                                               .preferred = true,
                                               .parameter = NAN,
                                               .parameter_low = NAN,
                                               .parameter_high = NAN,
                                               .weight = 1.0};
    route->rows[i] = (struct rfade_segment_result){
        .route = name,
        .channel = channel,
        .campaign = campaign,
        .sampling = resolved,
        .segment = (int64_t)i + 1,
        .from_m = from_m,
        .to_m = from_m + length_m,
        .passes = 2,
        .readings = 1000,
        .travel_m = 2.0 * length_m,
        .wavelength_m = 0.656,
        .effective_count = by_calibration ? INFINITY : pow(db_per_neper / uncertainty_db, 2.0),
        .local_mean_dbm = level_dbm,
        .local_sigma_db = 0.0,
        .window_noise_db = 0.0,
        .level_uncertainty_db = uncertainty_db,
        .calibration_db = by_calibration ? uncertainty_db : 0.0,
        .level = tally_at(level_dbm),
        .local_mean = tally_at(level_dbm),
        .snr = tally_at(level_dbm),
        .fits = &route->fits[i],
        .fit_count = 1,
    };
    route->pointers[i] = &route->rows[i];
    route->span.length_m += length_m;
    route->thresholds[i] = (struct rfade_threshold){-100.0, NAN};
}

static void open_route(struct route *route)
{
    memset(route, 0, sizeof *route);
    (void)snprintf(route->span.route, sizeof route->span.route, "valley-road");
    route->group = (struct rfade_route_group){route->pointers, 0, &route->span};
}

static void close_route(struct route *route)
{
    for (size_t i = 0; i < route->group.count; i++) {
        rfade_tally_destroy(route->rows[i].level);
        rfade_tally_destroy(route->rows[i].local_mean);
        rfade_tally_destroy(route->rows[i].snr);
    }
}

static struct rfade_whole_route whole_of(const struct route *route)
{
    struct rfade_whole_route whole;
    struct rfade_error error;
    assert_int_equal(rfade_whole_route(&route->group, route->thresholds, 0.95, &whole, &error),
                     RFADE_OK);
    return whole;
}

/* Rayleigh power is exponential. */
static double rayleigh(double x_db)
{
    return -expm1(-pow(10.0, x_db / 10.0));
}

static void assert_near(double value, double expected, double relative)
{
    if (!(fabs(value - expected) <= relative * fabs(expected)))
        fail_msg("%.15g, not %.15g", value, expected);
}

/* 100 m at 10 dB and 300 m at 20 dB above the threshold. */
static void outage_is_weighted_by_length(void **state)
{
    (void)state;
    struct route route;
    open_route(&route);
    add_row(&route, 100.0, -90.0, 0.5, true);
    add_row(&route, 300.0, -80.0, 0.5, true);
    route.span.length_m += 50.0; /* never driven */
    const struct rfade_whole_route whole = whole_of(&route);
    assert_near(whole.outage, 0.25 * rayleigh(-10.0) + 0.75 * rayleigh(-20.0), 1e-12);
    assert_true(whole.length_m == 450.0 && whole.predicted_m == 400.0);
    assert_true(whole.unseen_m == 50.0 && whole.not_predicted_m == 0.0);
    assert_int_equal(whole.readings, 2000);
    assert_true(whole.observed.fraction == 0.0 && whole.observed.high == 0.0);
    close_route(&route);
}

/* The calibration moves all segments at once: the interval is that of the route with all
 * levels lower, or higher. */
static void calibration_is_common(void **state)
{
    (void)state;
    struct route route;
    open_route(&route);
    for (int i = 0; i < 8; i++)
        add_row(&route, 100.0, -90.0 - i, 0.5, true);
    const struct rfade_whole_route whole = whole_of(&route);
    double low = 0.0, high = 0.0;
    for (int i = 0; i < 8; i++) {
        low += rayleigh(-10.0 + i - z95 * 0.5) / 8.0;
        high += rayleigh(-10.0 + i + z95 * 0.5) / 8.0;
    }
    assert_near(whole.low, low, 1e-5);
    assert_near(whole.high, high, 1e-5);
    close_route(&route);
}

/* Fading errs segment by segment: with n alike, the interval is narrower by the root of n. */
static void fading_is_independent(void **state)
{
    (void)state;
    struct route one, many;
    open_route(&one);
    open_route(&many);
    add_row(&one, 100.0, -90.0, 0.3, false);
    for (int i = 0; i < 9; i++)
        add_row(&many, 100.0, -90.0, 0.3, false);
    const struct rfade_whole_route single = whole_of(&one);
    const struct rfade_whole_route whole = whole_of(&many);
    assert_near(whole.outage, single.outage, 1e-12);
    assert_near(whole.high - whole.outage, (single.high - single.outage) / 3.0, 1e-6);
    assert_near(whole.outage - whole.low, (single.outage - single.low) / 3.0, 1e-6);
    /* and one segment's interval is the segment's own */
    struct rfade_stretch_outage outage;
    struct rfade_observed observed;
    struct rfade_error error;
    assert_int_equal(
        rfade_result_outage(&one.rows[0], &one.thresholds[0], 0.95, &outage, &observed, &error),
        RFADE_OK);
    assert_near(single.low, outage.low, 1e-6);
    assert_near(single.high, outage.high, 1e-6);
    close_route(&one);
    close_route(&many);
}

/* Half the route 3 dB below and half 3 dB above -90: a standard deviation of 3 dB. What the
 * lognormal makes of it stands in the published table. */
static void lognormal_figure_matches_reference(void **state)
{
    (void)state;
    struct reference_table table;
    int used = 0;
    reference_open(&table, "composite_open.tsv");
    while (reference_next(&table)) {
        if (strcmp(reference_text(&table, "fading"), "Rayleigh") != 0 ||
            reference_number(&table, "sigma_dB") != 3.0)
            continue;
        struct route route;
        open_route(&route);
        add_row(&route, 100.0, -93.0, 0.5, true);
        add_row(&route, 100.0, -87.0, 0.5, true);
        for (int i = 0; i < 2; i++)
            route.thresholds[i].level_dbm = -90.0 + reference_number(&table, "x_dB");
        const struct rfade_whole_route whole = whole_of(&route);
        assert_near(whole.local_mean_dbm, -90.0, 1e-12);
        assert_near(whole.local_sigma_db, 3.0, 1e-12);
        reference_assert_column(&table, "outage", whole.lognormal_outage, 1e-9);
        used++;
        close_route(&route);
    }
    assert_true(used > 10);
}

/* 100 m far above, 100 m far below the threshold, 100 m next to it, 100 m badly sampled. */
static void lengths_add_up_to_the_route(void **state)
{
    (void)state;
    static char held[] = "held", inseparable[] = "inseparable";
    struct route route;
    open_route(&route);
    add_row(&route, 100.0, -70.0, 0.5, true); /* 0.001 */
    add_row(&route, 110.0, -95.0, 0.5, true); /* 0.27 */
    add_row(&route, 120.0, -83.0, 0.5, true); /* 0.0198 */
    add_row(&route, 130.0, -70.0, 0.5, true);
    add_row(&route, 140.0, -70.0, 0.5, true);
    route.rows[3].sampling = held;
    route.rows[3].fit_count = 0;
    route.rows[4].sampling = inseparable;
    route.span.length_m += 7.0;
    const struct rfade_acceptance_target target = {0.02, 0.90};
    struct rfade_segment_acceptance segments[ROWS_MAX];
    struct rfade_acceptance_lengths lengths;
    struct rfade_error error;
    assert_int_equal(
        rfade_acceptance(&route.group, route.thresholds, &target, segments, &lengths, &error),
        RFADE_OK);
    assert_true(lengths.length_m == 607.0 && lengths.meets_m == 100.0);
    assert_true(lengths.fails_m == 110.0 && lengths.undecided_m == 120.0);
    assert_true(lengths.not_judged_m == 270.0 && lengths.unseen_m == 7.0);
    assert_true(lengths.meets_together_m == 100.0 && segments[0].meets_together);
    /* all that is uncertain is the calibration: 0.5 dB */
    assert_near(segments[2].bounds.calibration_db, 0.5, 1e-9);
    assert_true(isnan(segments[2].judgement.more_m));
    assert_true(segments[2].judgement.calibration_needed_db > 0.0 &&
                segments[2].judgement.calibration_needed_db < 0.5);
    assert_true(segments[2].judgement.calibration_is_enough);
    /* the observed fraction stands where nothing is judged */
    assert_true(segments[3].bounds.observed.fraction == 0.0);
    assert_true(isnan(segments[3].bounds.outage));
    const struct rfade_whole_route whole = whole_of(&route);
    assert_true(whole.not_predicted_m == 130.0 && whole.predicted_m == 470.0);
    close_route(&route);
}

static void nothing_predicted_leaves_nan(void **state)
{
    (void)state;
    struct route route;
    open_route(&route);
    add_row(&route, 100.0, -70.0, 0.5, true);
    route.rows[0].fit_count = 0;
    const struct rfade_whole_route whole = whole_of(&route);
    assert_true(isnan(whole.outage) && isnan(whole.low) && isnan(whole.lognormal_outage));
    assert_true(isnan(whole.observed.fraction) && whole.not_predicted_m == 100.0);
    close_route(&route);
}

/* By names of route, channel and campaign, along each. */
static void rows_are_grouped_along_their_route(void **state)
{
    (void)state;
    struct route route;
    open_route(&route);
    static char voice[] = "voice";
    for (int i = 0; i < 4; i++)
        add_row(&route, 100.0, -80.0, 0.5, true);
    route.rows[0].channel = voice;
    route.rows[3].channel = voice;
    struct rfade_segment_results results = {route.rows, 4, &route.span, 1};
    struct rfade_route_groups groups;
    assert_int_equal(rfade_route_groups_make(&results, &groups), RFADE_OK);
    assert_int_equal(groups.count, 2);
    assert_true(groups.groups[0].count == 2 && groups.groups[1].count == 2);
    assert_ptr_equal(groups.groups[0].rows[0], &route.rows[1]);
    assert_ptr_equal(groups.groups[0].rows[1], &route.rows[2]);
    assert_ptr_equal(groups.groups[1].rows[0], &route.rows[0]);
    assert_ptr_equal(groups.groups[1].rows[1], &route.rows[3]);
    assert_ptr_equal(groups.groups[1].span, &route.span);
    rfade_route_groups_clear(&groups);
    close_route(&route);
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(outage_is_weighted_by_length),
        cmocka_unit_test(calibration_is_common),
        cmocka_unit_test(fading_is_independent),
        cmocka_unit_test(lognormal_figure_matches_reference),
        cmocka_unit_test(lengths_add_up_to_the_route),
        cmocka_unit_test(nothing_predicted_leaves_nan),
        cmocka_unit_test(rows_are_grouped_along_their_route),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
