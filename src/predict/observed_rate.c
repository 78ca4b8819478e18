/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Error rates over an observed distribution of SNR. */
#include <math.h>

#include "model/model.h"
#include "predict/modulation.h"
#include "special/gauss_legendre.h"

/* Within so many dB the rule of 16 nodes leaves 1e-12, down to rates of 1e-40. */
static const double panel_db = 2.0;

/* More panels than the whole range of SNR holds. */
static const double widest_db = 2.0 * RFADE_SNR_LIMIT_DB;

struct means {
    double bit;
    double symbol;
};

static void add_node(const struct rfade_modulation *modulation, double snr_db, double weight,
                     struct means *means)
{
    const struct rfade_error_rate rate =
        rfade_error_rate_at(modulation, exp(rfade_log_ratio(snr_db)), false);
    means->bit += weight * rate.bit;
    means->symbol += weight * rate.symbol;
}

/* Mean over a bin, uniform in dB. */
static struct means bin_means(const struct rfade_modulation *modulation,
                              const struct rfade_snr_bin *bin)
{
    const struct rfade_gauss_rule *rule = rfade_gauss_rule_for(7.0, 0.0);
    const double width_db = bin->high_db - bin->low_db;
    const int panels = width_db > 0.0 ? (int)ceil(width_db / panel_db) : 0;
    struct means means = {0.0, 0.0};
    if (panels == 0) {
        add_node(modulation, bin->low_db, 1.0, &means);
    }
    for (int panel = 0; panel < panels; panel++) {
        for (int i = 0; i < rule->half_count; i++) {
            for (int side = -1; side <= 1; side += 2) {
                const double share = (panel + 0.5 * (1.0 + side * rule->node[i])) / panels;
                add_node(modulation, bin->low_db + width_db * share,
                         0.5 * rule->weight[i] / panels, &means);
            }
        }
    }
    return means;
}

static enum rfade_status check(const struct rfade_snr_bin *bins, size_t bin_count,
                               double *total)
{
    *total = 0.0;
    for (size_t i = 0; i < bin_count; i++) {
        if (!(fabs(bins[i].low_db) <= RFADE_SNR_LIMIT_DB) ||
            !(fabs(bins[i].high_db) <= RFADE_SNR_LIMIT_DB) ||
            !(bins[i].high_db >= bins[i].low_db && bins[i].weight >= 0.0) ||
            !(bins[i].high_db - bins[i].low_db <= widest_db) || isinf(bins[i].weight)) {
            return RFADE_DOMAIN;
        }
        *total += bins[i].weight;
    }
    return *total > 0.0 ? RFADE_OK : RFADE_NO_DATA;
}

enum rfade_status rfade_error_rates_observed(const struct rfade_snr_bin *bins, size_t bin_count,
                                             const struct rfade_modulation *const *modulations,
                                             size_t count, struct rfade_error_rate *rates)
{
    double total;
    for (size_t i = 0; i < count; i++) {
        rates[i] = rfade_error_rate_nan();
        if (modulations[i] == NULL) {
            return RFADE_DOMAIN;
        }
    }
    const enum rfade_status status = check(bins, bin_count, &total);
    if (status != RFADE_OK) {
        return status;
    }
    for (size_t i = 0; i < count; i++) {
        double bit = 0.0;
        double symbol = 0.0;
        for (size_t j = 0; j < bin_count; j++) {
            if (bins[j].weight > 0.0) {
                const struct means means = bin_means(modulations[i], &bins[j]);
                bit += bins[j].weight * means.bit;
                symbol += bins[j].weight * means.symbol;
            }
        }
        rates[i] = (struct rfade_error_rate){bit / total, symbol / total, log(bit / total),
                                             log(symbol / total)};
    }
    return RFADE_OK;
}
