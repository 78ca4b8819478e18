/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file error.h  What went wrong, where, and what to do about it: filled by the layer that
 * found out, passed up untouched, printed by the program alone.
 */
#ifndef ROUTEFADE_COMMON_ERROR_H
#define ROUTEFADE_COMMON_ERROR_H

#include <stddef.h>

#include "routefade/status.h"

struct rfade_error {
    enum rfade_status status;
    char file[512];   /**< the file it happened in; empty if none */
    size_t line;      /**< line of that file, from 1; 0 if none */
    char what[512];   /**< what went wrong */
    char remedy[512]; /**< what the user can do; empty if nothing */
};

/**
 * Fills an error and returns its status, so that a caller can `return rfade_error_set(...)`.
 * The text is made printable: control bytes become '?'. `error` may be NULL.
 */
enum rfade_status rfade_error_set(struct rfade_error *error, enum rfade_status status,
                                  const char *remedy, const char *what_format, ...)
    __attribute__((format(printf, 4, 5)));

/**
 * A file that the system refused: "what: reason of errno", RFADE_STORAGE, with `file` named.
 * errno_value 0 gives no reason.
 */
enum rfade_status rfade_error_system(struct rfade_error *error, const char *file,
                                     int errno_value, const char *remedy, const char *what);

/** Memory that ran out: RFADE_NO_MEMORY, with what the user can do. */
enum rfade_status rfade_error_no_memory(struct rfade_error *error);

/** Names the file and line of an error that is already filled. */
void rfade_error_at(struct rfade_error *error, const char *file, size_t line);

#endif
