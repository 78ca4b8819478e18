/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file zone.h  Time zones: fixed offsets, and names of the IANA database read from the
 * system's files (TZif, RFC 8536). The zone of the machine and of the process have no say.
 */
#ifndef ROUTEFADE_INGEST_ZONE_H
#define ROUTEFADE_INGEST_ZONE_H

#include <stddef.h>
#include <stdint.h>

#include "common/error.h"

struct rfade_zone; /* opaque; constant once made, so threads may share it */

/**
 * @param name  "UTC", "Z", "+01:00", "-0330", "+5", or "Europe/Berlin"
 * @return RFADE_OK; RFADE_INPUT if there is no such zone (the remedy says what to write);
 *     RFADE_NO_MEMORY. *zone is NULL on failure.
 */
enum rfade_status rfade_zone_create(const char *name, struct rfade_zone **zone,
                                    struct rfade_error *error);

/** As _create, from the bytes of a TZif file of version 2 or later. */
enum rfade_status rfade_zone_from_tzif(const unsigned char *bytes, size_t size,
                                       struct rfade_zone **zone, struct rfade_error *error);
void rfade_zone_destroy(struct rfade_zone *zone); /* NULL is harmless */

/** An offset from UTC and the stretch of time it holds for. */
struct rfade_zone_span {
    int64_t from_s;   /**< UTC seconds since 1970; INT64_MIN: since ever */
    int64_t until_s;  /**< first second after it; INT64_MAX: for ever */
    int32_t offset_s; /**< local = UTC + offset */
};

/** The span that holds the UTC second `time_s`. */
struct rfade_zone_span rfade_zone_span(const struct rfade_zone *zone, int64_t time_s);

/**
 * The UTC seconds that a clock in the zone shows as `local_s` (local seconds since
 * 1970-01-01T00:00:00 local), earliest first. `spans` gets the span of each.
 * @return how many there are: 0 in the hour a spring change leaves out, 2 in the hour that
 *     an autumn change repeats, else 1
 */
int rfade_zone_times(const struct rfade_zone *zone, int64_t local_s, int64_t times_s[2],
                     struct rfade_zone_span spans[2]);

#endif
