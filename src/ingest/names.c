/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/names.h"

#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "common/text.h"
#include "ingest/column_map_parts.h"

/* More different names than that are readings taken for names. */
enum { MOST_NAMES = 4096, SLOT_COUNT = 2 * MOST_NAMES };

struct entry {
    size_t size;
    char text[]; /* with a NUL */
};

struct rfade_name_table {
    size_t count;
    struct entry *latest; /* rows tend to repeat it */
    struct entry *slots[SLOT_COUNT];
};

struct rfade_name_table *rfade_name_table_create(void)
{
    return calloc(1, sizeof(struct rfade_name_table));
}

void rfade_name_table_destroy(struct rfade_name_table *table)
{
    if (!table)
        return;
    for (size_t i = 0; i < SLOT_COUNT; i++)
        free(table->slots[i]);
    free(table);
}

static bool is(const struct entry *entry, const char *text, size_t size)
{
    return entry->size == size && memcmp(entry->text, text, size) == 0;
}

/* FNV-1a (Fowler, Noll and Vo), 32 bits. */
static uint32_t hash(const char *text, size_t size)
{
    uint32_t value = UINT32_C(2166136261);
    for (size_t i = 0; i < size; i++)
        value = (value ^ (unsigned char)text[i]) * UINT32_C(16777619);
    return value;
}

/* Nothing in it that would have to be replaced to be shown. */
static bool is_text(const char *text, size_t size)
{
    char shown[RFADE_NAME_SIZE];
    if (memchr(text, '\0', size))
        return false;
    memcpy(shown, text, size);
    shown[size] = '\0';
    rfade_text_printable(shown);
    return strlen(shown) == size && memcmp(shown, text, size) == 0;
}

const char *rfade_name_keep(struct rfade_name_table *table, const char *text, size_t size,
                            const char **name)
{
    *name = NULL;
    if (table->latest && is(table->latest, text, size)) {
        *name = table->latest->text;
        return NULL;
    }
    if (size == 0)
        return "is empty";
    if (size >= RFADE_NAME_SIZE)
        return "is too long for a name";
    size_t slot = hash(text, size) % SLOT_COUNT;
    while (table->slots[slot] && !is(table->slots[slot], text, size))
        slot = (slot + 1) % SLOT_COUNT;
    if (!table->slots[slot]) {
        if (!is_text(text, size))
            return "is not text";
        if (table->count == MOST_NAMES)
            return "is one of more than 4096 different names";
        struct entry *entry = malloc(sizeof *entry + size + 1);
        if (!entry)
            return "found no memory";
        entry->size = size;
        memcpy(entry->text, text, size);
        entry->text[size] = '\0';
        table->slots[slot] = entry;
        table->count++;
    }
    table->latest = table->slots[slot];
    *name = table->latest->text;
    return NULL;
}
