/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file batch.h  Readings in memory as a table that SQL can select from: one
 * INSERT ... SELECT stores an extent, which is faster than one INSERT a reading.
 */
#ifndef ROUTEFADE_SURVEY_BATCH_H
#define ROUTEFADE_SURVEY_BATCH_H

#include <sqlite3.h>
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

struct rfade_batch_reading {
    int64_t time_us;
    int32_t level_cdb; /**< RFADE_NO_VALUE_CDB: NULL */
    int32_t snr_cdb;
    int32_t lost_before; /**< RFADE_LOST_UNKNOWN: NULL */
    bool numbered;       /**< `sequence` is its number */
    int64_t sequence;
    uint32_t place; /**< in the batch, as it came: keeps sorting stable */
};

struct rfade_batch {
    const struct rfade_batch_reading *readings; /**< in time order */
    size_t count;
    int64_t first_reading_id;
};

/**
 * Registers the table rfade_batch (reading_id, offset_us, level_cdb, snr_cdb, lost_before) on a
 * connection; it shows what `batch` holds when it is read. `batch` must stay where it is
 * until _unregister. @return an SQLite result code
 */
int rfade_batch_register(sqlite3 *database, const struct rfade_batch *batch);
void rfade_batch_unregister(sqlite3 *database);

#endif
