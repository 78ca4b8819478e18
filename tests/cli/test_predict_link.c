/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Error rates, required SNR, fade timing and limits through the program. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <ctype.h>
#include <jansson.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "program.h"
#include "support/reference_table.h"

enum { EVERY = 23 }; /* of the table's rows: each is a run of the program */

#define PREDICT(...)                                                                           \
    json_of((const char *const[]){"predict", "--format", "json", __VA_ARGS__, NULL})

static double member(const json_t *document, const char *array, size_t index, const char *name)
{
    const json_t *entry = json_array_get(json_object_get(document, array), index);
    const json_t *value = json_object_get(entry, name);
    return json_is_number(value) ? json_number_value(value) : NAN;
}

/* "16QAM" of the table is "16qam" of the program. */
static void lower(const char *text, char *name, size_t size)
{
    size_t i = 0;
    for (; text[i] && i + 1 < size; i++)
        name[i] = (char)tolower((unsigned char)text[i]);
    name[i] = '\0';
}

static void check_row(const struct reference_table *table)
{
    char modulation[16];
    const char *fading = reference_text(table, "fading");
    const char *arguments[16] = {"predict", "--format", "json"};
    size_t count = 3;
    lower(reference_text(table, "modulation"), modulation, sizeof modulation);
    arguments[count++] = "--modulation";
    arguments[count++] = strcmp(modulation, "ncbfsk") == 0 ? "ncfsk2" : modulation;
    arguments[count++] = "--branches";
    arguments[count++] = reference_text(table, "branches");
    arguments[count++] = "--mean-snr-db";
    arguments[count++] = reference_text(table, "EsN0_dB");
    if (strcmp(fading, "AWGN") == 0) {
        arguments[count++] = "--unfaded";
    } else if (strcmp(fading, "Rayleigh") == 0) {
        arguments[count++] = "--rayleigh";
    } else {
        arguments[count++] = strcmp(fading, "Rice") == 0 ? "--rice-k" : "--nakagami-m";
        arguments[count++] = reference_text(table, "par");
    }
    json_t *document = json_of(arguments);
    reference_assert_column(table, "BER", member(document, "error_rates", 0, "bit"), 1e-10);
    reference_assert_column(table, "SER", member(document, "error_rates", 0, "symbol"), 1e-10);
    json_decref(document);
}

static void error_rates_are_those_of_the_table(void **state)
{
    (void)state;
    struct reference_table table;
    size_t row = 0;
    reference_open(&table, "error_rate_open.tsv");
    while (reference_next(&table))
        if (row++ % EVERY == 0)
            check_row(&table);
    assert_true(row > 700);
}

/* At a wavelength of 1 m and 1 m/s the maximum Doppler shift is 1 Hz. */
static void fade_timing_is_that_of_the_table(void **state)
{
    (void)state;
    struct reference_table table;
    size_t row = 0;
    reference_open(&table, "lcr_afd.tsv");
    while (reference_next(&table)) {
        bool rice = strcmp(reference_text(&table, "fading"), "Rice") == 0;
        if (row++ % EVERY != 0)
            continue;
        json_t *document =
            PREDICT(rice ? "--rice-k" : "--nakagami-m", reference_text(&table, "par"),
                    "--mean-snr-db", "0", "--threshold-db", reference_text(&table, "level_dB"),
                    "--carrier-hz", "299792458", "--speed-kmh", "3.6");
        reference_assert_column(&table, "N_over_fd",
                                member(document, "fade_timing", 0, "crossings_per_s"), 1e-12);
        reference_assert_column(&table, "duration_times_fd",
                                member(document, "fade_timing", 0, "mean_fade_s"), 1e-12);
        reference_assert_column(&table, "cdf", member(document, "outage", 0, "outage"), 1e-12);
        json_decref(document);
    }
    assert_true(row > 20);
}

/* Common practice: 1 % of QPSK symbols are wrong at 5 to 6 dB of Eb/N0 without fading; with
 * Rayleigh fading at about 16.5 dB, by exact calculation. Eb/N0 is 3.0103 dB below Es/N0. */
static void facts_of_the_trade(void **state)
{
    (void)state;
    json_t *steady = PREDICT("--unfaded", "--modulation", "qpsk", "--target-ser", "0.01");
    json_t *faded = PREDICT("--rayleigh", "--modulation", "qpsk", "--target-ser", "0.01");
    double steady_db = member(steady, "required", 0, "mean_snr_db") - 3.0103;
    double faded_db = member(faded, "required", 0, "mean_snr_db") - 3.0103;
    assert_true(steady_db > 5.0 && steady_db < 6.0);
    assert_true(fabs(faded_db - 16.5) < 0.05);
    assert_true(fabs(member(faded, "required", 0, "fading_penalty_db") -
                     (faded_db - steady_db)) < 1e-6);
    assert_true(member(faded, "required", 0, "diversity_order") == 1.0);
    assert_int_equal(json_array_size(json_object_get(faded, "error_rates")), 0);
    json_decref(steady);
    json_decref(faded);
}

/* Rayleigh: an outage of 1 % needs -10 log10(-ln 0.99) = 19.98 dB over the threshold; of the
 * better of two branches, one of 10 % each: -10 log10(-ln 0.9) = 9.77 dB. */
static void required_snr_by_hand(void **state)
{
    (void)state;
    json_t *one = PREDICT("--rayleigh", "--threshold-db", "3", "--target-outage", "0.01");
    json_t *two = PREDICT("--rayleigh", "--threshold-db", "3", "--target-outage", "0.01",
                          "--branches", "2", "--combining", "selection");
    assert_true(fabs(member(one, "required", 0, "mean_snr_db") -
                     (3.0 - 10.0 * log10(-log(0.99)))) < 1e-8);
    assert_true(fabs(member(two, "required", 0, "mean_snr_db") -
                     (3.0 - 10.0 * log10(-log(0.9)))) < 1e-8);
    assert_true(fabs(member(one, "required", 0, "fading_penalty_db") +
                     10.0 * log10(-log(0.99))) < 1e-8);
    json_decref(one);
    json_decref(two);
}

/* One bit in 1/(2 + 2 SNR) is wrong of dbpsk over Rayleigh fading [Proakis]; interleaved, of
 * packets of 10 bits 1 - (1 - p)^10. Eb/N0 of qpsk is half of Es/N0. */
static void packets_and_bits(void **state)
{
    (void)state;
    json_t *dbpsk = PREDICT("--rayleigh", "--mean-snr-db", "10", "--modulation", "dbpsk",
                            "--packet-bits", "10");
    double p = 1.0 / 22.0;
    assert_true(fabs(member(dbpsk, "error_rates", 0, "packet_independent") -
                     (1.0 - pow(1.0 - p, 10.0))) < 1e-12);
    double block = member(dbpsk, "error_rates", 0, "packet_block");
    assert_true(block > p && block < 1.0 - pow(1.0 - p, 10.0));
    json_decref(dbpsk);
    json_t *qpsk = PREDICT("--rayleigh", "--mean-ebn0-db", "10", "--modulation", "qpsk");
    json_t *bpsk = PREDICT("--rayleigh", "--mean-snr-db", "10", "--modulation", "bpsk");
    assert_true(
        fabs(member(qpsk, "error_rates", 0, "bit") / member(bpsk, "error_rates", 0, "bit") -
             1.0) < 1e-12);
    json_decref(qpsk);
    json_decref(bpsk);
}

/* Bello and Nelin 1962: (1 - J0(2 pi f T))/2; f = 100/3.6 m/s x 900 MHz / c = 83.391 Hz,
 * T = 1/1200 s, J0(0.43664) = 0.952900 [series of AMS 55, 9.1.10]. */
static void limits_are_told(void **state)
{
    (void)state;
    json_t *document = PREDICT("--rayleigh", "--mean-snr-db", "10", "--modulation", "dbpsk",
                               "--carrier-hz", "900e6", "--speed-kmh", "100",
                               "--symbol-rate-hz", "1200", "--delay-spread-us", "50");
    double x = 2.0 * acos(-1.0) * (100.0 / 3.6) * 900e6 / 299792458.0 / 1200.0;
    double quarter = x * x / 4.0;
    double j0 = 1.0 - quarter + quarter * quarter / 4.0 - quarter * quarter * quarter / 36.0;
    assert_true(fabs(member(document, "limits", 0, "value") - 0.5 * (1.0 - j0)) < 1e-6);
    assert_true(fabs(member(document, "limits", 1, "value") - 0.06) < 1e-12);
    json_decref(document);
}

static void what_makes_no_sense_is_refused(void **state)
{
    (void)state;
#define RAYLEIGH "predict", "--rayleigh", "--mean-snr-db", "9"
    REFUSED(2, "there is no modulation 'am'", RAYLEIGH, "--modulation", "am");
    REFUSED(2, "--target-outage needs --threshold-db", RAYLEIGH, "--target-outage", "0.1");
    REFUSED(2, "a target error rate needs --modulation", RAYLEIGH, "--target-ber", "0.1");
    REFUSED(2, "--target-per needs --packet-bits", RAYLEIGH, "--target-per", "0.1",
            "--modulation", "bpsk");
    REFUSED(2, "--packet-bits needs --modulation", RAYLEIGH, "--packet-bits", "10");
    REFUSED(2, "go together", RAYLEIGH, "--threshold-db", "1", "--speed-kmh", "50");
    REFUSED(2, "--delay-spread-us needs", RAYLEIGH, "--threshold-db", "1", "--delay-spread-us",
            "5");
    REFUSED(2, "leave --branches out", RAYLEIGH, "--probability", "0.1", "--branches", "2");
    REFUSED(2, "as many bits a symbol", "predict", "--rayleigh", "--mean-ebn0-db", "9",
            "--modulation", "bpsk", "--modulation", "qpsk");
    REFUSED(2, "--mean-ebn0-db needs --modulation", "predict", "--rayleigh", "--mean-ebn0-db",
            "9", "--threshold-db", "3");
    REFUSED(2, "option --branches needs", RAYLEIGH, "--threshold-db", "1", "--branches", "9");
    REFUSED(1, "no mean SNR for a target of 0.9", "predict", "--rayleigh", "--modulation",
            "bpsk", "--target-ser", "0.9");
#undef RAYLEIGH
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(error_rates_are_those_of_the_table),
        cmocka_unit_test(fade_timing_is_that_of_the_table),
        cmocka_unit_test(facts_of_the_trade),
        cmocka_unit_test(required_snr_by_hand),
        cmocka_unit_test(packets_and_bits),
        cmocka_unit_test(limits_are_told),
        cmocka_unit_test(what_makes_no_sense_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
