/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/collect.h"

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>

#include <cmocka.h>
#include <dirent.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

static enum rfade_status keep_reading(void *context, const struct rfade_ingest_reading *reading,
                                      struct rfade_error *error)
{
    struct collected *collected = context;
    (void)error;
    if (collected->reading_count < MOST_COLLECTED) {
        struct collected_reading *kept = &collected->readings[collected->reading_count];
        kept->time_us = reading->time_us;
        kept->level_cdb = reading->level_cdb;
        kept->snr_cdb = reading->snr_cdb;
        kept->numbered = reading->numbered;
        kept->sequence = reading->sequence;
        kept->modulus = reading->modulus;
        (void)snprintf(kept->vehicle, sizeof kept->vehicle, "%s", reading->vehicle);
        (void)snprintf(kept->channel, sizeof kept->channel, "%s", reading->channel);
        (void)snprintf(kept->campaign, sizeof kept->campaign, "%s", reading->campaign);
    }
    collected->reading_count++;
    return RFADE_OK;
}

static enum rfade_status keep_fix(void *context, const struct rfade_ingest_fix *fix,
                                  struct rfade_error *error)
{
    struct collected *collected = context;
    (void)error;
    if (collected->fix_count < MOST_COLLECTED)
        collected->fixes[collected->fix_count] = *fix;
    collected->fix_count++;
    return RFADE_OK;
}

static enum rfade_status keep_refusal(void *context, const struct rfade_ingest_refusal *refusal,
                                      struct rfade_error *error)
{
    struct collected *collected = context;
    (void)error;
    if (collected->refusal_count < MOST_COLLECTED) {
        struct collected_refusal *kept = &collected->refusals[collected->refusal_count];
        kept->line = refusal->line;
        kept->text_size = refusal->text_size;
        (void)snprintf(kept->reason, sizeof kept->reason, "%s", refusal->reason);
        size_t size =
            refusal->text_size < sizeof kept->text ? refusal->text_size : sizeof kept->text - 1;
        memcpy(kept->text, refusal->text, size);
        kept->text[size] = '\0';
    }
    collected->refusal_count++;
    return RFADE_OK;
}

static char folder[] = "/tmp/routefade-ingest-XXXXXX";

static void remove_tree(const char *path)
{
    DIR *directory = opendir(path);
    /* NOLINTNEXTLINE(concurrency-mt-unsafe): the stream is this function's own */
    for (struct dirent *entry = directory ? readdir(directory) : NULL; entry;
         /* NOLINTNEXTLINE(concurrency-mt-unsafe) */
         entry = readdir(directory)) {
        char inner[512];
        struct stat about;
        int size = snprintf(inner, sizeof inner, "%s/%s", path, entry->d_name);
        if (strcmp(entry->d_name, ".") == 0 || strcmp(entry->d_name, "..") == 0 || size < 0 ||
            (size_t)size >= sizeof inner || lstat(inner, &about) != 0)
            continue;
        if (S_ISDIR(about.st_mode))
            remove_tree(inner);
        else
            (void)unlink(inner);
    }
    if (directory)
        (void)closedir(directory);
    (void)rmdir(path);
}

static void remove_folder(void)
{
    remove_tree(folder);
}

const char *test_folder(void)
{
    static bool made;
    if (!made) {
        assert_non_null(mkdtemp(folder));
        assert_int_equal(atexit(remove_folder), 0);
    }
    made = true;
    return folder;
}

const char *write_log(const char *name, const void *bytes, size_t size)
{
    static char path[256];
    (void)snprintf(path, sizeof path, "%s/%s", test_folder(), name);
    FILE *file = fopen(path, "wb");
    assert_non_null(file);
    assert_int_equal(fwrite(bytes, 1, size, file), size);
    assert_int_equal(fclose(file), 0);
    return path;
}

struct rfade_column_map *good_map(const char *text)
{
    struct rfade_column_map *map = NULL;
    struct rfade_error error;
    if (rfade_column_map_parse(text, strlen(text), "test.ini", &map, &error) != RFADE_OK)
        fail_msg("line %zu: %s", error.line, error.what);
    return map;
}

void collect_file(struct collected *collected, const char *path,
                  const struct rfade_column_map *const *maps, size_t map_count,
                  const struct rfade_ingest_names *names)
{
    *collected = (struct collected){0};
    struct rfade_log_source *source = NULL;
    struct rfade_sink sink = {.context = collected,
                              .reading = keep_reading,
                              .fix = keep_fix,
                              .refused = keep_refusal};
    collected->status = rfade_log_source_open(path, &source, &collected->error);
    if (collected->status == RFADE_OK)
        collected->status = rfade_ingest(source, maps, map_count, names, &sink,
                                         &collected->summary, &collected->error);
    rfade_log_source_close(source);
}

void collect_bytes(struct collected *collected, const char *map_text, const void *log,
                   size_t size)
{
    struct rfade_column_map *map = map_text ? good_map(map_text) : NULL;
    const struct rfade_column_map *maps[1] = {map};
    struct rfade_ingest_names names = {.vehicle = "test"};
    bool named = map_text && strstr(map_text, "[vehicle]");
    collect_file(collected, write_log("log", log, size), maps, map ? 1 : 0,
                 named ? NULL : &names);
    rfade_column_map_destroy(map);
}

void collect_text(struct collected *collected, const char *map_text, const char *log)
{
    collect_bytes(collected, map_text, log, strlen(log));
}

void assert_one_refusal(const struct collected *collected, size_t line, const char *part)
{
    assert_int_equal(collected->status, RFADE_OK);
    assert_int_equal(collected->refusal_count, 1);
    assert_int_equal(collected->summary.refused, 1);
    assert_int_equal(collected->refusals[0].line, line);
    if (!strstr(collected->refusals[0].reason, part))
        fail_msg("the reason is: %s", collected->refusals[0].reason);
}
