/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/levels.h"

#include <math.h>
#include <stdlib.h>

enum rfade_status rfade_fit_levels(const struct rfade_tally *levels,
                                   struct rfade_estimate *estimate)
{
    struct rfade_bin *bins = NULL;
    size_t bin_count = 0;
    struct rfade_fit *fit = &estimate->fits[0];
    estimate->fit_count = 0;
    enum rfade_status status = rfade_bins_from_tally(levels, &bins, &bin_count);
    if (status != RFADE_OK)
        return status;
    /* The interval is thrown away: any confidence will do. */
    const struct rfade_estimate_settings settings = {.confidence = 0.95};
    status = rfade_fit_bins(rfade_model(RFADE_LOGNORMAL), bins, bin_count, &settings, fit);
    free(bins);
    if (status != RFADE_OK)
        return status;
    fit->parameter_low = fit->parameter_high = NAN;
    fit->mean_power_low_db = fit->mean_power_high_db = NAN;
    fit->weight = 1.0;
    estimate->fit_count = 1;
    estimate->preferred = 0;
    return RFADE_OK;
}
