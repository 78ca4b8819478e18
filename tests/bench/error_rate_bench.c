/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file error_rate_bench.c  Times the error rates of all modulations under each kind of fading,
 * with and without shadowing, packets, required SNR, and means over tables. Prints
 * one line a measurement: what, processor time in microseconds (the best of several rounds).
 */
#include <gsl/gsl_errno.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <time.h>

#include "routefade/error_rate.h"

enum { ROUNDS = 7, REPEATS = 50, BINS = 60 };

static const struct rfade_modulation *modulations[RFADE_MODULATION_COUNT];

static double now_us(void)
{
    struct timespec time;
    clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &time);
    return 1e6 * (double)time.tv_sec + 1e-3 * (double)time.tv_nsec;
}

/* What one measurement runs: the link, differing a little from one repeat to the next. */
typedef enum rfade_status job(const struct rfade_link *link);

static double sink;

static enum rfade_status all_rates(const struct rfade_link *link)
{
    struct rfade_error_rate rates[RFADE_MODULATION_COUNT];
    const enum rfade_status status =
        rfade_error_rates(link, modulations, RFADE_MODULATION_COUNT, rates);
    sink += rates[0].bit;
    return status;
}

static enum rfade_status packet(const struct rfade_link *link)
{
    struct rfade_packet_error error;
    const enum rfade_status status =
        rfade_packet_error(link, modulations[RFADE_QPSK], 1000.0, &error);
    sink += error.block;
    return status;
}

static enum rfade_status required(const struct rfade_link *link)
{
    const struct rfade_target target = {
        .kind = RFADE_TARGET_BIT, .value = 1e-3, .modulation = modulations[RFADE_QPSK]};
    double snr_db;
    const enum rfade_status status = rfade_required_snr(link, &target, &snr_db);
    sink += snr_db;
    return status;
}

static enum rfade_status outage(const struct rfade_link *link)
{
    struct rfade_tails tails;
    const enum rfade_status status = rfade_link_outage(link, 5.0, &tails);
    sink += tails.lower;
    return status;
}

static void measure(const char *what, job *run, const struct rfade_link *link)
{
    double best_us = INFINITY;
    for (int round = 0; round < ROUNDS; round++) {
        const double start_us = now_us();
        for (int i = 0; i < REPEATS; i++) {
            struct rfade_link one = *link;
            one.parameter *= 1.0 + 1e-4 * i;
            if (run(&one) != RFADE_OK) {
                fprintf(stderr, "%s failed\n", what);
                exit(EXIT_FAILURE);
            }
        }
        best_us = fmin(best_us, (now_us() - start_us) / REPEATS);
    }
    printf("%-48s %10.2f us\n", what, best_us);
}

static void measure_table(double width_db)
{
    struct rfade_rate_table *table = NULL;
    struct rfade_snr_bin bins[BINS];
    struct rfade_error_rate rates[RFADE_MODULATION_COUNT];
    const double start_us = now_us();
    if (rfade_rate_table_create(modulations, RFADE_MODULATION_COUNT, width_db, &table) !=
        RFADE_OK) {
        exit(EXIT_FAILURE);
    }
    const double made_us = now_us();
    printf("%-48s %10.2f us\n", "table of steady rates, made once", made_us - start_us);
    for (int i = 0; i < BINS; i++) {
        bins[i] = (struct rfade_snr_bin){i - 20.0, i - 20.0 + width_db, 1.0 + i % 7};
    }
    for (int i = 0; i < REPEATS; i++) {
        (void)rfade_rate_table_mean(table, bins, BINS, rates);
        sink += rates[0].bit;
    }
    printf("%-48s %10.2f us\n", "mean of 8 modulations over 60 bins by the table",
           (now_us() - made_us) / REPEATS);
    rfade_rate_table_destroy(table);
}

int main(void)
{
    gsl_set_error_handler_off();
    for (int i = 0; i < RFADE_MODULATION_COUNT; i++) {
        modulations[i] = rfade_modulation((enum rfade_modulation_id)i);
    }
    const struct rfade_link rayleigh = {
        .model = rfade_model(RFADE_RAYLEIGH), .mean_snr_db = 20.0, .branches = 1};
    struct rfade_link rice = {
        .model = rfade_model(RFADE_RICE), .parameter = 4.0, .mean_snr_db = 20.0, .branches = 1};
    const struct rfade_link nakagami = {.model = rfade_model(RFADE_NAKAGAMI),
                                        .parameter = 2.3,
                                        .mean_snr_db = 20.0,
                                        .branches = 1};
    measure("8 modulations, rayleigh", all_rates, &rayleigh);
    measure("8 modulations, rice", all_rates, &rice);
    measure("8 modulations, nakagami", all_rates, &nakagami);
    measure("packet of 1000 bits, rice", packet, &rice);
    measure("required for a bit error rate, rice", required, &rice);
    rice.branches = 4;
    measure("8 modulations, rice, 4 branches added", all_rates, &rice);
    measure("outage, rice, 4 branches added", outage, &rice);
    rice.combining = RFADE_SELECTION;
    measure("8 modulations, rice, best of 4 branches", all_rates, &rice);
    rice.shadowing_db = 8.0;
    measure("8 modulations, rice, best of 4, shadowed", all_rates, &rice);
    measure("outage, rice, best of 4, shadowed", outage, &rice);
    measure("packet of 1000 bits, rice, best of 4, shadowed", packet, &rice);
    measure("required for a bit error rate, likewise", required, &rice);
    rice.branches = 1;
    rice.combining = RFADE_MAXIMAL_RATIO;
    measure("8 modulations, rice, shadowed", all_rates, &rice);
    measure_table(1.0);
    return isnan(sink) ? EXIT_FAILURE : EXIT_SUCCESS;
}
