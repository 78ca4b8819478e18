/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/walk.h"

#include <dirent.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

/* Folders within folders; each level holds one directory open. */
enum { MOST_DEPTH = 32 };

void rfade_path_list_clear(struct rfade_path_list *list)
{
    for (size_t i = 0; i < list->count; i++)
        free(list->paths[i]);
    free(list->paths);
    *list = (struct rfade_path_list){0};
}

static void cut(struct rfade_path_list *list, size_t count)
{
    while (list->count > count)
        free(list->paths[--list->count]);
}

/* Takes the path over, also on failure. */
static enum rfade_status append(struct rfade_path_list *list, char *path,
                                struct rfade_error *error)
{
    if (path && list->count == list->capacity) {
        size_t capacity = 2 * list->capacity + 16;
        char **grown = realloc(list->paths, capacity * sizeof *grown);
        if (grown) {
            list->paths = grown;
            list->capacity = capacity;
        }
    }
    if (!path || list->count == list->capacity) {
        free(path);
        return rfade_error_no_memory(error);
    }
    list->paths[list->count++] = path;
    return RFADE_OK;
}

static char *join(const char *folder, const char *name)
{
    size_t folder_length = strlen(folder);
    size_t name_length = strlen(name);
    bool slash = folder_length > 0 && folder[folder_length - 1] != '/';
    size_t size = folder_length + slash + name_length + 1;
    char *path = malloc(size);
    if (path)
        (void)snprintf(path, size, "%s%s%s", folder, slash ? "/" : "", name);
    return path;
}

static int by_bytes(const void *a, const void *b)
{
    const char *const *left = a;
    const char *const *right = b;
    return strcmp(*left, *right);
}

/* All names in a folder, sorted, as whole paths. */
static enum rfade_status list_folder(const char *folder, struct rfade_path_list *entries,
                                     struct rfade_error *error)
{
    DIR *directory = opendir(folder);
    if (!directory) {
        enum rfade_status status = rfade_error_set(
            error, RFADE_STORAGE, "check the folder's permissions", "the folder can't be read");
        rfade_error_at(error, folder, 0);
        return status;
    }
    enum rfade_status status = RFADE_OK;
    /* NOLINTNEXTLINE(concurrency-mt-unsafe): the stream is this function's own */
    for (struct dirent *entry = readdir(directory); entry && status == RFADE_OK;
         /* NOLINTNEXTLINE(concurrency-mt-unsafe) */
         entry = readdir(directory))
        if (entry->d_name[0] != '.')
            status = append(entries, join(folder, entry->d_name), error);
    (void)closedir(directory);
    if (entries->count > 1)
        qsort(entries->paths, entries->count, sizeof *entries->paths, by_bytes);
    return status;
}

static enum rfade_status walk(struct rfade_path_list *list, const char *folder, int depth,
                              struct rfade_error *error)
{
    struct rfade_path_list entries = {0};
    if (depth > MOST_DEPTH) {
        enum rfade_status status =
            rfade_error_set(error, RFADE_INPUT, "import the folders inside one by one",
                            "folders are nested more than 32 deep");
        rfade_error_at(error, folder, 0);
        return status;
    }
    enum rfade_status status = list_folder(folder, &entries, error);
    for (size_t i = 0; i < entries.count && status == RFADE_OK; i++) {
        struct stat about;
        if (lstat(entries.paths[i], &about) != 0)
            continue; /* gone since the folder was read */
        if (S_ISDIR(about.st_mode)) {
            status = walk(list, entries.paths[i], depth + 1, error);
        } else if (S_ISREG(about.st_mode)) {
            status = append(list, entries.paths[i], error);
            entries.paths[i] = NULL;
        }
    }
    rfade_path_list_clear(&entries);
    return status;
}

enum rfade_status rfade_path_list_add(struct rfade_path_list *list, const char *path,
                                      struct rfade_error *error)
{
    struct stat about;
    size_t before = list->count;
    enum rfade_status status = RFADE_OK;
    if (stat(path, &about) != 0) {
        status = rfade_error_set(error, RFADE_STORAGE, "check the name",
                                 "there is no such file or folder");
        rfade_error_at(error, path, 0);
    } else if (S_ISDIR(about.st_mode)) {
        status = walk(list, path, 1, error);
    } else {
        status = append(list, join("", path), error);
    }
    if (status != RFADE_OK)
        cut(list, before);
    return status;
}
