/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/kind.h"

#include <stdbool.h>
#include <string.h>

#include "common/gpx.h"
#include "ingest/nmea.h"

/* One NUL or control byte in so many is damage; more is another kind of file. */
enum { TEXT_PER_CONTROL = 20, ARCHIVE_MAGIC_AT = 257 };

static const struct {
    const char *magic;
    size_t size;
    struct rfade_other_kind kind;
} signatures[] = {
    {"PK\x03\x04",
     4,
     {"an XLSX workbook or a ZIP archive, whatever it is called",
      "save the sheet as CSV, or unpack the archive"}},
    {"\xD0\xCF\x11\xE0", 4, {"an old spreadsheet (XLS)", "save the sheet as CSV"}},
    {"SQLite format 3", 16, {"an SQLite database", "export the log as delimited text"}},
    {"\x89PNG\r\n", 6, {"a picture (PNG)", "give the log itself"}},
    {"\xFF\xD8\xFF", 3, {"a picture (JPEG)", "give the log itself"}},
    {"GIF8", 4, {"a picture (GIF)", "give the log itself"}},
    {"7z\xBC\xAF\x27\x1C", 6, {"a 7z archive", "unpack the archive"}},
    {"Rar!\x1A\x07", 6, {"a RAR archive", "unpack the archive"}},
    {"%PDF-", 5, {"a PDF document", "export the log as delimited text"}},
    {"\xFF\xFE", 2, {"text in UTF-16", "save it as UTF-8"}},
    {"\xFE\xFF", 2, {"text in UTF-16", "save it as UTF-8"}},
    {"\xFD"
     "7zXZ",
     5,
     {"compressed with xz", "unpack it first, or compress it with gzip"}},
    {"BZh", 3, {"compressed with bzip2", "unpack it first, or compress it with gzip"}},
    {"\x28\xB5\x2F\xFD",
     4,
     {"compressed with zstd", "unpack it first, or compress it with gzip"}},
    {"\x1F\x8B", 2, {"compressed with gzip twice", "unpack it once"}},
    {"<?xml", 5, {"XML and no GPX", "export the log as delimited text, or a track as GPX"}},
    {"<", 1, {"a markup file (HTML or XML)", "export the log as delimited text"}},
};

/* { or [ and then { or [ or a text: a time in brackets begins with a digit. */
static bool is_json(const char *head, size_t size)
{
    if (size > 0 && head[0] == '{')
        return true;
    if (size == 0 || head[0] != '[')
        return false;
    size_t i = 1;
    while (i < size && strchr(" \t\r\n", head[i]))
        i++;
    return i < size && strchr("{[\"", head[i]);
}

static bool is_binary(const char *head, size_t size)
{
    size_t controls = 0;
    for (size_t i = 0; i < size; i++) {
        unsigned char byte = (unsigned char)head[i];
        controls += byte < 0x20 && byte != '\t' && byte != '\n' && byte != '\r' && byte != '\f';
    }
    return controls > 16 + size / TEXT_PER_CONTROL;
}

static size_t blanks(const char *head, size_t size)
{
    size_t count = 0;
    while (count < size && head[count] && strchr(" \t\r\n", head[count]))
        count++;
    return count;
}

static bool is_gpx(const char *text, size_t size)
{
    return size > 0 && *text == '<' && rfade_gpx_is_gpx(text, size);
}

struct rfade_other_kind rfade_other_kind(const char *head, size_t size)
{
    const char *text = head + blanks(head, size);
    size_t left = size - blanks(head, size);
    if (is_gpx(text, left))
        return (struct rfade_other_kind){NULL, NULL};
    for (size_t i = 0; i < sizeof signatures / sizeof signatures[0]; i++)
        if (left >= signatures[i].size &&
            memcmp(text, signatures[i].magic, signatures[i].size) == 0)
            return signatures[i].kind;
    if (size > ARCHIVE_MAGIC_AT + 5 && memcmp(head + ARCHIVE_MAGIC_AT, "ustar", 5) == 0)
        return (struct rfade_other_kind){"a tar archive", "unpack it"};
    if (is_binary(head, size))
        return (struct rfade_other_kind){"binary, not text",
                                         "export the log as delimited text"};
    return (struct rfade_other_kind){NULL, NULL};
}

enum rfade_log_format rfade_log_format_of(const char *head, size_t size)
{
    size_t skipped = blanks(head, size);
    if (is_json(head + skipped, size - skipped))
        return RFADE_FORMAT_JSON;
    if (is_gpx(head + skipped, size - skipped))
        return RFADE_FORMAT_GPX;
    return rfade_nmea_is_log(head, size) ? RFADE_FORMAT_NMEA : RFADE_FORMAT_DELIMITED;
}
