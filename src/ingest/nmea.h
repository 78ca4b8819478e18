/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file nmea.h  The positions of an NMEA 0183 log, into a sink. */
#ifndef ROUTEFADE_INGEST_NMEA_H
#define ROUTEFADE_INGEST_NMEA_H

#include "ingest/lines.h"
#include "ingest/open.h"

/** Whether most of the first lines are sentences, whatever stands before their $. */
bool rfade_nmea_is_log(const char *head, size_t size);

/**
 * Reads all lines of a reader that has read none yet. RMC, GGA and VTG of one time of day are
 * one position; the date is that of the latest RMC, else the map's. A line may begin with
 * anything that holds no $, such as the logger's own time. Lines that begin with # or !, and
 * other sentences, say nothing that is wanted here.
 * @return as rfade_ingest
 */
enum rfade_status
rfade_nmea_read_log(struct rfade_line_reader *lines, const struct rfade_column_map *map,
                    const struct rfade_ingest_names *names, const struct rfade_sink *sink,
                    struct rfade_ingest_summary *summary, struct rfade_error *error);

#endif
