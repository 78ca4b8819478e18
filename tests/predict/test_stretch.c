/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Level crossings, the outage of a stretch, and the share observed below a threshold. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <math.h>
#include <stdbool.h>
#include <stdlib.h>
#include <string.h>

#include "routefade/stretch.h"
#include "simulate/drives.h"
#include "support/reference_table.h"

static void assert_near(double actual, double expected, double tolerance)
{
    if (!(fabs(actual - expected) <= tolerance))
        fail_msg("%.17g is not within %g of %.17g", actual, tolerance, expected);
}

/* N/fd is the rate per wavelength: a Doppler frequency of one is a wavelength a second. */
static void crossings_match_reference(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "lcr_afd.tsv");
    while (reference_next(&table)) {
        const struct rfade_model *model =
            rfade_model(strcmp(reference_text(&table, "fading"), "Rice") == 0 ? RFADE_RICE
                                                                              : RFADE_NAKAGAMI);
        double parameter = reference_number(&table, "par"), crossings = NAN;
        double level_db = reference_number(&table, "level_dB");
        assert_int_equal(rfade_crossings_per_wavelength(model, parameter, level_db, &crossings),
                         RFADE_OK);
        reference_assert_column(&table, "N_over_fd", crossings, 1e-12);
        struct rfade_tails tails;
        assert_int_equal(model->tails(parameter, level_db, &tails), RFADE_OK);
        reference_assert_column(&table, "duration_times_fd", tails.lower / crossings, 1e-12);
    }
}

static void rayleigh_crossings_are_those_of_rice_without_a_ray(void **state)
{
    (void)state;
    double rayleigh = NAN, rice = NAN;
    assert_int_equal(
        rfade_crossings_per_wavelength(rfade_model(RFADE_RAYLEIGH), NAN, -7.0, &rayleigh),
        RFADE_OK);
    assert_int_equal(rfade_crossings_per_wavelength(rfade_model(RFADE_RICE), 0.0, -7.0, &rice),
                     RFADE_OK);
    assert_near(rayleigh, rice, 1e-13);
}

static void crossings_of_lognormal_are_refused(void **state)
{
    (void)state;
    double crossings = 0.0;
    assert_int_equal(
        rfade_crossings_per_wavelength(rfade_model(RFADE_LOGNORMAL), 4.0, 0.0, &crossings),
        RFADE_DOMAIN);
    assert_true(isnan(crossings));
}

static const struct rfade_local_mean level_track[] = {{-90.0, 3.0}};
static const struct rfade_local_mean stepped_track[] = {{-90.0, 3.0}, {-100.0, 1.0}};

static struct rfade_stretch rayleigh_stretch(const struct rfade_local_mean *track, size_t count)
{
    return (struct rfade_stretch){.model = rfade_model(RFADE_RAYLEIGH),
                                  .parameter = NAN,
                                  .parameter_low = NAN,
                                  .parameter_high = NAN,
                                  .track = track,
                                  .track_count = count,
                                  .length_wavelengths = 150.0,
                                  .passes = 1.0,
                                  .level_uncertainty_db = 0.3,
                                  .confidence = 0.95};
}

/* P = 1 - exp(-threshold/mean): Rayleigh power is exponential. */
static double exponential(double threshold_dbm, double mean_dbm)
{
    return -expm1(-pow(10.0, (threshold_dbm - mean_dbm) / 10.0));
}

static void stretch_averages_over_the_track(void **state)
{
    (void)state;
    struct rfade_stretch stretch = rayleigh_stretch(stepped_track, 2);
    struct rfade_stretch_outage outage;
    assert_int_equal(rfade_stretch_outage(&stretch, -100.0, &outage), RFADE_OK);
    double expected = 0.75 * exponential(-100, -90) + 0.25 * exponential(-100, -100);
    assert_near(outage.outage, expected, 1e-13);
    stretch.offset_db = 0.5;
    assert_int_equal(rfade_stretch_outage(&stretch, -99.5, &outage), RFADE_OK);
    assert_near(outage.outage, expected, 1e-13);
}

/* With Rayleigh fading on a level track only the mean is uncertain: the ends are exact. */
static void interval_follows_the_mean_level(void **state)
{
    (void)state;
    struct rfade_stretch stretch = rayleigh_stretch(level_track, 1);
    struct rfade_stretch_outage outage;
    assert_int_equal(rfade_stretch_outage(&stretch, -100.0, &outage), RFADE_OK);
    double shift_db = 1.959963984540054 * 0.3; /* normal quantile of 0.975, AMS 55 table 26.5 */
    assert_near(outage.low, exponential(-100, -90 + shift_db), 1e-12);
    assert_near(outage.high, exponential(-100, -90 - shift_db), 1e-12);
}

static void nothing_uncertain_gives_no_width(void **state)
{
    (void)state;
    struct rfade_stretch stretch = rayleigh_stretch(level_track, 1);
    stretch.model = rfade_model(RFADE_RICE);
    stretch.parameter = stretch.parameter_low = stretch.parameter_high = 4.0;
    stretch.level_uncertainty_db = 0.0;
    struct rfade_stretch_outage outage;
    assert_int_equal(rfade_stretch_outage(&stretch, -100.0, &outage), RFADE_OK);
    assert_near(outage.low, outage.outage, 1e-15);
    assert_near(outage.high, outage.outage, 1e-15);
    stretch.parameter_low = 3.0; /* fades more, so the upper end moves */
    assert_int_equal(rfade_stretch_outage(&stretch, -100.0, &outage), RFADE_OK);
    assert_near(outage.low, outage.outage, 1e-15);
    assert_true(outage.high > outage.outage * 1.1);
}

enum { DRIVES = 1500, READINGS = 1000 };

/* Share of 1000 readings over 150 wavelengths below the level, one simulated pass. */
static double drive_share(double k, double level_dbm, uint64_t seed)
{
    struct rfade_drive_settings settings = plain_drive();
    struct rfade_drive_reading *readings = NULL;
    size_t count = 0, below = 0;
    settings.length_m = settings.stretch_m = 150.0;
    settings.rate_hz = 10.0 * READINGS / 150.0;
    settings.k = &k;
    settings.seed = seed;
    settings.mean_level_dbm = -90.0;
    assert_int_equal(rfade_simulate_drive(&settings, &readings, &count), RFADE_OK);
    for (size_t i = 0; i < count; i++)
        below += readings[i].power_dbm < level_dbm;
    free(readings);
    return (double)below / (double)count;
}

/* Simulated passes over a level track, nothing uncertain: which share does the interval leave
 * on each side? A tail of a count holds at most 0.025; the variance behind it is good to a
 * tenth. */
static void prediction_interval_holds_simulated_passes(void **state)
{
    (void)state;
    const double ks[] = {0.0, 1.0, 4.0};
    const double thresholds_dbm[] = {-95.0, -100.0};
    for (size_t i = 0; i < 6; i++) {
        double k = ks[i / 2], threshold_dbm = thresholds_dbm[i % 2];
        struct rfade_stretch stretch = rayleigh_stretch(level_track, 1);
        struct rfade_stretch_outage outage;
        stretch.model = rfade_model(RFADE_RICE);
        stretch.parameter = stretch.parameter_low = stretch.parameter_high = k;
        stretch.level_uncertainty_db = 0.0;
        stretch.readings = READINGS;
        assert_int_equal(rfade_stretch_outage(&stretch, threshold_dbm, &outage), RFADE_OK);
        int outside = 0;
        for (uint64_t seed = 1; seed <= DRIVES; seed++) {
            double share = drive_share(k, threshold_dbm, seed);
            outside += share < outage.next_low || share > outage.next_high;
        }
        assert_near((double)outside / DRIVES, 0.046, 0.02);
    }
}

/* The slow variation of a ray's scatter widens the prediction, and moves level and K at once.
 */
static void slow_variation_widens_both_intervals(void **state)
{
    (void)state;
    struct rfade_stretch stretch = rayleigh_stretch(level_track, 1);
    struct rfade_stretch_outage without, with;
    stretch.model = rfade_model(RFADE_RICE);
    stretch.parameter = 4.0;
    stretch.parameter_low = 3.5;
    stretch.parameter_high = 4.6;
    assert_int_equal(rfade_stretch_outage(&stretch, -100.0, &without), RFADE_OK);
    stretch.slow_variance = 0.004;
    assert_int_equal(rfade_stretch_outage(&stretch, -100.0, &with), RFADE_OK);
    assert_near(with.outage, without.outage, 1e-15);
    assert_true(with.low < without.low && with.high > without.high);
    assert_true(with.next_high > without.next_high);
}

/* What passes differ by moves another pass, and not what is known of the stretch. */
static void passes_that_differ_widen_the_prediction_alone(void **state)
{
    (void)state;
    struct rfade_stretch stretch = rayleigh_stretch(level_track, 1);
    struct rfade_stretch_outage without, with;
    assert_int_equal(rfade_stretch_outage(&stretch, -100.0, &without), RFADE_OK);
    stretch.pass_deviation_db = 3.0;
    assert_int_equal(rfade_stretch_outage(&stretch, -100.0, &with), RFADE_OK);
    assert_true(with.low == without.low && with.high == without.high);
    /* At least as far as a pass that is weaker by 1.96 times 3 dB has on average. */
    assert_true(with.next_high > exponential(-100, -90 - 5.88));
    assert_true(with.next_low < exponential(-100, -90 + 5.88));
    stretch.pass_deviation_db = -1.0;
    assert_int_equal(rfade_stretch_outage(&stretch, -100.0, &with), RFADE_DOMAIN);
}

/* On a track of two levels far apart the outage is the share of the weak one, and its spread
 * moves the level of both: ends are those of the moved tracks. */
static void an_unsure_spread_moves_the_ends(void **state)
{
    (void)state;
    struct rfade_stretch stretch = rayleigh_stretch(stepped_track, 2);
    struct rfade_stretch_outage sure, unsure;
    stretch.level_uncertainty_db = 0.0;
    assert_int_equal(rfade_stretch_outage(&stretch, -110.0, &sure), RFADE_OK);
    assert_near(sure.low, sure.high, 1e-15);
    stretch.spread_below = 0.1;
    stretch.spread_above = 0.2;
    assert_int_equal(rfade_stretch_outage(&stretch, -110.0, &unsure), RFADE_OK);
    struct rfade_local_mean moved[2];
    double weights = stepped_track[0].weight + stepped_track[1].weight;
    double mean_dbm = (stepped_track[0].weight * stepped_track[0].level_dbm +
                       stepped_track[1].weight * stepped_track[1].level_dbm) /
                      weights;
    double expected = 0.0;
    for (int i = 0; i < 2; i++) {
        moved[i] = stepped_track[i];
        moved[i].level_dbm = mean_dbm + 1.2 * (stepped_track[i].level_dbm - mean_dbm);
        expected += moved[i].weight / weights * exponential(-110, moved[i].level_dbm);
    }
    assert_near(unsure.high, expected, 1e-12);
    assert_true(unsure.low < sure.low);
    stretch.spread_below = 1.1;
    assert_int_equal(rfade_stretch_outage(&stretch, -110.0, &unsure), RFADE_DOMAIN);
}

/* A calibration is shared by the track; fading averages out over the part that matters. */
static void a_deep_part_is_less_certain(void **state)
{
    (void)state;
    struct rfade_stretch stretch = rayleigh_stretch(stepped_track, 2);
    struct rfade_stretch_outage shared, apart;
    assert_int_equal(rfade_stretch_outage(&stretch, -110.0, &apart), RFADE_OK);
    stretch.calibration_db = stretch.level_uncertainty_db;
    assert_int_equal(rfade_stretch_outage(&stretch, -110.0, &shared), RFADE_OK);
    assert_true(apart.low < shared.low && apart.high > shared.high);
}

/* Two models that fit as well, apart in the deep: the interval reaches from one's to the
 * other's; a model without weight changes nothing. */
static void models_are_mixed_by_weight(void **state)
{
    (void)state;
    struct rfade_stretch pair[2] = {rayleigh_stretch(level_track, 1),
                                    rayleigh_stretch(level_track, 1)};
    const double even[] = {0.5, 0.5}, one[] = {1.0, 0.0};
    struct rfade_stretch_outage rice, nakagami, mixed;
    pair[0].model = rfade_model(RFADE_RICE);
    pair[0].parameter = pair[0].parameter_low = pair[0].parameter_high = 10.0;
    pair[1].model = rfade_model(RFADE_NAKAGAMI);
    pair[1].parameter = pair[1].parameter_low = pair[1].parameter_high = 121.0 / 21.0;
    assert_int_equal(rfade_stretch_outage(&pair[0], -100.0, &rice), RFADE_OK);
    assert_int_equal(rfade_stretch_outage(&pair[1], -100.0, &nakagami), RFADE_OK);
    assert_true(nakagami.high < rice.low);
    assert_int_equal(rfade_stretch_outage_mixed(pair, even, 2, 0, -100.0, &mixed), RFADE_OK);
    assert_near(mixed.outage, rice.outage, 1e-15);
    assert_true(mixed.low > nakagami.low && mixed.low < nakagami.outage);
    assert_true(mixed.high < rice.high && mixed.high > rice.outage);
    assert_int_equal(rfade_stretch_outage_mixed(pair, one, 2, 0, -100.0, &mixed), RFADE_OK);
    assert_near(mixed.low, rice.low, 1e-12);
    assert_near(mixed.high, rice.high, 1e-12);
    assert_int_equal(rfade_stretch_outage_mixed(pair, even, 2, 2, -100.0, &mixed),
                     RFADE_DOMAIN);
    assert_true(isnan(mixed.outage));
}

static void rare_fades_may_not_come(void **state)
{
    (void)state;
    struct rfade_stretch stretch = rayleigh_stretch(level_track, 1);
    struct rfade_stretch_outage outage;
    assert_int_equal(rfade_stretch_outage(&stretch, -135.0, &outage), RFADE_OK);
    assert_true(outage.outage > 0.0 && outage.next_low == 0.0);
    assert_int_equal(rfade_stretch_outage(&stretch, -80.0, &outage), RFADE_OK);
    assert_true(outage.outage < 1.0 && outage.next_high > 0.9999);
}

static void useless_stretches_are_refused(void **state)
{
    (void)state;
    struct rfade_stretch_outage outage;
    struct rfade_stretch stretch = rayleigh_stretch(level_track, 0);
    assert_int_equal(rfade_stretch_outage(&stretch, -100.0, &outage), RFADE_NO_DATA);
    assert_true(isnan(outage.outage));
    stretch = rayleigh_stretch(level_track, 1);
    assert_int_equal(rfade_stretch_outage(&stretch, NAN, &outage), RFADE_DOMAIN);
    stretch.length_wavelengths = 0.0;
    assert_int_equal(rfade_stretch_outage(&stretch, -100.0, &outage), RFADE_DOMAIN);
    stretch = rayleigh_stretch(level_track, 1);
    stretch.confidence = 1.0;
    assert_int_equal(rfade_stretch_outage(&stretch, -100.0, &outage), RFADE_DOMAIN);
}

static void add(struct rfade_tally *levels, enum rfade_tally_kind kind, int32_t step_cdb,
                int32_t centre_cdb, int64_t weight)
{
    const struct rfade_tally_key key = {step_cdb, (int32_t)kind, centre_cdb, 0};
    assert_int_equal(rfade_tally_add(levels, &key, weight, 1), RFADE_OK);
}

/* 1 dB steps at -100, -101 and -102 dBm, and a floor below -102.5. */
static struct rfade_tally *floored_levels(void)
{
    struct rfade_tally *levels = NULL;
    assert_int_equal(rfade_tally_create(&levels), RFADE_OK);
    add(levels, RFADE_INTERVAL, 100, -10000, 40);
    add(levels, RFADE_INTERVAL, 100, -10100, 30);
    add(levels, RFADE_INTERVAL, 100, -10200, 20);
    add(levels, RFADE_BELOW, 0, -10250, 10);
    return levels;
}

static void observed_share_splits_the_step(void **state)
{
    (void)state;
    struct rfade_tally *levels = floored_levels();
    struct rfade_observed observed;
    assert_int_equal(rfade_observed_below(levels, -100.5, &observed), RFADE_OK);
    assert_near(observed.fraction, 0.6, 1e-15);
    assert_near(observed.low, 0.6, 1e-15);
    assert_near(observed.high, 0.6, 1e-15);
    assert_int_equal(rfade_observed_below(levels, -100.75, &observed), RFADE_OK);
    assert_near(observed.fraction, 0.3 + 0.3 * 0.75, 1e-15);
    assert_near(observed.low, 0.3, 1e-15);
    assert_near(observed.high, 0.6, 1e-15);
    rfade_tally_destroy(levels);
}

static void observed_share_below_the_floor_is_bounds(void **state)
{
    (void)state;
    struct rfade_tally *levels = floored_levels();
    struct rfade_observed observed;
    assert_int_equal(rfade_observed_below(levels, -110.0, &observed), RFADE_OK);
    assert_true(isnan(observed.fraction));
    assert_near(observed.low, 0.0, 0.0);
    assert_near(observed.high, 0.1, 1e-15);
    assert_int_equal(rfade_observed_below(levels, NAN, &observed), RFADE_DOMAIN);
    rfade_tally_destroy(levels);
    assert_int_equal(rfade_tally_create(&levels), RFADE_OK);
    assert_int_equal(rfade_observed_below(levels, -110.0, &observed), RFADE_NO_DATA);
    rfade_tally_destroy(levels);
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(crossings_match_reference),
        cmocka_unit_test(rayleigh_crossings_are_those_of_rice_without_a_ray),
        cmocka_unit_test(crossings_of_lognormal_are_refused),
        cmocka_unit_test(stretch_averages_over_the_track),
        cmocka_unit_test(interval_follows_the_mean_level),
        cmocka_unit_test(nothing_uncertain_gives_no_width),
        cmocka_unit_test(prediction_interval_holds_simulated_passes),
        cmocka_unit_test(slow_variation_widens_both_intervals),
        cmocka_unit_test(passes_that_differ_widen_the_prediction_alone),
        cmocka_unit_test(an_unsure_spread_moves_the_ends),
        cmocka_unit_test(a_deep_part_is_less_certain),
        cmocka_unit_test(models_are_mixed_by_weight),
        cmocka_unit_test(rare_fades_may_not_come),
        cmocka_unit_test(useless_stretches_are_refused),
        cmocka_unit_test(observed_share_splits_the_step),
        cmocka_unit_test(observed_share_below_the_floor_is_bounds),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
