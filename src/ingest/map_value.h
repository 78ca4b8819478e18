/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file map_value.h  The values of a column map's keys, as the key tables read them. Pure. */
#ifndef ROUTEFADE_INGEST_MAP_VALUE_H
#define ROUTEFADE_INGEST_MAP_VALUE_H

#include <stdbool.h>
#include <stddef.h>

/** Each returns false for a value that says nothing that can be used. */

/** A number with a decimal point in [low, high]. */
bool rfade_map_number(const char *value, double low, double high, double *number);

/** Digits alone, in [low, high]. */
bool rfade_map_count(const char *value, size_t low, size_t high, size_t *count);

/** A text that isn't empty and has room with its NUL. */
bool rfade_map_text(char *target, size_t size, const char *value);

/** Index of a word in a list that ends with NULL; -1 if it is not there. */
int rfade_map_word(const char *const *words, const char *value);

/** Setters of rfade_map_key for a name of RFADE_NAME_SIZE and a struct rfade_column. */
bool rfade_map_set_name(void *target, const char *value);
bool rfade_map_set_column(void *target, const char *value);

/** Of a struct rfade_sentinels: values between commas. */
bool rfade_map_set_sentinels(void *target, const char *value);

extern const char rfade_map_column_remedy[];
extern const char rfade_map_name_remedy[];
extern const char rfade_map_sentinel_remedy[];

#endif
