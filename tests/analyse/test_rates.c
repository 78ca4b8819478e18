/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Error rates and margins along segments whose local mean and fading are set by hand. */
#include <gsl/gsl_errno.h>
#include <gsl/gsl_math.h>
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <string.h>

#include <cmocka.h>

#include "analyse/rates.h"

static const struct rfade_reception alone = {1, RFADE_MAXIMAL_RATIO, 0.95};

/* A segment of two local means of equal travel; the level tally holds the same two levels. */
struct segment {
    struct rfade_segment_result row;
    struct rfade_stored_fit fit;
};

static void add_level(struct rfade_tally *tally, double level_dbm)
{
    const struct rfade_tally_key key = {.step_cdb = 10,
                                        .kind = RFADE_INTERVAL,
                                        .centre_cdb = (int32_t)lround(100.0 * level_dbm)};
    assert_int_equal(rfade_tally_add(tally, &key, 1000, 1), RFADE_OK);
}

static void make_segment(struct segment *segment, double first_dbm, double second_dbm)
{
    memset(segment, 0, sizeof *segment);
    struct rfade_segment_result *row = &segment->row;
    assert_int_equal(rfade_tally_create(&row->local_mean), RFADE_OK);
    assert_int_equal(rfade_tally_create(&row->level), RFADE_OK);
    assert_int_equal(rfade_tally_create(&row->snr), RFADE_OK);
    add_level(row->local_mean, first_dbm);
    add_level(row->local_mean, second_dbm);
    add_level(row->level, first_dbm);
    add_level(row->level, second_dbm);
    row->local_sigma_db = 0.5 * fabs(first_dbm - second_dbm); /* as the track has it */
    row->noise_floor_dbm = -120.0;
    row->fits = &segment->fit;
    row->fit_count = 1;
    segment->fit = (struct rfade_stored_fit){.model = rfade_model(RFADE_RAYLEIGH),
                                             .preferred = true,
                                             .parameter = NAN,
                                             .parameter_low = NAN,
                                             .parameter_high = NAN,
                                             .weight = 1.0};
}

static void clear_segment(struct segment *segment)
{
    rfade_tally_destroy(segment->row.local_mean);
    rfade_tally_destroy(segment->row.level);
    rfade_tally_destroy(segment->row.snr);
}

/* Coherent BPSK over Rayleigh fading: (1 - sqrt(g/(1 + g)))/2 [Proakis]. */
static double bpsk_rayleigh(double snr_db)
{
    double snr = pow(10.0, snr_db / 10.0);
    return 0.5 * (1.0 - sqrt(snr / (1.0 + snr)));
}

static void rates_are_averaged_along_the_local_mean(void **state)
{
    (void)state;
    struct segment segment;
    struct rfade_error error;
    struct rfade_segment_rate rate;
    const double reference_dbm = -117.0;
    const struct rfade_target target = {.kind = RFADE_TARGET_BIT,
                                        .modulation = rfade_modulation(RFADE_BPSK)};
    make_segment(&segment, -107.0, -97.0);
    segment.row.level_uncertainty_db = 1.0;
    struct rfade_segment_results results = {.rows = &segment.row, .count = 1};
    assert_int_equal(
        rfade_results_rates(&results, &alone, &reference_dbm, &target, 1, 1, &rate, &error),
        RFADE_OK);
    double expected = 0.5 * (bpsk_rayleigh(10.0) + bpsk_rayleigh(20.0));
    assert_true(fabs(rate.value / expected - 1.0) < 1e-6);
    /* 1.96 dB of level either way, and nothing else is uncertain. */
    double low = 0.5 * (bpsk_rayleigh(11.959964) + bpsk_rayleigh(21.959964));
    double high = 0.5 * (bpsk_rayleigh(8.040036) + bpsk_rayleigh(18.040036));
    assert_true(fabs(rate.low / low - 1.0) < 1e-5);
    assert_true(fabs(rate.high / high - 1.0) < 1e-5);
    clear_segment(&segment);
}

/* Observed without a model: BPSK at the two levels, erfc(sqrt(g))/2, next to uniform over a
 * step of 0.1 dB. */
static void observed_rates_need_no_model(void **state)
{
    (void)state;
    struct segment segment;
    struct rfade_error error;
    struct rfade_observed_rate rate;
    const double reference_dbm = -117.0;
    const struct rfade_modulation *bpsk = rfade_modulation(RFADE_BPSK);
    make_segment(&segment, -117.0, -111.0);
    segment.row.fit_count = 0;
    struct rfade_segment_results results = {.rows = &segment.row, .count = 1};
    assert_int_equal(
        rfade_results_rates_observed(&results, &reference_dbm, &bpsk, 1, &rate, &error),
        RFADE_OK);
    double expected = 0.25 * (erfc(1.0) + erfc(sqrt(pow(10.0, 0.6))));
    assert_true(fabs(rate.bit / expected - 1.0) < 1e-3);
    assert_true(rate.bit_low == rate.bit && rate.bit_high == rate.bit);

    /* Where SNR was logged all along it is that: 3 dB more than the level would say. */
    segment.row.noise_source = RFADE_NOISE_LOGGED;
    segment.row.noise_floor_dbm = -117.0;
    add_level(segment.row.snr, 3.0);
    add_level(segment.row.snr, 9.0);
    assert_int_equal(
        rfade_results_rates_observed(&results, &reference_dbm, &bpsk, 1, &rate, &error),
        RFADE_OK);
    expected = 0.25 * (erfc(sqrt(pow(10.0, 0.3))) + erfc(sqrt(pow(10.0, 0.9))));
    assert_true(fabs(rate.bit / expected - 1.0) < 1e-3);
    clear_segment(&segment);
}

/* Of BPSK at 0 and 6 dB and as much travel once more beyond one of the receiver's ends. */
static void observe_clipped(enum rfade_tally_kind kind, double end_dbm,
                            struct rfade_observed_rate *rate)
{
    struct segment segment;
    struct rfade_error error;
    const double reference_dbm = -117.0;
    const struct rfade_modulation *bpsk = rfade_modulation(RFADE_BPSK);
    const struct rfade_tally_key key = {.kind = (int32_t)kind,
                                        .centre_cdb = (int32_t)lround(100.0 * end_dbm)};
    make_segment(&segment, -117.0, -111.0);
    assert_int_equal(rfade_tally_add(segment.row.level, &key, 2000, 2), RFADE_OK);
    struct rfade_segment_results results = {.rows = &segment.row, .count = 1};
    assert_int_equal(
        rfade_results_rates_observed(&results, &reference_dbm, &bpsk, 1, rate, &error),
        RFADE_OK);
    clear_segment(&segment);
}

/* A reading below the floor may stand for no signal at all, whose bits are wrong half the time;
 * one above the ceiling for no error. */
static void what_was_clipped_leaves_bounds(void **state)
{
    (void)state;
    struct rfade_observed_rate rate;
    double seen = 0.25 * (erfc(1.0) + erfc(sqrt(pow(10.0, 0.6))));
    observe_clipped(RFADE_BELOW, -117.05, &rate);
    double at_floor = 0.5 * erfc(sqrt(pow(10.0, -0.005)));
    assert_true(isnan(rate.bit));
    assert_true(fabs(rate.bit_low / (0.5 * (seen + at_floor)) - 1.0) < 1e-3);
    assert_true(fabs(rate.bit_high / (0.5 * (seen + 0.5)) - 1.0) < 1e-3);

    observe_clipped(RFADE_ABOVE, -110.0, &rate);
    double at_ceiling = 0.5 * erfc(sqrt(pow(10.0, 0.7)));
    assert_true(fabs(rate.bit_low / (0.5 * seen) - 1.0) < 1e-3);
    assert_true(fabs(rate.bit_high / (0.5 * (seen + at_ceiling)) - 1.0) < 1e-3);
    assert_true(fabs(rate.bit / rate.bit_high - 1.0) < 1e-12); /* 2 % apart: one number does */
}

/* Where every reading is at an end, nothing but the bounds is left. */
static void nothing_but_clipped_readings(void **state)
{
    (void)state;
    struct segment segment;
    struct rfade_error error;
    struct rfade_observed_rate rate;
    const double reference_dbm = -117.0;
    const struct rfade_modulation *bpsk = rfade_modulation(RFADE_BPSK);
    const struct rfade_tally_key key = {.kind = RFADE_BELOW, .centre_cdb = -11700};
    make_segment(&segment, -117.0, -117.0);
    rfade_tally_destroy(segment.row.level);
    assert_int_equal(rfade_tally_create(&segment.row.level), RFADE_OK);
    assert_int_equal(rfade_tally_add(segment.row.level, &key, 1000, 1), RFADE_OK);
    struct rfade_segment_results results = {.rows = &segment.row, .count = 1};
    assert_int_equal(
        rfade_results_rates_observed(&results, &reference_dbm, &bpsk, 1, &rate, &error),
        RFADE_OK);
    assert_true(isnan(rate.bit));
    assert_true(fabs(rate.bit_low / (0.5 * erfc(1.0)) - 1.0) < 1e-6);
    assert_true(fabs(rate.bit_high - 0.5) < 1e-12);
    clear_segment(&segment);
}

/*
 * Rayleigh fading over one local mean: the outage is 1 - exp(-x), so that 1 % needs a mean
 * 10 log10(-1/ln(0.99)) = 19.978 dB above the threshold.
 */
static void margin_of_an_outage_by_hand(void **state)
{
    (void)state;
    struct segment segment;
    struct rfade_error error;
    struct rfade_segment_margin margin;
    const double threshold_dbm = -115.0;
    const struct rfade_target target = {.kind = RFADE_TARGET_OUTAGE, .value = 0.01};
    make_segment(&segment, -100.0, -100.0);
    segment.row.level_uncertainty_db = 0.5;
    struct rfade_segment_results results = {.rows = &segment.row, .count = 1};
    assert_int_equal(
        rfade_results_margins(&results, &alone, &threshold_dbm, &target, &margin, &error),
        RFADE_OK);
    double required_db = -10.0 * log10(-log(0.99));
    assert_true(fabs(margin.required_db - required_db) < 1e-5);
    assert_true(fabs(margin.margin_db - (15.0 - required_db)) < 1e-5);
    assert_true(fabs(margin.low_db - (15.0 - required_db - 0.979982)) < 1e-4);
    assert_true(fabs(margin.high_db - (15.0 - required_db + 0.979982)) < 1e-4);
    clear_segment(&segment);
}

/* K is known badly: the margin's ends are those of the ends of K, solved for by themselves. */
static void margin_carries_the_parameter(void **state)
{
    (void)state;
    struct segment segment;
    struct rfade_error error;
    struct rfade_segment_margin margin, end;
    const double threshold_dbm = -115.0;
    const struct rfade_target target = {.kind = RFADE_TARGET_OUTAGE, .value = 0.01};
    make_segment(&segment, -100.0, -100.0);
    struct rfade_segment_results results = {.rows = &segment.row, .count = 1};
    segment.fit.model = rfade_model(RFADE_RICE);
    segment.fit.parameter = 4.0;
    segment.fit.parameter_low = 1.0;
    segment.fit.parameter_high = 12.0;
    assert_int_equal(
        rfade_results_margins(&results, &alone, &threshold_dbm, &target, &margin, &error),
        RFADE_OK);
    const double ends[] = {1.0, 12.0}, found[] = {margin.low_db, margin.high_db};
    for (int i = 0; i < 2; i++) {
        segment.fit.parameter = segment.fit.parameter_low = segment.fit.parameter_high =
            ends[i];
        assert_int_equal(
            rfade_results_margins(&results, &alone, &threshold_dbm, &target, &end, &error),
            RFADE_OK);
        assert_true(fabs(end.margin_db - found[i]) < 1e-6);
    }
    assert_true(margin.low_db < margin.margin_db && margin.margin_db < margin.high_db);
    clear_segment(&segment);
}

static void what_was_not_fitted_has_no_rate(void **state)
{
    (void)state;
    struct segment segment;
    struct rfade_error error;
    struct rfade_segment_rate rate = {0.0, 0.0, 0.0};
    struct rfade_segment_margin margin;
    const double reference_dbm = -117.0, unknown = NAN;
    struct rfade_target target = {
        .kind = RFADE_TARGET_BIT, .value = 0.01, .modulation = rfade_modulation(RFADE_BPSK)};
    make_segment(&segment, -100.0, -100.0);
    struct rfade_segment_results results = {.rows = &segment.row, .count = 1};
    assert_int_equal(
        rfade_results_rates(&results, &alone, &unknown, &target, 1, 1, &rate, &error),
        RFADE_OK);
    assert_true(isnan(rate.value) && isnan(rate.low));
    target.value = 0.6; /* no bit error rate is above one half */
    assert_int_equal(
        rfade_results_margins(&results, &alone, &reference_dbm, &target, &margin, &error),
        RFADE_DOMAIN);
    segment.row.fit_count = 0;
    target.value = 0.01;
    assert_int_equal(
        rfade_results_margins(&results, &alone, &reference_dbm, &target, &margin, &error),
        RFADE_OK);
    assert_true(isnan(margin.margin_db));
    clear_segment(&segment);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(rates_are_averaged_along_the_local_mean),
        cmocka_unit_test(observed_rates_need_no_model),
        cmocka_unit_test(what_was_clipped_leaves_bounds),
        cmocka_unit_test(nothing_but_clipped_readings),
        cmocka_unit_test(margin_of_an_outage_by_hand),
        cmocka_unit_test(margin_carries_the_parameter),
        cmocka_unit_test(what_was_not_fitted_has_no_rate),
    };
    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
