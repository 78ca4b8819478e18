/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Packets of uncoded bits: the fading of every bit for itself, or one fading for all of them.
 */
#include <math.h>

#include "predict/average.h"

static enum rfade_status average_once(const struct rfade_link *link,
                                      const struct rfade_averaged *what,
                                      struct rfade_error_rate *rate)
{
    struct rfade_average average;
    enum rfade_status status = rfade_average_init(&average, link, what);
    if (status == RFADE_OK) {
        status = rfade_average_at(&average, link->mean_snr_db, rate);
    }
    rfade_average_clear(&average);
    return status;
}

enum rfade_status rfade_packet_error(const struct rfade_link *link,
                                     const struct rfade_modulation *modulation, double bits,
                                     struct rfade_packet_error *error)
{
    struct rfade_averaged what = {modulation, true, 0.0};
    struct rfade_error_rate bit;
    struct rfade_error_rate block;
    *error = (struct rfade_packet_error){NAN, NAN};
    if (!(bits >= 1.0 && bits <= RFADE_PACKET_BITS_MAX)) {
        return RFADE_DOMAIN;
    }
    enum rfade_status status = average_once(link, &what, &bit);
    if (status == RFADE_OK) {
        what.packet_bits = bits;
        status = average_once(link, &what, &block);
    }
    if (status == RFADE_OK) {
        *error = (struct rfade_packet_error){rfade_packet_rate(bits, &bit).bit, block.bit};
    }
    return status;
}
