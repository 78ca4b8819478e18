/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Packets of uncoded bits: the fading of every bit for itself, or one fading for all of them.
 */
#include <math.h>

#include "predict/average.h"

enum rfade_status rfade_packet_error(const struct rfade_link *link,
                                     const struct rfade_modulation *modulation, double bits,
                                     struct rfade_packet_error *error)
{
    struct rfade_average block = {.modulation = NULL};
    struct rfade_error_rate rate;
    *error = (struct rfade_packet_error){NAN, NAN};
    if (!(bits >= 1.0 && bits <= RFADE_PACKET_BITS_MAX)) {
        return RFADE_DOMAIN;
    }
    enum rfade_status status = rfade_error_rates(link, &modulation, 1, &rate);
    if (status != RFADE_OK) {
        return status;
    }
    const double independent = -expm1(bits * log1p(-rate.bit));
    status = rfade_average_init(&block, link, modulation, bits);
    if (status == RFADE_OK) {
        status = rfade_average_at(&block, link->mean_snr_db, &rate);
    }
    if (status == RFADE_OK) {
        *error = (struct rfade_packet_error){independent, rate.bit};
    }
    rfade_average_clear(&block);
    return status;
}
