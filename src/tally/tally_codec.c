/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Byte form of a tally, numbers as varint.h says:
 *   byte 'T', byte 1 (version), unsigned number of cells, then for each cell in key order
 *   six signed numbers: step, kind, centre and class, each less that of the cell before
 *   (0 before the first), weight, readings.
 * There is one form for one content; decoding refuses everything else.
 */
#include <stdlib.h>

#include "tally/checked.h"
#include "tally/tally_private.h"
#include "tally/varint.h"

enum { MARK = 'T', VERSION = 1, CELL_BYTES_MIN = 6 };

enum rfade_status rfade_tally_encode(const struct rfade_tally *tally, uint8_t **bytes,
                                     size_t *size)
{
    struct rfade_writer writer = {NULL, 0, 0, false};
    struct rfade_tally_key before = {0, 0, 0, 0};
    *bytes = NULL;
    *size = 0;
    rfade_write_byte(&writer, MARK);
    rfade_write_byte(&writer, VERSION);
    rfade_write_unsigned(&writer, tally->count);
    for (size_t i = 0; i < tally->count; i++) {
        const struct rfade_tally_cell *cell = &tally->cells[i];
        rfade_write_signed(&writer, (int64_t)cell->key.step_cdb - before.step_cdb);
        rfade_write_signed(&writer, (int64_t)cell->key.kind - before.kind);
        rfade_write_signed(&writer, (int64_t)cell->key.centre_cdb - before.centre_cdb);
        rfade_write_signed(&writer, (int64_t)cell->key.window_class - before.window_class);
        rfade_write_signed(&writer, cell->weight);
        rfade_write_signed(&writer, cell->readings);
        before = cell->key;
    }
    if (writer.failed) {
        free(writer.bytes);
        return RFADE_NO_MEMORY;
    }
    *bytes = writer.bytes;
    *size = writer.size;
    return RFADE_OK;
}

/* The field that lies `before` plus the next number; the reader fails if it isn't 32 bits. */
static int32_t read_field(struct rfade_reader *reader, int32_t before)
{
    int64_t value = 0;
    if (!rfade_checked_add(rfade_read_signed(reader), before, &value) || value < INT32_MIN ||
        value > INT32_MAX) {
        reader->failed = true;
        return 0;
    }
    return (int32_t)value;
}

/* The next cell, appended; false if it is malformed. */
static bool read_cell(struct rfade_reader *reader, struct rfade_tally *tally)
{
    static const struct rfade_tally_key origin = {0, 0, 0, 0};
    bool first = tally->count == 0;
    struct rfade_tally_key before = first ? origin : tally->cells[tally->count - 1].key;
    struct rfade_tally_cell cell;
    cell.key.step_cdb = read_field(reader, before.step_cdb);
    cell.key.kind = read_field(reader, before.kind);
    cell.key.centre_cdb = read_field(reader, before.centre_cdb);
    cell.key.window_class = read_field(reader, before.window_class);
    cell.weight = rfade_read_signed(reader);
    cell.readings = rfade_read_signed(reader);
    if (reader->failed || !rfade_tally_key_valid(&cell.key) ||
        (!first && rfade_tally_key_compare(&before, &cell.key) >= 0) ||
        (cell.weight == 0 && cell.readings == 0) ||
        !rfade_checked_add(tally->weight, cell.weight, &tally->weight) ||
        !rfade_checked_add(tally->readings, cell.readings, &tally->readings)) {
        return false;
    }
    tally->cells[tally->count++] = cell;
    return true;
}

enum rfade_status rfade_tally_decode(const uint8_t *bytes, size_t size,
                                     struct rfade_tally **tally)
{
    struct rfade_reader reader = {bytes, size, 0, false};
    struct rfade_tally *read = NULL;
    *tally = NULL;
    if (rfade_read_byte(&reader) != MARK || rfade_read_byte(&reader) != VERSION) {
        return RFADE_INPUT;
    }
    uint64_t count = rfade_read_unsigned(&reader);
    /* A length that the bytes can't hold must not decide how much is allocated. */
    if (reader.failed || count > (size - reader.position) / CELL_BYTES_MIN) {
        return RFADE_INPUT;
    }
    enum rfade_status status = rfade_tally_create(&read);
    if (status != RFADE_OK) {
        return status;
    }
    if (count > 0) {
        read->cells = malloc((size_t)count * sizeof *read->cells);
        status = read->cells == NULL ? RFADE_NO_MEMORY : RFADE_OK;
        read->capacity = read->cells == NULL ? 0 : (size_t)count;
    }
    for (uint64_t i = 0; status == RFADE_OK && i < count; i++) {
        status = read_cell(&reader, read) ? RFADE_OK : RFADE_INPUT;
    }
    if (status == RFADE_OK && reader.position != size) {
        status = RFADE_INPUT;
    }
    if (status != RFADE_OK) {
        rfade_tally_destroy(read);
        return status;
    }
    *tally = read;
    return RFADE_OK;
}
