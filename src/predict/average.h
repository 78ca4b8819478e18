/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file average.h  The mean of an error rate over all that a link does to the SNR. */
#ifndef ROUTEFADE_PREDICT_AVERAGE_H
#define ROUTEFADE_PREDICT_AVERAGE_H

#include <stdbool.h>

#include "predict/mgf_average.h"
#include "predict/modulation.h"
#include "predict/rate_grid.h"
#include "predict/snr_law.h"

/** What is averaged. */
struct rfade_averaged {
    const struct rfade_modulation *modulation;
    bool bits_only;     /**< the symbol rate is not wanted: it is the bits' */
    double packet_bits; /**< 0: bit and symbol error rates; else block packet errors, as both */
};

/** Ready for any mean SNR of one link; what is worked out for one serves the next. */
struct rfade_average {
    struct rfade_link link;
    struct rfade_averaged what;
    struct rfade_mgf mgf;
    bool by_law;  /**< else by mgf, or steady */
    bool on_grid; /**< the shadowing is wide enough for the fixed grid below */
    struct rfade_snr_law law;
    struct rfade_rate_grid steady; /**< steps of the law */
    struct rfade_rate_grid faded;  /**< means over fast fading, steps of the shadowing's sum */
};

/** @return RFADE_OK | RFADE_DOMAIN; afterwards rfade_average_clear() is harmless either way */
enum rfade_status rfade_average_init(struct rfade_average *average,
                                     const struct rfade_link *link,
                                     const struct rfade_averaged *what);

void rfade_average_clear(struct rfade_average *average);

/** Another modulation, likewise. */
enum rfade_status rfade_average_change(struct rfade_average *average,
                                       const struct rfade_modulation *modulation);

/** Averages at a mean SNR of one branch. RFADE_DOMAIN beyond RFADE_SNR_LIMIT_DB. */
enum rfade_status rfade_average_at(struct rfade_average *average, double mean_snr_db,
                                   struct rfade_error_rate *rate);

/** 1 - (1 - p)^bits of a bit error rate, as bit and symbol. */
struct rfade_error_rate rfade_packet_rate(double bits, const struct rfade_error_rate *rate);

#endif
