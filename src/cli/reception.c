/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/reception.h"

#include <math.h>
#include <string.h>

#include "analyse/settings.h"

/* In the order of enum rfade_combining. */
const char *rfade_combining_name(size_t index)
{
    static const char *const names[] = {"mrc", "selection"};
    return index < sizeof names / sizeof names[0] ? names[index] : NULL;
}

enum rfade_combining rfade_combining_by_name(const char *name)
{
    return strcmp(name, rfade_combining_name(RFADE_SELECTION)) == 0 ? RFADE_SELECTION
                                                                    : RFADE_MAXIMAL_RATIO;
}

struct rfade_reception rfade_reception_take(const struct rfade_reception_options *given)
{
    return (struct rfade_reception){.branches = (int)given->branches,
                                    .combining = rfade_combining_by_name(given->combining),
                                    .confidence = rfade_analysis_defaults().confidence};
}

void rfade_reception_values(const struct rfade_reception_options *given,
                            struct rfade_value values[3])
{
    values[0] = rfade_value_integer(given->branches);
    values[1] = rfade_value_text(given->branches > 1 ? given->combining : "none");
    values[2] = rfade_value_number(given->other_direction_db);
}

enum rfade_status rfade_modulation_take(const struct rfade_command *command, const char *name,
                                        const struct rfade_modulation **modulation,
                                        struct rfade_error *error)
{
    char names[128] = "";
    *modulation = rfade_modulation_by_name(name);
    if (*modulation)
        return RFADE_OK;
    for (int id = 0; id < RFADE_MODULATION_COUNT; id++) {
        size_t length = strlen(names);
        (void)snprintf(names + length, sizeof names - length, "%s%s", id ? ", " : "",
                       rfade_modulation_name(rfade_modulation((enum rfade_modulation_id)id)));
    }
    return rfade_usage(error, command, "there is no modulation '%s': one of %s", name, names);
}

enum rfade_status
rfade_modulations_take(const struct rfade_command *command, const struct rfade_texts *names,
                       const struct rfade_modulation *modulations[RFADE_MODULATION_COUNT],
                       struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    if (names->count > RFADE_MODULATION_COUNT)
        return rfade_usage(error, command, "give each --modulation once");
    for (size_t i = 0; i < names->count && status == RFADE_OK; i++)
        status = rfade_modulation_take(command, names->items[i], &modulations[i], error);
    return status;
}

const char *rfade_target_kind_name(enum rfade_target_kind kind)
{
    static const char *const names[] = {
        [RFADE_TARGET_OUTAGE] = "outage",
        [RFADE_TARGET_BIT] = "bit",
        [RFADE_TARGET_SYMBOL] = "symbol",
        [RFADE_TARGET_PACKET_INDEPENDENT] = "packet_independent",
        [RFADE_TARGET_PACKET_BLOCK] = "packet_block",
    };
    return names[kind];
}

enum rfade_status rfade_reception_reference(const struct rfade_segment_result *row,
                                            const struct rfade_reception_options *given,
                                            double *reference_dbm, struct rfade_error *error)
{
    /* Es/N0 is SNR in the bandwidth B times B over the symbol rate. */
    double esn0_over_snr_db = 10.0 * log10(row->bandwidth_hz / row->symbol_rate_hz);
    *reference_dbm = row->noise_floor_dbm - esn0_over_snr_db - given->other_direction_db;
    if (isnan(row->noise_floor_dbm))
        return rfade_error_set(error, RFADE_INPUT,
                               "give it with `routefade channel NAME --noise-floor-dbm N` (or "
                               "--bandwidth-hz and --noise-figure-db)",
                               "channel %s has no noise floor, so Es/N0 is unknown",
                               row->channel);
    if (isnan(esn0_over_snr_db))
        return rfade_error_set(error, RFADE_INPUT,
                               "give them with `routefade channel NAME --bandwidth-hz B "
                               "--symbol-rate-hz R`",
                               "channel %s lacks a bandwidth or a symbol rate, so Es/N0 is "
                               "unknown",
                               row->channel);
    return RFADE_OK;
}
