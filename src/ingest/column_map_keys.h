/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file column_map_keys.h  The keys of the map language: what each may say and where it goes.
 */
#ifndef ROUTEFADE_INGEST_COLUMN_MAP_KEYS_H
#define ROUTEFADE_INGEST_COLUMN_MAP_KEYS_H

#include "ingest/column_map_parts.h"

/** One key of one section. */
struct rfade_map_key {
    const char *section;
    const char *name;
    /** Puts the value at `target`; false if it says nothing that can be used. */
    bool (*set)(void *target, const char *value);
    size_t offset;      /**< of the target in rfade_column_map, or in rfade_level_map */
    const char *remedy; /**< what the value may be */
};

/** The key of that name; NULL if the section has none. Static storage. */
const struct rfade_map_key *rfade_map_key(const char *section, const char *name);

/** Place of the key in the table, below 64 within its section; tells keys given twice. */
unsigned rfade_map_key_index(const struct rfade_map_key *key);

/** The names of a section's keys, joined by commas, into `text`; empty: no such section. */
void rfade_map_key_names(const char *section, char *text, size_t size);

#endif
