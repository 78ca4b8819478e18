/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/threshold.h"

#include <math.h>
#include <string.h>

enum rfade_status rfade_threshold_choose(const struct rfade_command *command,
                                         const struct rfade_threshold_options *given,
                                         struct rfade_threshold_asked *asked,
                                         struct rfade_error *error)
{
    const struct rfade_threshold_asked ways[] = {{"threshold_db", given->db},
                                                 {"threshold_esn0_db", given->esn0_db},
                                                 {"threshold_dbm", given->dbm}};
    int count = 0;
    for (size_t i = 0; i < sizeof ways / sizeof ways[0]; i++) {
        if (isnan(ways[i].value))
            continue;
        *asked = ways[i];
        count++;
    }
    if (count != 1)
        return rfade_usage(error, command,
                           "exactly one of --threshold-db, --threshold-esn0-db and "
                           "--threshold-dbm is needed");
    return RFADE_OK;
}

enum rfade_status rfade_threshold_here(const struct rfade_segment_result *row,
                                       const struct rfade_threshold_asked *asked,
                                       struct rfade_threshold *here, struct rfade_error *error)
{
    *here = (struct rfade_threshold){asked->value, NAN};
    if (rfade_threshold_is_level(asked))
        return RFADE_OK;
    here->snr_db = asked->value;
    if (strcmp(asked->column, "threshold_esn0_db") == 0) {
        /* SNR in the bandwidth B is Es/N0 times symbol rate over B. */
        here->snr_db += 10.0 * log10(row->symbol_rate_hz / row->bandwidth_hz);
        if (isnan(here->snr_db))
            return rfade_error_set(error, RFADE_INPUT,
                                   "give them with `routefade channel NAME --bandwidth-hz B "
                                   "--symbol-rate-hz R`, or use --threshold-dbm",
                                   "channel %s lacks a bandwidth or a symbol rate, so Es/N0 "
                                   "is unknown",
                                   row->channel);
    }
    here->level_dbm = here->snr_db + row->noise_floor_dbm;
    if (isnan(here->level_dbm))
        return rfade_error_set(error, RFADE_INPUT,
                               "give it with `routefade channel NAME --noise-floor-dbm N` (or "
                               "--bandwidth-hz and --noise-figure-db), or use --threshold-dbm",
                               "channel %s has no noise floor, so SNR is unknown",
                               row->channel);
    return RFADE_OK;
}

bool rfade_threshold_is_level(const struct rfade_threshold_asked *asked)
{
    return asked->column && strcmp(asked->column, "threshold_dbm") == 0;
}

void rfade_threshold_noise_values(const struct rfade_threshold_asked *asked,
                                  const struct rfade_segment_result *row,
                                  struct rfade_value values[2])
{
    bool counts = !rfade_threshold_is_level(asked);
    values[0] = rfade_value_number(counts ? row->noise_floor_dbm : NAN);
    values[1] = rfade_value_text(counts ? rfade_noise_source_name(row->noise_source) : NULL);
}
