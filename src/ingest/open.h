/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file open.h  One logger file from its path to readings and fixes: opened and hashed,
 * recognised, matched to a column map, read.
 *
 *     struct rfade_log_source *source;
 *     rfade_log_source_open(path, &source, &error);
 *     ... known already by rfade_log_source_sha256(source)? then skip it ...
 *     rfade_ingest(source, maps, map_count, &names, &sink, &summary, &error);
 *     rfade_log_source_close(source);
 *
 * Reentrant: one source belongs to one thread. Independent of locale and time zone.
 */
#ifndef ROUTEFADE_INGEST_OPEN_H
#define ROUTEFADE_INGEST_OPEN_H

#include <stdint.h>

#include "ingest/column_map.h"
#include "ingest/sink.h"

enum { RFADE_SHA256_SIZE = 32 };

/** What a reading is called where neither names, map nor column say. */
#define RFADE_DEFAULT_CHANNEL "1"
#define RFADE_DEFAULT_CAMPAIGN "default"

/** Names given by the user; each wins over the map and the columns. NULL: not given. */
struct rfade_ingest_names {
    const char *vehicle;
    const char *channel; /**< refused for a map with several levels */
    const char *campaign;
};

/** What came out of a file. */
struct rfade_ingest_summary {
    size_t lines;      /**< of the file */
    size_t rows;       /**< lines of data among them: all but header, comments, blank lines */
    size_t refused;    /**< rows of which something, or all, was refused and told to the sink */
    size_t readings;   /**< emitted; one a row and level */
    size_t no_reading; /**< row and level where the log says itself that there is none */
    size_t fixes;      /**< emitted, once a position */
    size_t no_position; /**< rows where the log says itself that there is none */
    int64_t first_us;   /**< earliest time of a row that was used; 0 without any */
    int64_t last_us;    /**< latest */
    char map_name[256]; /**< the column map that was used */
};

struct rfade_log_source; /* opaque */

/**
 * Opens a file, plain or gzip, and hashes its bytes as stored. Refuses what is no regular
 * file (RFADE_INPUT) or can't be read (RFADE_STORAGE). *source is NULL on failure.
 */
enum rfade_status rfade_log_source_open(const char *path, struct rfade_log_source **source,
                                        struct rfade_error *error);
void rfade_log_source_close(struct rfade_log_source *source); /* NULL is harmless */

/** SHA-256 (FIPS 180-4) of the stored bytes; RFADE_SHA256_SIZE of them, valid until close. */
const unsigned char *rfade_log_source_sha256(const struct rfade_log_source *source);
int64_t rfade_log_source_size_bytes(const struct rfade_log_source *source);

/**
 * Reads the source, once, into the sink.
 *
 * Of the maps the one is taken whose columns the file has, the one with most columns if
 * several fit; two that fit equally well refuse the file. Where none fits, the header may
 * still say what the columns hold (the built-in map).
 *
 * @param maps   maps[map_count]; may be NULL if map_count is 0
 * @param names  may be NULL
 * @param[out] summary  also filled as far as it went on failure
 * @return RFADE_OK; RFADE_INPUT if the file is refused whole: nothing readable in it, of
 *     another kind, no map fits, no vehicle named (what the sink got must be thrown away);
 *     RFADE_STORAGE if it can't be read to the end or changed meanwhile; RFADE_NO_MEMORY;
 *     or what the sink returned. The error names file, line and remedy.
 */
enum rfade_status rfade_ingest(struct rfade_log_source *source,
                               const struct rfade_column_map *const *maps, size_t map_count,
                               const struct rfade_ingest_names *names,
                               const struct rfade_sink *sink,
                               struct rfade_ingest_summary *summary, struct rfade_error *error);

#endif
