/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/zone.h"

#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ingest/zone_rule.h"

/* A day and two hours: no zone is further from UTC (RFC 8536, 3.2). */
enum { MOST_OFFSET_S = 26 * 3600, MOST_FILE_SIZE = 1 << 20, HEADER_SIZE = 44 };

static const char zone_directory[] = "/usr/share/zoneinfo/";
static const char name_remedy[] =
    "write UTC, an offset such as +01:00, or a name of the IANA time zone database such as "
    "Europe/Berlin";

struct transition {
    int64_t time_s;
    int32_t offset_s; /* from then on */
};

struct rfade_zone {
    int32_t first_offset_s; /* before all transitions */
    size_t count;
    struct transition *transitions;
    bool has_rule;
    struct rfade_zone_rule rule; /* after all transitions */
};

void rfade_zone_destroy(struct rfade_zone *zone)
{
    if (zone)
        free(zone->transitions);
    free(zone);
}

/* Big-endian two's complement of `size` bytes. */
static int64_t big_endian(const unsigned char *bytes, size_t size)
{
    uint64_t value = bytes[0] & 0x80 ? UINT64_MAX : 0;
    for (size_t i = 0; i < size; i++)
        value = value << 8 | bytes[i];
    return (int64_t)value;
}

/* The six counts of a TZif header (RFC 8536, 3.1). */
struct counts {
    size_t isut, isstd, leap, time, type, character;
};

static bool read_header(const unsigned char *bytes, size_t size, struct counts *counts)
{
    if (size < HEADER_SIZE || memcmp(bytes, "TZif", 4) != 0 || bytes[4] < '2')
        return false;
    size_t *fields[6] = {&counts->isut, &counts->isstd, &counts->leap,
                         &counts->time, &counts->type,  &counts->character};
    for (size_t i = 0; i < 6; i++) {
        *fields[i] = (uint32_t)big_endian(bytes + 20 + 4 * i, 4);
        if (*fields[i] > MOST_FILE_SIZE)
            return false;
    }
    return true;
}

static size_t block_size(const struct counts *counts, size_t time_size)
{
    return counts->time * (time_size + 1) + counts->type * 6 + counts->character +
           counts->leap * (time_size + 4) + counts->isstd + counts->isut;
}

static bool is_offset(int32_t offset_s)
{
    return offset_s >= -MOST_OFFSET_S && offset_s <= MOST_OFFSET_S;
}

/* Takes the transitions of a version 2 block. */
static bool take_transitions(struct rfade_zone *zone, const unsigned char *block,
                             const struct counts *counts)
{
    const unsigned char *types = block + counts->time * 8;
    const unsigned char *infos = types + counts->time;
    zone->first_offset_s = (int32_t)big_endian(infos, 4);
    zone->count = counts->time;
    for (size_t i = 0; i < counts->time; i++) {
        if (types[i] >= counts->type)
            return false;
        struct transition *transition = &zone->transitions[i];
        transition->time_s = big_endian(block + 8 * i, 8);
        transition->offset_s = (int32_t)big_endian(infos + 6 * (size_t)types[i], 4);
        if (!is_offset(transition->offset_s) ||
            (i > 0 && transition->time_s <= transition[-1].time_s))
            return false;
    }
    return is_offset(zone->first_offset_s);
}

/* The line between two newlines after the second block. */
static bool take_rule(struct rfade_zone *zone, const unsigned char *footer, size_t size)
{
    char text[128];
    if (size < 2 || footer[0] != '\n')
        return false;
    const unsigned char *end = memchr(footer + 1, '\n', size - 1);
    if (!end || (size_t)(end - footer) > sizeof text)
        return false;
    size_t length = (size_t)(end - footer - 1);
    if (memchr(footer + 1, '\0', length))
        return false;
    memcpy(text, footer + 1, length);
    text[length] = '\0';
    zone->has_rule = length > 0;
    return length == 0 || rfade_zone_rule_read(text, &zone->rule);
}

static bool take_file(struct rfade_zone *zone, const unsigned char *bytes, size_t size)
{
    struct counts counts;
    if (!read_header(bytes, size, &counts))
        return false;
    size_t skipped = HEADER_SIZE + block_size(&counts, 4);
    if (skipped > size || !read_header(bytes + skipped, size - skipped, &counts))
        return false;
    const unsigned char *block = bytes + skipped + HEADER_SIZE;
    size_t left = size - skipped - HEADER_SIZE;
    /* Leap seconds are in the "right" zones only, whose clocks are not UTC. */
    if (block_size(&counts, 8) > left || counts.type == 0 || counts.leap != 0)
        return false;
    zone->transitions = calloc(counts.time + 1, sizeof *zone->transitions);
    if (!zone->transitions || !take_transitions(zone, block, &counts))
        return false;
    size_t used = block_size(&counts, 8);
    return take_rule(zone, block + used, left - used);
}

enum rfade_status rfade_zone_from_tzif(const unsigned char *bytes, size_t size,
                                       struct rfade_zone **zone, struct rfade_error *error)
{
    *zone = NULL;
    struct rfade_zone *made = calloc(1, sizeof *made);
    if (!made)
        return rfade_error_no_memory(error);
    if (!take_file(made, bytes, size)) {
        rfade_zone_destroy(made);
        return rfade_error_set(error, RFADE_INPUT, name_remedy, "not a usable time zone file");
    }
    *zone = made;
    return RFADE_OK;
}

static enum rfade_status no_zone(const char *name, struct rfade_error *error)
{
    return rfade_error_set(error, RFADE_INPUT, name_remedy, "there is no time zone '%.64s'",
                           name);
}

/* Letters, digits and _ + - in parts joined by single slashes: never a way out of the folder.
 */
static bool is_zone_name(const char *name)
{
    static const char allowed[] =
        "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789_+-/";
    size_t length = strlen(name);
    return length > 0 && length <= 64 && strspn(name, allowed) == length && name[0] != '/' &&
           name[length - 1] != '/' && !strstr(name, "//");
}

static enum rfade_status read_named(const char *name, struct rfade_zone **zone,
                                    struct rfade_error *error)
{
    char path[sizeof zone_directory + 64];
    if (!is_zone_name(name))
        return no_zone(name, error);
    (void)snprintf(path, sizeof path, "%s%s", zone_directory, name);
    FILE *file = fopen(path, "rb");
    if (!file)
        return no_zone(name, error);
    enum rfade_status status = RFADE_OK;
    unsigned char *bytes = malloc(MOST_FILE_SIZE);
    if (!bytes) {
        status = rfade_error_no_memory(error);
        goto out;
    }
    size_t size = fread(bytes, 1, MOST_FILE_SIZE, file);
    if (size == 0) /* a folder, for instance */
        status = no_zone(name, error);
    else
        status = rfade_zone_from_tzif(bytes, size, zone, error);
out:
    free(bytes);
    (void)fclose(file);
    return status;
}

static int two_digits(const char *text)
{
    if (text[0] < '0' || text[0] > '9' || text[1] < '0' || text[1] > '9')
        return -1;
    return (text[0] - '0') * 10 + (text[1] - '0');
}

/* +h, +hh, +hhmm or +hh:mm */
static bool read_offset(const char *name, int32_t *offset_s)
{
    size_t length = strlen(name);
    int hours = 0;
    int minutes = 0;
    *offset_s = 0;
    if (name[0] != '+' && name[0] != '-')
        return false;
    const char *digits = name + 1;
    if (length == 2 && digits[0] >= '0' && digits[0] <= '9')
        hours = digits[0] - '0';
    else if (length >= 3)
        hours = two_digits(digits);
    else
        return false;
    if (length == 5)
        minutes = two_digits(digits + 2);
    else if (length == 6 && digits[2] == ':')
        minutes = two_digits(digits + 3);
    else if (length > 3)
        return false;
    if (hours < 0 || hours > 15 || minutes < 0 || minutes > 59)
        return false;
    *offset_s = (name[0] == '-' ? -1 : 1) * (hours * 3600 + minutes * 60);
    return true;
}

enum rfade_status rfade_zone_create(const char *name, struct rfade_zone **zone,
                                    struct rfade_error *error)
{
    *zone = NULL;
    int32_t offset_s = 0;
    if (strcmp(name, "UTC") != 0 && strcmp(name, "Z") != 0 && !read_offset(name, &offset_s))
        return read_named(name, zone, error);
    *zone = calloc(1, sizeof **zone);
    if (!*zone)
        return rfade_error_no_memory(error);
    (*zone)->first_offset_s = offset_s;
    return RFADE_OK;
}

struct rfade_zone_span rfade_zone_span(const struct rfade_zone *zone, int64_t time_s)
{
    size_t low = 0; /* transitions[low - 1] <= time_s < transitions[high] */
    size_t high = zone->count;
    while (low < high) {
        size_t middle = low + (high - low) / 2;
        if (zone->transitions[middle].time_s <= time_s)
            low = middle + 1;
        else
            high = middle;
    }
    struct rfade_zone_span span = {INT64_MIN, INT64_MAX, zone->first_offset_s};
    if (low == zone->count && zone->has_rule)
        span = rfade_zone_rule_span(&zone->rule, time_s);
    else if (low > 0)
        span.offset_s = zone->transitions[low - 1].offset_s;
    if (low > 0 && zone->transitions[low - 1].time_s > span.from_s)
        span.from_s = zone->transitions[low - 1].time_s;
    if (low < zone->count)
        span.until_s = zone->transitions[low].time_s;
    return span;
}

/* Whether a clock in the span shows `local_s`, and at what UTC second. */
static bool shows(struct rfade_zone_span span, int64_t local_s, int64_t *time_s)
{
    *time_s = local_s - span.offset_s;
    return *time_s >= span.from_s && *time_s < span.until_s;
}

int rfade_zone_times(const struct rfade_zone *zone, int64_t local_s, int64_t times_s[2],
                     struct rfade_zone_span spans[2])
{
    int count = 0;
    int64_t latest = local_s + MOST_OFFSET_S;
    struct rfade_zone_span span = rfade_zone_span(zone, local_s - MOST_OFFSET_S);
    for (;;) {
        int64_t time_s = 0;
        if (shows(span, local_s, &time_s)) {
            times_s[count] = time_s;
            spans[count++] = span;
        }
        if (count == 2 || span.until_s > latest)
            return count;
        span = rfade_zone_span(zone, span.until_s);
    }
}
