/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/trace.h"

#include <math.h>
#include <stdlib.h>

#include "analyse/losses.h"
#include "analyse/receiver.h"
#include "ingest/sink.h"
#include "routefade/separate.h"
#include "survey/read.h"

/* Speed of light in vacuum, m/s (SI, exact); air's index changes a wavelength by 3e-4. */
static const double LIGHT_M_S = 299792458.0;

static double wavelength_m(const struct rfade_channel *channel)
{
    return LIGHT_M_S / channel->carrier_hz;
}

static double noise_dbm(const struct rfade_channel *channel)
{
    return rfade_noise_floor_dbm(channel->noise_floor_dbm, channel->bandwidth_hz,
                                 channel->noise_figure_db);
}

enum rfade_status rfade_trace_fingerprint(const struct rfade_trace_work *work,
                                          struct rfade_fingerprint *fingerprint,
                                          struct rfade_error *error)
{
    const struct rfade_outing *outing = work->outing;
    int64_t margin_us = llround(work->settings->fix_gap_s * 1e6);
    unsigned char readings[32], fixes[32];
    enum rfade_status status = rfade_survey_readings_fingerprint(
        work->survey, outing->vehicle_id, work->stream->channel_id, work->stream->campaign_id,
        outing->start_us, outing->end_us, readings, error);
    if (status == RFADE_OK)
        status = rfade_survey_fixes_fingerprint(work->survey, outing->vehicle_id,
                                                outing->start_us - margin_us,
                                                outing->end_us + margin_us, fixes, error);
    if (status != RFADE_OK)
        return status;
    struct rfade_fingerprint_writer writer;
    rfade_fingerprint_begin(&writer);
    rfade_analysis_settings_fingerprint(work->settings, &writer);
    rfade_fingerprint_bytes(&writer, work->route->fingerprint.bytes, RFADE_FINGERPRINT_SIZE);
    rfade_fingerprint_bytes(&writer, readings, sizeof readings);
    rfade_fingerprint_bytes(&writer, fixes, sizeof fixes);
    rfade_fingerprint_integer(&writer, outing->start_us);
    rfade_fingerprint_integer(&writer, outing->end_us);
    rfade_fingerprint_number(&writer, work->channel->carrier_hz);
    rfade_fingerprint_number(&writer, work->channel->step_db);
    rfade_fingerprint_number(&writer, work->channel->floor_dbm);
    rfade_fingerprint_number(&writer, work->channel->ceiling_dbm);
    rfade_fingerprint_number(&writer, noise_dbm(work->channel));
    rfade_fingerprint_number(&writer, work->calibration ? work->calibration->offset_db : NAN);
    rfade_fingerprint_number(
        &writer, work->calibration ? work->calibration->offset_uncertainty_db : NAN);
    *fingerprint = rfade_fingerprint_end(&writer);
    return RFADE_OK;
}

/* One trace while it is made: a run of readings without a gap. */
struct making {
    const struct rfade_trace_work *work;
    const struct rfade_drive *drive;
    const struct rfade_fingerprint *fingerprint;
    const struct rfade_trace_listener *listener; /* NULL: passes are separated and stored */
    struct rfade_trace_receiver known;
    const struct rfade_survey_reading *readings; /* lost ones put in */
    size_t count;
    struct rfade_track_reading *located; /* room for all of them */
};

/* What is stored of a trace beside what it is made with. */
struct trace_row {
    int64_t start_us;
    int64_t end_us;
    int64_t reading_count;
    int64_t repeated_count;
    int64_t located_count;
    int64_t lost_count;    /* negative: not known */
    int64_t missing_count; /* negative: not known */
};

/* SQLite stores a NaN as NULL. */
static double limit_dbm(const struct rfade_trace_receiver *known, int32_t limit_cdb,
                        enum rfade_limit_source source)
{
    return source == RFADE_LIMIT_NONE ? NAN : (limit_cdb - known->offset_cdb) / 100.0;
}

static enum rfade_status store_trace(const struct making *making, const struct trace_row *row,
                                     int64_t *trace_id, struct rfade_error *error)
{
    const struct rfade_trace_work *work = making->work;
    const struct rfade_trace_receiver *known = &making->known;
    enum rfade_status status = rfade_survey_run(
        work->survey, error,
        "INSERT INTO trace (route_id, vehicle_id, channel_id, campaign_id, start_us, end_us,"
        " reading_count, repeated_count, located_count, step_db, step_found, floor_dbm,"
        " floor_source, ceiling_dbm, ceiling_source, lost_count, missing_count, wavelength_m,"
        " fingerprint) VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12, ?13, ?14,"
        " ?15, iif(?16 < 0, NULL, ?16), iif(?17 < 0, NULL, ?17), ?18, ?19)",
        "iiiiiiiiididtdtiidb", work->route->row.route_id, work->outing->vehicle_id,
        work->stream->channel_id, work->stream->campaign_id, row->start_us, row->end_us,
        row->reading_count, row->repeated_count, row->located_count,
        known->receiver.step_cdb / 100.0, (int64_t)known->step_found,
        limit_dbm(known, known->reported.floor_cdb, known->floor_source),
        rfade_limit_source_name(known->floor_source),
        limit_dbm(known, known->reported.ceiling_cdb, known->ceiling_source),
        rfade_limit_source_name(known->ceiling_source), row->lost_count, row->missing_count,
        wavelength_m(work->channel), (const void *)making->fingerprint->bytes,
        sizeof making->fingerprint->bytes);
    *trace_id = sqlite3_last_insert_rowid(rfade_survey_database(work->survey));
    return status;
}

/* The byte forms of one traversal's tallies, blocks and sums. */
enum { TALLIES = 5, BLOCKS = TALLIES, SAMPLING, CROSSINGS, ENCODED };
struct encoded {
    uint8_t *bytes[ENCODED];
    size_t sizes[ENCODED];
};

static void clear_encoded(struct encoded *encoded)
{
    for (size_t i = 0; i < ENCODED; i++)
        free(encoded->bytes[i]);
}

static enum rfade_status encode(const struct rfade_traversal_tally *traversal,
                                struct encoded *encoded)
{
    *encoded = (struct encoded){{NULL}, {0}};
    struct rfade_tally *const tallies[TALLIES] = {traversal->fading, traversal->level,
                                                  traversal->local_mean, traversal->snr,
                                                  traversal->noise};
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; i < TALLIES && status == RFADE_OK; i++)
        status = rfade_tally_encode(tallies[i], &encoded->bytes[i], &encoded->sizes[i]);
    if (status == RFADE_OK)
        status = rfade_blocks_encode(&traversal->blocks, &encoded->bytes[BLOCKS],
                                     &encoded->sizes[BLOCKS]);
    if (status == RFADE_OK)
        status = rfade_sampling_encode(&traversal->sampling, &encoded->bytes[SAMPLING],
                                       &encoded->sizes[SAMPLING]);
    if (status == RFADE_OK)
        status = rfade_crossings_encode(&traversal->crossings, &encoded->bytes[CROSSINGS],
                                        &encoded->sizes[CROSSINGS]);
    return status;
}

static enum rfade_status store_traversal(const struct making *making, int64_t trace_id,
                                         size_t pass,
                                         const struct rfade_traversal_tally *traversal,
                                         struct rfade_error *error)
{
    struct encoded encoded;
    enum rfade_status status = encode(traversal, &encoded);
    if (status != RFADE_OK) {
        status = rfade_error_set(error, status, "", "a tally can't be stored: %s",
                                 rfade_status_text(status));
        goto out;
    }
    status = rfade_survey_run(
        making->work->survey, error,
        "INSERT INTO traversal (trace_id, segment_id, pass_start_us, start_us, end_us,"
        " reading_count, travel_m, level_uncertainty_db, fading_tally, level_tally,"
        " local_mean_tally, snr_tally, noise_tally, blocks, sampling,"
        " crossings)"
        " VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12, ?13, ?14, ?15, ?16)",
        "iiiiiiddbbbbbbbb", trace_id,
        making->work->route->segments[traversal->segment].segment_id,
        rfade_track_start_us(making->drive->tracks[pass]), traversal->first_time_us,
        traversal->last_time_us, traversal->sampling.readings,
        (double)traversal->sampling.travel_mm / 1000.0, making->known.uncertainty_db,
        (const void *)encoded.bytes[0], encoded.sizes[0], (const void *)encoded.bytes[1],
        encoded.sizes[1], (const void *)encoded.bytes[2], encoded.sizes[2],
        (const void *)encoded.bytes[3], encoded.sizes[3], (const void *)encoded.bytes[4],
        encoded.sizes[4], (const void *)encoded.bytes[BLOCKS], encoded.sizes[BLOCKS],
        (const void *)encoded.bytes[SAMPLING], encoded.sizes[SAMPLING],
        (const void *)encoded.bytes[CROSSINGS], encoded.sizes[CROSSINGS]);
out:
    clear_encoded(&encoded);
    return status;
}

static struct rfade_separate_settings separate_settings(const struct making *making)
{
    return (struct rfade_separate_settings){
        .wavelength_m = wavelength_m(making->work->channel),
        .window_wavelengths = making->work->settings->window_wavelengths,
        .block_wavelengths = making->work->settings->block_wavelengths,
    };
}

static enum rfade_status separate_pass(const struct making *making, int64_t trace_id,
                                       size_t pass, const struct rfade_track_reading *located,
                                       size_t count, struct rfade_error *error)
{
    const struct rfade_separate_settings how = separate_settings(making);
    struct rfade_separation separation;
    enum rfade_status status =
        rfade_separate(located, count, &making->known.receiver, &how, &separation);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "", "a pass can't be separated: %s",
                               rfade_status_text(status));
    for (size_t i = 0; i < separation.count && status == RFADE_OK; i++)
        status = store_traversal(making, trace_id, pass, &separation.traversals[i], error);
    rfade_separation_clear(&separation);
    return status;
}

/* Index of the first reading at or after a time. */
static size_t first_at(const struct rfade_survey_reading *readings, size_t count,
                       int64_t time_us)
{
    size_t low = 0, high = count;
    while (low < high) {
        size_t middle = low + (high - low) / 2;
        if (readings[middle].time_us < time_us)
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}

/* The readings of a trace that lie on one pass, with their place. */
static size_t locate(const struct making *making, size_t pass)
{
    const struct rfade_survey_reading *readings = making->readings;
    int64_t start_us = 0, end_us = 0;
    rfade_drive_pass_times(making->drive, pass, &start_us, &end_us);
    size_t end = first_at(readings, making->count, end_us), found = 0;
    for (size_t i = first_at(readings, making->count, start_us); i < end; i++) {
        int64_t chainage_mm = 0, travel_mm = 0;
        if (!rfade_track_at(making->drive->tracks[pass], readings[i].time_us, &chainage_mm,
                            &travel_mm))
            continue;
        making->located[found++] = (struct rfade_track_reading){
            .time_us = readings[i].time_us,
            .travel_mm = travel_mm,
            .level_cdb = rfade_trace_level_cdb(&making->known, readings[i].level_cdb),
            .segment =
                rfade_route_work_segment(making->work->route, (double)chainage_mm / 1000.0),
            .snr_cdb = readings[i].snr_cdb == RFADE_NO_VALUE_CDB ? RFADE_NO_SNR_CDB
                                                                 : readings[i].snr_cdb,
        };
    }
    return found;
}

static enum rfade_status store_passes(const struct making *making, struct trace_row *row,
                                      struct rfade_error *error)
{
    size_t passes = making->drive->pass_count;
    for (size_t pass = 0; pass < passes; pass++)
        row->located_count += (int64_t)locate(making, pass);
    int64_t trace_id = 0;
    enum rfade_status status = store_trace(making, row, &trace_id, error);
    for (size_t pass = 0; pass < passes && status == RFADE_OK; pass++) {
        size_t located = locate(making, pass);
        if (located > 0)
            status = separate_pass(making, trace_id, pass, making->located, located, error);
    }
    return status;
}

static enum rfade_status tell_passes(const struct making *making, struct rfade_error *error)
{
    const struct rfade_trace_listener *listener = making->listener;
    enum rfade_status status = RFADE_OK;
    for (size_t pass = 0; pass < making->drive->pass_count && status == RFADE_OK; pass++) {
        const struct rfade_located_pass located = {
            .pass = pass,
            .count = locate(making, pass),
            .readings = making->located,
            .receiver = making->known.receiver,
            .settings = separate_settings(making),
        };
        if (located.count > 0)
            status = listener->take(listener->context, &located, error);
    }
    return status;
}

/* A run of readings without a gap; `stream` is what all the stream's traces share. */
static enum rfade_status make_trace(const struct making *stream,
                                    const struct rfade_survey_reading *readings, size_t count,
                                    size_t repeated, struct rfade_error *error)
{
    struct making making = *stream;
    struct rfade_survey_reading *filled = NULL;
    struct trace_row row = {
        .start_us = readings[0].time_us,
        .end_us = readings[count - 1].time_us,
        .reading_count = (int64_t)count,
        .repeated_count = (int64_t)repeated,
        .lost_count = rfade_count_lost(readings, count),
        .missing_count = -1,
    };
    int32_t lost_cdb = 0; /* asked for only where something was lost; then there is a floor */
    if (row.lost_count > 0) {
        rfade_trace_receiver_losing(&making.known, readings, count);
        lost_cdb = making.known.reported.floor_cdb - making.known.offset_cdb;
    }
    enum rfade_status status =
        rfade_fill_losses(readings, count, lost_cdb, &filled, &making.count, error);
    if (status == RFADE_OK && row.lost_count < 0)
        status = rfade_count_missing(readings, count, &row.missing_count, error);
    making.readings = filled;
    making.located = malloc((making.count + 1) * sizeof *making.located);
    if (status == RFADE_OK && making.located)
        status =
            making.listener ? tell_passes(&making, error) : store_passes(&making, &row, error);
    else if (status == RFADE_OK)
        status = rfade_error_no_memory(error);
    free(making.located);
    free(filled);
    return status;
}

/* Rows that carry SNR alone say nothing of the level; what was lost before them was lost. */
static size_t keep_levels(struct rfade_survey_reading *readings, size_t count)
{
    size_t kept = 0;
    int32_t lost = 0;
    for (size_t i = 0; i < count; i++) {
        bool known = readings[i].lost_before != RFADE_LOST_UNKNOWN;
        lost = known ? lost + readings[i].lost_before : 0;
        if (readings[i].level_cdb == RFADE_NO_VALUE_CDB)
            continue;
        readings[kept] = readings[i];
        if (known)
            readings[kept].lost_before = lost;
        kept++;
        lost = 0;
    }
    return kept;
}

static enum rfade_status make_traces(const struct making *stream,
                                     const struct rfade_survey_reading *readings, size_t count,
                                     size_t repeated, struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    int64_t gap_us = llround(stream->work->settings->gap_s * 1e6);
    for (size_t first = 0; first < count && status == RFADE_OK;) {
        size_t end = first + 1;
        while (end < count && readings[end].time_us - readings[end - 1].time_us <= gap_us)
            end++;
        status = make_trace(stream, readings + first, end - first, first ? 0 : repeated, error);
        first = end;
    }
    return status;
}

static enum rfade_status make_stream(const struct making *how, struct rfade_error *error)
{
    const struct rfade_trace_work *work = how->work;
    struct rfade_survey_reading *readings = NULL;
    size_t count = 0, repeated = 0;
    enum rfade_status status = rfade_survey_trace_readings(
        work->survey, work->outing->vehicle_id, work->stream->channel_id,
        work->stream->campaign_id, work->outing->start_us, work->outing->end_us, &readings,
        &count, &repeated, error);
    if (status != RFADE_OK)
        return status;
    count = keep_levels(readings, count);
    struct making stream = *how;
    status = rfade_trace_receiver(work->channel, work->calibration, work->settings, readings,
                                  count, &stream.known);
    if (status == RFADE_OK)
        status = make_traces(&stream, readings, count, repeated, error);
    else
        status = rfade_error_set(error, status, "", "out of memory");
    free(readings);
    return status;
}

enum rfade_status rfade_trace_make(const struct rfade_trace_work *work,
                                   const struct rfade_drive *drive,
                                   const struct rfade_fingerprint *fingerprint,
                                   struct rfade_error *error)
{
    const struct making how = {.work = work, .drive = drive, .fingerprint = fingerprint};
    return make_stream(&how, error);
}

enum rfade_status rfade_trace_locate(const struct rfade_trace_work *work,
                                     const struct rfade_drive *drive,
                                     const struct rfade_trace_listener *listener,
                                     struct rfade_error *error)
{
    const struct making how = {.work = work, .drive = drive, .listener = listener};
    return make_stream(&how, error);
}
