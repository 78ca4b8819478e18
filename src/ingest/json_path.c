/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/json_path.h"

#include <string.h>

enum { MOST_INDEX_DIGITS = 9 };

/* Each reads one step and returns what follows it; NULL if it is none. */

static const char *read_index(const char *at, struct rfade_json_step *step)
{
    size_t digits = strspn(at, "0123456789");
    step->index = RFADE_ANY_INDEX;
    if (*at == '*')
        return at[1] == ']' ? at + 2 : NULL;
    if (at[0] == '#' && at[1] == '-') {
        step->index = RFADE_FROM_END;
        digits = strspn(at + 2, "0123456789");
        return digits > 0 && at[2 + digits] == ']' ? at + digits + 3 : NULL;
    }
    if (digits == 0 || digits > MOST_INDEX_DIGITS || at[digits] != ']')
        return NULL;
    step->index = 0;
    for (size_t i = 0; i < digits; i++)
        step->index = step->index * 10 + (size_t)(at[i] - '0');
    return at + digits + 1;
}

static const char *read_name(const char *at, struct rfade_json_step *step)
{
    bool quoted = *at == '"';
    step->name = at + quoted;
    step->name_size = strcspn(step->name, quoted ? "\"" : ".[");
    const char *end = step->name + step->name_size;
    if (step->name_size == 0 || (quoted && *end != '"'))
        return NULL;
    return end + quoted;
}

static bool read_path(const char *text, struct rfade_json_path *path)
{
    *path = (struct rfade_json_path){0};
    if (*text != '$')
        return false;
    const char *at = text + 1;
    while (*at) {
        if (path->count == RFADE_MOST_JSON_STEPS)
            return false;
        struct rfade_json_step *step = &path->steps[path->count++];
        if (*at == '[')
            at = read_index(at + 1, step);
        else
            at = *at == '.' ? read_name(at + 1, step) : NULL;
        if (!at)
            return false;
    }
    return true;
}

static bool has_index(const struct rfade_json_path *path, size_t index)
{
    for (size_t i = 0; i < path->count; i++)
        if (!path->steps[i].name && path->steps[i].index == index)
            return true;
    return false;
}

bool rfade_json_path_read(const char *text, struct rfade_json_path *path)
{
    return read_path(text, path) && !has_index(path, RFADE_FROM_END);
}

bool rfade_json_path_is_value(const char *text)
{
    struct rfade_json_path path;
    return read_path(text, &path) && !has_index(&path, RFADE_ANY_INDEX);
}
