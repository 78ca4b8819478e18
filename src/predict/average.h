/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file average.h  The mean of an error rate over all that a link does to the SNR. */
#ifndef ROUTEFADE_PREDICT_AVERAGE_H
#define ROUTEFADE_PREDICT_AVERAGE_H

#include "predict/mgf_average.h"
#include "predict/modulation.h"
#include "predict/snr_law.h"

/** What is averaged, ready for any mean SNR. */
struct rfade_average {
    struct rfade_link link;
    const struct rfade_modulation *modulation;
    double packet_bits; /**< 0: bit and symbol error rates; else block packet errors, as both */
    struct rfade_mgf mgf;
    struct rfade_snr_law law; /**< in use for selection and for packets under fading */
};

/** @return RFADE_OK | RFADE_DOMAIN; afterwards rfade_average_clear() is harmless either way */
enum rfade_status rfade_average_init(struct rfade_average *average,
                                     const struct rfade_link *link,
                                     const struct rfade_modulation *modulation,
                                     double packet_bits);

void rfade_average_clear(struct rfade_average *average);

/** Averages at a mean SNR of one branch. RFADE_DOMAIN beyond RFADE_SNR_LIMIT_DB. */
enum rfade_status rfade_average_at(struct rfade_average *average, double mean_snr_db,
                                   struct rfade_error_rate *rate);

#endif
