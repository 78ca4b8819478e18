/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Steady error rates against dB. What is kept is their logarithm, every 0.08 dB, between which
 * six points are interpolated by Lagrange's polynomial (AMS 55, 25.2.2): h^6 times the sixth
 * derivative is what is left out, and ln p is nearly -SNR, so that h = 0.018 nepers leaves
 * 225/46080 h^6 SNR = 2e-13 SNR.
 */
#include <math.h>
#include <stdbool.h>
#include <stdlib.h>

#include "model/model.h"
#include "predict/log_sum.h"
#include "predict/modulation.h"
#include "predict/observed_rate.h"
#include "special/gauss_legendre.h"

static const double low_db = -60.0;
static const double spacing_db = 0.08;
static const double width_max_db = 1.0;
static const double width_tolerance_db = 1e-9;
static const double width_variation = 7.0; /* 16 nodes within a bin */
enum { POINTS = 1626, LAGRANGE = 6 };

struct curves {
    double log_bit[POINTS];
    double log_symbol[POINTS];
};

struct rfade_rate_table {
    size_t count;
    double width_db;
    const struct rfade_modulation **modulations; /* [count], owned */
    struct curves *curves;                       /* [count], owned: means over a bin */
};

/* Six neighbouring points and their weights. */
struct lagrange {
    size_t first;
    double weight[LAGRANGE];
};

/* False beyond the table. */
static bool lagrange_at(double snr_db, struct lagrange *at)
{
    static const double inverse_products[LAGRANGE] = {-1.0 / 120, 1.0 / 24,  -1.0 / 12,
                                                      1.0 / 12,   -1.0 / 24, 1.0 / 120};
    const double place = (snr_db - low_db) / spacing_db;
    if (!(place >= 2.0 && place <= POINTS - 4.0)) {
        return false;
    }
    at->first = (size_t)place - 2;
    const double t = place - (double)at->first;
    double below[LAGRANGE]; /* products of t - j, j < i, and j > i */
    double above[LAGRANGE];
    below[0] = 1.0;
    above[LAGRANGE - 1] = 1.0;
    for (int i = 1; i < LAGRANGE; i++) {
        below[i] = below[i - 1] * (t - (i - 1));
        above[LAGRANGE - 1 - i] = above[LAGRANGE - i] * (t - (LAGRANGE - i));
    }
    for (int i = 0; i < LAGRANGE; i++) {
        at->weight[i] = below[i] * above[i] * inverse_products[i];
    }
    return true;
}

static double rate_at(const double *log_rates, const struct lagrange *at)
{
    double sum = 0.0;
    for (int i = 0; i < LAGRANGE; i++) {
        sum += at->weight[i] * log_rates[at->first + (size_t)i];
    }
    return exp(sum);
}

static double point_db(size_t index)
{
    return low_db + spacing_db * (double)index;
}

static void fill_steady(const struct rfade_modulation *modulation, struct curves *curves)
{
    for (size_t i = 0; i < POINTS; i++) {
        const struct rfade_error_rate rate =
            rfade_error_rate_at(modulation, exp(rfade_log_ratio(point_db(i))), false);
        curves->log_bit[i] = rate.log_bit;
        curves->log_symbol[i] = rate.log_symbol;
    }
}

/* ln of a rate between points; NaN beyond the table. */
static double log_rate_at(const double *log_rates, double snr_db)
{
    struct lagrange at;
    double log_rate = 0.0;
    if (!lagrange_at(snr_db, &at)) {
        return NAN;
    }
    for (int j = 0; j < LAGRANGE; j++) {
        log_rate += at.weight[j] * log_rates[at.first + (size_t)j];
    }
    return log_rate;
}

/* ln of the mean of exp(log_rate) over a bin about a point, from steady rates; NaN at the
 * table's ends, which is never looked at again. */
static double log_bin_mean(const double *log_rates, size_t point, double width_db)
{
    const struct rfade_gauss_rule *rule = rfade_gauss_rule_for(width_variation, 0.0);
    struct rfade_log_sum sum = rfade_log_sum_empty();
    for (int i = 0; i < rule->half_count; i++) {
        for (int side = -1; side <= 1; side += 2) {
            const double off_db = 0.5 * width_db * side * rule->node[i];
            const double log_rate = log_rate_at(log_rates, point_db(point) + off_db);
            rfade_log_sum_add(&sum, log_rate + log(0.5 * rule->weight[i]));
        }
    }
    return rfade_log_sum_log(&sum);
}

static void average_over_bins(const struct curves *steady, double width_db,
                              struct curves *curves)
{
    for (size_t i = 0; i < POINTS; i++) {
        curves->log_bit[i] = log_bin_mean(steady->log_bit, i, width_db);
        curves->log_symbol[i] = log_bin_mean(steady->log_symbol, i, width_db);
    }
}

enum rfade_status rfade_rate_table_create(const struct rfade_modulation *const *modulations,
                                          size_t count, double width_db,
                                          struct rfade_rate_table **table)
{
    *table = NULL;
    if (count == 0 || !(width_db >= 0.0 && width_db <= width_max_db)) {
        return RFADE_DOMAIN;
    }
    for (size_t i = 0; i < count; i++) {
        if (modulations[i] == NULL) {
            return RFADE_DOMAIN;
        }
    }
    struct curves *steady = malloc(sizeof *steady);
    struct rfade_rate_table *made = calloc(1, sizeof *made);
    if (made != NULL) {
        made->modulations = calloc(count, sizeof(const struct rfade_modulation *));
        made->curves = calloc(count, sizeof *made->curves);
    }
    if (steady == NULL || made == NULL || made->modulations == NULL || made->curves == NULL) {
        free(steady);
        rfade_rate_table_destroy(made);
        return RFADE_NO_MEMORY;
    }
    made->count = count;
    made->width_db = width_db;
    for (size_t i = 0; i < count; i++) {
        made->modulations[i] = modulations[i];
        fill_steady(modulations[i], width_db > 0.0 ? steady : &made->curves[i]);
        if (width_db > 0.0) {
            average_over_bins(steady, width_db, &made->curves[i]);
        }
    }
    free(steady);
    *table = made;
    return RFADE_OK;
}

void rfade_rate_table_destroy(struct rfade_rate_table *table)
{
    if (table != NULL) {
        free(table->modulations);
        free(table->curves);
        free(table);
    }
}

/* Adds one bin's means to all modulations' sums, which stand in bit and symbol of the rates. */
static void add_bin(const struct rfade_rate_table *table, const struct rfade_snr_bin *bin,
                    struct rfade_error_rate *sums)
{
    struct lagrange at;
    const double excess_db = bin->high_db - bin->low_db - table->width_db;
    const double middle_db = 0.5 * (bin->low_db + bin->high_db);
    const double reach_db = table->width_db + 10.0 * spacing_db;
    const bool tabulated =
        fabs(excess_db) <= width_tolerance_db && middle_db > low_db + reach_db &&
        middle_db < point_db(POINTS) - reach_db && lagrange_at(middle_db, &at);
    for (size_t i = 0; i < table->count; i++) {
        struct rfade_rate_means means;
        if (!tabulated) {
            means = rfade_bin_means(table->modulations[i], bin);
        } else {
            means.bit = rate_at(table->curves[i].log_bit, &at);
            means.symbol = table->modulations[i]->symbol.count == 0
                               ? means.bit
                               : rate_at(table->curves[i].log_symbol, &at);
        }
        sums[i].bit += bin->weight * means.bit;
        sums[i].symbol += bin->weight * means.symbol;
    }
}

enum rfade_status rfade_rate_table_mean(const struct rfade_rate_table *table,
                                        const struct rfade_snr_bin *bins, size_t bin_count,
                                        struct rfade_error_rate *rates)
{
    double total;
    for (size_t i = 0; i < table->count; i++) {
        rates[i] = rfade_error_rate_nan();
    }
    const enum rfade_status status = rfade_snr_bins_check(bins, bin_count, &total);
    if (status != RFADE_OK) {
        return status;
    }
    for (size_t i = 0; i < table->count; i++) {
        rates[i] = (struct rfade_error_rate){0.0, 0.0, 0.0, 0.0};
    }
    for (size_t j = 0; j < bin_count; j++) {
        if (bins[j].weight > 0.0) {
            add_bin(table, &bins[j], rates);
        }
    }
    for (size_t i = 0; i < table->count; i++) {
        const struct rfade_rate_means sums = {rates[i].bit, rates[i].symbol};
        rates[i] = rfade_rate_of_means(&sums, total);
    }
    return RFADE_OK;
}
