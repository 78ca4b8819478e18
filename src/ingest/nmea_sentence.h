/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file nmea_sentence.h  One sentence of NMEA 0183 (IEC 61162-1), of any talker: what RMC, GGA
 * and VTG say of time, position and speed. Pure function.
 */
#ifndef ROUTEFADE_INGEST_NMEA_SENTENCE_H
#define ROUTEFADE_INGEST_NMEA_SENTENCE_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

enum rfade_nmea_type { RFADE_NMEA_OTHER, RFADE_NMEA_RMC, RFADE_NMEA_GGA, RFADE_NMEA_VTG };

struct rfade_nmea_sentence {
    enum rfade_nmea_type type;
    bool has_time;
    bool has_date;
    bool has_place;    /**< the receiver holds the position to be good */
    int64_t of_day_us; /**< UTC time of day */
    int64_t days;      /**< UTC date, days since 1970-01-01 */
    double latitude_deg;
    double longitude_deg;
    double speed_m_s; /**< NaN: not said */
};

/** Whether a text begins with a sentence's address: $, two to ten capitals or digits, comma. */
bool rfade_nmea_is_address(const char *text, size_t size);

/**
 * Reads a sentence from its `$` on, blanks at the end allowed. RMC, GGA and VTG must have a
 * checksum, and whatever checksum there is must be right. Positions that the receiver calls
 * void, simulated or typed in count as none.
 * @return NULL, or why it can't be used: a plain clause, static storage
 */
const char *rfade_nmea_read(const char *text, size_t size,
                            struct rfade_nmea_sentence *sentence);

#endif
