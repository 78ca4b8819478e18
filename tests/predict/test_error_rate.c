/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Error rates, unfaded and averaged over fading, against values from outside. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <math.h>
#include <string.h>

#include "routefade/error_rate.h"
#include "support/reference_table.h"

static const double rate_accuracy = 1e-10;

/* The table's names of fading and modulations. */
static const struct rfade_model *fading_named(const char *name)
{
    const char *const names[] = {"Rayleigh", "Rice", "Nakagami"};
    const enum rfade_model_id ids[] = {RFADE_RAYLEIGH, RFADE_RICE, RFADE_NAKAGAMI};
    for (size_t i = 0; i < 3; i++) {
        if (strcmp(name, names[i]) == 0) {
            return rfade_model(ids[i]);
        }
    }
    assert_string_equal(name, "AWGN");
    return NULL;
}

static const struct rfade_modulation *modulation_named(const char *name)
{
    const char *const names[RFADE_MODULATION_COUNT] = {"BPSK",  "QPSK",   "8PSK",  "16QAM",
                                                       "64QAM", "256QAM", "DBPSK", "NCBFSK"};
    for (int i = 0; i < RFADE_MODULATION_COUNT; i++) {
        if (strcmp(name, names[i]) == 0) {
            return rfade_modulation((enum rfade_modulation_id)i);
        }
    }
    fail_msg("no modulation %s", name);
    return NULL;
}

static void rates_match_reference(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "error_rate_open.tsv");
    while (reference_next(&table)) {
        const struct rfade_modulation *modulation =
            modulation_named(reference_text(&table, "modulation"));
        const struct rfade_link link = {
            .model = fading_named(reference_text(&table, "fading")),
            .parameter = reference_number(&table, "par"),
            .mean_snr_db = reference_number(&table, "EsN0_dB"),
            .branches = (int)reference_number(&table, "branches"),
            .combining = RFADE_MAXIMAL_RATIO,
        };
        struct rfade_error_rate rate;
        assert_int_equal(rfade_error_rates(&link, &modulation, 1, &rate), RFADE_OK);
        reference_assert_column(&table, "BER", rate.bit, rate_accuracy);
        reference_assert_column(&table, "SER", rate.symbol, rate_accuracy);
        reference_assert_column(&table, "ln_BER", rate.log_bit, rate_accuracy);
        reference_assert_column(&table, "ln_SER", rate.log_symbol, rate_accuracy);
    }
    assert_int_equal(table.row_count, 739);
}

static struct rfade_error_rate rate_of(const struct rfade_link *link,
                                       enum rfade_modulation_id id)
{
    const struct rfade_modulation *modulation = rfade_modulation(id);
    struct rfade_error_rate rate;
    assert_int_equal(rfade_error_rates(link, &modulation, 1, &rate), RFADE_OK);
    return rate;
}

/* Means over the density of the combined SNR, by make_error_rates.py. */
static void check_random(const char *file_name, size_t rows)
{
    struct reference_table table;
    reference_open(&table, file_name);
    while (reference_next(&table)) {
        const bool is_sum = strcmp(reference_text(&table, "combining"), "mrc") == 0;
        const struct rfade_modulation *modulation =
            rfade_modulation_by_name(reference_text(&table, "modulation"));
        const struct rfade_link link = {
            .model = rfade_model_by_name(reference_text(&table, "model")),
            .parameter = reference_number(&table, "parameter"),
            .mean_snr_db = reference_number(&table, "mean_snr_db"),
            .branches = (int)reference_number(&table, "branches"),
            .combining = is_sum ? RFADE_MAXIMAL_RATIO : RFADE_SELECTION,
        };
        struct rfade_error_rate rate;
        assert_non_null(modulation);
        assert_non_null(link.model);
        assert_int_equal(rfade_error_rates(&link, &modulation, 1, &rate), RFADE_OK);
        reference_assert_column(&table, "bit", rate.bit, rate_accuracy);
        reference_assert_column(&table, "symbol", rate.symbol, rate_accuracy);
        assert_true(fabs(rate.log_bit - log(rate.bit)) <= 1e-12 * (1.0 + fabs(rate.log_bit)));
    }
    assert_int_equal(table.row_count, rows);
}

static void sums_of_branches_match_random_points(void **state)
{
    (void)state;
    check_random("rate_branches_random.tsv", 78);
}

static void selection_matches_random_points(void **state)
{
    (void)state;
    check_random("selection_branches_random.tsv", 24);
}

/*
 * BPSK over `order` independent exponential SNRs of mean g, and so over Nakagami fading of
 * whole m (Proakis, Digital Communications; Simon and Alouini 2005), with mu = sqrt(g/(1 + g)):
 *     ((1 - mu)/2)^order sum C(order-1+k, k) ((1 + mu)/2)^k, k = 0 ... order - 1
 */
static long double bpsk_closed_form(int order, long double g)
{
    const long double mu = sqrtl(g / (1.0L + g));
    const long double less = 0.5L / ((1.0L + g) * (1.0L + mu)); /* (1 - mu)/2 */
    long double sum = 0.0L;
    long double binomial = 1.0L;
    for (int k = 0; k < order; k++) {
        sum += binomial * powl(0.5L * (1.0L + mu), k);
        binomial *= (long double)(order + k) / (k + 1);
    }
    return powl(less, order) * sum;
}

static void assert_close(double actual, long double expected, double relative)
{
    if (!(fabsl(actual / expected - 1.0L) <= relative)) {
        fail_msg("%.17g, not %.17Lg", actual, expected);
    }
}

static void closed_forms_are_met(void **state)
{
    (void)state;
    for (int branches = 1; branches <= RFADE_BRANCHES_MAX; branches++) {
        for (int m = 1; m <= 6; m++) {
            for (double snr_db = -40.0; snr_db <= 60.0; snr_db += 1.7) {
                struct rfade_link link = {.model = rfade_model(RFADE_NAKAGAMI),
                                          .parameter = m,
                                          .mean_snr_db = snr_db,
                                          .branches = branches};
                const long double g = powl(10.0L, snr_db / 10.0L);
                const long double expected = bpsk_closed_form(m * branches, g / m);
                assert_close(rate_of(&link, RFADE_BPSK).bit, expected, 1e-12);
                const long double gamma_m = powl(1.0L + g / m, -m * branches) / 2.0L;
                assert_close(rate_of(&link, RFADE_DBPSK).bit, gamma_m, 1e-12);
                link.model = rfade_model(RFADE_RAYLEIGH);
                assert_close(rate_of(&link, RFADE_NCFSK2).bit,
                             powl(1.0L + g / 2.0L, -branches) / 2.0L, 1e-12);
                link.combining = RFADE_SELECTION; /* a sum of exponentials of means g/k */
                long double product = 0.5L;
                for (int k = 1; k <= branches; k++) {
                    product /= 1.0L + g / k;
                }
                assert_close(rate_of(&link, RFADE_DBPSK).bit, product, rate_accuracy);
            }
        }
    }
}

/* Eb/N0, dB, and what it should give; `read` in a source, or common knowledge of the trade. */
static void facts_of_the_trade_are_met(void **state)
{
    (void)state;
    const struct rfade_link unfaded = {.branches = 1};
    const struct rfade_link rayleigh = {.model = rfade_model(RFADE_RAYLEIGH), .branches = 1};
    struct rfade_target target = {
        .kind = RFADE_TARGET_SYMBOL, .value = 0.01, .modulation = rfade_modulation(RFADE_QPSK)};
    const double bit_db = 10.0 * log10(2.0);
    double snr_db;
    /* common practice, no source: 1 % QPSK symbol errors at Eb/N0 of 5 to 6 dB unfaded; exact
     * value by 50-digit arithmetic beside it, as below */
    assert_int_equal(rfade_required_snr(&unfaded, &target, &snr_db), RFADE_OK);
    assert_true(snr_db - bit_db > 5.0 && snr_db - bit_db < 6.0);
    assert_true(fabs(snr_db - bit_db - 5.205114693) < 1e-8);
    /* under Rayleigh fading practice says 17 to 18 dB; exact calculation 16.5 */
    assert_int_equal(rfade_required_snr(&rayleigh, &target, &snr_db), RFADE_OK);
    assert_true(fabs(snr_db - bit_db - 16.49967345) < 1e-7);
    double penalty_db;
    assert_int_equal(rfade_fading_penalty(&rayleigh, &target, &penalty_db), RFADE_OK);
    assert_true(fabs(penalty_db - (16.49967345 - 5.205114693)) < 1e-7);
    /* textbook figures: 1 % QPSK bit errors at 4.3 dB; BPSK under Rayleigh fading */
    target.kind = RFADE_TARGET_BIT;
    assert_int_equal(rfade_required_snr(&unfaded, &target, &snr_db), RFADE_OK);
    assert_true(fabs(snr_db - bit_db - 4.323193206) < 1e-8);
    target.modulation = rfade_modulation(RFADE_BPSK);
    const double rates[] = {1e-2, 1e-3, 1e-4};
    const double expected_db[] = {13.84756965, 23.96635603, 33.97809705};
    for (int i = 0; i < 3; i++) {
        target.value = rates[i];
        assert_int_equal(rfade_required_snr(&rayleigh, &target, &snr_db), RFADE_OK);
        assert_true(fabs(snr_db - expected_db[i]) < 1e-7);
    }
}

static void table_holds_all_modulations(void **state)
{
    (void)state;
    const char *const names[] = {"bpsk",  "qpsk",   "8psk",  "16qam",
                                 "64qam", "256qam", "dbpsk", "ncfsk2"};
    const int bits[] = {1, 2, 3, 4, 6, 8, 1, 1};
    for (int i = 0; i < RFADE_MODULATION_COUNT; i++) {
        const struct rfade_modulation *modulation =
            rfade_modulation((enum rfade_modulation_id)i);
        assert_non_null(modulation);
        assert_string_equal(rfade_modulation_name(modulation), names[i]);
        assert_ptr_equal(rfade_modulation_by_name(names[i]), modulation);
        assert_int_equal(rfade_modulation_bits(modulation), bits[i]);
    }
    assert_null(rfade_modulation((enum rfade_modulation_id)RFADE_MODULATION_COUNT));
    assert_null(rfade_modulation_by_name("qpsk "));
}

/* At no SNR at all a receiver guesses. */
static void limits_are_those_of_guessing(void **state)
{
    (void)state;
    for (int i = 0; i < RFADE_MODULATION_COUNT; i++) {
        const struct rfade_modulation *modulation =
            rfade_modulation((enum rfade_modulation_id)i);
        const int bits = rfade_modulation_bits(modulation);
        const int points = i == RFADE_NCFSK2 ? 2 : 1 << bits;
        struct rfade_error_rate rate;
        assert_int_equal(rfade_error_rate_steady(modulation, -INFINITY, &rate), RFADE_OK);
        assert_close(rate.bit, 0.5L, 1e-15);
        assert_close(rate.symbol, 1.0L - 1.0L / points, 1e-15);
        assert_int_equal(rfade_error_rate_steady(modulation, -300.0, &rate), RFADE_OK);
        assert_close(rate.symbol, 1.0L - 1.0L / points, 1e-13);
        assert_int_equal(rfade_error_rate_steady(modulation, INFINITY, &rate), RFADE_OK);
        assert_true(rate.bit == 0.0 && rate.symbol == 0.0 && rate.log_bit == -INFINITY);
        const struct rfade_link link = {.model = rfade_model(RFADE_RICE),
                                        .parameter = 3.0,
                                        .mean_snr_db = -300.0,
                                        .branches = 8};
        rate = rate_of(&link, (enum rfade_modulation_id)i);
        assert_close(rate.bit, 0.5L, 1e-13);
        assert_close(rate.symbol, 1.0L - 1.0L / points, 1e-13);
    }
}

static void unfaded_rates_add_up_the_branches(void **state)
{
    (void)state;
    struct rfade_link link = {.model = rfade_model(RFADE_RICE),
                              .parameter = 2.0,
                              .shadowing_db = 4.0,
                              .mean_snr_db = 3.0,
                              .branches = 4};
    const struct rfade_modulation *modulation = rfade_modulation(RFADE_BPSK);
    struct rfade_error_rate rate;
    assert_int_equal(rfade_error_rate_unfaded(&link, modulation, &rate), RFADE_OK);
    const long double g = powl(10.0L, 0.3L);
    assert_close(rate.bit, 0.5L * erfcl(sqrtl(4.0L * g)), 1e-14);
    link.combining = RFADE_SELECTION;
    assert_int_equal(rfade_error_rate_unfaded(&link, modulation, &rate), RFADE_OK);
    assert_close(rate.bit, 0.5L * erfcl(sqrtl(g)), 1e-14);
}

/* Each refusal, starting from a link that is right; the outputs are NaN. */
static void what_is_out_of_range_is_refused(void **state)
{
    (void)state;
    const struct rfade_link right = {.model = rfade_model(RFADE_RICE),
                                     .parameter = 3.0,
                                     .shadowing_db = 6.0,
                                     .mean_snr_db = 10.0,
                                     .branches = 2};
    const struct rfade_modulation *const modulations[] = {rfade_modulation(RFADE_QPSK), NULL};
    struct rfade_error_rate rates[2];
    assert_int_equal(rfade_error_rates(&right, modulations, 1, rates), RFADE_OK);
    assert_int_equal(rfade_error_rates(&right, modulations, 2, rates), RFADE_DOMAIN);
    assert_true(isnan(rates[1].bit));
    assert_int_equal(rfade_error_rates(&right, modulations, 0, rates), RFADE_DOMAIN);
    struct rfade_link wrong[12];
    for (int i = 0; i < 12; i++) {
        wrong[i] = right;
    }
    wrong[0].model = rfade_model(RFADE_LOGNORMAL);
    wrong[1].parameter = -0.1;
    wrong[2].parameter = NAN;
    wrong[3].parameter = 1.1e5;
    wrong[4].shadowing_db = -1.0;
    wrong[5].shadowing_db = 30.1;
    wrong[6].mean_snr_db = 300.1;
    wrong[7].mean_snr_db = NAN;
    wrong[8].branches = 0;
    wrong[9].branches = 9;
    wrong[10].combining = (enum rfade_combining)2;
    wrong[11].model = rfade_model(RFADE_NAKAGAMI);
    wrong[11].parameter = 0.4;
    for (int i = 0; i < 12; i++) {
        assert_int_equal(rfade_error_rates(&wrong[i], modulations, 1, rates), RFADE_DOMAIN);
        assert_true(isnan(rates[0].bit) && isnan(rates[0].symbol) && isnan(rates[0].log_bit) &&
                    isnan(rates[0].log_symbol));
    }
    assert_int_equal(rfade_error_rate_steady(NULL, 0.0, rates), RFADE_DOMAIN);
    assert_int_equal(rfade_error_rate_steady(modulations[0], NAN, rates), RFADE_DOMAIN);
    assert_int_equal(rfade_error_rate_steady(modulations[0], 301.0, rates), RFADE_DOMAIN);
    assert_true(isnan(rates[0].symbol));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(rates_match_reference),
        cmocka_unit_test(sums_of_branches_match_random_points),
        cmocka_unit_test(selection_matches_random_points),
        cmocka_unit_test(closed_forms_are_met),
        cmocka_unit_test(facts_of_the_trade_are_met),
        cmocka_unit_test(table_holds_all_modulations),
        cmocka_unit_test(limits_are_those_of_guessing),
        cmocka_unit_test(unfaded_rates_add_up_the_branches),
        cmocka_unit_test(what_is_out_of_range_is_refused),
    };
    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
