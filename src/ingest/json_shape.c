/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/json_shape.h"

#include <string.h>

enum { LOOKED_AT_LINES = 3 };

/* Whether a line's brackets are closed at its end, and none before it. */
static bool is_value(const char *text, size_t size)
{
    size_t depth = 0;
    bool quoted = false;
    for (size_t i = 0; i < size; i++) {
        if (quoted && text[i] == '\\')
            i++;
        else if (text[i] == '"')
            quoted = !quoted;
        else if (!quoted && (text[i] == '{' || text[i] == '['))
            depth++;
        else if (!quoted && (text[i] == '}' || text[i] == ']') && (depth == 0 || --depth == 0))
            return depth == 0 && i + 1 == size;
    }
    return false;
}

bool rfade_json_is_value_a_line(const char *text, size_t size)
{
    const char *end = text + size;
    for (int looked_at = 0; looked_at < LOOKED_AT_LINES && text < end;) {
        const char *newline = memchr(text, '\n', (size_t)(end - text));
        if (!newline)
            return false;
        const char *last = newline;
        while (text < last && strchr(" \t\r", *text))
            text++;
        while (last > text && strchr(" \t\r", last[-1]))
            last--;
        if (last > text && is_value(text, (size_t)(last - text)))
            return true;
        if (last > text && *text == '[')
            return false;
        looked_at += last > text;
        text = newline + 1;
    }
    return false;
}

bool rfade_json_is_array(const char *text, size_t size)
{
    while (size > 0 && strchr(" \t\r\n", *text)) {
        text++;
        size--;
    }
    return size > 0 && *text == '[';
}
