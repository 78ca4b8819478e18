/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file sink.h  What a log format emits, one call a reading, fix or refused line. A format
 * knows nothing of the survey; whoever owns the sink stores what comes.
 */
#ifndef ROUTEFADE_INGEST_SINK_H
#define ROUTEFADE_INGEST_SINK_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "common/error.h"

/** A level or SNR that the row doesn't have. */
#define RFADE_NO_VALUE_CDB INT32_MIN

/** Texts are UTF-8 or raw bytes of the log; valid during the call only. */
struct rfade_ingest_reading {
    int64_t time_us; /**< since 1970-01-01T00:00:00Z */
    const char *vehicle;
    const char *channel;
    const char *campaign;
    int32_t level_cdb; /**< centi-dBm, or RFADE_NO_VALUE_CDB */
    int32_t snr_cdb;   /**< centi-dB, or RFADE_NO_VALUE_CDB */
    bool numbered;     /**< may then be without level and SNR: that number is not lost */
    int64_t sequence;  /**< its number, [0, RFADE_MOST_SEQUENCE] */
    int64_t modulus;   /**< of the numbers, which begin anew at 0; 0: they never do */
};

/** Numbers stay exact in whatever number format the log has. */
#define RFADE_MOST_SEQUENCE ((int64_t)1 << 53)

struct rfade_ingest_fix {
    int64_t time_us;
    const char *vehicle;
    double latitude_deg;  /**< WGS 84, [-90, 90] */
    double longitude_deg; /**< WGS 84, [-180, 180) */
    double speed_m_s;     /**< NaN: not logged */
};

struct rfade_ingest_refusal {
    size_t line;        /**< from 1 */
    const char *reason; /**< one plain sentence */
    const char *text;   /**< the line as it stands in the file, any bytes */
    size_t text_size;
};

/** Each returns RFADE_OK, or a status that stops the file. */
struct rfade_sink {
    void *context;
    enum rfade_status (*reading)(void *context, const struct rfade_ingest_reading *reading,
                                 struct rfade_error *error);
    enum rfade_status (*fix)(void *context, const struct rfade_ingest_fix *fix,
                             struct rfade_error *error);
    enum rfade_status (*refused)(void *context, const struct rfade_ingest_refusal *refusal,
                                 struct rfade_error *error);
    /** The two clocks of a row that has both, before anything else of it. NULL: not wanted. */
    enum rfade_status (*clocks)(void *context, int64_t logger_us, int64_t gnss_us,
                                struct rfade_error *error);
};

#endif
