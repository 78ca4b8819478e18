/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Error rates of a link: what the caller asks for, put together from averages. */
#include <math.h>
#include <stdbool.h>
#include <stddef.h>

#include "predict/average.h"
#include "predict/branches.h"

enum rfade_status rfade_error_rates(const struct rfade_link *link,
                                    const struct rfade_modulation *const *modulations,
                                    size_t count, struct rfade_error_rate *rates)
{
    struct rfade_average average;
    for (size_t i = 0; i < count; i++) {
        rates[i] = rfade_error_rate_nan();
    }
    if (count == 0) {
        return RFADE_DOMAIN;
    }
    const struct rfade_averaged what = {modulations[0], false, 0.0};
    enum rfade_status status = rfade_average_init(&average, link, &what);
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        struct rfade_error_rate rate;
        status = i == 0 ? RFADE_OK : rfade_average_change(&average, modulations[i]);
        if (status == RFADE_OK) {
            status = rfade_average_at(&average, link->mean_snr_db, &rate);
        }
        if (status == RFADE_OK) {
            rates[i] = rate;
        }
    }
    rfade_average_clear(&average);
    return status;
}

enum rfade_status rfade_error_rate_unfaded(const struct rfade_link *link,
                                           const struct rfade_modulation *modulation,
                                           struct rfade_error_rate *rate)
{
    struct rfade_link unfaded = *link;
    unfaded.model = NULL;
    unfaded.shadowing_db = 0.0;
    return rfade_error_rates(&unfaded, &modulation, 1, rate);
}
