/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file observed_rate.h  What the two ways of averaging over observed SNR share. */
#ifndef ROUTEFADE_PREDICT_OBSERVED_RATE_H
#define ROUTEFADE_PREDICT_OBSERVED_RATE_H

#include "routefade/error_rate.h"

struct rfade_rate_means {
    double bit;
    double symbol;
};

/** Mean over a bin, uniform in dB, by quadrature. */
struct rfade_rate_means rfade_bin_means(const struct rfade_modulation *modulation,
                                        const struct rfade_snr_bin *bin);

/** Checks all bins and sums up their weight. @return RFADE_OK | RFADE_DOMAIN | RFADE_NO_DATA */
enum rfade_status rfade_snr_bins_check(const struct rfade_snr_bin *bins, size_t bin_count,
                                       double *total);

/** Rates from sums over bins. */
struct rfade_error_rate rfade_rate_of_means(const struct rfade_rate_means *sums, double total);

#endif
