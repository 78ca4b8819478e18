/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/column_map_keys.h"

#include <stdio.h>
#include <string.h>

static const struct rfade_map_section *const sections[] = {
    &rfade_map_file_section,    &rfade_map_time_section,     &rfade_map_position_section,
    &rfade_map_speed_section,   &rfade_map_sequence_section, &rfade_map_vehicle_section,
    &rfade_map_channel_section, &rfade_map_campaign_section, &rfade_map_level_section};

enum { SECTIONS = sizeof sections / sizeof sections[0] };

/* The section of that name, and how many keys the sections before it have; NULL if none. */
static const struct rfade_map_section *find(const char *name, size_t *before)
{
    *before = 0;
    for (size_t i = 0; i < SECTIONS; i++) {
        if (strcmp(sections[i]->name, name) == 0)
            return sections[i];
        *before += sections[i]->count;
    }
    return NULL;
}

const struct rfade_map_key *rfade_map_key(const char *section, const char *name)
{
    size_t before = 0;
    const struct rfade_map_section *found = find(section, &before);
    for (size_t i = 0; found && i < found->count; i++)
        if (strcmp(found->keys[i].name, name) == 0)
            return &found->keys[i];
    return NULL;
}

unsigned rfade_map_key_index(const char *section, const struct rfade_map_key *key)
{
    size_t before = 0;
    const struct rfade_map_section *found = find(section, &before);
    return (unsigned)(before + (size_t)(key - found->keys));
}

void rfade_map_key_names(const char *section, char *text, size_t size)
{
    size_t used = 0;
    size_t before = 0;
    const struct rfade_map_section *found = find(section, &before);
    text[0] = '\0';
    for (size_t i = 0; found && i < found->count; i++) {
        int added =
            snprintf(text + used, size - used, "%s%s", used ? ", " : "", found->keys[i].name);
        if (added < 0 || (size_t)added >= size - used)
            return;
        used += (size_t)added;
    }
}
