/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "common/error.h"

#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include "common/text.h"

enum rfade_status rfade_error_set(struct rfade_error *error, enum rfade_status status,
                                  const char *remedy, const char *what_format, ...)
{
    if (!error)
        return status;
    *error = (struct rfade_error){.status = status};
    va_list arguments;
    va_start(arguments, what_format);
    (void)vsnprintf(error->what, sizeof error->what, what_format, arguments);
    va_end(arguments);
    (void)snprintf(error->remedy, sizeof error->remedy, "%s", remedy ? remedy : "");
    rfade_text_printable(error->what);
    rfade_text_printable(error->remedy);
    return status;
}

enum rfade_status rfade_error_no_memory(struct rfade_error *error)
{
    return rfade_error_set(error, RFADE_NO_MEMORY, "close other programs", "memory ran out");
}

void rfade_error_at(struct rfade_error *error, const char *file, size_t line)
{
    if (!error)
        return;
    (void)snprintf(error->file, sizeof error->file, "%s", file ? file : "");
    rfade_text_printable(error->file);
    error->line = line;
}

enum rfade_status rfade_error_system(struct rfade_error *error, const char *file,
                                     int errno_value, const char *remedy, const char *what)
{
    char reason[128] = "";
    if (errno_value == 0)
        (void)rfade_error_set(error, RFADE_STORAGE, remedy, "%s", what);
    else if (strerror_r(errno_value, reason, sizeof reason) != 0)
        (void)rfade_error_set(error, RFADE_STORAGE, remedy, "%s: error %d", what, errno_value);
    else
        (void)rfade_error_set(error, RFADE_STORAGE, remedy, "%s: %s", what, reason);
    rfade_error_at(error, file, 0);
    return RFADE_STORAGE;
}
