/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/read.h"

#include <sha2.h>
#include <stdlib.h>
#include <string.h>

#include "ingest/sink.h"
#include "survey/rows.h"

/* A reading on its way into a trace. Files count by the order of their SHA-256, places by the
 * order in which the extents were read: file, then ordinal, then place in the extent. */
struct entry {
    int64_t time_us;
    int32_t level_cdb;
    int32_t snr_cdb;
    int32_t lost_before;
    uint32_t file;
    uint32_t place;
};

struct entries {
    struct entry *all;
    size_t count;
    size_t capacity;
    bool sorted;
};

struct extent_row {
    int64_t first_reading_id;
    int64_t reading_count;
    int64_t start_us;
    int64_t end_us;
    unsigned char sha256[32];
};

static void read_sha256(unsigned char sha256[32], sqlite3_stmt *statement, int column)
{
    const void *bytes = sqlite3_column_blob(statement, column);
    memset(sha256, 0, 32);
    if (bytes && sqlite3_column_bytes(statement, column) == 32)
        memcpy(sha256, bytes, 32);
}

static void read_extent(sqlite3_stmt *statement, void *row)
{
    struct extent_row *extent = row;
    extent->first_reading_id = sqlite3_column_int64(statement, 0);
    extent->reading_count = sqlite3_column_int64(statement, 1);
    extent->start_us = sqlite3_column_int64(statement, 2);
    extent->end_us = sqlite3_column_int64(statement, 3);
    read_sha256(extent->sha256, statement, 4);
}

static enum rfade_status list_extents(struct rfade_survey *survey, int64_t vehicle_id,
                                      int64_t channel_id, int64_t campaign_id, int64_t from_us,
                                      int64_t to_us, struct extent_row **extents, size_t *count,
                                      struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status = rfade_rows_query(
        survey, sizeof **extents, read_extent, &rows, count, error,
        "SELECT first_reading_id, extent.reading_count, start_us, end_us, sha256 FROM extent "
        "JOIN logger_file USING (logger_file_id) WHERE vehicle_id = ?1 AND channel_id = ?2 "
        "AND campaign_id = ?3 AND start_us <= ?5 AND end_us >= ?4 ORDER BY sha256, ordinal",
        "iiiii", vehicle_id, channel_id, campaign_id, from_us, to_us);
    *extents = rows;
    return status;
}

static bool make_room(struct entries *entries)
{
    if (entries->count < entries->capacity)
        return true;
    size_t capacity = entries->capacity ? entries->capacity * 2 : 1024;
    if (capacity > UINT32_MAX)
        return false;
    struct entry *grown = realloc(entries->all, capacity * sizeof *grown);
    if (!grown)
        return false;
    entries->all = grown;
    entries->capacity = capacity;
    return true;
}

static int32_t column_cdb(sqlite3_stmt *statement, int column)
{
    return sqlite3_column_type(statement, column) == SQLITE_NULL
               ? RFADE_NO_VALUE_CDB
               : sqlite3_column_int(statement, column);
}

static int32_t column_lost(sqlite3_stmt *statement, int column)
{
    return sqlite3_column_type(statement, column) == SQLITE_NULL
               ? RFADE_LOST_UNKNOWN
               : sqlite3_column_int(statement, column);
}

/* Appends the rows of a prepared SELECT that fall in the time range. */
static enum rfade_status append_rows(struct rfade_survey *survey, sqlite3_stmt *statement,
                                     const struct extent_row *extent, uint32_t file,
                                     int64_t from_us, int64_t to_us, struct entries *entries,
                                     struct rfade_error *error)
{
    bool row = false;
    enum rfade_status status;
    while ((status = rfade_survey_step(survey, statement, &row, error)) == RFADE_OK && row) {
        int64_t time_us = extent->start_us + sqlite3_column_int64(statement, 0);
        if (time_us < from_us || time_us > to_us)
            continue;
        if (!make_room(entries))
            return rfade_error_no_memory(error);
        if (entries->count > 0 && time_us < entries->all[entries->count - 1].time_us)
            entries->sorted = false;
        entries->all[entries->count] = (struct entry){
            .time_us = time_us,
            .level_cdb = column_cdb(statement, 1),
            .snr_cdb = column_cdb(statement, 2),
            .lost_before = column_lost(statement, 3),
            .file = file,
            .place = (uint32_t)entries->count,
        };
        entries->count++;
    }
    return status;
}

static enum rfade_status read_extents(struct rfade_survey *survey,
                                      const struct extent_row *extents, size_t extent_count,
                                      int64_t from_us, int64_t to_us, struct entries *entries,
                                      struct rfade_error *error)
{
    sqlite3_stmt *statement = NULL;
    enum rfade_status status =
        rfade_survey_prepare(survey, &statement, error,
                             "SELECT offset_us, level_cdb, snr_cdb, lost_before FROM reading "
                             "WHERE reading_id BETWEEN ?1 AND ?2 ORDER BY reading_id",
                             "");
    uint32_t file = 0;
    for (size_t i = 0; status == RFADE_OK && i < extent_count; i++) {
        if (i > 0 && memcmp(extents[i].sha256, extents[i - 1].sha256, 32) != 0)
            file++;
        (void)sqlite3_bind_int64(statement, 1, extents[i].first_reading_id);
        (void)sqlite3_bind_int64(statement, 2,
                                 extents[i].first_reading_id + extents[i].reading_count - 1);
        status =
            append_rows(survey, statement, &extents[i], file, from_us, to_us, entries, error);
        (void)sqlite3_reset(statement);
    }
    sqlite3_finalize(statement);
    return status;
}

static int by_time_and_place(const void *left, const void *right)
{
    const struct entry *a = left;
    const struct entry *b = right;
    if (a->time_us != b->time_us)
        return a->time_us < b->time_us ? -1 : 1;
    return a->place < b->place ? -1 : a->place > b->place;
}

static int by_value_and_place(const void *left, const void *right)
{
    const struct entry *a = left;
    const struct entry *b = right;
    if (a->level_cdb != b->level_cdb)
        return a->level_cdb < b->level_cdb ? -1 : 1;
    if (a->snr_cdb != b->snr_cdb)
        return a->snr_cdb < b->snr_cdb ? -1 : 1;
    return a->place < b->place ? -1 : a->place > b->place;
}

static bool same_value(const struct entry *a, const struct entry *b)
{
    return a->level_cdb == b->level_cdb && a->snr_cdb == b->snr_cdb;
}

/* An extract of a log lacks what the log itself has: the fewest losses that a file knows of
 * are those of the reading. */
static int32_t fewest_lost(const struct entry *same, size_t count)
{
    int32_t fewest = RFADE_LOST_UNKNOWN;
    for (size_t i = 0; i < count; i++)
        if (same[i].lost_before != RFADE_LOST_UNKNOWN &&
            (fewest == RFADE_LOST_UNKNOWN || same[i].lost_before < fewest))
            fewest = same[i].lost_before;
    return fewest;
}

/* Of entries with one time and value, by file: moves those of the file that has most of them
 * (the first of equals) to `to`. Returns how many. */
static size_t keep_fullest_file(const struct entry *same, size_t count, struct entry *to)
{
    size_t best = 0;
    size_t best_count = 0;
    for (size_t from = 0, end; from < count; from = end) {
        for (end = from + 1; end < count && same[end].file == same[from].file;)
            end++;
        if (end - from > best_count) {
            best = from;
            best_count = end - from;
        }
    }
    int32_t lost_before = fewest_lost(same, count);
    memmove(to, same + best, best_count * sizeof *to);
    if (best_count == 1)
        to->lost_before = lost_before;
    return best_count;
}

/* Leaves out of entries with one time what several files have. Returns how many stay. */
static size_t keep_once(struct entry *group, size_t count)
{
    bool one_file = true;
    for (size_t i = 1; i < count; i++)
        one_file = one_file && group[i].file == group[0].file;
    if (one_file)
        return count;
    qsort(group, count, sizeof *group, by_value_and_place);
    size_t kept = 0;
    for (size_t from = 0, end; from < count; from = end) {
        for (end = from + 1; end < count && same_value(&group[end], &group[from]);)
            end++;
        kept += keep_fullest_file(group + from, end - from, group + kept);
    }
    qsort(group, kept, sizeof *group, by_time_and_place);
    return kept;
}

static size_t keep_each_once(struct entry *all, size_t count)
{
    size_t kept = 0;
    for (size_t from = 0, end; from < count; from = end) {
        for (end = from + 1; end < count && all[end].time_us == all[from].time_us;)
            end++;
        size_t stay = keep_once(all + from, end - from);
        memmove(all + kept, all + from, stay * sizeof *all);
        kept += stay;
    }
    return kept;
}

/* Sorted extents that don't overlap come in order already: only the others are sorted. */
static enum rfade_status merge(struct entries *entries, struct rfade_survey_reading **readings,
                               size_t *count, size_t *repeated, struct rfade_error *error)
{
    if (entries->count == 0)
        return RFADE_OK;
    if (!entries->sorted)
        qsort(entries->all, entries->count, sizeof *entries->all, by_time_and_place);
    size_t kept = keep_each_once(entries->all, entries->count);
    struct rfade_survey_reading *made = malloc(kept * sizeof *made);
    if (!made)
        return rfade_error_no_memory(error);
    for (size_t i = 0; i < kept; i++)
        made[i] = (struct rfade_survey_reading){.time_us = entries->all[i].time_us,
                                                .level_cdb = entries->all[i].level_cdb,
                                                .snr_cdb = entries->all[i].snr_cdb,
                                                .lost_before = entries->all[i].lost_before};
    *readings = made;
    *count = kept;
    *repeated = entries->count - kept;
    return RFADE_OK;
}

enum rfade_status rfade_survey_trace_readings(struct rfade_survey *survey, int64_t vehicle_id,
                                              int64_t channel_id, int64_t campaign_id,
                                              int64_t from_us, int64_t to_us,
                                              struct rfade_survey_reading **readings,
                                              size_t *count, size_t *repeated,
                                              struct rfade_error *error)
{
    *readings = NULL;
    *count = 0;
    *repeated = 0;
    struct extent_row *extents = NULL;
    size_t extent_count = 0;
    struct entries entries = {.sorted = true};
    enum rfade_status status = list_extents(survey, vehicle_id, channel_id, campaign_id,
                                            from_us, to_us, &extents, &extent_count, error);
    if (status == RFADE_OK)
        status = read_extents(survey, extents, extent_count, from_us, to_us, &entries, error);
    if (status == RFADE_OK)
        status = merge(&entries, readings, count, repeated, error);
    free(entries.all);
    free(extents);
    return status;
}

static void read_fix(sqlite3_stmt *statement, void *row)
{
    struct rfade_position *fix = row;
    fix->time_us = sqlite3_column_int64(statement, 0);
    fix->latitude_deg = sqlite3_column_double(statement, 1);
    fix->longitude_deg = sqlite3_column_double(statement, 2);
    fix->speed_m_s = rfade_column_real(statement, 3);
}

enum rfade_status rfade_survey_fixes(struct rfade_survey *survey, int64_t vehicle_id,
                                     int64_t from_us, int64_t to_us,
                                     struct rfade_position **fixes, size_t *count,
                                     struct rfade_error *error)
{
    *fixes = NULL;
    *count = 0;
    void *rows = NULL;
    size_t read_count = 0;
    enum rfade_status status = rfade_rows_query(
        survey, sizeof **fixes, read_fix, &rows, &read_count, error,
        "SELECT time_us, latitude_deg, longitude_deg, speed_m_s FROM fix "
        "JOIN logger_file USING (logger_file_id) "
        "WHERE vehicle_id = ?1 AND time_us BETWEEN ?2 AND ?3 ORDER BY time_us, sha256",
        "iii", vehicle_id, from_us, to_us);
    struct rfade_position *read = rows;
    for (size_t i = 0; i < read_count; i++)
        if (*count == 0 || read[i].time_us != read[*count - 1].time_us)
            read[(*count)++] = read[i];
    *fixes = read;
    return status;
}

/* Hashes a statement's rows: one BLOB of 32 bytes, then integers. */
static enum rfade_status hash_rows(struct rfade_survey *survey, sqlite3_stmt *statement,
                                   unsigned char sha256[32], struct rfade_error *error)
{
    SHA2_CTX context;
    SHA256Init(&context);
    bool row = false;
    enum rfade_status status;
    while ((status = rfade_survey_step(survey, statement, &row, error)) == RFADE_OK && row) {
        unsigned char file[32];
        read_sha256(file, statement, 0);
        SHA256Update(&context, file, sizeof file);
        for (int column = 1; column < sqlite3_column_count(statement); column++) {
            uint64_t value = (uint64_t)sqlite3_column_int64(statement, column);
            uint8_t bytes[8];
            for (int i = 0; i < 8; i++) /* low byte first, whatever the machine */
                bytes[i] = (uint8_t)(value >> (8 * i));
            SHA256Update(&context, bytes, sizeof bytes);
        }
    }
    SHA256Final(sha256, &context);
    return status;
}

enum rfade_status rfade_survey_readings_fingerprint(struct rfade_survey *survey,
                                                    int64_t vehicle_id, int64_t channel_id,
                                                    int64_t campaign_id, int64_t from_us,
                                                    int64_t to_us, unsigned char sha256[32],
                                                    struct rfade_error *error)
{
    sqlite3_stmt *statement = NULL;
    memset(sha256, 0, 32);
    enum rfade_status status = rfade_survey_prepare(
        survey, &statement, error,
        "SELECT sha256, ordinal FROM extent JOIN logger_file USING (logger_file_id) "
        "WHERE vehicle_id = ?1 AND channel_id = ?2 AND campaign_id = ?3 AND start_us <= ?5 "
        "AND end_us >= ?4 ORDER BY sha256, ordinal",
        "iiiii", vehicle_id, channel_id, campaign_id, from_us, to_us);
    if (status == RFADE_OK)
        status = hash_rows(survey, statement, sha256, error);
    sqlite3_finalize(statement);
    return status;
}

enum rfade_status rfade_survey_fixes_fingerprint(struct rfade_survey *survey,
                                                 int64_t vehicle_id, int64_t from_us,
                                                 int64_t to_us, unsigned char sha256[32],
                                                 struct rfade_error *error)
{
    sqlite3_stmt *statement = NULL;
    memset(sha256, 0, 32);
    enum rfade_status status =
        rfade_survey_prepare(survey, &statement, error,
                             "SELECT sha256, count(*), min(time_us), max(time_us) FROM fix "
                             "JOIN logger_file USING (logger_file_id) "
                             "WHERE vehicle_id = ?1 AND time_us BETWEEN ?2 AND ?3 "
                             "GROUP BY logger_file_id ORDER BY sha256",
                             "iii", vehicle_id, from_us, to_us);
    if (status == RFADE_OK)
        status = hash_rows(survey, statement, sha256, error);
    sqlite3_finalize(statement);
    return status;
}
