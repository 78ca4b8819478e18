/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file walk.h  The logger files of a path: itself, or all below a folder in a fixed order. */
#ifndef ROUTEFADE_INGEST_WALK_H
#define ROUTEFADE_INGEST_WALK_H

#include <stddef.h>

#include "common/error.h"

/** Paths, each owned by the list. Start with {0}. */
struct rfade_path_list {
    char **paths;
    size_t count;
    size_t capacity;
};

/**
 * Appends a file's own path, or all regular files in a folder and the folders below it, by
 * bytes of their names. Names that begin with a dot and symbolic links inside a folder are
 * left out: the first are no logger files, the second lead out of the folder or round in it.
 * @return RFADE_OK, RFADE_STORAGE (missing, unreadable), RFADE_INPUT (nested too deeply),
 *     RFADE_NO_MEMORY; on failure the list is as before.
 */
enum rfade_status rfade_path_list_add(struct rfade_path_list *list, const char *path,
                                      struct rfade_error *error);
void rfade_path_list_clear(struct rfade_path_list *list);

#endif
