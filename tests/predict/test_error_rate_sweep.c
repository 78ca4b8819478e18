/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Dense sweeps: error rates fall with the SNR, stay within their limits, and are smooth
 * wherever the method changes. A step of 1e-10 in ln p shows ten times as large in some sixth
 * difference, while those of a smooth curve are h^6 of the sixth derivative.
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <math.h>
#include <stdbool.h>

#include "routefade/error_rate.h"

enum { ORDER = 6, PACKETS = RFADE_MODULATION_COUNT };
static const double step_allowed = 1e-10;
static const double step_in_difference = 10.0;

struct sweep {
    const char *what;
    double log_rates[2][ORDER + 1]; /* bit and symbol, the last few */
    double before[2];
    int count;
};

static double sixth_difference(const double *values)
{
    return values[0] - 6.0 * values[1] + 15.0 * values[2] - 20.0 * values[3] +
           15.0 * values[4] - 6.0 * values[5] + values[6];
}

/* `at`: what the message names. Deep down the sixth derivative itself is too large to see. */
static void take(struct sweep *sweep, double at, const double *log_rates, bool falls)
{
    for (int i = 0; i < 2; i++) {
        const double log_rate = log_rates[i];
        assert_true(!isnan(log_rate));
        if (falls && sweep->count > 0 && !(log_rate <= sweep->before[i] + 4e-15)) {
            fail_msg("%s rises at %g: %.17g after %.17g", sweep->what, at, log_rate,
                     sweep->before[i]);
        }
        sweep->before[i] = log_rate;
        for (int j = 0; j < ORDER; j++) {
            sweep->log_rates[i][j] = sweep->log_rates[i][j + 1];
        }
        sweep->log_rates[i][ORDER] = log_rate;
        if (sweep->count >= ORDER && log_rate > -100.0) {
            const double difference = sixth_difference(sweep->log_rates[i]);
            if (!(fabs(difference) <= step_in_difference * step_allowed)) {
                fail_msg("%s steps at %g: %g", sweep->what, at, difference);
            }
        }
    }
    sweep->count++;
}

static void rates_of(const struct rfade_link *link, int modulation, double *log_rates)
{
    const struct rfade_modulation *one = rfade_modulation(
        (enum rfade_modulation_id)(modulation == PACKETS ? RFADE_QPSK : modulation));
    if (modulation == PACKETS) {
        struct rfade_packet_error error;
        assert_int_equal(rfade_packet_error(link, one, 200.0, &error), RFADE_OK);
        assert_true(error.independent >= 0.0 && error.independent <= 1.0);
        assert_true(error.block >= 0.0 && error.block <= 1.0);
        log_rates[0] = log(error.independent);
        log_rates[1] = log(error.block);
        return;
    }
    struct rfade_error_rate rate;
    assert_int_equal(rfade_error_rates(link, &one, 1, &rate), RFADE_OK);
    const int points = modulation == RFADE_NCFSK2 ? 2 : 1 << rfade_modulation_bits(one);
    assert_true(rate.bit >= 0.0 && rate.bit <= 0.5);
    assert_true(rate.symbol >= 0.0 && rate.symbol <= 1.0 - 1.0 / points);
    log_rates[0] = rate.log_bit;
    log_rates[1] = rate.log_symbol;
}

static void sweep_snr(struct rfade_link link, int modulation, double low_db, double high_db,
                      double step_db)
{
    struct sweep sweep = {.what = modulation == PACKETS
                                      ? "packet"
                                      : rfade_modulation_name(rfade_modulation(
                                            (enum rfade_modulation_id)modulation))};
    const int steps = (int)lround((high_db - low_db) / step_db);
    for (int i = 0; i <= steps; i++) {
        double log_rates[2];
        link.mean_snr_db = low_db + i * step_db;
        rates_of(&link, modulation, log_rates);
        take(&sweep, link.mean_snr_db, log_rates, true);
    }
}

static void rates_fall_smoothly_with_snr(void **state)
{
    (void)state;
    const struct rfade_link links[] = {
        {.model = NULL, .branches = 1},
        {.model = rfade_model(RFADE_RAYLEIGH), .branches = 1},
        {.model = rfade_model(RFADE_RICE), .parameter = 5.0, .branches = 1},
        {.model = rfade_model(RFADE_RICE), .parameter = 700.0, .branches = 3},
        {.model = rfade_model(RFADE_NAKAGAMI), .parameter = 0.5, .branches = 1},
        {.model = rfade_model(RFADE_NAKAGAMI), .parameter = 3.7, .branches = 2},
        {.model = rfade_model(RFADE_NAKAGAMI), .parameter = 9e3, .branches = 8},
    };
    for (size_t i = 0; i < sizeof links / sizeof links[0]; i++) {
        for (int modulation = 0; modulation < RFADE_MODULATION_COUNT; modulation++) {
            sweep_snr(links[i], modulation, -60.0, 60.0, 0.05);
        }
    }
}

static void far_sweeps_do_not_rise(void **state)
{
    (void)state;
    struct rfade_link link = {
        .model = rfade_model(RFADE_RICE), .parameter = 40.0, .branches = 2};
    for (int modulation = 0; modulation < RFADE_MODULATION_COUNT; modulation++) {
        struct sweep sweep = {.what = "far"};
        for (int i = 0; i <= 600; i++) {
            double log_rates[2];
            link.mean_snr_db = -300.0 + i;
            rates_of(&link, modulation, log_rates);
            sweep.count = i == 0 ? 0 : 1; /* too coarse for differences */
            take(&sweep, link.mean_snr_db, log_rates, true);
        }
    }
}

static void shadowed_and_selected_rates_fall_smoothly(void **state)
{
    (void)state;
    const struct rfade_link links[] = {
        {.model = NULL, .shadowing_db = 6.0, .branches = 1},
        {.model = rfade_model(RFADE_RICE),
         .parameter = 8.0,
         .shadowing_db = 5.0,
         .branches = 2},
        {.model = rfade_model(RFADE_NAKAGAMI),
         .parameter = 2.5,
         .shadowing_db = 0.3,
         .branches = 1},
        {.model = rfade_model(RFADE_RICE),
         .parameter = 3.0,
         .branches = 3,
         .combining = RFADE_SELECTION},
        {.model = rfade_model(RFADE_RAYLEIGH),
         .shadowing_db = 8.0,
         .branches = 2,
         .combining = RFADE_SELECTION},
    };
    for (size_t i = 0; i < sizeof links / sizeof links[0]; i++) {
        sweep_snr(links[i], RFADE_BPSK, -5.0, 25.0, 0.04);
        sweep_snr(links[i], RFADE_16QAM, -5.0, 25.0, 0.1);
        sweep_snr(links[i], PACKETS, 0.0, 20.0, 0.04);
    }
}

/* One of the link's numbers, by equal steps of its logarithm. */
static void sweep_number(struct rfade_link *link, double *number, double low, double high,
                         int steps)
{
    for (int modulation = 0; modulation <= PACKETS; modulation += 4) {
        struct sweep sweep = {.what = "a number of the link"};
        for (int i = 0; i <= steps; i++) {
            double log_rates[2];
            *number = low * pow(high / low, (double)i / steps);
            rates_of(link, modulation, log_rates);
            take(&sweep, *number, log_rates, false);
        }
    }
}

static void rates_are_smooth_in_the_fading(void **state)
{
    (void)state;
    struct rfade_link rice = {
        .model = rfade_model(RFADE_RICE), .mean_snr_db = 9.0, .branches = 2};
    sweep_number(&rice, &rice.parameter, 1e-3, 1e3, 700);
    rice.combining = RFADE_SELECTION;
    sweep_number(&rice, &rice.parameter, 1e-2, 1e2, 500);
    struct rfade_link nakagami = {
        .model = rfade_model(RFADE_NAKAGAMI), .mean_snr_db = 9.0, .branches = 1};
    sweep_number(&nakagami, &nakagami.parameter, 0.5, 1e3, 500);
}

static void rates_are_smooth_in_the_shadowing(void **state)
{
    (void)state;
    struct rfade_link link = {
        .model = rfade_model(RFADE_RICE), .parameter = 4.0, .mean_snr_db = 12.0, .branches = 1};
    sweep_number(&link, &link.shadowing_db, 1.0, 6.0, 400);
    link.branches = 2;
    link.combining = RFADE_SELECTION;
    sweep_number(&link, &link.shadowing_db, 1.0, 6.0, 400);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(rates_fall_smoothly_with_snr),
        cmocka_unit_test(far_sweeps_do_not_rise),
        cmocka_unit_test(shadowed_and_selected_rates_fall_smoothly),
        cmocka_unit_test(rates_are_smooth_in_the_fading),
        cmocka_unit_test(rates_are_smooth_in_the_shadowing),
    };
    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
