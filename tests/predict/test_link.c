/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Outage of combined branches, packets, observed distributions, required SNR and diversity. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <math.h>
#include <stdbool.h>
#include <string.h>

#include "routefade/error_rate.h"
#include "routefade/predict.h"
#include "support/reference_table.h"

static const double accuracy = 1e-10;

/* The columns that all tables have; an absent shadowing_db is for the caller to set. */
static struct rfade_link link_of(const struct reference_table *table)
{
    const bool is_sum = strcmp(reference_text(table, "combining"), "mrc") == 0;
    const char *model = reference_text(table, "model");
    const struct rfade_link link = {
        .model = rfade_model_by_name(model),
        .parameter = reference_number(table, "parameter"),
        .mean_snr_db = reference_number(table, "mean_snr_db"),
        .branches = (int)reference_number(table, "branches"),
        .combining = is_sum ? RFADE_MAXIMAL_RATIO : RFADE_SELECTION,
    };
    assert_true((link.model == NULL) == (strcmp(model, "unfaded") == 0));
    return link;
}

static void outage_of_branches_matches_random_points(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "outage_branches_random.tsv");
    while (reference_next(&table)) {
        const struct rfade_link link = link_of(&table);
        struct rfade_tails tails;
        assert_int_equal(
            rfade_link_outage(&link, reference_number(&table, "threshold_db"), &tails),
            RFADE_OK);
        reference_assert_column(&table, "outage", tails.lower, accuracy);
        reference_assert_column(&table, "coverage", tails.upper, accuracy);
        assert_true(fabs(tails.log_lower - log(tails.lower)) <= 1e-11);
    }
    assert_int_equal(table.row_count, 200);
}

static void shadowed_outage_matches_random_points(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "shadowed_outage_random.tsv");
    while (reference_next(&table)) {
        struct rfade_link link = link_of(&table);
        struct rfade_tails tails;
        link.shadowing_db = reference_number(&table, "shadowing_db");
        assert_int_equal(
            rfade_link_outage(&link, reference_number(&table, "threshold_db"), &tails),
            RFADE_OK);
        reference_assert_column(&table, "outage", tails.lower, accuracy);
        assert_true(fabs(tails.lower + tails.upper - 1.0) < 1e-15);
    }
    assert_int_equal(table.row_count, 20);
}

/* Two Rayleigh branches added are one Nakagami branch of m = 2 and twice the mean. */
static void upper_tail_is_that_of_one_branch(void **state)
{
    (void)state;
    const struct rfade_link link = {.model = rfade_model(RFADE_RAYLEIGH),
                                    .shadowing_db = 5.0,
                                    .mean_snr_db = 10.0,
                                    .branches = 2};
    const double median_db =
        10.0 + 10.0 * log10(2.0) - rfade_lognormal_mean_over_median_db(5.0);
    for (double threshold_db = -40.0; threshold_db < 60.0; threshold_db += 3.3) {
        struct rfade_tails expected;
        struct rfade_tails tails;
        assert_int_equal(rfade_outage(rfade_model(RFADE_NAKAGAMI), 2.0, 5.0,
                                      threshold_db - median_db, &expected),
                         RFADE_OK);
        assert_int_equal(rfade_link_outage(&link, threshold_db, &tails), RFADE_OK);
        assert_true(fabs(tails.lower / expected.lower - 1.0) < accuracy);
        assert_true(fabs(tails.upper / expected.upper - 1.0) < accuracy);
    }
}

static void steady_outage_is_a_step(void **state)
{
    (void)state;
    struct rfade_link link = {.mean_snr_db = 10.0, .branches = 4};
    struct rfade_tails tails;
    const double sum_db = 10.0 + 10.0 * log10(4.0);
    assert_int_equal(rfade_link_outage(&link, sum_db - 1e-9, &tails), RFADE_OK);
    assert_true(tails.lower == 0.0 && tails.upper == 1.0 && tails.log_upper == 0.0);
    assert_int_equal(rfade_link_outage(&link, sum_db + 1e-9, &tails), RFADE_OK);
    assert_true(tails.lower == 1.0 && tails.upper == 0.0);
    link.shadowing_db = 8.0;
    struct rfade_tails normal;
    assert_int_equal(rfade_normal_tails(0.5, &normal), RFADE_OK);
    assert_int_equal(rfade_link_outage(&link,
                                       sum_db + 4.0 - rfade_lognormal_mean_over_median_db(8.0),
                                       &tails),
                     RFADE_OK);
    assert_true(fabs(tails.lower / normal.lower - 1.0) < 1e-13);
    assert_int_equal(rfade_link_outage(&link, NAN, &tails), RFADE_DOMAIN);
    assert_true(isnan(tails.lower));
    link.branches = 0;
    assert_int_equal(rfade_link_outage(&link, 0.0, &tails), RFADE_DOMAIN);
}

static void shadowed_rates_match_random_points(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "shadowed_random.tsv");
    while (reference_next(&table)) {
        struct rfade_link link = link_of(&table);
        const struct rfade_modulation *modulation =
            rfade_modulation_by_name(reference_text(&table, "modulation"));
        struct rfade_error_rate rate;
        link.shadowing_db = reference_number(&table, "shadowing_db");
        assert_int_equal(rfade_error_rates(&link, &modulation, 1, &rate), RFADE_OK);
        reference_assert_column(&table, "bit", rate.bit, accuracy);
        reference_assert_column(&table, "symbol", rate.symbol, accuracy);
    }
    assert_int_equal(table.row_count, 70);
}

static void packets_match_random_points(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "packet_branches_random.tsv");
    while (reference_next(&table)) {
        const struct rfade_link link = link_of(&table);
        const struct rfade_modulation *modulation =
            rfade_modulation_by_name(reference_text(&table, "modulation"));
        struct rfade_packet_error error;
        assert_int_equal(
            rfade_packet_error(&link, modulation, reference_number(&table, "bits"), &error),
            RFADE_OK);
        reference_assert_column(&table, "block", error.block, accuracy);
    }
    assert_int_equal(table.row_count, 28);
}

/* One bit is a bit, without fading both packets are the same, and many bits lose every packet.
 */
static void packets_are_exact_in_both_limits(void **state)
{
    (void)state;
    const struct rfade_modulation *modulation = rfade_modulation(RFADE_16QAM);
    struct rfade_link link = {
        .model = rfade_model(RFADE_RICE), .parameter = 4.0, .mean_snr_db = 18.0, .branches = 2};
    struct rfade_packet_error error;
    struct rfade_error_rate rate;
    assert_int_equal(rfade_error_rates(&link, &modulation, 1, &rate), RFADE_OK);
    assert_int_equal(rfade_packet_error(&link, modulation, 1.0, &error), RFADE_OK);
    assert_true(fabs(error.independent / rate.bit - 1.0) < 1e-15);
    assert_true(fabs(error.block / rate.bit - 1.0) < 1e-12);
    assert_int_equal(rfade_packet_error(&link, modulation, 1000.0, &error), RFADE_OK);
    const long double independent = -expm1l(1000.0L * log1pl(-(long double)rate.bit));
    assert_true(fabsl(error.independent / independent - 1.0L) < 1e-14L);
    assert_true(error.block < error.independent);
    assert_int_equal(rfade_packet_error(&link, modulation, 1e9, &error), RFADE_OK);
    assert_true(error.independent > 0.999999);
    link.model = NULL;
    assert_int_equal(rfade_packet_error(&link, modulation, 1e6, &error), RFADE_OK);
    assert_true(error.independent == error.block && error.block > 0.0);
    /* a rate so small that 1 - p is 1 */
    link.mean_snr_db = 24.0;
    assert_int_equal(rfade_error_rate_unfaded(&link, modulation, &rate), RFADE_OK);
    assert_true(rate.bit < 1e-20);
    assert_int_equal(rfade_packet_error(&link, modulation, 100.0, &error), RFADE_OK);
    assert_true(fabs(error.block / (100.0 * rate.bit) - 1.0) < 1e-14);
    const double refused[] = {0.0, 0.5, 1.1e9, NAN, -3.0};
    for (int i = 0; i < 5; i++) {
        assert_int_equal(rfade_packet_error(&link, modulation, refused[i], &error),
                         RFADE_DOMAIN);
        assert_true(isnan(error.independent) && isnan(error.block));
    }
    assert_int_equal(rfade_packet_error(&link, NULL, 8.0, &error), RFADE_DOMAIN);
}

/* What the SNR found gives, asked forward, is the target. */
static double forward(const struct rfade_link *link, const struct rfade_target *target)
{
    struct rfade_tails tails;
    struct rfade_error_rate rate;
    struct rfade_packet_error error;
    switch (target->kind) {
    case RFADE_TARGET_OUTAGE:
        assert_int_equal(rfade_link_outage(link, target->threshold_db, &tails), RFADE_OK);
        return tails.lower;
    case RFADE_TARGET_BIT:
    case RFADE_TARGET_SYMBOL:
        assert_int_equal(rfade_error_rates(link, &target->modulation, 1, &rate), RFADE_OK);
        return target->kind == RFADE_TARGET_BIT ? rate.bit : rate.symbol;
    default:
        assert_int_equal(
            rfade_packet_error(link, target->modulation, target->packet_bits, &error),
            RFADE_OK);
        return target->kind == RFADE_TARGET_PACKET_BLOCK ? error.block : error.independent;
    }
}

static void required_snr_meets_the_target(void **state)
{
    (void)state;
    const double values[] = {0.4, 1e-2, 1e-5, 1e-12};
    for (int shape = 0; shape < 24; shape++) {
        const enum rfade_model_id ids[] = {RFADE_RAYLEIGH, RFADE_RICE, RFADE_NAKAGAMI};
        struct rfade_link link = {.model = rfade_model(ids[shape % 3]),
                                  .parameter = 3.3,
                                  .branches = 1 + shape % 2 * 2,
                                  .combining =
                                      shape & 4 ? RFADE_SELECTION : RFADE_MAXIMAL_RATIO,
                                  .shadowing_db = shape >= 12 ? 6.0 : 0.0};
        for (int i = 0; i < 20; i++) {
            const struct rfade_target target = {.kind = (enum rfade_target_kind)(i % 5),
                                                .value = values[i / 5],
                                                .threshold_db = 8.0,
                                                .modulation = rfade_modulation(RFADE_8PSK),
                                                .packet_bits = 500.0};
            assert_int_equal(rfade_required_snr(&link, &target, &link.mean_snr_db), RFADE_OK);
            assert_true(fabs(forward(&link, &target) / target.value - 1.0) < 2e-9);
        }
    }
}

static void unreachable_targets_are_refused(void **state)
{
    (void)state;
    struct rfade_link link = {.model = rfade_model(RFADE_RAYLEIGH), .branches = 1};
    const struct rfade_target right = {.kind = RFADE_TARGET_BIT,
                                       .value = 0.1,
                                       .modulation = rfade_modulation(RFADE_QPSK),
                                       .packet_bits = 10.0};
    struct rfade_target wrong[10];
    double snr_db = 0.0;
    for (int i = 0; i < 10; i++) {
        wrong[i] = right;
    }
    wrong[0].value = 0.5; /* met by guessing */
    wrong[1].value = 0.6;
    wrong[2].value = 0.0;
    wrong[3].value = NAN;
    wrong[4].value = 1e-200; /* of a single Rayleigh branch: 2000 dB */
    wrong[5].kind = RFADE_TARGET_SYMBOL;
    wrong[5].value = 0.75;
    wrong[6].modulation = NULL;
    wrong[7].kind = RFADE_TARGET_PACKET_BLOCK;
    wrong[7].packet_bits = 0.0;
    wrong[8].kind = RFADE_TARGET_OUTAGE;
    wrong[8].threshold_db = NAN;
    wrong[9].kind = (enum rfade_target_kind)5;
    assert_int_equal(rfade_required_snr(&link, &right, &snr_db), RFADE_OK);
    for (int i = 0; i < 10; i++) {
        assert_int_equal(rfade_required_snr(&link, &wrong[i], &snr_db), RFADE_DOMAIN);
        assert_true(isnan(snr_db));
    }
    link.branches = 9;
    assert_int_equal(rfade_required_snr(&link, &right, &snr_db), RFADE_DOMAIN);
    assert_int_equal(rfade_fading_penalty(&link, &right, &snr_db), RFADE_DOMAIN);
    assert_true(isnan(snr_db));
}

/* Rayleigh: outage 1 - exp(-x), so the margin over a steady SNR is -10 log10(-ln(1 - p)). */
static void fade_margin_is_the_closed_form(void **state)
{
    (void)state;
    const struct rfade_link link = {.model = rfade_model(RFADE_RAYLEIGH), .branches = 1};
    for (double value = 0.3; value > 1e-9; value *= 0.1) {
        const struct rfade_target target = {
            .kind = RFADE_TARGET_OUTAGE, .value = value, .threshold_db = 12.0};
        double margin_db;
        assert_int_equal(rfade_fading_penalty(&link, &target, &margin_db), RFADE_OK);
        assert_true(fabs(margin_db + 10.0 * log10(-log1p(-value))) < 1e-8);
    }
}

/* Far out an error rate falls by that many decades for one of SNR. */
static void diversity_order_is_the_slope_far_out(void **state)
{
    (void)state;
    const struct rfade_modulation *modulation = rfade_modulation(RFADE_QPSK);
    for (int shape = 0; shape < 12; shape++) {
        struct rfade_link link = {.model = rfade_model((enum rfade_model_id)(shape % 3)),
                                  .parameter = 1.7,
                                  .branches = 1 + shape / 3,
                                  .shadowing_db = shape % 2 ? 3.0 : 0.0,
                                  .combining =
                                      shape > 5 ? RFADE_SELECTION : RFADE_MAXIMAL_RATIO};
        struct rfade_error_rate rates[2];
        double order;
        for (int i = 0; i < 2; i++) {
            link.mean_snr_db = 70.0 + 10.0 * i;
            assert_int_equal(rfade_error_rates(&link, &modulation, 1, &rates[i]), RFADE_OK);
        }
        assert_int_equal(rfade_diversity_order(&link, &order), RFADE_OK);
        const double slope = (rates[0].log_bit - rates[1].log_bit) / log(10.0);
        assert_true(fabs(slope / order - 1.0) < 1e-3);
    }
    struct rfade_link link = {.branches = 2};
    double order;
    assert_int_equal(rfade_diversity_order(&link, &order), RFADE_OK);
    assert_true(isinf(order));
    link.branches = 0;
    assert_int_equal(rfade_diversity_order(&link, &order), RFADE_DOMAIN);
    assert_true(isnan(order));
}

/* A distribution given in fine bins has the average of the fading that it was made from. */
static void observed_average_is_that_of_the_distribution(void **state)
{
    (void)state;
    enum { BINS = 700 };
    const struct rfade_modulation *modulations[RFADE_MODULATION_COUNT];
    struct rfade_error_rate observed[RFADE_MODULATION_COUNT];
    struct rfade_error_rate expected[RFADE_MODULATION_COUNT];
    struct rfade_snr_bin bins[BINS];
    const struct rfade_model *model = rfade_model(RFADE_RAYLEIGH);
    const struct rfade_link link = {.model = model, .mean_snr_db = 12.0, .branches = 1};
    for (int i = 0; i < RFADE_MODULATION_COUNT; i++) {
        modulations[i] = rfade_modulation((enum rfade_modulation_id)i);
    }
    for (int i = 0; i < BINS; i++) {
        const double low_db = -60.0 + 0.1 * i;
        struct rfade_log_gradient mass;
        assert_int_equal(model->log_interval(0.0, low_db, low_db + 0.1, &mass), RFADE_OK);
        bins[i] = (struct rfade_snr_bin){12.0 + low_db, 12.1 + low_db, 7.0 * exp(mass.value)};
    }
    assert_int_equal(
        rfade_error_rates_observed(bins, BINS, modulations, RFADE_MODULATION_COUNT, observed),
        RFADE_OK);
    assert_int_equal(rfade_error_rates(&link, modulations, RFADE_MODULATION_COUNT, expected),
                     RFADE_OK);
    for (int i = 0; i < RFADE_MODULATION_COUNT; i++) {
        /* within a bin the density is not flat: 0.1 dB squared */
        assert_true(fabs(observed[i].bit / expected[i].bit - 1.0) < 2e-4);
        assert_true(fabs(observed[i].symbol / expected[i].symbol - 1.0) < 2e-4);
    }
    /* single levels: the mean of two steady rates */
    struct rfade_error_rate low;
    struct rfade_error_rate high;
    const struct rfade_snr_bin two[] = {{3.0, 3.0, 1.0}, {9.0, 9.0, 3.0}};
    assert_int_equal(rfade_error_rate_steady(modulations[1], 3.0, &low), RFADE_OK);
    assert_int_equal(rfade_error_rate_steady(modulations[1], 9.0, &high), RFADE_OK);
    assert_int_equal(rfade_error_rates_observed(two, 2, &modulations[1], 1, observed),
                     RFADE_OK);
    assert_true(fabs(observed[0].bit / (0.25 * low.bit + 0.75 * high.bit) - 1.0) < 1e-14);
    assert_true(fabs(observed[0].symbol / (0.25 * low.symbol + 0.75 * high.symbol) - 1.0) <
                1e-14);
}

/* DBPSK over a bin: the mean of exp(-g)/2, g = exp(t), is (E1(g_low) - E1(g_high))/(2 width).
 */
static void wide_bins_are_integrated(void **state)
{
    (void)state;
    const struct rfade_modulation *modulation = rfade_modulation(RFADE_DBPSK);
    const struct rfade_snr_bin bin = {0.0, 10.0, 2.0};
    struct rfade_error_rate rate;
    /* E1(1), E1(10): AMS 55 table 5.1, to the digits that it prints, and mpmath's */
    const double e1_1 = 0.21938393439552027;
    const double e1_10 = 4.1569689296853242e-6;
    assert_int_equal(rfade_error_rates_observed(&bin, 1, &modulation, 1, &rate), RFADE_OK);
    assert_true(fabs(rate.bit / ((e1_1 - e1_10) / (2.0 * log(10.0))) - 1.0) < 1e-12);
}

static void bad_distributions_are_refused(void **state)
{
    (void)state;
    const struct rfade_modulation *modulation = rfade_modulation(RFADE_BPSK);
    const struct rfade_snr_bin wrong[] = {
        {2.0, 1.0, 1.0}, {NAN, 1.0, 1.0},      {0.0, NAN, 1.0},       {0.0, 1.0, -1.0},
        {0.0, 1.0, NAN}, {0.0, INFINITY, 1.0}, {-INFINITY, 1.0, 1.0}, {0.0, 1.0, INFINITY}};
    struct rfade_error_rate rate;
    for (size_t i = 0; i < sizeof wrong / sizeof wrong[0]; i++) {
        assert_int_equal(rfade_error_rates_observed(&wrong[i], 1, &modulation, 1, &rate),
                         RFADE_DOMAIN);
        assert_true(isnan(rate.bit) && isnan(rate.log_symbol));
    }
    const struct rfade_snr_bin nothing = {0.0, 1.0, 0.0};
    assert_int_equal(rfade_error_rates_observed(&nothing, 1, &modulation, 1, &rate),
                     RFADE_NO_DATA);
    assert_int_equal(rfade_error_rates_observed(NULL, 0, &modulation, 1, &rate), RFADE_NO_DATA);
    modulation = NULL;
    const struct rfade_snr_bin right = {0.0, 1.0, 1.0};
    assert_int_equal(rfade_error_rates_observed(&right, 1, &modulation, 1, &rate),
                     RFADE_DOMAIN);
}

/* As exact as the table says. */
static void check_quick(double quick, double exact)
{
    assert_true(quick >= 0.0); /* no NaN, however small */
    const double allowed = exact > 1e-12 ? 1e-10 : 1e-9;
    if (exact > 1e-60 && !(fabs(quick / exact - 1.0) <= allowed)) {
        fail_msg("%.17g, not %.17g", quick, exact);
    }
}

/* Against the quadrature, on bins of the table's width, narrower and wider ones, and far out.
 */
static void table_gives_the_same_means(void **state)
{
    (void)state;
    const double widths_db[] = {0.0, 0.1, 0.5, 1.0};
    const struct rfade_modulation *modulations[RFADE_MODULATION_COUNT];
    struct rfade_error_rate quick[RFADE_MODULATION_COUNT];
    struct rfade_error_rate exact[RFADE_MODULATION_COUNT];
    for (int i = 0; i < RFADE_MODULATION_COUNT; i++) {
        modulations[i] = rfade_modulation((enum rfade_modulation_id)i);
    }
    for (int w = 0; w < 4; w++) {
        struct rfade_rate_table *table = NULL;
        assert_int_equal(
            rfade_rate_table_create(modulations, RFADE_MODULATION_COUNT, widths_db[w], &table),
            RFADE_OK);
        for (double middle_db = -65.0; middle_db < 75.0; middle_db += 0.773) {
            const double half_db = 0.5 * widths_db[w];
            const struct rfade_snr_bin bin = {middle_db - half_db, middle_db + half_db, 3.0};
            assert_int_equal(rfade_rate_table_mean(table, &bin, 1, quick), RFADE_OK);
            assert_int_equal(
                rfade_error_rates_observed(&bin, 1, modulations, RFADE_MODULATION_COUNT, exact),
                RFADE_OK);
            for (int i = 0; i < RFADE_MODULATION_COUNT; i++) {
                check_quick(quick[i].bit, exact[i].bit);
                check_quick(quick[i].symbol, exact[i].symbol);
            }
        }
        const struct rfade_snr_bin mixed[] = {{3.0, 3.7, 1.0}, {5.0, 5.0 + widths_db[w], 2.0}};
        assert_int_equal(rfade_rate_table_mean(table, mixed, 2, quick), RFADE_OK);
        assert_int_equal(
            rfade_error_rates_observed(mixed, 2, modulations, RFADE_MODULATION_COUNT, exact),
            RFADE_OK);
        for (int i = 0; i < RFADE_MODULATION_COUNT; i++) {
            assert_true(fabs(quick[i].bit / exact[i].bit - 1.0) < 1e-10);
        }
        const struct rfade_snr_bin wrong = {3.0, 2.0, 1.0};
        assert_int_equal(rfade_rate_table_mean(table, &wrong, 1, quick), RFADE_DOMAIN);
        assert_true(isnan(quick[7].bit));
        assert_int_equal(rfade_rate_table_mean(table, NULL, 0, quick), RFADE_NO_DATA);
        rfade_rate_table_destroy(table);
    }
    struct rfade_rate_table *table = NULL;
    assert_int_equal(rfade_rate_table_create(modulations, 0, 0.0, &table), RFADE_DOMAIN);
    assert_int_equal(rfade_rate_table_create(modulations, 1, 1.1, &table), RFADE_DOMAIN);
    assert_int_equal(rfade_rate_table_create(modulations, 1, NAN, &table), RFADE_DOMAIN);
    modulations[3] = NULL;
    assert_int_equal(rfade_rate_table_create(modulations, 8, 1.0, &table), RFADE_DOMAIN);
    assert_null(table);
    rfade_rate_table_destroy(table);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(outage_of_branches_matches_random_points),
        cmocka_unit_test(shadowed_outage_matches_random_points),
        cmocka_unit_test(upper_tail_is_that_of_one_branch),
        cmocka_unit_test(steady_outage_is_a_step),
        cmocka_unit_test(shadowed_rates_match_random_points),
        cmocka_unit_test(packets_match_random_points),
        cmocka_unit_test(packets_are_exact_in_both_limits),
        cmocka_unit_test(required_snr_meets_the_target),
        cmocka_unit_test(unreachable_targets_are_refused),
        cmocka_unit_test(fade_margin_is_the_closed_form),
        cmocka_unit_test(diversity_order_is_the_slope_far_out),
        cmocka_unit_test(observed_average_is_that_of_the_distribution),
        cmocka_unit_test(wide_bins_are_integrated),
        cmocka_unit_test(bad_distributions_are_refused),
        cmocka_unit_test(table_gives_the_same_means),
    };
    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
