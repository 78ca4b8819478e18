/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/row_spread.h"

#include <stdlib.h>
#include <string.h>

enum { MOST_ROWS = 4096, KEPT_TEXT = 200, SECOND_US = 1000000 };

struct waiting {
    struct rfade_row row;
    bool usable;
    size_t line;
    size_t text_size;
    char text[KEPT_TEXT];
};

struct rfade_row_spread {
    enum rfade_status (*pass)(void *context, const struct rfade_row *row, bool usable,
                              const struct rfade_line *line, struct rfade_error *error);
    void *context;
    size_t count;
    size_t capacity;
    struct waiting *rows; /* all with the time of the first */
};

struct rfade_row_spread *rfade_row_spread_create(
    enum rfade_status (*pass)(void *context, const struct rfade_row *row, bool usable,
                              const struct rfade_line *line, struct rfade_error *error),
    void *context)
{
    struct rfade_row_spread *spread = calloc(1, sizeof *spread);
    if (spread) {
        spread->pass = pass;
        spread->context = context;
    }
    return spread;
}

void rfade_row_spread_destroy(struct rfade_row_spread *spread)
{
    if (spread)
        free(spread->rows);
    free(spread);
}

enum rfade_status rfade_row_spread_flush(struct rfade_row_spread *spread,
                                         struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; i < spread->count && status == RFADE_OK; i++) {
        struct waiting *waiting = &spread->rows[i];
        const struct rfade_line line = {.text = waiting->text,
                                        .size = waiting->text_size,
                                        .number = waiting->line,
                                        .ended = true};
        waiting->row.time_us += (int64_t)(i * SECOND_US / spread->count);
        status = spread->pass(spread->context, &waiting->row, waiting->usable, &line, error);
    }
    spread->count = 0;
    return status;
}

static enum rfade_status wait(struct rfade_row_spread *spread, const struct rfade_row *row,
                              bool usable, const struct rfade_line *line,
                              struct rfade_error *error)
{
    if (spread->count == MOST_ROWS) {
        (void)rfade_error_set(error, RFADE_INPUT, "leave out `spread = yes`",
                              "more than 4096 rows have one stamp");
        rfade_error_at(error, NULL, line->number);
        return RFADE_INPUT;
    }
    if (spread->count == spread->capacity) {
        size_t capacity = 2 * spread->capacity + 16;
        struct waiting *grown = realloc(spread->rows, capacity * sizeof *grown);
        if (!grown)
            return rfade_error_no_memory(error);
        spread->rows = grown;
        spread->capacity = capacity;
    }
    struct waiting *waiting = &spread->rows[spread->count++];
    waiting->row = *row;
    waiting->usable = usable;
    waiting->line = line->number;
    waiting->text_size = line->size < KEPT_TEXT ? line->size : KEPT_TEXT;
    memcpy(waiting->text, line->text, waiting->text_size);
    return RFADE_OK;
}

enum rfade_status rfade_row_spread_add(struct rfade_row_spread *spread, int64_t offset_us,
                                       const struct rfade_row *row, bool usable,
                                       const struct rfade_line *line, struct rfade_error *error)
{
    if (row->time_us == 0) /* its time could not be read */
        return spread->pass(spread->context, row, usable, line, error);
    enum rfade_status status = RFADE_OK;
    if (spread->count > 0 && spread->rows[0].row.time_us != row->time_us)
        status = rfade_row_spread_flush(spread, error);
    if (status != RFADE_OK)
        return status;
    if ((row->time_us - offset_us) % SECOND_US == 0)
        return wait(spread, row, usable, line, error);
    return spread->pass(spread->context, row, usable, line, error);
}
