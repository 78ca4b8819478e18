/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file column_map_keys.h  The keys of the map language: what each may say and where it goes.
 */
#ifndef ROUTEFADE_INGEST_COLUMN_MAP_KEYS_H
#define ROUTEFADE_INGEST_COLUMN_MAP_KEYS_H

#include "ingest/column_map_parts.h"

/** One key of one section. */
struct rfade_map_key {
    const char *name;
    /** Puts the value at `target`; false if it says nothing that can be used. */
    bool (*set)(void *target, const char *value);
    size_t offset;      /**< of the target in rfade_column_map, or in rfade_level_map */
    const char *remedy; /**< what the value may be */
};

struct rfade_map_section {
    const char *name;
    size_t count;
    const struct rfade_map_key *keys; /**< [count] */
};

/** Each in its map_keys_*.c. */
extern const struct rfade_map_section rfade_map_file_section;
extern const struct rfade_map_section rfade_map_time_section;
extern const struct rfade_map_section rfade_map_position_section;
extern const struct rfade_map_section rfade_map_speed_section;
extern const struct rfade_map_section rfade_map_sequence_section;
extern const struct rfade_map_section rfade_map_vehicle_section;
extern const struct rfade_map_section rfade_map_channel_section;
extern const struct rfade_map_section rfade_map_campaign_section;
extern const struct rfade_map_section rfade_map_level_section;

/** The key of that name; NULL if the section has none. Static storage. */
const struct rfade_map_key *rfade_map_key(const char *section, const char *name);

/** Place of a section's key among all keys, below 64; tells keys given twice. */
unsigned rfade_map_key_index(const char *section, const struct rfade_map_key *key);

/** The names of a section's keys, joined by commas, into `text`; empty: no such section. */
void rfade_map_key_names(const char *section, char *text, size_t size);

#endif
