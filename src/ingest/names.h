/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file names.h  The names that stand in a log's columns, each kept once: a row's vehicle or
 * channel is a pointer that stays the same as long as the text does.
 */
#ifndef ROUTEFADE_INGEST_NAMES_H
#define ROUTEFADE_INGEST_NAMES_H

#include <stddef.h>

struct rfade_name_table; /* opaque */

struct rfade_name_table *rfade_name_table_create(void); /* NULL: no memory */
void rfade_name_table_destroy(struct rfade_name_table *table);

/**
 * @param[out] name  the text as a string, valid until the table is destroyed; NULL on failure
 * @return NULL, or a reason why it can't be a name: empty, not text, too long, or one of too
 *     many different ones (a plain clause, static storage)
 */
const char *rfade_name_keep(struct rfade_name_table *table, const char *text, size_t size,
                            const char **name);

#endif
