/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/map_value.h"

#include <math.h>
#include <string.h>

#include "common/text.h"
#include "ingest/column_map_parts.h"
#include "ingest/number.h"

bool rfade_map_number(const char *value, double low, double high, double *number)
{
    double read = NAN;
    if (!rfade_text_to_double(value, &read) || !(read >= low && read <= high))
        return false;
    *number = read;
    return true;
}

bool rfade_map_count(const char *value, size_t low, size_t high, size_t *count)
{
    struct rfade_decimal decimal;
    int64_t read = 0;
    if (value[0] < '0' || value[0] > '9' || strspn(value, "0123456789") != strlen(value) ||
        !rfade_decimal_read(value, strlen(value), '.', &decimal) ||
        !rfade_decimal_scaled(&decimal, 0, &read) || (uint64_t)read < low ||
        (uint64_t)read > high)
        return false;
    *count = (size_t)read;
    return true;
}

int rfade_map_word(const char *const *words, const char *value)
{
    for (int i = 0; words[i]; i++)
        if (strcmp(words[i], value) == 0)
            return i;
    return -1;
}

bool rfade_map_text(char *target, size_t size, const char *value)
{
    size_t length = strlen(value);
    if (length == 0 || length >= size)
        return false;
    memcpy(target, value, length + 1);
    return true;
}

bool rfade_map_set_name(void *target, const char *value)
{
    return rfade_map_text(target, RFADE_NAME_SIZE, value);
}

/* A number, a name, or a name in double quotes. */
bool rfade_map_set_column(void *target, const char *value)
{
    struct rfade_column *column = target;
    size_t length = strlen(value);
    if (length > 0 && strspn(value, "0123456789") == length)
        return rfade_map_count(value, 1, RFADE_MOST_COLUMNS, &column->number);
    if (length < 2 || value[0] != '"' || value[length - 1] != '"')
        return rfade_map_text(column->name, sizeof column->name, value);
    if (!rfade_map_text(column->name, sizeof column->name, value + 1) || length == 2)
        return false;
    column->name[length - 2] = '\0';
    return true;
}

bool rfade_map_set_sentinels(void *target, const char *value)
{
    struct rfade_sentinels *sentinels = target;
    while (sentinels->count < RFADE_MOST_SENTINELS) {
        value += strspn(value, " \t");
        size_t length = strcspn(value, ",");
        const char *next = value + length;
        while (length > 0 && (value[length - 1] == ' ' || value[length - 1] == '\t'))
            length--;
        if (length == 0 || length >= RFADE_SENTINEL_SIZE)
            return false;
        char *text = sentinels->texts[sentinels->count];
        memcpy(text, value, length);
        text[length] = '\0';
        (void)rfade_text_to_double(text, &sentinels->values[sentinels->count++]);
        if (*next == '\0')
            return true;
        value = next + 1;
    }
    return false;
}

const char rfade_map_column_remedy[] =
    "give a column's name as in the header, or its number from 1 on";
const char rfade_map_name_remedy[] = "give a name of at most 127 bytes";
const char rfade_map_sentinel_remedy[] = "give at most 16 values, joined by commas";
