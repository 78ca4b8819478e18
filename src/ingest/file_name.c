/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/file_name.h"

#include <string.h>

#include "common/text.h"
#include "ingest/time_text.h"

/* A name that takes longer to match is taken for one that doesn't. */
enum { MOST_STEPS = 200000, DATE_SIZE = 10 };

static const char *const part_names[RFADE_PARTS] = {"{vehicle}", "{channel}",  "{campaign}",
                                                    "{date}",    "{latitude}", "{longitude}",
                                                    "{x}",       "{y}"};

/* Index of the part that a pattern goes on with; RFADE_PARTS if with none. */
static size_t part_at(const char *pattern)
{
    size_t part = 0;
    while (part < RFADE_PARTS &&
           strncmp(pattern, part_names[part], strlen(part_names[part])) != 0)
        part++;
    return part;
}

bool rfade_name_pattern_has(const char *pattern, enum rfade_name_part part)
{
    return strstr(pattern, part_names[part]) != NULL;
}

const char *rfade_name_pattern_check(const char *pattern)
{
    unsigned seen = 0;
    if (strchr(pattern, '/'))
        return "has a folder in it";
    for (const char *at = pattern; *at; at++) {
        if (*at == '}')
            return "has a stray brace";
        if (*at != '{')
            continue;
        size_t part = part_at(at);
        if (part == RFADE_PARTS)
            return "has a part in braces that is not known";
        if (seen & 1U << part)
            return "has a part twice";
        seen |= 1U << part;
        at += strlen(part_names[part]) - 1;
    }
    return NULL;
}

bool rfade_name_date(const char *text, int64_t *days)
{
    char plain[DATE_SIZE + 1] = "";
    struct rfade_clock_time time;
    size_t size = strlen(text);
    if (size > DATE_SIZE || size < 8)
        return false;
    memcpy(plain, text, size + 1);
    bool joined = size == 8 && strspn(plain, "0123456789") == 8;
    bool parted = size == DATE_SIZE && plain[4] == plain[7] && strchr("-_.", plain[4]);
    if (parted)
        plain[4] = plain[7] = '-';
    if ((!joined && !parted) ||
        rfade_time_pattern(joined ? "%Y%m%d" : "%Y-%m-%d", plain, size, &time))
        return false;
    *days = time.days;
    return true;
}

static bool is_good(size_t part, const char *text)
{
    int64_t days = 0;
    double value = 0;
    if (part == RFADE_PART_DATE)
        return rfade_name_date(text, &days);
    return part < RFADE_PART_LATITUDE || rfade_text_to_double(text, &value);
}

static bool match(const char *pattern, const char *name, struct rfade_name_parts *parts,
                  size_t *steps);

/* A part, and then what follows it. */
static bool match_part(size_t part, const char *rest, const char *name,
                       struct rfade_name_parts *parts, size_t *steps)
{
    char *text = parts->texts[part];
    size_t longest = strlen(name);
    for (size_t size = 1; size <= longest && size < RFADE_NAME_SIZE; size++) {
        memcpy(text, name, size);
        text[size] = '\0';
        if (is_good(part, text) && match(rest, name + size, parts, steps))
            return true;
    }
    return false;
}

static bool match(const char *pattern, const char *name, struct rfade_name_parts *parts,
                  size_t *steps)
{
    for (;; pattern++, name++) {
        if (++*steps > MOST_STEPS)
            return false;
        size_t part = part_at(pattern);
        if (part < RFADE_PARTS)
            return match_part(part, pattern + strlen(part_names[part]), name, parts, steps);
        if (*pattern == '*') {
            do
                if (match(pattern + 1, name, parts, steps))
                    return true;
            while (*name++);
            return false;
        }
        if (*pattern == '\0' || *name == '\0')
            return *pattern == *name;
        if (*pattern != '?' && *pattern != *name)
            return false;
    }
}

bool rfade_name_match(const char *pattern, const char *name, struct rfade_name_parts *parts)
{
    size_t steps = 0;
    *parts = (struct rfade_name_parts){0};
    return match(pattern, name, parts, &steps);
}
