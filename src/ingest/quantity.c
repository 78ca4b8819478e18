/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/quantity.h"

#include <math.h>
#include <string.h>

#include "ingest/sink.h"

/* 1 uV across 50 ohm is 2e-14 W: dBm = dBuV - (90 + 10 log10(50)). */
static const double dbuv_in_dbm = 106.98970004336019;

static bool is_word(const char *word, const char *text, size_t size)
{
    for (size_t i = 0; i < size; i++)
        if (word[i] == '\0' || word[i] != rfade_lower(text[i]))
            return false;
    return word[size] == '\0';
}

static bool is_nothing(const char *text, size_t size)
{
    static const char *const words[] = {"", "nan", "na", "n/a", "null", "none", "-", "--"};
    for (size_t i = 0; i < sizeof words / sizeof words[0]; i++)
        if (is_word(words[i], text, size))
            return true;
    return false;
}

static bool is_sentinel_value(const struct rfade_sentinels *sentinels,
                              const struct rfade_decimal *decimal)
{
    double value = rfade_decimal_double(decimal);
    for (size_t i = 0; i < sentinels->count; i++)
        if (value == sentinels->values[i])
            return true;
    return false;
}

static bool is_sentinel_text(const struct rfade_sentinels *sentinels, const char *text,
                             size_t size)
{
    for (size_t i = 0; i < sentinels->count; i++)
        if (strlen(sentinels->texts[i]) == size && memcmp(sentinels->texts[i], text, size) == 0)
            return true;
    return false;
}

enum rfade_number_kind rfade_number_read(const struct rfade_sentinels *sentinels,
                                         char decimal_sign, const char *text, size_t size,
                                         struct rfade_decimal *decimal)
{
    if (rfade_decimal_read(text, size, decimal_sign, decimal)) {
        if (sentinels->count == 0 || !is_sentinel_value(sentinels, decimal))
            return RFADE_NUMBER;
        *decimal = (struct rfade_decimal){0};
        return RFADE_NOTHING;
    }
    if (is_nothing(text, size) || is_sentinel_text(sentinels, text, size))
        return RFADE_NOTHING;
    return RFADE_NO_NUMBER;
}

static double to_dbm(enum rfade_level_unit unit, double value)
{
    switch (unit) {
    case RFADE_UNIT_DBM:
        return value;
    case RFADE_UNIT_DBW:
        return value + 30;
    case RFADE_UNIT_DBUV:
        return value - dbuv_in_dbm;
    case RFADE_UNIT_W:
        return 10 * log10(value) + 30;
    case RFADE_UNIT_MW:
        return 10 * log10(value);
    case RFADE_UNIT_UW:
        return 10 * log10(value) - 30;
    }
    return NAN;
}

static const char *convert(const struct rfade_quantity *quantity,
                           const struct rfade_decimal *decimal, int64_t *value_cdb)
{
    double value = rfade_decimal_double(decimal) * quantity->scale + quantity->offset;
    bool power = quantity->unit >= RFADE_UNIT_W;
    if (power && !(value > 0))
        return "is a power that is not above zero";
    double dbm = to_dbm(quantity->unit, value);
    if (!(fabs(dbm) < 1e6))
        return "is out of range";
    *value_cdb = llround(100 * dbm);
    return NULL;
}

const char *rfade_quantity_read(const struct rfade_quantity *quantity, char decimal_sign,
                                const char *text, size_t size, int32_t *value_cdb)
{
    *value_cdb = RFADE_NO_VALUE_CDB;
    struct rfade_decimal decimal;
    enum rfade_number_kind kind =
        rfade_number_read(&quantity->sentinels, decimal_sign, text, size, &decimal);
    if (kind != RFADE_NUMBER)
        return kind == RFADE_NOTHING ? NULL : "is not a number";
    int64_t value = 0;
    if (quantity->unit == RFADE_UNIT_DBM && quantity->scale == 1 && quantity->offset == 0) {
        if (!rfade_decimal_scaled(&decimal, 2, &value))
            return "is out of range";
    } else {
        const char *reason = convert(quantity, &decimal, &value);
        if (reason)
            return reason;
    }
    if (value < quantity->low_cdb || value > quantity->high_cdb)
        return "is out of range";
    *value_cdb = (int32_t)value;
    return NULL;
}
