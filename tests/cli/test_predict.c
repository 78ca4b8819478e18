/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Outage through the program: what is typed in must come out as the reference tables say. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <jansson.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "program.h"
#include "support/reference_table.h"

enum { MAX_THRESHOLDS = 100, LIST_SIZE = 2048 };

/* Thresholds that one run of the program predicts, and what should come out. */
struct batch {
    char list[LIST_SIZE];
    double thresholds[MAX_THRESHOLDS];
    double outages[MAX_THRESHOLDS];
    size_t count;
};

static void batch_add(struct batch *batch, const char *threshold, double outage)
{
    size_t used = strlen(batch->list);
    assert_true(batch->count < MAX_THRESHOLDS && used + 32 < LIST_SIZE);
    (void)snprintf(batch->list + used, LIST_SIZE - used, "%s%s", used ? "," : "", threshold);
    batch->thresholds[batch->count] = strtod(threshold, NULL);
    batch->outages[batch->count++] = outage;
}

/* Predicts the batch with an SNR of 0 dB, so that thresholds are levels about it. */
static void batch_check(struct batch *batch, const char *snr_option, const char *option,
                        const char *value, const char *shadowing_db, double relative)
{
    const char *arguments[16] = {"predict", "--format",       "json",     snr_option,
                                 "0",       "--threshold-db", batch->list};
    size_t count = 7;
    if (shadowing_db) {
        arguments[count++] = "--shadowing-db";
        arguments[count++] = shadowing_db;
    }
    arguments[count++] = option;
    if (value)
        arguments[count++] = value;
    struct program program = {0};
    program_run(&program, arguments);
    assert_string_equal(program.errors, "");
    assert_int_equal(program.status, 0);
    json_t *document = json_loads(program.output, 0, NULL);
    json_t *outages = json_object_get(document, "outage");
    assert_int_equal(json_array_size(outages), batch->count);
    for (size_t i = 0; i < batch->count; i++) {
        json_t *entry = json_array_get(outages, i);
        double outage = json_number_value(json_object_get(entry, "outage"));
        assert_true(json_number_value(json_object_get(entry, "threshold_db")) ==
                    batch->thresholds[i]);
        if (fabs(outage - batch->outages[i]) > relative * batch->outages[i])
            fail_msg("%s %s at %g dB: %.17g, not %.17g", option, value ? value : "",
                     batch->thresholds[i], outage, batch->outages[i]);
    }
    json_decref(document);
    program_clear(&program);
    *batch = (struct batch){.count = 0};
}

/* A table of one parameter column, in blocks of equal parameter. */
static void check_table(const char *file, const char *column, const char *option)
{
    struct reference_table table;
    struct batch batch = {.count = 0};
    char parameter[64] = "";
    reference_open(&table, file);
    while (reference_next(&table)) {
        const char *here = reference_text(&table, column);
        double outage = reference_number(&table, "cdf");
        if (outage < 1e-300) /* the program has no logarithms to show */
            continue;
        if (batch.count > 0 && (strcmp(parameter, here) != 0 || batch.count == MAX_THRESHOLDS))
            batch_check(&batch, "--mean-snr-db", option, parameter, NULL, 1e-12);
        (void)snprintf(parameter, sizeof parameter, "%s", here);
        batch_add(&batch, reference_text(&table, "x_dB"), outage);
    }
    batch_check(&batch, "--mean-snr-db", option, parameter, NULL, 1e-12);
}

static void rice_outage_matches_reference(void **state)
{
    (void)state;
    check_table("rice_cdf_open.tsv", "K", "--rice-k");
}

static void nakagami_outage_matches_reference(void **state)
{
    (void)state;
    check_table("nakagami_cdf_open.tsv", "m", "--nakagami-m");
}

/* Parameters of one block of the shadowed table. */
struct block {
    char fading[32], par[32], sigma_db[32];
};

static void check_block(struct batch *batch, const struct block *block)
{
    bool rayleigh = strcmp(block->fading, "Rayleigh") == 0;
    if (batch->count > 0)
        batch_check(batch, "--median-snr-db", rayleigh ? "--rayleigh" : "--rice-k",
                    rayleigh ? NULL : block->par, block->sigma_db, 1e-10);
}

/* The table's x is about the median of the local mean: --median-snr-db. */
static void shadowed_outage_matches_reference(void **state)
{
    (void)state;
    struct reference_table table;
    struct batch batch = {.count = 0};
    struct block block = {.fading = ""};
    reference_open(&table, "composite_open.tsv");
    while (reference_next(&table)) {
        struct block here = {.fading = ""};
        (void)snprintf(here.fading, sizeof here.fading, "%s", reference_text(&table, "fading"));
        (void)snprintf(here.par, sizeof here.par, "%s", reference_text(&table, "par"));
        (void)snprintf(here.sigma_db, sizeof here.sigma_db, "%s",
                       reference_text(&table, "sigma_dB"));
        if (memcmp(&here, &block, sizeof here) != 0)
            check_block(&batch, &block);
        block = here;
        batch_add(&batch, reference_text(&table, "x_dB"), reference_number(&table, "outage"));
    }
    check_block(&batch, &block);
}

#define PREDICTED(...) JSON_OF("predict", __VA_ARGS__)

static double outage_at(const json_t *document, size_t index)
{
    const json_t *entry = json_array_get(json_object_get(document, "outage"), index);
    return json_number_value(json_object_get(entry, "outage"));
}

/* Rayleigh power is exponential: P = 1 - exp(-10^(x/10)). */
static void rayleigh_outage_is_exponential(void **state)
{
    (void)state;
    json_t *document = PREDICTED("--rayleigh", "--mean-snr-db", "20", "--threshold-db", "0",
                                 "--threshold-db", "20,30");
    assert_true(fabs(outage_at(document, 0) + expm1(-0.01)) < 1e-14);
    assert_true(fabs(outage_at(document, 1) + expm1(-1)) < 1e-14);
    assert_true(fabs(outage_at(document, 2) + expm1(-10)) < 1e-14);
    const json_t *fading = json_object_get(document, "fading");
    assert_string_equal(json_string_value(json_object_get(fading, "model")), "rayleigh");
    assert_int_equal(json_object_size(fading), 1);
    assert_true(json_number_value(json_object_get(document, "mean_snr_db")) == 20);
    json_decref(document);
}

/* A lognormal power's mean lies ln(10)/20 sigma^2 dB above its median: from its moments,
 * exp(mu + s^2/2) with s = sigma ln(10)/10. */
static void mean_and_median_differ_by_the_shadowing(void **state)
{
    (void)state;
    json_t *median = PREDICTED("--rayleigh", "--median-snr-db", "15", "--shadowing-db", "6",
                               "--threshold-db", "3");
    double mean_db = json_number_value(json_object_get(median, "mean_snr_db"));
    assert_true(fabs(mean_db - (15 + 36 * 0.1151292546497023)) < 1e-12);
    char text[40];
    (void)snprintf(text, sizeof text, "%.17g", mean_db);
    json_t *mean = PREDICTED("--rayleigh", "--mean-snr-db", text, "--shadowing-db", "6",
                             "--threshold-db", "3");
    assert_true(fabs(outage_at(mean, 0) / outage_at(median, 0) - 1) < 1e-12);
    json_decref(median);
    json_decref(mean);
}

static void rice_k_in_db_is_the_ratio(void **state)
{
    (void)state;
    json_t *ratio = PREDICTED("--rice-k", "10", "--mean-snr-db", "9", "--threshold-db", "0");
    json_t *decibel =
        PREDICTED("--rice-k-db", "10", "--mean-snr-db", "9", "--threshold-db", "0");
    assert_true(outage_at(ratio, 0) == outage_at(decibel, 0));
    const json_t *fading = json_object_get(decibel, "fading");
    assert_true(json_number_value(json_object_get(fading, "k")) == 10);
    json_decref(ratio);
    json_decref(decibel);
}

/* Without fast fading the SNR is steady, or lognormal: AMS 55 table 26.1, P(1.5) =
 * 0.93319 27987 31142. */
static void unfaded_is_steady_or_lognormal(void **state)
{
    (void)state;
    json_t *steady = PREDICTED("--unfaded", "--mean-snr-db", "10", "--threshold-db", "9.9",
                               "--threshold-db", "10", "--threshold-db", "10.1");
    assert_true(outage_at(steady, 0) == 0);
    assert_true(outage_at(steady, 1) == 0); /* at the threshold is not below it */
    assert_true(outage_at(steady, 2) == 1);
    json_decref(steady);
    json_t *shadowed = PREDICTED("--unfaded", "--median-snr-db", "10", "--shadowing-db", "4",
                                 "--threshold-db", "16");
    assert_true(fabs(outage_at(shadowed, 0) - 0.933192798731142) < 2e-15);
    json_decref(shadowed);
}

/* Where the table says that the outage is, its level is the quantile. */
static void shadowed_quantile_matches_reference(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "composite_open.tsv");
    for (int i = 0; reference_next(&table); i++) {
        if (strcmp(reference_text(&table, "fading"), "Rayleigh") != 0 || i % 9 != 0)
            continue; /* a run of the program each */
        json_t *document = PREDICTED("--rayleigh", "--median-snr-db", "0", "--shadowing-db",
                                     reference_text(&table, "sigma_dB"), "--probability",
                                     reference_text(&table, "outage"));
        const json_t *entry = json_array_get(json_object_get(document, "quantiles"), 0);
        double expected = reference_number(&table, "outage");
        assert_true(json_number_value(json_object_get(entry, "probability")) == expected);
        reference_assert_close(&table, "snr_db",
                               json_number_value(json_object_get(entry, "snr_db")),
                               reference_number(&table, "x_dB"), 1e-10);
        assert_int_equal(json_array_size(json_object_get(document, "outage")), 0);
        json_decref(document);
    }
}

/* Exponential power: -ln(0.99) of the mean; lognormal: AMS 55 table 26.1, P(1) = 0.84134 47460
 * 68543; steady: the same everywhere. */
static void quantiles_by_hand(void **state)
{
    (void)state;
    json_t *document = PREDICTED("--rayleigh", "--mean-snr-db", "20", "--probability",
                                 "0.01,0.5", "--threshold-db", "0");
    const json_t *quantiles = json_object_get(document, "quantiles");
    const json_t *entry = json_array_get(quantiles, 0);
    assert_int_equal(json_array_size(quantiles), 2);
    assert_true(fabs(json_number_value(json_object_get(entry, "snr_db")) -
                     (20 + 10 * log10(-log1p(-0.01)))) < 1e-12);
    assert_int_equal(json_array_size(json_object_get(document, "outage")), 1);
    json_decref(document);
    document = PREDICTED("--unfaded", "--median-snr-db", "10", "--shadowing-db", "4",
                         "--probability", "0.841344746068543");
    entry = json_array_get(json_object_get(document, "quantiles"), 0);
    assert_true(fabs(json_number_value(json_object_get(entry, "snr_db")) - 14) < 1e-13);
    json_decref(document);
    document = PREDICTED("--unfaded", "--mean-snr-db", "7", "--probability", "0.2");
    entry = json_array_get(json_object_get(document, "quantiles"), 0);
    assert_true(json_number_value(json_object_get(entry, "snr_db")) == 7);
    json_decref(document);
}

static void each_kind_of_answer_has_its_table(void **state)
{
    (void)state;
    struct program program = {0};
    RUN(&program, "predict", "--rayleigh", "--mean-snr-db", "20", "--threshold-db", "0",
        "--probability", "0.5,0.01");
    assert_int_equal(program.status, 0);
    /* 10 log10(ln 2) = -1.592, 10 log10(-ln 0.99) = -19.978 */
    assert_string_equal(
        program.output,
        "fading    parameter  mean_snr_db  shadowing_db  threshold_db    outage\n"
        "rayleigh          -        20.00          0.00          0.00  0.009950\n"
        "\n"
        "fading    parameter  mean_snr_db  shadowing_db  probability  snr_db\n"
        "rayleigh          -        20.00          0.00       0.5000   18.41\n"
        "rayleigh          -        20.00          0.00      0.01000    0.02\n");
    program_clear(&program);
}

static void table_and_csv_have_a_row_a_threshold(void **state)
{
    (void)state;
    struct program program = {0};
    RUN(&program, "predict", "--rayleigh", "--mean-snr-db", "20", "--threshold-db", "0,3");
    assert_int_equal(program.status, 0);
    assert_string_equal(
        program.output,
        "fading    parameter  mean_snr_db  shadowing_db  threshold_db    outage\n"
        "rayleigh          -        20.00          0.00          0.00  0.009950\n"
        "rayleigh          -        20.00          0.00          3.00   0.01975\n");
    RUN(&program, "predict", "--rayleigh", "--mean-snr-db", "20", "--threshold-db", "0",
        "--format", "csv");
    assert_int_equal(strncmp(program.output,
                             "fading,parameter,mean_snr_db,shadowing_db,threshold_db,outage\r\n"
                             "rayleigh,,20,0,0,0.00995016625",
                             88),
                     0);
    program_clear(&program);
}

static void what_makes_no_sense_is_refused(void **state)
{
    (void)state;
    REFUSED(2, "give one of --unfaded, --rayleigh", "predict", "--mean-snr-db", "9",
            "--threshold-db", "0");
    REFUSED(2, "give one of --unfaded, --rayleigh", "predict", "--rayleigh", "--rice-k", "3",
            "--mean-snr-db", "9", "--threshold-db", "0");
    REFUSED(2, "give one of --mean-snr-db, --mean-ebn0-db", "predict", "--rayleigh",
            "--threshold-db", "0");
    REFUSED(2, "give one of --mean-snr-db, --mean-ebn0-db", "predict", "--rayleigh",
            "--mean-snr-db", "9", "--median-snr-db", "8", "--shadowing-db", "4",
            "--threshold-db", "0");
    REFUSED(2, "--median-snr-db needs --shadowing-db", "predict", "--rayleigh",
            "--median-snr-db", "9", "--threshold-db", "0");
    REFUSED(2, "give a --threshold-db, --probability or", "predict", "--rayleigh",
            "--mean-snr-db", "9");
    REFUSED(2, "--format csv holds one kind of answer", "predict", "--rayleigh",
            "--mean-snr-db", "9", "--threshold-db", "0", "--probability", "0.1", "--format",
            "csv");
    REFUSED(2, "option --probability needs a number from", "predict", "--probability", "0");
    REFUSED(2, "option --probability needs a number from", "predict", "--probability", "1");
    REFUSED(2, "option --rice-k needs a number from 0", "predict", "--rice-k", "-1");
    REFUSED(2, "option --nakagami-m needs a number from 0.5", "predict", "--nakagami-m", "0.4");
    REFUSED(2, "option --shadowing-db needs a number from 0 to 30", "predict", "--shadowing-db",
            "31");
    REFUSED(2, "'predict' takes no argument 'x'", "predict", "--rayleigh", "x");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(rice_outage_matches_reference),
        cmocka_unit_test(nakagami_outage_matches_reference),
        cmocka_unit_test(shadowed_outage_matches_reference),
        cmocka_unit_test(rayleigh_outage_is_exponential),
        cmocka_unit_test(mean_and_median_differ_by_the_shadowing),
        cmocka_unit_test(rice_k_in_db_is_the_ratio),
        cmocka_unit_test(unfaded_is_steady_or_lognormal),
        cmocka_unit_test(shadowed_quantile_matches_reference),
        cmocka_unit_test(quantiles_by_hand),
        cmocka_unit_test(each_kind_of_answer_has_its_table),
        cmocka_unit_test(table_and_csv_have_a_row_a_threshold),
        cmocka_unit_test(what_makes_no_sense_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
