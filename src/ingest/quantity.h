/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file quantity.h  Levels and ratios out of their column's text. Pure functions. */
#ifndef ROUTEFADE_INGEST_QUANTITY_H
#define ROUTEFADE_INGEST_QUANTITY_H

#include "ingest/column_map_parts.h"
#include "ingest/number.h"

/**
 * Reads a level (centi-dBm) or a ratio (centi-dB: unit RFADE_UNIT_DBM) by its map. Without
 * scale, offset and unit conversion it is the text's decimal digits rounded to the nearest
 * hundredth, ties to even; else computed in double precision and rounded to the nearest.
 * @param[out] value_cdb  RFADE_NO_VALUE_CDB where the text says that there is none
 * @return NULL, or a reason why it can't be used (static storage)
 */
const char *rfade_quantity_read(const struct rfade_quantity *quantity, char decimal_sign,
                                const char *text, size_t size, int32_t *value_cdb);

enum rfade_number_kind { RFADE_NUMBER, RFADE_NOTHING, RFADE_NO_NUMBER };

/**
 * Reads a number, unless the text says that nothing was there: empty, nan, n/a, ... or one of
 * the sentinels. *decimal is 0 unless it is a number.
 */
enum rfade_number_kind rfade_number_read(const struct rfade_sentinels *sentinels,
                                         char decimal_sign, const char *text, size_t size,
                                         struct rfade_decimal *decimal);

#endif
