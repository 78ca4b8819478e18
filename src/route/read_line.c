/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "route/read_line.h"

#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

#include "route/read_line_text.h"

/* A route of 100 km by a point a metre takes 3 MB. */
enum { FILE_BYTES_MAX = 64 * 1024 * 1024 };

enum rfade_status rfade_place_list_add(struct rfade_place_list *list,
                                       const struct rfade_place *place, const char *remedy,
                                       struct rfade_error *error)
{
    if (!rfade_place_is_valid(place))
        return rfade_error_set(error, RFADE_INPUT, remedy,
                               "no place on earth: latitude %g, longitude %g",
                               place->latitude_deg, place->longitude_deg);
    if (list->count == list->capacity) {
        size_t capacity = list->capacity ? list->capacity * 2 : 256;
        struct rfade_place *grown = realloc(list->all, capacity * sizeof *grown);
        if (!grown)
            return rfade_error_no_memory(error);
        list->all = grown;
        list->capacity = capacity;
    }
    list->all[list->count++] = *place;
    return RFADE_OK;
}

static enum rfade_status fail(const char *path, enum rfade_status status, const char *remedy,
                              const char *what, struct rfade_error *error)
{
    rfade_error_set(error, status, remedy, "%s", what);
    rfade_error_at(error, path, 0);
    return status;
}

static enum rfade_status slurp(const char *path, char **text, size_t *size,
                               struct rfade_error *error)
{
    static const char *const remedy = "check the file's name and permissions";
    struct stat about;
    *text = NULL;
    *size = 0;
    if (stat(path, &about) != 0)
        return fail(path, RFADE_STORAGE, remedy,
                    errno == ENOENT ? "there is no such file" : "the file can't be reached",
                    error);
    if (!S_ISREG(about.st_mode))
        return fail(path, RFADE_STORAGE, "name a file with the line",
                    S_ISDIR(about.st_mode) ? "this is a folder" : "this is no ordinary file",
                    error);
    if (about.st_size > FILE_BYTES_MAX)
        return fail(path, RFADE_INPUT, "give fewer points; one every few metres is plenty",
                    "the file is larger than 64 MiB", error);
    FILE *file = fopen(path, "rbe");
    if (!file)
        return fail(path, RFADE_STORAGE, remedy, "the file can't be opened", error);
    char *read = malloc((size_t)about.st_size + 1);
    size_t got = read ? fread(read, 1, (size_t)about.st_size, file) : 0;
    bool failed = ferror(file) != 0;
    (void)fclose(file);
    if (!read) {
        (void)rfade_error_no_memory(error);
        rfade_error_at(error, path, 0);
        return RFADE_NO_MEMORY;
    }
    if (failed) {
        free(read);
        return fail(path, RFADE_STORAGE, remedy, "the file can't be read", error);
    }
    read[got] = '\0';
    *text = read;
    *size = got;
    return RFADE_OK;
}

static enum rfade_status read_text(const char *path, const char *text, size_t size,
                                   struct rfade_place **places, size_t *count,
                                   struct rfade_error *error)
{
    static const char *const remedy =
        "give a GeoJSON LineString, a GPX track, or text with latitude,longitude on each line";
    if (size >= 3 && memcmp(text, "\xEF\xBB\xBF", 3) == 0) { /* byte order mark */
        text += 3;
        size -= 3;
    }
    const char *start = text + strspn(text, " \t\r\n");
    if (memchr(text, '\0', size))
        return fail(path, RFADE_INPUT, remedy, "this is not a text file", error);
    if (*start == '\0')
        return fail(path, RFADE_INPUT, remedy, "the file is empty", error);
    if (*start == '<')
        return rfade_line_from_gpx(path, text, size, places, count, error);
    if (*start == '{' || *start == '[')
        return rfade_line_from_geojson(path, text, size, places, count, error);
    return rfade_line_from_csv(path, text, size, places, count, error);
}

enum rfade_status rfade_read_line(const char *path, struct rfade_place **places, size_t *count,
                                  struct rfade_error *error)
{
    *places = NULL;
    *count = 0;
    char *text = NULL;
    size_t size = 0;
    enum rfade_status status = slurp(path, &text, &size, error);
    if (status == RFADE_OK)
        status = read_text(path, text, size, places, count, error);
    if (status == RFADE_OK && *count < 2)
        status = fail(path, RFADE_INPUT, "give at least two places along the road",
                      "the line has fewer than two places", error);
    if (status != RFADE_OK) {
        free(*places);
        *places = NULL;
        *count = 0;
    }
    free(text);
    return status;
}
