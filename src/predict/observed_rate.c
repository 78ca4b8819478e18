/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Error rates over an observed distribution of SNR. */
#include "predict/observed_rate.h"

#include <math.h>

#include "model/model.h"
#include "predict/modulation.h"
#include "special/gauss_legendre.h"

/* Within so many dB the rule of 16 nodes leaves 1e-12, down to rates of 1e-100. */
static const double panel_db = 0.5;
static const double panel_variation = 7.0;

static void add_node(const struct rfade_modulation *modulation, double snr_db, double weight,
                     struct rfade_rate_means *means)
{
    const struct rfade_error_rate rate =
        rfade_error_rate_at(modulation, exp(rfade_log_ratio(snr_db)), false);
    means->bit += weight * rate.bit;
    means->symbol += weight * rate.symbol;
}

struct rfade_rate_means rfade_bin_means(const struct rfade_modulation *modulation,
                                        const struct rfade_snr_bin *bin)
{
    const struct rfade_gauss_rule *rule = rfade_gauss_rule_for(panel_variation, 0.0);
    const double width_db = bin->high_db - bin->low_db;
    const int panels = width_db > 0.0 ? (int)ceil(width_db / panel_db) : 0;
    struct rfade_rate_means means = {0.0, 0.0};
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

enum rfade_status rfade_snr_bins_check(const struct rfade_snr_bin *bins, size_t bin_count,
                                       double *total)
{
    *total = 0.0;
    for (size_t i = 0; i < bin_count; i++) {
        if (!(fabs(bins[i].low_db) <= RFADE_SNR_LIMIT_DB) ||
            !(fabs(bins[i].high_db) <= RFADE_SNR_LIMIT_DB) ||
            !(bins[i].high_db >= bins[i].low_db && bins[i].weight >= 0.0) ||
            isinf(bins[i].weight)) {
            return RFADE_DOMAIN;
        }
        *total += bins[i].weight;
    }
    return *total > 0.0 ? RFADE_OK : RFADE_NO_DATA;
}

struct rfade_error_rate rfade_rate_of_means(const struct rfade_rate_means *sums, double total)
{
    const double bit = sums->bit / total;
    const double symbol = sums->symbol / total;
    return (struct rfade_error_rate){bit, symbol, log(bit), log(symbol)};
}

enum rfade_status rfade_error_rates_observed(const struct rfade_snr_bin *bins, size_t bin_count,
                                             const struct rfade_modulation *const *modulations,
                                             size_t count, struct rfade_error_rate *rates)
{
    double total;
    enum rfade_status status = count == 0 ? RFADE_DOMAIN : RFADE_OK;
    for (size_t i = 0; i < count; i++) {
        rates[i] = rfade_error_rate_nan();
        status = modulations[i] == NULL ? RFADE_DOMAIN : status;
    }
    if (status == RFADE_OK) {
        status = rfade_snr_bins_check(bins, bin_count, &total);
    }
    if (status != RFADE_OK) {
        return status;
    }
    for (size_t i = 0; i < count; i++) {
        struct rfade_rate_means sums = {0.0, 0.0};
        for (size_t j = 0; j < bin_count; j++) {
            if (bins[j].weight > 0.0) {
                const struct rfade_rate_means means = rfade_bin_means(modulations[i], &bins[j]);
                sums.bit += bins[j].weight * means.bit;
                sums.symbol += bins[j].weight * means.symbol;
            }
        }
        rates[i] = rfade_rate_of_means(&sums, total);
    }
    return RFADE_OK;
}
