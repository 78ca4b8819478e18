/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "checked_sink.h"

#include <math.h>

#include "ingest/time.h"

#include "fuzz.h"

static enum rfade_status take_reading(void *context, const struct rfade_ingest_reading *reading,
                                      struct rfade_error *error)
{
    struct counts *counts = context;
    (void)error;
    counts->readings++;
    FUZZ_REQUIRE(reading->time_us >= RFADE_EARLIEST_US);
    FUZZ_REQUIRE(reading->vehicle[0] && reading->channel[0] && reading->campaign[0]);
    FUZZ_REQUIRE(reading->level_cdb != RFADE_NO_VALUE_CDB ||
                 reading->snr_cdb != RFADE_NO_VALUE_CDB);
    FUZZ_REQUIRE(reading->level_cdb == RFADE_NO_VALUE_CDB ||
                 (reading->level_cdb >= -20000 && reading->level_cdb <= 6000));
    return RFADE_OK;
}

static enum rfade_status take_fix(void *context, const struct rfade_ingest_fix *fix,
                                  struct rfade_error *error)
{
    struct counts *counts = context;
    (void)error;
    counts->fixes++;
    FUZZ_REQUIRE(fix->latitude_deg >= -90 && fix->latitude_deg <= 90);
    FUZZ_REQUIRE(fix->longitude_deg >= -180 && fix->longitude_deg < 180);
    FUZZ_REQUIRE(isnan(fix->speed_m_s) || fix->speed_m_s >= 0);
    return RFADE_OK;
}

static enum rfade_status take_refusal(void *context, const struct rfade_ingest_refusal *refusal,
                                      struct rfade_error *error)
{
    struct counts *counts = context;
    (void)error;
    counts->refused++;
    FUZZ_REQUIRE(refusal->line >= 1 && refusal->reason[0] != '\0');
    return RFADE_OK;
}

struct rfade_sink checked_sink(struct counts *counts)
{
    return (struct rfade_sink){
        .context = counts, .reading = take_reading, .fix = take_fix, .refused = take_refusal};
}
