/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "common/text.h"

#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

/* Length of the valid UTF-8 character at `text` (RFC 3629: no overlong forms, surrogates or
 * values above U+10FFFF); 0 if there is none. */
static size_t utf8_length(const unsigned char *text)
{
    static const struct {
        unsigned char first_low, first_high, second_low, second_high;
        size_t length;
    } forms[] = {
        {0x00, 0x7F, 0, 0, 1},       {0xC2, 0xDF, 0x80, 0xBF, 2}, {0xE0, 0xE0, 0xA0, 0xBF, 3},
        {0xE1, 0xEC, 0x80, 0xBF, 3}, {0xED, 0xED, 0x80, 0x9F, 3}, {0xEE, 0xEF, 0x80, 0xBF, 3},
        {0xF0, 0xF0, 0x90, 0xBF, 4}, {0xF1, 0xF3, 0x80, 0xBF, 4}, {0xF4, 0xF4, 0x80, 0x8F, 4},
    };
    for (size_t i = 0; i < sizeof forms / sizeof forms[0]; i++) {
        if (text[0] < forms[i].first_low || text[0] > forms[i].first_high)
            continue;
        if (forms[i].length == 1)
            return 1;
        if (text[1] < forms[i].second_low || text[1] > forms[i].second_high)
            return 0;
        for (size_t k = 2; k < forms[i].length; k++)
            if ((text[k] & 0xC0) != 0x80)
                return 0;
        return forms[i].length;
    }
    return 0;
}

static bool is_control(const unsigned char *text, size_t length)
{
    if (length == 1)
        return text[0] < 0x20 || text[0] == 0x7F;
    return length == 2 && text[0] == 0xC2 && text[1] < 0xA0; /* C1: U+0080 to U+009F */
}

void rfade_text_printable(char *text)
{
    const unsigned char *from = (const unsigned char *)text;
    char *to = text;
    while (*from) {
        size_t length = utf8_length(from);
        if (length == 0 || is_control(from, length)) {
            *to++ = '?';
            from += length ? length : 1;
            continue;
        }
        memmove(to, from, length);
        to += length;
        from += length;
    }
    *to = '\0';
}

bool rfade_text_to_double(const char *text, double *value)
{
    *value = NAN;
    size_t blanks = strspn(text, " \t");
    const char *start = text + blanks;
    const char *sign_skipped = start + (*start == '+' || *start == '-');
    /* strtod also takes hexadecimal, nan and inf: only a digit or a point may come first. */
    if (strspn(sign_skipped, "0123456789.") == 0 || strpbrk(start, "xX"))
        return false;
    char *end = NULL;
    double parsed = strtod(start, &end);
    if (end == start || end[strspn(end, " \t\r")] != '\0' || !isfinite(parsed))
        return false;
    *value = parsed;
    return true;
}
