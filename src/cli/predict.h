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
#include "routefade/model.h"

/** As typed; NaN: not given. */
struct rfade_predict_options {
    bool unfaded, rayleigh;
    double rice_k, rice_k_db, nakagami_m;
    double mean_snr_db, median_snr_db;
    double shadowing_db;
    struct rfade_numbers threshold_db;
    struct rfade_numbers probability;
};

/** What was typed of fading and SNR, made into numbers. SNR is Es/N0 of one branch. */
struct rfade_link {
    const struct rfade_model *model; /**< of the fast fading; NULL: unfaded */
    double parameter;                /**< K or m; NaN if there is none */
    double shadowing_db;
    double mean_snr_db;   /**< over everything */
    double median_snr_db; /**< over the shadowing, of the local mean */
};

/** @return RFADE_OK | RFADE_USAGE (nothing or too much was typed) */
enum rfade_status rfade_link_take(const struct rfade_predict_options *given,
                                  struct rfade_link *link, struct rfade_error *error);

enum { RFADE_PREDICTION_COLUMNS = 8 };

/** One kind of answer: an array of the JSON document, or a table. */
struct rfade_prediction {
    const char *name;                                           /**< the member in JSON */
    size_t (*count)(const struct rfade_predict_options *given); /**< of entries; 0: not asked */
    const struct rfade_column *columns; /**< of an entry, and its members in JSON */
    size_t column_count;                /**< up to RFADE_PREDICTION_COLUMNS */
    /** Computes entry number `index`: a value a column, texts borrowed from static storage. */
    enum rfade_status (*entry)(const struct rfade_link *link,
                               const struct rfade_predict_options *given, size_t index,
                               struct rfade_value *values, struct rfade_error *error);
};

extern const struct rfade_prediction rfade_prediction_outage;
extern const struct rfade_prediction rfade_prediction_quantiles;

#endif
