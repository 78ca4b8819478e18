/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/open.h"

#include <errno.h>
#include <fcntl.h>
#include <sha256.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>
#include <zlib.h>

#include "ingest/clock.h"
#include "ingest/delimited.h"
#include "ingest/gpx_track.h"
#include "ingest/json.h"
#include "ingest/kind.h"
#include "ingest/lines.h"
#include "ingest/map_choice.h"
#include "ingest/map_of_file.h"
#include "ingest/nmea.h"

static const char read_remedy[] = "check the file's name, permissions and medium";

struct rfade_log_source {
    char *path;
    int descriptor; /* -1 once `stream` owns it */
    gzFile stream;
    int64_t size_bytes;
    struct timespec modified;
    unsigned char sha256[RFADE_SHA256_SIZE];
};

void rfade_log_source_close(struct rfade_log_source *source)
{
    if (!source)
        return;
    if (source->stream)
        (void)gzclose_r(source->stream);
    if (source->descriptor >= 0)
        (void)close(source->descriptor);
    free(source->path);
    free(source);
}

const unsigned char *rfade_log_source_sha256(const struct rfade_log_source *source)
{
    return source->sha256;
}

int64_t rfade_log_source_size_bytes(const struct rfade_log_source *source)
{
    return source->size_bytes;
}

static enum rfade_status unreadable(int error_number, struct rfade_error *error)
{
    const char *why = error_number == ENOENT   ? "there is no such file"
                      : error_number == EACCES ? "the file may not be read"
                                               : "the file can't be read";
    return rfade_error_set(error, RFADE_STORAGE, read_remedy, "%s", why);
}

static enum rfade_status hash(struct rfade_log_source *source, struct rfade_error *error)
{
    unsigned char block[RFADE_BLOCK_SIZE];
    SHA256_CTX context;
    SHA256Init(&context);
    for (;;) {
        ssize_t size = read(source->descriptor, block, sizeof block);
        if (size < 0 && errno == EINTR)
            continue;
        if (size < 0)
            return unreadable(errno, error);
        if (size == 0)
            break;
        SHA256Update(&context, block, (size_t)size);
        source->size_bytes += size;
    }
    SHA256Final(source->sha256, &context);
    return RFADE_OK;
}

static enum rfade_status open_source(struct rfade_log_source *source, struct rfade_error *error)
{
    struct stat about;
    /* O_NONBLOCK: a pipe must be refused, not waited for. */
    source->descriptor = open(source->path, O_RDONLY | O_CLOEXEC | O_NONBLOCK);
    if (source->descriptor < 0 || fstat(source->descriptor, &about) != 0)
        return unreadable(errno, error);
    if (!S_ISREG(about.st_mode))
        return rfade_error_set(error, RFADE_INPUT, "give files, or folders of them",
                               "this is no regular file");
    source->modified = about.st_mtim;
    enum rfade_status status = hash(source, error);
    if (status != RFADE_OK)
        return status;
    if (lseek(source->descriptor, 0, SEEK_SET) != 0)
        return unreadable(errno, error);
    source->stream = gzdopen(source->descriptor, "rb");
    if (!source->stream)
        return rfade_error_no_memory(error);
    source->descriptor = -1;
    (void)gzbuffer(source->stream, RFADE_BLOCK_SIZE);
    return RFADE_OK;
}

enum rfade_status rfade_log_source_open(const char *path, struct rfade_log_source **source,
                                        struct rfade_error *error)
{
    *source = NULL;
    struct rfade_log_source *made = calloc(1, sizeof *made);
    size_t length = strlen(path) + 1;
    enum rfade_status status = RFADE_NO_MEMORY;
    if (made) {
        made->descriptor = -1;
        made->path = malloc(length);
    }
    if (made && made->path) {
        memcpy(made->path, path, length);
        status = open_source(made, error);
    } else {
        rfade_error_no_memory(error);
    }
    if (status == RFADE_OK) {
        *source = made;
    } else {
        rfade_error_at(error, path, 0);
        rfade_log_source_close(made);
    }
    return status;
}

/* Bytes of the source, unpacked if it is gzip. */
static enum rfade_status read_bytes(void *context, char *buffer, size_t capacity, size_t *size,
                                    struct rfade_error *error)
{
    struct rfade_log_source *source = context;
    int read = gzread(source->stream, buffer, (unsigned)capacity);
    int problem = Z_OK;
    *size = read > 0 ? (size_t)read : 0;
    (void)gzerror(source->stream, &problem);
    if (read > 0 || (read == 0 && problem == Z_OK))
        return RFADE_OK;
    if (problem == Z_ERRNO)
        return rfade_error_set(error, RFADE_STORAGE, read_remedy, "the file can't be read");
    return rfade_error_set(error, RFADE_INPUT, "fetch the file again from the logger",
                           "the gzip file is damaged or cut off");
}

/* A file that was written to while it was read is not the one that was hashed. */
static enum rfade_status check_unchanged(const struct rfade_log_source *source,
                                         struct rfade_error *error)
{
    struct stat about;
    if (stat(source->path, &about) == 0 && about.st_size == source->size_bytes &&
        about.st_mtim.tv_sec == source->modified.tv_sec &&
        about.st_mtim.tv_nsec == source->modified.tv_nsec)
        return RFADE_OK;
    return rfade_error_set(error, RFADE_STORAGE, "import it again once it is complete",
                           "the file changed while it was read");
}

/* What there is to read, and by what map. */
struct job {
    struct rfade_line_reader *lines;
    const struct rfade_column_map *const *maps;
    size_t map_count;
    const struct rfade_ingest_names *names;
    const struct rfade_sink *sink;
    struct rfade_ingest_summary *summary;
};

static enum rfade_status read_log(const struct job *job, const struct rfade_map_choice *choice,
                                  struct rfade_error *error)
{
    switch (choice->map->file.format) {
    case RFADE_FORMAT_JSON:
        return rfade_json_read(job->lines, choice->map, job->names, job->sink, job->summary,
                               error);
    case RFADE_FORMAT_NMEA:
        return rfade_nmea_read_log(job->lines, choice->map, job->names, job->sink, job->summary,
                                   error);
    case RFADE_FORMAT_GPX:
        return rfade_gpx_track_read(job->lines, choice->map, job->names, job->sink,
                                    job->summary, error);
    case RFADE_FORMAT_DELIMITED:
        return rfade_delimited_read(job->lines, choice->map, choice->layout, job->names,
                                    job->sink, job->summary, error);
    }
    return RFADE_DOMAIN;
}

/* Looks at the first bytes, and chooses the map. */
static enum rfade_status recognise(const struct job *job, const char *path,
                                   struct rfade_map_choice *choice, struct rfade_error *error)
{
    const char *head = NULL;
    size_t size = 0;
    enum rfade_status status = rfade_line_peek(job->lines, &head, &size, error);
    if (status != RFADE_OK)
        return status;
    if (size == 0)
        return rfade_error_set(error, RFADE_INPUT, "fetch the file again from the logger",
                               "the file is empty");
    struct rfade_other_kind kind = rfade_other_kind(head, size);
    if (kind.what)
        return rfade_error_set(error, RFADE_INPUT, kind.remedy, "the file is %s", kind.what);
    bool whole = size < RFADE_BLOCK_SIZE - 3; /* a byte-order mark may have gone */
    return rfade_map_choose(job->maps, job->map_count, path, rfade_log_format_of(head, size),
                            head, size, whole, choice, error);
}

/* To the file's beginning, for another reading. */
static enum rfade_status restart(struct rfade_log_source *source, struct job *job,
                                 struct rfade_error *error)
{
    const struct rfade_byte_source bytes = {source, read_bytes};
    rfade_line_reader_destroy(job->lines);
    job->lines = rfade_line_reader_create(&bytes);
    if (!job->lines)
        return rfade_error_no_memory(error);
    if (gzrewind(source->stream) == 0)
        return RFADE_OK;
    return rfade_error_set(error, RFADE_STORAGE, read_remedy, "the file can't be read again");
}

static enum rfade_status pass_reading(void *context, const struct rfade_ingest_reading *reading,
                                      struct rfade_error *error)
{
    (void)context;
    (void)reading;
    (void)error;
    return RFADE_OK;
}

static enum rfade_status pass_fix(void *context, const struct rfade_ingest_fix *fix,
                                  struct rfade_error *error)
{
    (void)context;
    (void)fix;
    (void)error;
    return RFADE_OK;
}

static enum rfade_status pass_refusal(void *context, const struct rfade_ingest_refusal *refusal,
                                      struct rfade_error *error)
{
    (void)context;
    (void)refusal;
    (void)error;
    return RFADE_OK;
}

static enum rfade_status take_clocks(void *context, int64_t logger_us, int64_t gnss_us,
                                     struct rfade_error *error)
{
    (void)error;
    rfade_clock_add(context, logger_us, gnss_us);
    return RFADE_OK;
}

/* Reads the file for its two clocks alone, and puts their distance into a map of its own. */
static enum rfade_status compare_clocks(struct rfade_log_source *source, struct job *job,
                                        struct rfade_map_choice *choice,
                                        struct rfade_error *error)
{
    int64_t offset_us = 0;
    const char *reason = NULL;
    struct rfade_clock *clock = rfade_clock_create();
    if (!choice->own)
        choice->own = rfade_map_copy(choice->map);
    if (!clock || !choice->own) {
        rfade_clock_destroy(clock);
        return rfade_error_no_memory(error);
    }
    choice->map = choice->own;
    const struct rfade_sink sink = {clock, pass_reading, pass_fix, pass_refusal, take_clocks};
    struct job first = *job;
    first.sink = &sink;
    enum rfade_status status = read_log(&first, choice, error);
    *job->summary = (struct rfade_ingest_summary){0};
    if (status == RFADE_OK)
        reason = rfade_clock_offset(clock, &offset_us);
    rfade_clock_destroy(clock);
    if (reason)
        status =
            rfade_error_set(error, RFADE_INPUT,
                            "leave out gnss_column and set offset_s, or read the time from "
                            "the GNSS column",
                            "%s", reason);
    choice->own->time_offset_us += offset_us;
    return status == RFADE_OK ? restart(source, job, error) : status;
}

static enum rfade_status ingest(struct rfade_log_source *source, struct job *job,
                                struct rfade_error *error)
{
    struct rfade_map_choice choice = {0};
    enum rfade_status status = recognise(job, source->path, &choice, error);
    if (status == RFADE_OK && choice.map) {
        if (rfade_column_given(&choice.map->gnss_column))
            status = compare_clocks(source, job, &choice, error);
        (void)snprintf(job->summary->map_name, sizeof job->summary->map_name, "%s",
                       choice.map->name);
        if (status == RFADE_OK)
            status = read_log(job, &choice, error);
    }
    if (status == RFADE_OK)
        status = check_unchanged(source, error);
    rfade_map_choice_clear(&choice);
    return status;
}

enum rfade_status rfade_ingest(struct rfade_log_source *source,
                               const struct rfade_column_map *const *maps, size_t map_count,
                               const struct rfade_ingest_names *names,
                               const struct rfade_sink *sink,
                               struct rfade_ingest_summary *summary, struct rfade_error *error)
{
    *summary = (struct rfade_ingest_summary){0};
    struct rfade_byte_source bytes = {source, read_bytes};
    struct rfade_line_reader *lines = rfade_line_reader_create(&bytes);
    if (!lines)
        return rfade_error_no_memory(error);
    struct job job = {lines, maps, map_count, names, sink, summary};
    enum rfade_status status = ingest(source, &job, error);
    rfade_line_reader_destroy(job.lines);
    if (status != RFADE_OK && error && error->file[0] == '\0')
        rfade_error_at(error, source->path, error->line);
    return status;
}
