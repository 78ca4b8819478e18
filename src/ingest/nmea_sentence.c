/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/nmea_sentence.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "ingest/number.h"
#include "ingest/time_text.h"

enum { MOST_FIELDS = 24, DATE_TIME_SIZE = 40 };

static const double m_s_per_knot = 1852.0 / 3600;

struct field {
    const char *text;
    size_t size;
};

struct fields {
    size_t count;
    struct field all[MOST_FIELDS];
};

static bool is_capital_or_digit(char c)
{
    return (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9');
}

bool rfade_nmea_is_address(const char *text, size_t size)
{
    size_t length = 1;
    while (length < size && length < 12 && is_capital_or_digit(text[length]))
        length++;
    return length >= 3 && length <= 11 && length < size && text[0] == '$' &&
           text[length] == ',';
}

static int hexadecimal(char c)
{
    static const char digits[] = "0123456789ABCDEF0123456789abcdef";
    const char *found = c ? strchr(digits, c) : NULL;
    return found ? (int)((found - digits) % 16) : -1;
}

/* Cuts the checksum off; *has_one tells whether there was one. */
static const char *check_sum(const char *text, size_t *size, bool *has_one)
{
    unsigned sum = 0;
    size_t star = 1;
    for (; star < *size && text[star] != '*'; star++)
        sum ^= (unsigned char)text[star];
    *has_one = star < *size;
    if (!*has_one)
        return NULL;
    if (star + 3 != *size || hexadecimal(text[star + 1]) < 0 || hexadecimal(text[star + 2]) < 0)
        return "has a checksum that is not two hexadecimal digits";
    *size = star;
    if (sum != (unsigned)(16 * hexadecimal(text[star + 1]) + hexadecimal(text[star + 2])))
        return "does not agree with its checksum";
    return NULL;
}

static void split(const char *text, size_t size, struct fields *fields)
{
    fields->count = 0;
    const char *end = text + size;
    while (fields->count < MOST_FIELDS) {
        const char *comma = memchr(text, ',', (size_t)(end - text));
        const char *stop = comma ? comma : end;
        fields->all[fields->count++] = (struct field){text, (size_t)(stop - text)};
        if (!comma)
            return;
        text = comma + 1;
    }
}

static struct field field(const struct fields *fields, size_t index)
{
    static const struct field absent = {"", 0};
    return index < fields->count ? fields->all[index] : absent;
}

static char letter(const struct fields *fields, size_t index)
{
    struct field value = field(fields, index);
    if (value.size != 1)
        return '\0';
    return value.text[0];
}

static bool number(const struct fields *fields, size_t index, double *value)
{
    struct rfade_decimal decimal;
    struct field text = field(fields, index);
    *value = NAN;
    if (!rfade_decimal_read(text.text, text.size, '.', &decimal))
        return false;
    *value = rfade_decimal_double(&decimal);
    return true;
}

/* ddmm.mmmm or dddmm.mmmm with its hemisphere; false if it is none. */
static bool angle(const struct fields *fields, size_t index, const char *letters, double most,
                  double *degrees)
{
    double value = NAN;
    char hemisphere = letter(fields, index + 1);
    if (!number(fields, index, &value) || !(value >= 0 && value < 100000) ||
        (hemisphere != letters[0] && hemisphere != letters[1]))
        return false;
    double whole = floor(value / 100);
    double minutes = value - 100 * whole;
    *degrees = whole + minutes / 60;
    if (hemisphere == letters[1])
        *degrees = -*degrees;
    return minutes < 60 && fabs(*degrees) <= most;
}

static const char *place(const struct fields *fields, size_t index,
                         struct rfade_nmea_sentence *sentence)
{
    sentence->has_place = angle(fields, index, "NS", 90, &sentence->latitude_deg) &&
                          angle(fields, index + 2, "EW", 180, &sentence->longitude_deg);
    if (sentence->longitude_deg == 180)
        sentence->longitude_deg = -180;
    return sentence->has_place ? NULL : "has a position that is no place on the earth";
}

/* hhmmss.ss at `index`, and ddmmyy if `date` isn't 0. An empty one is no error. */
static const char *time_of(const struct fields *fields, size_t index, size_t date,
                           struct rfade_nmea_sentence *sentence)
{
    char text[DATE_TIME_SIZE];
    struct rfade_clock_time time;
    struct field clock = field(fields, index);
    struct field day = date ? field(fields, date) : (struct field){"", 0};
    if (clock.size == 0)
        return NULL;
    if (clock.size < 6 || clock.size > 20 || (day.size != 0 && day.size != 6))
        return "has a time that can't be read";
    int size = snprintf(text, sizeof text, "%.*s%s%.*s", (int)day.size, day.text,
                        day.size ? " " : "", (int)clock.size, clock.text);
    const char *reason =
        rfade_time_pattern(day.size ? "%d%m%y %H%M%S" : "%H%M%S", text, (size_t)size, &time);
    if (reason)
        return "has a time that can't be read";
    sentence->has_time = true;
    sentence->of_day_us = time.of_day_us;
    sentence->has_date = time.has_date;
    sentence->days = time.days;
    return NULL;
}

static void speed(const struct fields *fields, size_t index, double m_s_per_unit,
                  struct rfade_nmea_sentence *sentence)
{
    double value = NAN;
    if (number(fields, index, &value) && value >= 0)
        sentence->speed_m_s = value * m_s_per_unit;
}

static const char *read_rmc(const struct fields *fields, struct rfade_nmea_sentence *sentence)
{
    const char *reason = time_of(fields, 1, 9, sentence);
    char mode = letter(fields, 12); /* of NMEA 2.3 on */
    bool good = letter(fields, 2) == 'A' && !(mode && strchr("NMS", mode));
    if (reason || !good)
        return reason;
    speed(fields, 7, m_s_per_knot, sentence);
    return place(fields, 3, sentence);
}

static const char *read_gga(const struct fields *fields, struct rfade_nmea_sentence *sentence)
{
    const char *reason = time_of(fields, 1, 0, sentence);
    char quality = letter(fields, 6);
    /* 0 none, 7 typed in, 8 simulated */
    if (reason || !quality || !strchr("1234569", quality))
        return reason;
    return place(fields, 2, sentence);
}

static const char *read_vtg(const struct fields *fields, struct rfade_nmea_sentence *sentence)
{
    if (letter(fields, 6) == 'N')
        speed(fields, 5, m_s_per_knot, sentence);
    if (isnan(sentence->speed_m_s) && letter(fields, 8) == 'K')
        speed(fields, 7, 1000.0 / 3600, sentence);
    return NULL;
}

static enum rfade_nmea_type type_of(struct field address)
{
    /* Two of the talker, three of the type; P begins an address of the maker's own. */
    if (address.size != 6 || address.text[1] == 'P')
        return RFADE_NMEA_OTHER;
    const char *type = address.text + 3;
    return memcmp(type, "RMC", 3) == 0   ? RFADE_NMEA_RMC
           : memcmp(type, "GGA", 3) == 0 ? RFADE_NMEA_GGA
           : memcmp(type, "VTG", 3) == 0 ? RFADE_NMEA_VTG
                                         : RFADE_NMEA_OTHER;
}

const char *rfade_nmea_read(const char *text, size_t size, struct rfade_nmea_sentence *sentence)
{
    struct fields fields;
    bool has_sum = false;
    *sentence = (struct rfade_nmea_sentence){
        .latitude_deg = NAN, .longitude_deg = NAN, .speed_m_s = NAN};
    while (size > 0 && (text[size - 1] == ' ' || text[size - 1] == '\t'))
        size--;
    if (!rfade_nmea_is_address(text, size))
        return "is no NMEA sentence";
    const char *reason = check_sum(text, &size, &has_sum);
    if (reason)
        return reason;
    split(text, size, &fields);
    sentence->type = type_of(fields.all[0]);
    if (sentence->type != RFADE_NMEA_OTHER && !has_sum)
        return "has no checksum";
    switch (sentence->type) {
    case RFADE_NMEA_RMC:
        return read_rmc(&fields, sentence);
    case RFADE_NMEA_GGA:
        return read_gga(&fields, sentence);
    case RFADE_NMEA_VTG:
        return read_vtg(&fields, sentence);
    case RFADE_NMEA_OTHER:
        break;
    }
    return NULL;
}
