/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/column_map_keys.h"

#include "ingest/map_value.h"
#include "ingest/sink.h"

static bool set_modulus(void *target, const char *value)
{
    return rfade_map_count(value, 16, (size_t)RFADE_MOST_SEQUENCE, target);
}

#define MAP(part) offsetof(struct rfade_column_map, part)

static const struct rfade_map_key sequence_keys[] = {
    {"column", rfade_map_set_column, MAP(sequence_column), rfade_map_column_remedy},
    {"modulus", set_modulus, MAP(sequence_modulus),
     "the number of different numbers, such as 65536"},
};

static const struct rfade_map_key vehicle_keys[] = {
    {"name", rfade_map_set_name, MAP(vehicle.name), rfade_map_name_remedy},
    {"column", rfade_map_set_column, MAP(vehicle.column), rfade_map_column_remedy},
};

static const struct rfade_map_key channel_keys[] = {
    {"name", rfade_map_set_name, MAP(channel.name), rfade_map_name_remedy},
    {"column", rfade_map_set_column, MAP(channel.column), rfade_map_column_remedy},
};

static const struct rfade_map_key campaign_keys[] = {
    {"name", rfade_map_set_name, MAP(campaign.name), rfade_map_name_remedy},
    {"column", rfade_map_set_column, MAP(campaign.column), rfade_map_column_remedy},
};

const struct rfade_map_section rfade_map_sequence_section = {
    "sequence", sizeof sequence_keys / sizeof sequence_keys[0], sequence_keys};
const struct rfade_map_section rfade_map_vehicle_section = {
    "vehicle", sizeof vehicle_keys / sizeof vehicle_keys[0], vehicle_keys};
const struct rfade_map_section rfade_map_channel_section = {
    "channel", sizeof channel_keys / sizeof channel_keys[0], channel_keys};
const struct rfade_map_section rfade_map_campaign_section = {
    "campaign", sizeof campaign_keys / sizeof campaign_keys[0], campaign_keys};
