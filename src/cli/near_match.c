/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "cli/options.h"

enum { LONGEST = 63 };

static size_t smallest(size_t a, size_t b, size_t c)
{
    size_t smaller = a < b ? a : b;
    return smaller < c ? smaller : c;
}

/* Edits that turn one word into the other [Levenshtein 1966]; LONGEST for long words. */
static size_t edit_distance(const char *left, const char *right)
{
    size_t left_length = strlen(left), right_length = strlen(right);
    if (left_length > LONGEST || right_length > LONGEST)
        return LONGEST;
    size_t row[LONGEST + 1];
    for (size_t j = 0; j <= right_length; j++)
        row[j] = j;
    for (size_t i = 1; i <= left_length; i++) {
        size_t diagonal = row[0];
        row[0] = i;
        for (size_t j = 1; j <= right_length; j++) {
            size_t replaced = diagonal + (left[i - 1] != right[j - 1]);
            diagonal = row[j];
            row[j] = smallest(row[j] + 1, row[j - 1] + 1, replaced);
        }
    }
    return row[right_length];
}

const char *rfade_near_match(const char *mistyped,
                             const char *(*name_at)(const void *context, size_t index),
                             const void *context)
{
    const char *nearest = NULL;
    size_t nearest_distance = strlen(mistyped) / 3 + 1; /* one edit in three characters */
    for (size_t i = 0; name_at(context, i); i++) {
        size_t distance = edit_distance(mistyped, name_at(context, i));
        if (distance <= nearest_distance && (!nearest || distance < nearest_distance)) {
            nearest = name_at(context, i);
            nearest_distance = distance;
        }
    }
    return nearest;
}
