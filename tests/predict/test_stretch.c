/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Level crossings, the outage of a stretch, and the share observed below a threshold. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_randist.h>
#include <math.h>
#include <stdbool.h>
#include <string.h>

#include "routefade/stretch.h"
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

enum { DRAWS = 20000, READINGS = 1000 };

/* Share of the readings that a signal which is in turn below and above, each for a time of
 * exponential distribution, has below. */
static double draw_share(gsl_rng *random, double outage, double fade_readings)
{
    double gap_readings = fade_readings * (1.0 - outage) / outage;
    bool is_below = gsl_rng_uniform(random) < outage;
    double place = 0.0;
    int count = 0;
    while (place < READINGS) {
        double next =
            place + gsl_ran_exponential(random, is_below ? fade_readings : gap_readings);
        if (is_below)
            count += (int)(fmin(ceil(next), READINGS) - ceil(place));
        is_below = !is_below;
        place = next;
    }
    return (double)count / READINGS;
}

/* GSL's generators draw the passes: which share does the interval leave on each side? A tail
 * of a count holds at most 0.025; what the distribution supposes beside is of first order. */
static void prediction_interval_holds_drawn_fades(void **state)
{
    (void)state;
    const double thresholds_dbm[] = {-95.0, -100.0, -105.0};
    gsl_rng *random = gsl_rng_alloc(gsl_rng_mt19937);
    for (size_t i = 0; i < sizeof thresholds_dbm / sizeof thresholds_dbm[0]; i++) {
        struct rfade_stretch stretch = rayleigh_stretch(level_track, 1);
        struct rfade_stretch_outage outage;
        stretch.level_uncertainty_db = 0.0;
        stretch.readings = READINGS;
        assert_int_equal(rfade_stretch_outage(&stretch, thresholds_dbm[i], &outage), RFADE_OK);
        double fades = outage.crossings_per_wavelength * stretch.length_wavelengths;
        int below = 0, above = 0;
        for (int j = 0; j < DRAWS; j++) {
            double share = draw_share(random, outage.outage, READINGS * outage.outage / fades);
            below += share < outage.next_low;
            above += share > outage.next_high;
        }
        assert_near((double)below / DRAWS, 0.022, 0.008);
        assert_near((double)above / DRAWS, 0.022, 0.008);
    }
    gsl_rng_free(random);
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
        cmocka_unit_test(prediction_interval_holds_drawn_fades),
        cmocka_unit_test(slow_variation_widens_both_intervals),
        cmocka_unit_test(a_deep_part_is_less_certain),
        cmocka_unit_test(models_are_mixed_by_weight),
        cmocka_unit_test(rare_fades_may_not_come),
        cmocka_unit_test(useless_stretches_are_refused),
        cmocka_unit_test(observed_share_splits_the_step),
        cmocka_unit_test(observed_share_below_the_floor_is_bounds),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
