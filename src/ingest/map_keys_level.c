/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/column_map_keys.h"

#include <math.h>
#include <string.h>

#include "ingest/map_value.h"

static bool set_level_unit(void *target, const char *value)
{
    static const char *const words[] = {"dbm", "dbw", "dbuv", "w", "mw", "uw", NULL};
    int word = rfade_map_word(words, value);
    if (word >= 0)
        *(enum rfade_level_unit *)target = (enum rfade_level_unit)word;
    return word >= 0;
}

static bool set_scale(void *target, const char *value)
{
    return rfade_map_number(value, -1e12, 1e12, target) && *(double *)target != 0;
}

static bool set_offset(void *target, const char *value)
{
    return rfade_map_number(value, -1e12, 1e12, target);
}

/* -140 .. -20 */
static bool set_valid(void *target, const char *value)
{
    struct rfade_quantity *quantity = target;
    char low_text[32];
    const char *dots = strstr(value, "..");
    double low = NAN;
    double high = NAN;
    if (!dots || (size_t)(dots - value) >= sizeof low_text)
        return false;
    memcpy(low_text, value, (size_t)(dots - value));
    low_text[dots - value] = '\0';
    if (!rfade_map_number(low_text, -200, 60, &low) ||
        !rfade_map_number(dots + 2, -200, 60, &high) || low >= high)
        return false;
    quantity->low_cdb = (int32_t)lround(100 * low);
    quantity->high_cdb = (int32_t)lround(100 * high);
    return true;
}

static const char scale_remedy[] = "give a number other than 0, with a decimal point";
static const char offset_remedy[] = "give a number with a decimal point";

#define LEVEL(part) offsetof(struct rfade_level_map, part)

static const struct rfade_map_key level_keys[] = {
    {"column", rfade_map_set_column, LEVEL(level.column), rfade_map_column_remedy},
    {"unit", set_level_unit, LEVEL(level.unit), "dbm, dbw, dbuv, w, mw or uw"},
    {"scale", set_scale, LEVEL(level.scale), scale_remedy},
    {"offset", set_offset, LEVEL(level.offset), offset_remedy},
    {"no_reading", rfade_map_set_sentinels, LEVEL(level.sentinels), rfade_map_sentinel_remedy},
    {"valid", set_valid, LEVEL(level),
     "the lowest and highest dBm from -200 to 60, such as -140 .. -20"},
    {"snr_column", rfade_map_set_column, LEVEL(snr.column), rfade_map_column_remedy},
    {"noise_column", rfade_map_set_column, LEVEL(noise_column), rfade_map_column_remedy},
    {"snr_scale", set_scale, LEVEL(snr.scale), scale_remedy},
    {"snr_offset", set_offset, LEVEL(snr.offset), offset_remedy},
    {"snr_no_reading", rfade_map_set_sentinels, LEVEL(snr.sentinels),
     rfade_map_sentinel_remedy},
};

const struct rfade_map_section rfade_map_level_section = {
    "level", sizeof level_keys / sizeof level_keys[0], level_keys};
