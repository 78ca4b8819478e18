/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/receiver.h"

#include <gsl/gsl_math.h>
#include <math.h>
#include <stdlib.h>

#include "analyse/clipping.h"
#include "ingest/sink.h"
#include "routefade/estimate.h"

static int32_t to_cdb(double level_db)
{
    return (int32_t)lround(level_db * 100.0);
}

static enum rfade_status find_step(const struct rfade_survey_reading *readings, size_t count,
                                   int32_t *step_cdb)
{
    double *levels_dbm = malloc((count + 1) * sizeof *levels_dbm);
    *step_cdb = 0;
    if (!levels_dbm)
        return RFADE_NO_MEMORY;
    for (size_t i = 0; i < count; i++)
        levels_dbm[i] = readings[i].level_cdb / 100.0;
    *step_cdb = to_cdb(rfade_find_step_db(levels_dbm, count));
    free(levels_dbm);
    return RFADE_OK;
}

/* Step and ceiling of the SNR, found as those of the level are; no SNR leaves a step of 0. */
static enum rfade_status find_snr(const struct rfade_survey_reading *readings, size_t count,
                                  struct rfade_receiver *receiver)
{
    struct rfade_survey_reading *ratios = malloc((count + 1) * sizeof *ratios);
    size_t found = 0;
    if (!ratios)
        return RFADE_NO_MEMORY;
    for (size_t i = 0; i < count; i++) {
        if (readings[i].snr_cdb == RFADE_NO_VALUE_CDB)
            continue;
        ratios[found] = readings[i];
        ratios[found++].level_cdb = readings[i].snr_cdb;
    }
    enum rfade_status status = RFADE_OK;
    if (found > 0)
        status = find_step(ratios, found, &receiver->snr_step_cdb);
    if (status == RFADE_OK && found > 0) {
        receiver->snr_step_cdb = receiver->snr_step_cdb > 0 ? receiver->snr_step_cdb : 1;
        receiver->snr_ceiling_cdb =
            rfade_find_clipping(ratios, found, receiver->snr_step_cdb).ceiling_cdb;
    }
    free(ratios);
    return status;
}

static void set_limits(struct rfade_trace_receiver *known, const struct rfade_channel *channel,
                       const struct rfade_clipping *found)
{
    struct rfade_receiver *receiver = &known->reported;
    if (!isnan(channel->floor_dbm)) {
        known->floor_source = RFADE_LIMIT_CHANNEL;
        receiver->floor_cdb = to_cdb(channel->floor_dbm) + known->offset_cdb;
    } else if (found->floor_cdb != RFADE_NO_FLOOR_CDB) {
        known->floor_source = RFADE_LIMIT_PILE_UP;
        receiver->floor_cdb = found->floor_cdb + known->offset_cdb;
    }
    if (!isnan(channel->ceiling_dbm)) {
        known->ceiling_source = RFADE_LIMIT_CHANNEL;
        receiver->ceiling_cdb = to_cdb(channel->ceiling_dbm) + known->offset_cdb;
    } else if (found->ceiling_cdb != RFADE_NO_CEILING_CDB) {
        known->ceiling_source = RFADE_LIMIT_PILE_UP;
        receiver->ceiling_cdb = found->ceiling_cdb + known->offset_cdb;
    }
}

static void raise_floor(struct rfade_trace_receiver *known, int32_t floor_cdb,
                        enum rfade_limit_source source)
{
    if (floor_cdb <= known->reported.floor_cdb || floor_cdb >= known->reported.ceiling_cdb)
        return;
    known->reported.floor_cdb = floor_cdb;
    known->floor_source = source;
}

/* Level of the signal alone in a level of signal and noise. */
static int32_t signal_cdb(double level_cdb, double noise_dbm)
{
    double over_db = level_cdb / 100.0 - noise_dbm;
    return (int32_t)lround(level_cdb + 1000.0 * log10(-expm1(-over_db * M_LN10 / 10.0)));
}

/*
 * Censoring must end where the receiver's intervals do: at the first edge of its grid, on
 * which `level_cdb` lies, from the margin up.
 */
static void stay_above_noise(struct rfade_trace_receiver *known, double least_dbm,
                             int32_t level_cdb)
{
    double step_cdb = known->reported.step_cdb;
    double steps = ceil((100.0 * least_dbm - level_cdb) / step_cdb - 0.5);
    raise_floor(known, level_cdb + (int32_t)(steps * step_cdb), RFADE_LIMIT_NOISE);
}

/* The limits with the noise taken off. A floor that the ceiling leaves no room for stays
 * where it was, below the noise; then nothing is taken off. */
static void settle(struct rfade_trace_receiver *known)
{
    const struct rfade_receiver *reported = &known->reported;
    double edge_cdb = reported->floor_cdb + 0.5 * reported->step_cdb;
    known->receiver = *reported;
    if (isnan(known->noise_dbm) || !(edge_cdb > 100.0 * known->noise_dbm)) {
        known->noise_dbm = NAN;
        return;
    }
    known->receiver.floor_cdb = signal_cdb(edge_cdb, known->noise_dbm) - reported->step_cdb / 2;
    if (known->ceiling_source != RFADE_LIMIT_NONE)
        known->receiver.ceiling_cdb = signal_cdb(reported->ceiling_cdb, known->noise_dbm);
}

int32_t rfade_trace_level_cdb(const struct rfade_trace_receiver *known, int32_t logged_cdb)
{
    int32_t level_cdb = logged_cdb + known->offset_cdb;
    if (isnan(known->noise_dbm))
        return level_cdb;
    return level_cdb <= known->reported.floor_cdb ? known->receiver.floor_cdb
                                                  : signal_cdb(level_cdb, known->noise_dbm);
}

enum rfade_status rfade_trace_receiver(const struct rfade_channel *channel,
                                       const struct rfade_calibration *calibration,
                                       const struct rfade_analysis_settings *settings,
                                       const struct rfade_survey_reading *readings,
                                       size_t count, struct rfade_trace_receiver *known)
{
    *known = (struct rfade_trace_receiver){
        .reported = {.step_cdb = 1,
                     .floor_cdb = RFADE_NO_FLOOR_CDB,
                     .ceiling_cdb = RFADE_NO_CEILING_CDB,
                     .snr_ceiling_cdb = RFADE_NO_CEILING_CDB},
        .step_found = isnan(channel->step_db),
        .noise_dbm = NAN,
    };
    if (calibration) {
        known->offset_cdb = to_cdb(calibration->offset_db);
        known->uncertainty_db = calibration->offset_uncertainty_db;
    }
    enum rfade_status status = RFADE_OK;
    if (known->step_found)
        status = find_step(readings, count, &known->reported.step_cdb);
    else
        known->reported.step_cdb = to_cdb(channel->step_db);
    if (status == RFADE_OK)
        status = find_snr(readings, count, &known->reported);
    if (status != RFADE_OK)
        return status;
    struct rfade_clipping found =
        rfade_find_clipping(readings, count, known->reported.step_cdb);
    set_limits(known, channel, &found);
    if (count > 0 && settings->noise_margin_db > 0.0)
        known->noise_dbm = rfade_noise_floor_dbm(
            channel->noise_floor_dbm, channel->bandwidth_hz, channel->noise_figure_db);
    if (!isnan(known->noise_dbm))
        stay_above_noise(known, known->noise_dbm + settings->noise_margin_db,
                         readings[0].level_cdb + known->offset_cdb);
    settle(known);
    return RFADE_OK;
}

void rfade_trace_receiver_losing(struct rfade_trace_receiver *known,
                                 const struct rfade_survey_reading *readings, size_t count)
{
    if (count == 0)
        return;
    int32_t lowest_cdb = readings[0].level_cdb;
    for (size_t i = 1; i < count; i++)
        lowest_cdb = readings[i].level_cdb < lowest_cdb ? readings[i].level_cdb : lowest_cdb;
    raise_floor(known, lowest_cdb - known->reported.step_cdb + known->offset_cdb,
                RFADE_LIMIT_LOST);
    settle(known);
}

const char *rfade_limit_source_name(enum rfade_limit_source source)
{
    static const char *const names[] = {NULL, "channel", "pile-up", "noise", "lost"};
    return names[source];
}
