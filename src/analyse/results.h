/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file results.h  Reads back what `fit` left in the survey, one segment at a time. */
#ifndef ROUTEFADE_ANALYSE_RESULTS_H
#define ROUTEFADE_ANALYSE_RESULTS_H

#include <stdbool.h>
#include <stdint.h>

#include "routefade/model.h"
#include "routefade/stretch.h"
#include "routefade/tally.h"
#include "survey/name.h"
#include "survey/survey.h"

/** Which segments; NULL, 0 and NaN: all. */
struct rfade_segment_filter {
    const char *route;
    const char *channel;
    const char *campaign;
    int64_t segment;
    double from_m; /**< segments that reach into this stretch of chainage */
    double to_m;
};

/** One fitted model as stored. */
struct rfade_stored_fit {
    const struct rfade_model *model;
    bool preferred;
    double offset_db;
    double parameter;
    double parameter_low;
    double parameter_high;
    double weight;
    double goodness_p;
};

/** Where a segment's noise comes from: measured noise beats computed noise. */
enum rfade_noise_source {
    RFADE_NOISE_UNKNOWN,
    RFADE_NOISE_LISTED,  /**< measured, by place: `routefade noise` */
    RFADE_NOISE_LOGGED,  /**< level less the logged SNR */
    RFADE_NOISE_CHANNEL, /**< told of the channel */
    RFADE_NOISE_THERMAL  /**< kTB at 290 K and the noise figure */
};

/** The word for a source; NULL for none. */
const char *rfade_noise_source_name(enum rfade_noise_source source);

/** One row of `fading` with its fits. Texts and tallies are owned by the row. */
struct rfade_segment_result {
    int64_t fading_id;
    char *route;
    char *channel;
    char *campaign;
    char *sampling;
    int64_t segment;
    double from_m;
    double to_m;
    int64_t passes;
    int64_t readings;
    double travel_m;
    double wavelength_m;
    double effective_count;
    double mean_power_dbm;
    double local_mean_dbm;
    double local_sigma_db;
    double local_sigma_low_db;
    double local_sigma_high_db;
    double window_noise_db;
    double level_uncertainty_db;
    double calibration_db;    /**< the part of it that is the vehicles' calibration */
    double pass_deviation_db; /**< NaN with one pass */
    double noise_floor_dbm;   /**< in the bandwidth; NaN: not known */
    enum rfade_noise_source noise_source;
    double bandwidth_hz;
    double symbol_rate_hz;
    struct rfade_tally *level;
    struct rfade_tally *local_mean;
    struct rfade_tally *snr; /**< as logged; empty where none was */
    struct rfade_stored_fit *fits;
    size_t fit_count;
};

/** A route as far as the filter takes it in. */
struct rfade_route_span {
    char route[RFADE_NAME_SIZE];
    int64_t segments;
    double length_m; /**< of these segments, whether or not a vehicle was there */
};

struct rfade_segment_results {
    struct rfade_segment_result *rows; /**< by route, segment, channel, campaign */
    size_t count;
    struct rfade_route_span *spans; /**< by route */
    size_t span_count;
};

/**
 * Whether the results stand for the survey as it is now.
 * @return RFADE_NO_DATA if nothing was fitted yet
 */
enum rfade_status rfade_results_current(struct rfade_survey *survey, bool *current,
                                        struct rfade_error *error);

/** How many readings carry SNR alone, which no result is made from. Reads all of them. */
enum rfade_status rfade_readings_without_level(struct rfade_survey *survey, int64_t *count,
                                               struct rfade_error *error);

/**
 * All results that pass the filter. A name, or a number of a segment, in the filter that the
 * survey doesn't hold is refused.
 */
enum rfade_status rfade_results_read(struct rfade_survey *survey,
                                     const struct rfade_segment_filter *filter,
                                     struct rfade_segment_results *results,
                                     struct rfade_error *error);
void rfade_results_clear(struct rfade_segment_results *results);

/** The preferred fit, or NULL where nothing was fitted. Borrowed from the row. */
const struct rfade_stored_fit *rfade_result_preferred(const struct rfade_segment_result *row);

/** The fit of one model, or NULL. Borrowed from the row. */
const struct rfade_stored_fit *rfade_result_fit(const struct rfade_segment_result *row,
                                                enum rfade_model_id model);

/** Whether the fast fading was told apart, so that K and m may be shown. */
bool rfade_result_resolved(const struct rfade_segment_result *row);

/** The local mean along a row's segment, what its window adds and takes away undone. free(). */
enum rfade_status rfade_result_track(struct rfade_segment_result *row,
                                     struct rfade_local_mean **track, size_t *count);

/** A threshold as a level, and as the SNR it was given as: NaN for one given as a level. */
struct rfade_threshold {
    double level_dbm;
    double snr_db;
};

/** Whether SNR was logged all along and tells the row's noise: then it is what was observed. */
bool rfade_result_has_snr(struct rfade_segment_result *row);

/**
 * Outage of a row at a threshold; NaN members where nothing was fitted. Observed is the logged
 * SNR against a threshold in SNR where the log has it all along, else the level.
 */
enum rfade_status rfade_result_outage(struct rfade_segment_result *row,
                                      const struct rfade_threshold *threshold,
                                      double confidence, struct rfade_stretch_outage *outage,
                                      struct rfade_observed *observed,
                                      struct rfade_error *error);

#endif
