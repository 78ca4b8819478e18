/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/batch.h"

#include "ingest/sink.h"
#include "survey/read.h"

struct batch_table {
    sqlite3_vtab base;
    const struct rfade_batch *batch;
};

struct batch_cursor {
    sqlite3_vtab_cursor base;
    const struct rfade_batch *batch;
    size_t row;
};

static int batch_connect(sqlite3 *database, void *context, int argument_count,
                         const char *const *arguments, sqlite3_vtab **table, char **message)
{
    (void)argument_count;
    (void)arguments;
    (void)message;
    int code =
        sqlite3_declare_vtab(database, "CREATE TABLE batch (reading_id, offset_us, level_cdb, "
                                       "snr_cdb, lost_before)");
    if (code != SQLITE_OK)
        return code;
    struct batch_table *made = sqlite3_malloc(sizeof *made);
    if (!made)
        return SQLITE_NOMEM;
    *made = (struct batch_table){.batch = context};
    *table = &made->base;
    return SQLITE_OK;
}

static int batch_disconnect(sqlite3_vtab *table)
{
    sqlite3_free(table);
    return SQLITE_OK;
}

static int batch_best_index(sqlite3_vtab *table, sqlite3_index_info *plan)
{
    const struct rfade_batch *batch = ((struct batch_table *)table)->batch;
    plan->estimatedCost = (double)batch->count;
    plan->estimatedRows = (sqlite3_int64)batch->count;
    return SQLITE_OK;
}

static int batch_open(sqlite3_vtab *table, sqlite3_vtab_cursor **cursor)
{
    struct batch_cursor *made = sqlite3_malloc(sizeof *made);
    if (!made)
        return SQLITE_NOMEM;
    *made = (struct batch_cursor){.batch = ((struct batch_table *)table)->batch};
    *cursor = &made->base;
    return SQLITE_OK;
}

static int batch_close(sqlite3_vtab_cursor *cursor)
{
    sqlite3_free(cursor);
    return SQLITE_OK;
}

static int batch_filter(sqlite3_vtab_cursor *cursor, int plan, const char *plan_text,
                        int argument_count, sqlite3_value **arguments)
{
    (void)plan;
    (void)plan_text;
    (void)argument_count;
    (void)arguments;
    ((struct batch_cursor *)cursor)->row = 0;
    return SQLITE_OK;
}

static int batch_next(sqlite3_vtab_cursor *cursor)
{
    ((struct batch_cursor *)cursor)->row++;
    return SQLITE_OK;
}

static int batch_eof(sqlite3_vtab_cursor *cursor)
{
    const struct batch_cursor *at = (struct batch_cursor *)cursor;
    return at->row >= at->batch->count;
}

static void give_value(sqlite3_context *context, int32_t value_cdb)
{
    if (value_cdb == RFADE_NO_VALUE_CDB)
        sqlite3_result_null(context);
    else
        sqlite3_result_int(context, value_cdb);
}

static int batch_column(sqlite3_vtab_cursor *cursor, sqlite3_context *context, int column)
{
    const struct batch_cursor *at = (struct batch_cursor *)cursor;
    const struct rfade_batch_reading *reading = &at->batch->readings[at->row];
    switch (column) {
    case 0:
        sqlite3_result_int64(context, at->batch->first_reading_id + (int64_t)at->row);
        break;
    case 1:
        sqlite3_result_int64(context, reading->time_us - at->batch->readings[0].time_us);
        break;
    case 2:
        give_value(context, reading->level_cdb);
        break;
    case 3:
        give_value(context, reading->snr_cdb);
        break;
    default:
        if (reading->lost_before != RFADE_LOST_UNKNOWN)
            sqlite3_result_int(context, reading->lost_before);
        break;
    }
    return SQLITE_OK;
}

static int batch_rowid(sqlite3_vtab_cursor *cursor, sqlite3_int64 *rowid)
{
    *rowid = (sqlite3_int64)((struct batch_cursor *)cursor)->row;
    return SQLITE_OK;
}

/* No xCreate: the table exists by its name alone, without CREATE VIRTUAL TABLE. */
static const sqlite3_module batch_module = {
    .xConnect = batch_connect,
    .xBestIndex = batch_best_index,
    .xDisconnect = batch_disconnect,
    .xOpen = batch_open,
    .xClose = batch_close,
    .xFilter = batch_filter,
    .xNext = batch_next,
    .xEof = batch_eof,
    .xColumn = batch_column,
    .xRowid = batch_rowid,
};

int rfade_batch_register(sqlite3 *database, const struct rfade_batch *batch)
{
    return sqlite3_create_module_v2(database, "rfade_batch", &batch_module, (void *)batch,
                                    NULL);
}

void rfade_batch_unregister(sqlite3 *database)
{
    (void)sqlite3_create_module_v2(database, "rfade_batch", NULL, NULL, NULL);
}
