/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * The SNR that a receiver logs, and the noise that level and SNR together tell of: at VHF and
 * UHF man-made noise lies many dB above the receiver's own.
 */
#include <math.h>

#include "separate/pass.h"

/* Level less SNR; a level that is clipped, or an SNR that is, says nothing of the noise. */
static enum rfade_status add_noise(const struct rfade_receiver *receiver,
                                   const struct rfade_track_reading *reading, int64_t weight_mm,
                                   struct rfade_traversal_tally *traversal)
{
    bool clipped = reading->level_cdb <= receiver->floor_cdb ||
                   reading->level_cdb >= receiver->ceiling_cdb ||
                   reading->snr_cdb >= receiver->snr_ceiling_cdb;
    double noise_cdb = (double)reading->level_cdb - reading->snr_cdb;
    struct rfade_tally_key key = {.step_cdb = 10,
                                  .kind = RFADE_INTERVAL,
                                  .centre_cdb = (int32_t)(10.0 * round(noise_cdb / 10.0))};

    if (clipped) {
        return RFADE_OK;
    }
    return rfade_tally_add(traversal->noise, &key, weight_mm, 1);
}

enum rfade_status rfade_pass_add_snr(const struct rfade_pass *pass, size_t i,
                                     struct rfade_traversal_tally *traversal)
{
    const struct rfade_receiver *receiver = &pass->receiver;
    const struct rfade_track_reading *reading = &pass->readings[i];
    int64_t weight_mm = pass->weight_mm[i];
    struct rfade_tally_key key = {.step_cdb = receiver->snr_step_cdb,
                                  .kind = RFADE_INTERVAL,
                                  .centre_cdb = reading->snr_cdb};

    if (receiver->snr_step_cdb == 0 || reading->snr_cdb == RFADE_NO_SNR_CDB) {
        return RFADE_OK;
    }
    if (reading->snr_cdb >= receiver->snr_ceiling_cdb) {
        int32_t bound_cdb = receiver->snr_ceiling_cdb - receiver->snr_step_cdb / 2;

        key = (struct rfade_tally_key){.kind = RFADE_ABOVE, .centre_cdb = bound_cdb};
    }

    enum rfade_status status = rfade_tally_add(traversal->snr, &key, weight_mm, 1);
    return status == RFADE_OK ? add_noise(receiver, reading, weight_mm, traversal) : status;
}
