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

#include "ingest/built_in_map.h"
#include "ingest/delimited.h"
#include "ingest/kind.h"
#include "ingest/layout.h"
#include "ingest/lines.h"

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

/* What a file is read by. The map is owned only if it is the built-in one. */
struct choice {
    const struct rfade_column_map *map;
    struct rfade_column_map *built_in;
    struct rfade_layout *layout;
};

static void clear_choice(struct choice *choice)
{
    rfade_column_map_destroy(choice->built_in);
    free(choice->layout);
}

/* Of the maps that fit, the one with most columns. RFADE_OK without a map if none fits: the
 * error is that of the first then. */
static enum rfade_status choose_given(const struct rfade_column_map *const *maps,
                                      size_t map_count, const char *head, size_t size,
                                      bool whole, struct choice *choice,
                                      struct rfade_error *error)
{
    const struct rfade_column_map *rival = NULL;
    for (size_t i = 0; i < map_count; i++) {
        struct rfade_layout *layout = NULL;
        struct rfade_error misfit;
        enum rfade_status status =
            rfade_layout_create(maps[i], head, size, whole, &layout, &misfit);
        if (status != RFADE_OK && i == 0)
            rfade_error_set(error, status, misfit.remedy, "%s%s",
                            map_count > 1 ? "none of the column maps fits: " : "", misfit.what);
        if (status != RFADE_OK && status != RFADE_INPUT)
            return status;
        if (status != RFADE_OK)
            continue;
        if (choice->layout && choice->layout->column_count == layout->column_count)
            rival = maps[i];
        if (choice->layout && choice->layout->column_count >= layout->column_count) {
            free(layout);
            continue;
        }
        free(choice->layout);
        choice->map = maps[i];
        choice->layout = layout;
        rival = NULL;
    }
    if (rival)
        return rfade_error_set(error, RFADE_INPUT, "import the file with one of them alone",
                               "two column maps fit equally well: %s and %s", choice->map->name,
                               rival->name);
    return RFADE_OK;
}

static enum rfade_status choose(const struct rfade_column_map *const *maps, size_t map_count,
                                const char *head, size_t size, struct choice *choice,
                                struct rfade_error *error)
{
    bool whole = size < RFADE_BLOCK_SIZE - 3; /* a byte-order mark may have gone */
    enum rfade_status status = choose_given(maps, map_count, head, size, whole, choice, error);
    if (status != RFADE_OK || choice->map)
        return status;
    struct rfade_error unsaid;
    status = rfade_built_in_map(head, size, &choice->built_in, &unsaid);
    if (status == RFADE_OK)
        status =
            rfade_layout_create(choice->built_in, head, size, whole, &choice->layout, &unsaid);
    choice->map = choice->built_in;
    /* A map that was given explains more than the one that was only tried. */
    if (status != RFADE_OK && error && (map_count == 0 || status == RFADE_NO_MEMORY))
        *error = unsaid;
    return status;
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

static enum rfade_status ingest(struct rfade_log_source *source,
                                struct rfade_line_reader *lines,
                                const struct rfade_column_map *const *maps, size_t map_count,
                                const struct rfade_ingest_names *names,
                                const struct rfade_sink *sink,
                                struct rfade_ingest_summary *summary, struct rfade_error *error)
{
    struct choice choice = {0};
    const char *head = NULL;
    size_t size = 0;
    enum rfade_status status = rfade_line_peek(lines, &head, &size, error);
    if (status != RFADE_OK)
        return status;
    if (size == 0)
        return rfade_error_set(error, RFADE_INPUT, "fetch the file again from the logger",
                               "the file is empty");
    struct rfade_other_kind kind = rfade_other_kind(head, size);
    if (kind.what)
        return rfade_error_set(error, RFADE_INPUT, kind.remedy, "the file is %s", kind.what);
    status = choose(maps, map_count, head, size, &choice, error);
    if (status == RFADE_OK) {
        (void)snprintf(summary->map_name, sizeof summary->map_name, "%s", choice.map->name);
        status =
            rfade_delimited_read(lines, choice.map, choice.layout, names, sink, summary, error);
    }
    if (status == RFADE_OK)
        status = check_unchanged(source, error);
    clear_choice(&choice);
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
    enum rfade_status status =
        ingest(source, lines, maps, map_count, names, sink, summary, error);
    rfade_line_reader_destroy(lines);
    if (status != RFADE_OK && error && error->file[0] == '\0')
        rfade_error_at(error, source->path, error->line);
    return status;
}
