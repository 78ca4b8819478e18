/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/import.h"

#include <stdlib.h>
#include <string.h>

#include "survey/batch.h"
#include "survey/layout.h"
#include "survey/name.h"
#include "survey/sequence.h"

enum {
    EXTENT_READINGS = 65536,
    BUFFERED_READINGS = 1048576, /* over all streams: bounds the memory of a file of many */
    STREAM_BUCKETS = 256,
    REFUSED_TEXT_BYTES = 200,
    HELD_FIX_US = 2000000
};

/* The readings of one vehicle, channel and campaign that wait to become an extent. */
struct stream {
    struct stream *next;           /* in the order of first appearance in the file */
    struct stream *next_in_bucket; /* of the hash of its names */
    char vehicle[RFADE_NAME_SIZE];
    char channel[RFADE_NAME_SIZE];
    char campaign[RFADE_NAME_SIZE];
    int64_t vehicle_id;
    int64_t channel_id;
    int64_t campaign_id;
    struct rfade_batch_reading *readings;
    uint32_t count;
    uint32_t capacity;
    bool sorted;
    struct rfade_sequence sequence; /* up to the last extent */
};

struct fix_vehicle {
    struct fix_vehicle *next;
    char name[RFADE_NAME_SIZE];
    int64_t vehicle_id;
    struct rfade_ingest_fix last; /* stored; its vehicle isn't used */
};

struct rfade_import {
    struct rfade_survey *survey;
    int64_t logger_file_id;
    int64_t next_reading_id;
    struct stream *streams;
    struct stream **last_stream;
    struct stream *buckets[STREAM_BUCKETS];
    struct stream *recent; /* of the reading before: the likeliest */
    struct fix_vehicle *fix_vehicles;
    size_t buffered;
    struct rfade_batch batch;
    sqlite3_stmt *insert_extent;
    sqlite3_stmt *insert_readings;
    sqlite3_stmt *insert_fix;
    sqlite3_stmt *find_fix;
    sqlite3_stmt *insert_refused;
    struct rfade_import_counts counts;
};

static void free_import(struct rfade_import *import)
{
    while (import->streams) {
        struct stream *stream = import->streams;
        import->streams = stream->next;
        free(stream->readings);
        free(stream);
    }
    while (import->fix_vehicles) {
        struct fix_vehicle *vehicle = import->fix_vehicles;
        import->fix_vehicles = vehicle->next;
        free(vehicle);
    }
    sqlite3_finalize(import->insert_extent);
    sqlite3_finalize(import->insert_readings);
    sqlite3_finalize(import->insert_fix);
    sqlite3_finalize(import->find_fix);
    sqlite3_finalize(import->insert_refused);
    rfade_batch_unregister(rfade_survey_database(import->survey));
    free(import);
}

void rfade_import_abort(struct rfade_import *import)
{
    if (!import)
        return;
    struct rfade_survey *survey = import->survey;
    free_import(import);
    rfade_survey_rollback(survey);
}

static enum rfade_status prepare_statements(struct rfade_import *import,
                                            struct rfade_error *error)
{
    struct {
        sqlite3_stmt **statement;
        const char *sql;
    } const all[] = {
        {&import->insert_extent,
         "INSERT INTO extent (logger_file_id, vehicle_id, channel_id, campaign_id, ordinal, "
         "first_reading_id, reading_count, start_us, end_us) VALUES (?,?,?,?,?,?,?,?,?)"},
        {&import->insert_readings,
         "INSERT INTO reading (reading_id, offset_us, level_cdb, snr_cdb, lost_before) "
         "SELECT reading_id, offset_us, level_cdb, snr_cdb, lost_before FROM rfade_batch"},
        {&import->insert_fix,
         "INSERT INTO fix (vehicle_id, time_us, logger_file_id, latitude_deg, longitude_deg, "
         "speed_m_s) VALUES (?,?,?,?,?,?) "
         "ON CONFLICT (vehicle_id, time_us, logger_file_id) DO NOTHING"},
        {&import->find_fix, "SELECT latitude_deg, longitude_deg FROM fix "
                            "WHERE vehicle_id = ? AND time_us = ? AND logger_file_id = ?"},
        {&import->insert_refused, "INSERT INTO refused_line VALUES (?,?,?,?)"},
    };
    if (rfade_batch_register(rfade_survey_database(import->survey), &import->batch) !=
        SQLITE_OK)
        return rfade_survey_failed(import->survey, "registering the batch", error);
    for (size_t i = 0; i < sizeof all / sizeof all[0]; i++) {
        enum rfade_status status =
            rfade_survey_prepare(import->survey, all[i].statement, error, all[i].sql, "");
        if (status != RFADE_OK)
            return status;
    }
    return RFADE_OK;
}

/* One loop for the statements above: run with what is bound, then make ready for the next. */
static enum rfade_status run_bound(struct rfade_import *import, sqlite3_stmt *statement,
                                   struct rfade_error *error)
{
    if (sqlite3_step(statement) == SQLITE_DONE) {
        (void)sqlite3_reset(statement);
        return RFADE_OK;
    }
    enum rfade_status status = rfade_survey_failed(import->survey, "storing", error);
    (void)sqlite3_reset(statement);
    return status;
}

static enum rfade_status insert_logger_file(struct rfade_import *import, const char *name,
                                            const unsigned char sha256[32], int64_t size_bytes,
                                            struct rfade_error *error)
{
    bool found = false;
    enum rfade_status status =
        rfade_survey_run(import->survey, error,
                         "INSERT INTO logger_file (sha256, name, size_bytes, line_count, "
                         "reading_count, fix_count, differing_fix_count, refused_count) "
                         "VALUES (?1, ?2, ?3, 0, 0, 0, 0, 0)",
                         "bti", (const void *)sha256, (size_t)32, name, size_bytes);
    if (status != RFADE_OK)
        return status;
    import->logger_file_id = sqlite3_last_insert_rowid(rfade_survey_database(import->survey));
    return rfade_survey_integer(import->survey, &import->next_reading_id, &found, error,
                                "SELECT coalesce(max(reading_id), 0) + 1 FROM reading", "");
}

enum rfade_status rfade_import_begin(struct rfade_survey *survey, const char *name,
                                     const unsigned char sha256[32], int64_t size_bytes,
                                     struct rfade_import **import, bool *already_known,
                                     struct rfade_error *error)
{
    *import = NULL;
    *already_known = false;
    int64_t ignored = 0;
    enum rfade_status status = rfade_survey_begin(survey, error);
    if (status != RFADE_OK)
        return status;
    status = rfade_survey_integer(survey, &ignored, already_known, error,
                                  "SELECT 1 FROM logger_file WHERE sha256 = ?1", "b",
                                  (const void *)sha256, (size_t)32);
    if (status != RFADE_OK || *already_known) {
        rfade_survey_rollback(survey);
        return status;
    }
    struct rfade_import *begun = calloc(1, sizeof *begun);
    if (!begun) {
        rfade_survey_rollback(survey);
        return rfade_error_no_memory(error);
    }
    begun->survey = survey;
    begun->last_stream = &begun->streams;
    status = insert_logger_file(begun, name, sha256, size_bytes, error);
    if (status == RFADE_OK)
        status = prepare_statements(begun, error);
    if (status != RFADE_OK) {
        rfade_import_abort(begun);
        return status;
    }
    *import = begun;
    return RFADE_OK;
}

static int by_time_and_place(const void *left, const void *right)
{
    const struct rfade_batch_reading *a = left;
    const struct rfade_batch_reading *b = right;
    if (a->time_us != b->time_us)
        return a->time_us < b->time_us ? -1 : 1;
    return a->place < b->place ? -1 : a->place > b->place;
}

/* Counts what was lost before each reading; what came without level and SNR only told its
 * number. */
static void settle(struct stream *stream)
{
    uint32_t kept = 0;
    if (!stream->sorted)
        qsort(stream->readings, stream->count, sizeof *stream->readings, by_time_and_place);
    for (uint32_t i = 0; i < stream->count; i++) {
        struct rfade_batch_reading reading = stream->readings[i];
        int32_t lost =
            rfade_sequence_lost(&stream->sequence, reading.numbered, reading.sequence);
        if (reading.level_cdb == RFADE_NO_VALUE_CDB && reading.snr_cdb == RFADE_NO_VALUE_CDB)
            continue;
        reading.lost_before = lost;
        stream->readings[kept++] = reading;
    }
    stream->count = kept;
    stream->sorted = true;
}

/* Makes an extent of what a stream has gathered. */
static enum rfade_status flush(struct rfade_import *import, struct stream *stream,
                               struct rfade_error *error)
{
    import->buffered -= stream->count;
    settle(stream);
    if (stream->count == 0)
        return RFADE_OK;
    const struct rfade_batch_reading *first = &stream->readings[0];
    const struct rfade_batch_reading *last = &stream->readings[stream->count - 1];
    const int64_t values[] = {
        import->logger_file_id, stream->vehicle_id,     stream->channel_id,
        stream->campaign_id,    import->counts.extents, import->next_reading_id,
        stream->count,          first->time_us,         last->time_us,
    };
    for (size_t i = 0; i < sizeof values / sizeof values[0]; i++)
        (void)sqlite3_bind_int64(import->insert_extent, (int)i + 1, values[i]);
    enum rfade_status status = run_bound(import, import->insert_extent, error);
    if (status != RFADE_OK)
        return status;
    import->batch = (struct rfade_batch){.readings = stream->readings,
                                         .count = stream->count,
                                         .first_reading_id = import->next_reading_id};
    status = run_bound(import, import->insert_readings, error);
    import->counts.extents++;
    import->next_reading_id += stream->count;
    stream->count = 0;
    return status;
}

static enum rfade_status check_log_name(const char *what, const char *name,
                                        struct rfade_error *error)
{
    size_t length = strnlen(name, RFADE_NAME_SIZE);
    if (length > 0 && length < RFADE_NAME_SIZE)
        return RFADE_OK;
    return rfade_error_set(
        error, RFADE_INPUT, "map another column to it, or a fixed name (--columns FILE.ini)",
        "the %s's name is %s", what, length == 0 ? "empty" : "longer than 200 bytes");
}

static unsigned hash_names(const struct rfade_ingest_reading *reading)
{
    const char *const names[] = {reading->vehicle, reading->channel, reading->campaign};
    uint32_t hash = 2166136261U; /* FNV-1a, 32 bits */
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++)
        for (const char *byte = names[i];; byte++) {
            hash = (hash ^ (unsigned char)*byte) * 16777619U;
            if (!*byte)
                break;
        }
    return hash % STREAM_BUCKETS;
}

static bool stream_is(const struct stream *stream, const struct rfade_ingest_reading *reading)
{
    return strcmp(stream->channel, reading->channel) == 0 &&
           strcmp(stream->vehicle, reading->vehicle) == 0 &&
           strcmp(stream->campaign, reading->campaign) == 0;
}

static enum rfade_status name_stream(struct rfade_import *import, struct stream *stream,
                                     const struct rfade_ingest_reading *reading,
                                     struct rfade_error *error)
{
    struct {
        enum rfade_named kind;
        const char *word;
        const char *name;
        char *copy;
        int64_t *id;
    } const parts[] = {
        {RFADE_NAMED_VEHICLE, "vehicle", reading->vehicle, stream->vehicle,
         &stream->vehicle_id},
        {RFADE_NAMED_CHANNEL, "channel", reading->channel, stream->channel,
         &stream->channel_id},
        {RFADE_NAMED_CAMPAIGN, "campaign", reading->campaign, stream->campaign,
         &stream->campaign_id},
    };
    for (size_t i = 0; i < sizeof parts / sizeof parts[0]; i++) {
        enum rfade_status status = check_log_name(parts[i].word, parts[i].name, error);
        if (status == RFADE_OK)
            status = rfade_name_add(import->survey, parts[i].kind, parts[i].name, parts[i].id,
                                    error);
        if (status != RFADE_OK)
            return status;
        memcpy(parts[i].copy, parts[i].name, strlen(parts[i].name) + 1);
    }
    return RFADE_OK;
}

static enum rfade_status find_stream(struct rfade_import *import,
                                     const struct rfade_ingest_reading *reading,
                                     struct stream **found, struct rfade_error *error)
{
    *found = import->recent;
    if (*found && stream_is(*found, reading))
        return RFADE_OK;
    struct stream **bucket = &import->buckets[hash_names(reading)];
    for (*found = *bucket; *found; *found = (*found)->next_in_bucket)
        if (stream_is(*found, reading)) {
            import->recent = *found;
            return RFADE_OK;
        }
    struct stream *made = calloc(1, sizeof *made);
    if (!made)
        return rfade_error_no_memory(error);
    enum rfade_status status = name_stream(import, made, reading, error);
    if (status != RFADE_OK) {
        free(made);
        return status;
    }
    made->sorted = true;
    made->next_in_bucket = *bucket;
    *bucket = made;
    *import->last_stream = made;
    import->last_stream = &made->next;
    import->recent = *found = made;
    return RFADE_OK;
}

static bool make_room(struct stream *stream)
{
    if (stream->count < stream->capacity)
        return true;
    uint32_t capacity = stream->capacity ? stream->capacity * 2 : 256;
    struct rfade_batch_reading *grown =
        realloc(stream->readings, capacity * sizeof *stream->readings);
    if (!grown)
        return false;
    stream->readings = grown;
    stream->capacity = capacity;
    return true;
}

/* Too many readings wait: the stream with most of them goes first, the earlier of equals, so
 * that the same file always gives the same extents. */
static enum rfade_status flush_largest(struct rfade_import *import, struct rfade_error *error)
{
    struct stream *largest = import->streams;
    for (struct stream *stream = import->streams; stream; stream = stream->next)
        if (stream->count > largest->count)
            largest = stream;
    return flush(import, largest, error);
}

static enum rfade_status take_reading(void *context, const struct rfade_ingest_reading *reading,
                                      struct rfade_error *error)
{
    struct rfade_import *import = context;
    struct stream *stream = NULL;
    bool valued =
        reading->level_cdb != RFADE_NO_VALUE_CDB || reading->snr_cdb != RFADE_NO_VALUE_CDB;
    if (!valued && !reading->numbered)
        return rfade_error_set(error, RFADE_DOMAIN, "", "a reading without level and SNR");
    enum rfade_status status = find_stream(import, reading, &stream, error);
    if (status != RFADE_OK)
        return status;
    if (!make_room(stream))
        return rfade_error_no_memory(error);
    if (stream->count > 0 && reading->time_us < stream->readings[stream->count - 1].time_us)
        stream->sorted = false;
    stream->readings[stream->count] = (struct rfade_batch_reading){
        .time_us = reading->time_us,
        .level_cdb = reading->level_cdb,
        .snr_cdb = reading->snr_cdb,
        .numbered = reading->numbered,
        .sequence = reading->sequence,
        .place = stream->count,
    };
    stream->sequence.modulus = reading->modulus;
    stream->count++;
    import->buffered++;
    import->counts.readings += valued;
    if (stream->count == EXTENT_READINGS)
        return flush(import, stream, error);
    if (import->buffered >= BUFFERED_READINGS)
        return flush_largest(import, error);
    return RFADE_OK;
}

static enum rfade_status find_fix_vehicle(struct rfade_import *import, const char *name,
                                          struct fix_vehicle **found, struct rfade_error *error)
{
    for (*found = import->fix_vehicles; *found; *found = (*found)->next)
        if (strcmp((*found)->name, name) == 0)
            return RFADE_OK;
    enum rfade_status status = check_log_name("vehicle", name, error);
    if (status != RFADE_OK)
        return status;
    struct fix_vehicle *made = calloc(1, sizeof *made);
    if (!made)
        return rfade_error_no_memory(error);
    status =
        rfade_name_add(import->survey, RFADE_NAMED_VEHICLE, name, &made->vehicle_id, error);
    if (status != RFADE_OK) {
        free(made);
        return status;
    }
    memcpy(made->name, name, strlen(name) + 1);
    made->last.time_us = INT64_MIN;
    made->next = import->fix_vehicles;
    import->fix_vehicles = *found = made;
    return RFADE_OK;
}

static bool same_place(const struct rfade_ingest_fix *a, double latitude_deg,
                       double longitude_deg)
{
    return a->latitude_deg == latitude_deg && a->longitude_deg == longitude_deg;
}

/* The same fix written again beside a later reading. */
static bool is_held(const struct rfade_ingest_fix *last, const struct rfade_ingest_fix *fix)
{
    return last->time_us != INT64_MIN &&
           same_place(last, fix->latitude_deg, fix->longitude_deg) &&
           fix->time_us >= last->time_us && fix->time_us - HELD_FIX_US < last->time_us;
}

/* There is a fix at this time already: does it stand at the same place? */
static enum rfade_status count_ignored_fix(struct rfade_import *import, int64_t vehicle_id,
                                           const struct rfade_ingest_fix *fix,
                                           struct rfade_error *error)
{
    sqlite3_stmt *find = import->find_fix;
    bool row = false;
    (void)sqlite3_bind_int64(find, 1, vehicle_id);
    (void)sqlite3_bind_int64(find, 2, fix->time_us);
    (void)sqlite3_bind_int64(find, 3, import->logger_file_id);
    enum rfade_status status = rfade_survey_step(import->survey, find, &row, error);
    if (status == RFADE_OK) {
        bool same = row && same_place(fix, sqlite3_column_double(find, 0),
                                      sqlite3_column_double(find, 1));
        import->counts.repeated_fixes += same;
        import->counts.differing_fixes += !same;
    }
    (void)sqlite3_reset(find);
    return status;
}

static enum rfade_status take_fix(void *context, const struct rfade_ingest_fix *fix,
                                  struct rfade_error *error)
{
    struct rfade_import *import = context;
    struct fix_vehicle *vehicle = NULL;
    enum rfade_status status = find_fix_vehicle(import, fix->vehicle, &vehicle, error);
    if (status != RFADE_OK)
        return status;
    if (is_held(&vehicle->last, fix)) {
        import->counts.repeated_fixes++;
        return RFADE_OK;
    }
    sqlite3_stmt *insert = import->insert_fix;
    (void)sqlite3_bind_int64(insert, 1, vehicle->vehicle_id);
    (void)sqlite3_bind_int64(insert, 2, fix->time_us);
    (void)sqlite3_bind_int64(insert, 3, import->logger_file_id);
    (void)sqlite3_bind_double(insert, 4, fix->latitude_deg);
    (void)sqlite3_bind_double(insert, 5, fix->longitude_deg);
    (void)sqlite3_bind_double(insert, 6, fix->speed_m_s); /* NaN is stored as NULL */
    status = run_bound(import, insert, error);
    if (status != RFADE_OK)
        return status;
    if (sqlite3_changes(rfade_survey_database(import->survey)) == 0)
        return count_ignored_fix(import, vehicle->vehicle_id, fix, error);
    import->counts.fixes++;
    vehicle->last = *fix;
    vehicle->last.vehicle = NULL;
    return RFADE_OK;
}

static enum rfade_status take_refused(void *context, const struct rfade_ingest_refusal *refusal,
                                      struct rfade_error *error)
{
    struct rfade_import *import = context;
    sqlite3_stmt *insert = import->insert_refused;
    size_t kept = refusal->text_size < REFUSED_TEXT_BYTES ? refusal->text_size
                                                          : (size_t)REFUSED_TEXT_BYTES;
    (void)sqlite3_bind_int64(insert, 1, import->logger_file_id);
    (void)sqlite3_bind_int64(insert, 2, (int64_t)refusal->line);
    (void)sqlite3_bind_text(insert, 3, refusal->reason, -1, SQLITE_TRANSIENT);
    /* sqlite3_bind_blob of a NULL pointer is NULL, not an empty BLOB. */
    (void)sqlite3_bind_blob64(insert, 4, kept ? refusal->text : "", kept, SQLITE_TRANSIENT);
    import->counts.refused++;
    return run_bound(import, insert, error);
}

struct rfade_sink rfade_import_sink(struct rfade_import *import)
{
    return (struct rfade_sink){
        .context = import, .reading = take_reading, .fix = take_fix, .refused = take_refused};
}

static enum rfade_status store_rest(struct rfade_import *import, int64_t line_count,
                                    struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    for (struct stream *stream = import->streams; status == RFADE_OK && stream;
         stream = stream->next)
        status = flush(import, stream, error);
    const struct rfade_import_counts *counts = &import->counts;
    if (status == RFADE_OK)
        status = rfade_survey_run(
            import->survey, error,
            "UPDATE logger_file SET line_count = ?2, reading_count = ?3, fix_count = ?4, "
            "differing_fix_count = ?5, refused_count = ?6 WHERE logger_file_id = ?1",
            "iiiiii", import->logger_file_id, line_count, counts->readings, counts->fixes,
            counts->differing_fixes, counts->refused);
    if (status == RFADE_OK && (counts->readings > 0 || counts->fixes > 0))
        status = rfade_survey_changed(import->survey, error);
    return status;
}

enum rfade_status rfade_import_finish(struct rfade_import *import, int64_t line_count,
                                      struct rfade_import_counts *counts,
                                      struct rfade_error *error)
{
    *counts = (struct rfade_import_counts){0};
    struct rfade_survey *survey = import->survey;
    enum rfade_status status = store_rest(import, line_count, error);
    if (status == RFADE_OK)
        status = rfade_survey_commit(survey, error);
    if (status == RFADE_OK)
        *counts = import->counts;
    rfade_import_abort(import); /* after a commit there is nothing to take back */
    return status;
}
