/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file predict.h  What `predict` is asked for, and the kinds of answer it has. Another kind
 * is a file with a `struct rfade_prediction`, its options in predict.c, and a line in the
 * table there.
 */
#ifndef ROUTEFADE_CLI_PREDICT_H
#define ROUTEFADE_CLI_PREDICT_H

#include <stdbool.h>
#include <stddef.h>

#include "cli/command.h"
#include "routefade/error_rate.h"

/** As typed; NaN: not given. */
struct rfade_predict_options {
    bool unfaded, rayleigh;
    double rice_k, rice_k_db, nakagami_m;
    double mean_snr_db, mean_ebn0_db, median_snr_db;
    double shadowing_db;
    struct rfade_numbers threshold_db;
    struct rfade_numbers probability;
    struct rfade_texts modulation;
    int64_t branches;
    const char *combining;
    double target_outage, target_ber, target_ser, target_per;
    double packet_bits;
    double carrier_hz, speed_kmh, symbol_rate_hz, delay_spread_us;
};

/** What was typed of fading, SNR and modulations, made into numbers. SNR is Es/N0 of one
 * branch. */
struct rfade_predicted {
    struct rfade_link link; /**< its mean SNR is NaN where none was given */
    double median_snr_db;   /**< over the shadowing, of the local mean */
    const struct rfade_modulation *modulations[RFADE_MODULATION_COUNT];
    size_t modulation_count;
    const struct rfade_predict_options *given;
};

/** @return RFADE_OK | RFADE_USAGE (nothing or too much was typed) */
enum rfade_status rfade_predicted_take(const struct rfade_predict_options *given,
                                       struct rfade_predicted *predicted,
                                       struct rfade_error *error);

enum { RFADE_PREDICTION_COLUMNS = 8 };

/** One kind of answer: an array of the JSON document, or a table. */
struct rfade_prediction {
    const char *name;                                         /**< the member in JSON */
    size_t (*count)(const struct rfade_predicted *predicted); /**< of entries; 0: not asked */
    const struct rfade_column *columns; /**< of an entry, and its members in JSON */
    size_t column_count;                /**< up to RFADE_PREDICTION_COLUMNS */
    /** Computes entry number `index`: a value a column, texts borrowed from static storage. */
    enum rfade_status (*entry)(const struct rfade_predicted *predicted, size_t index,
                               struct rfade_value *values, struct rfade_error *error);
};

extern const struct rfade_prediction rfade_prediction_outage;
extern const struct rfade_prediction rfade_prediction_quantiles;
extern const struct rfade_prediction rfade_prediction_error_rates;
extern const struct rfade_prediction rfade_prediction_required;
extern const struct rfade_prediction rfade_prediction_fade_timing;
extern const struct rfade_prediction rfade_prediction_limits;

#endif
