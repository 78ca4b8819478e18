/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file collect.h  A sink that keeps what comes, and logs made up by the tests. */
#ifndef ROUTEFADE_TESTS_INGEST_COLLECT_H
#define ROUTEFADE_TESTS_INGEST_COLLECT_H

#include "ingest/open.h"

enum { MOST_COLLECTED = 64 };

struct collected_reading {
    int64_t time_us;
    char vehicle[32];
    char channel[32];
    char campaign[32];
    int32_t level_cdb;
    int32_t snr_cdb;
    bool numbered;
    int64_t sequence;
    int64_t modulus;
};

struct collected_refusal {
    size_t line;
    char reason[256];
    char text[256];
    size_t text_size;
};

struct collected {
    enum rfade_status status;
    struct rfade_error error;
    struct rfade_ingest_summary summary;
    size_t reading_count; /* all; the first MOST_COLLECTED are kept */
    struct collected_reading readings[MOST_COLLECTED];
    size_t fix_count;
    struct rfade_ingest_fix fixes[MOST_COLLECTED]; /* vehicle is not kept */
    size_t refusal_count;
    struct collected_refusal refusals[MOST_COLLECTED];
};

/** Writes a file in the tests' own folder and returns its path, valid until the next call. */
const char *write_log(const char *name, const void *bytes, size_t size);

/** A folder of the tests' own, made once. */
const char *test_folder(void);

/** Reads a file with maps; the vehicle is "test" unless the map says so. */
void collect_file(struct collected *collected, const char *path,
                  const struct rfade_column_map *const *maps, size_t map_count,
                  const struct rfade_ingest_names *names);

/** Reads text as a log by a column map's text; NULL: by the built-in map. */
void collect_text(struct collected *collected, const char *map_text, const char *log);

/** As collect_text, of any bytes. */
void collect_bytes(struct collected *collected, const char *map_text, const void *log,
                   size_t size);

/** A column map that must be right. */
struct rfade_column_map *good_map(const char *text);

/** Asserts that the only refusal is of that line, and for a reason that holds `part`. */
void assert_one_refusal(const struct collected *collected, size_t line, const char *part);

#endif
