/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/number.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { MAX_DECIMALS = 12, FIRST_EXACT_DIGITS = 15, ALWAYS_EXACT_DIGITS = 17 };

/* The text of fewest digits that reads back to the same double, and how many those are. */
static int write_exact(double value, char text[RFADE_NUMBER_SIZE])
{
    int digits = FIRST_EXACT_DIGITS;
    for (; digits < ALWAYS_EXACT_DIGITS; digits++) {
        (void)snprintf(text, RFADE_NUMBER_SIZE, "%.*g", digits, value);
        if (strtod(text, NULL) == value)
            return digits;
    }
    (void)snprintf(text, RFADE_NUMBER_SIZE, "%.*g", digits, value);
    return digits;
}

int rfade_number_exact_digits(double value)
{
    char text[RFADE_NUMBER_SIZE];
    return write_exact(value, text);
}

/* Writes what is not a finite number. */
static bool write_special(double value, const char *missing, char text[RFADE_NUMBER_SIZE])
{
    if (isfinite(value))
        return false;
    const char *word = missing;
    if (isinf(value))
        word = value > 0 ? "inf" : "-inf";
    (void)snprintf(text, RFADE_NUMBER_SIZE, "%s", word);
    return true;
}

void rfade_number_exact(double value, char text[RFADE_NUMBER_SIZE])
{
    if (write_special(value, "", text))
        return;
    (void)write_exact(value, text);
}

int rfade_number_place(double estimate, double low, double high, int fallback)
{
    double half = (high - low) / 2;
    if (!isfinite(half))
        half = isfinite(high) ? high - estimate : estimate - low;
    if (!isfinite(half) || half <= 0)
        return fallback;
    double place = floor(log10(half)) - 1;
    return place < -300 ? fallback : (int)place;
}

int rfade_number_second_digit(double value, int place)
{
    if (value == 0 || !isfinite(value))
        return place;
    int second = (int)floor(log10(fabs(value))) - 1;
    return second < place ? second : place;
}

void rfade_number_limit(double value, char text[RFADE_NUMBER_SIZE])
{
    double exponent = floor(log10(value));
    if (value > 0 && pow(10, exponent) == value)
        (void)snprintf(text, RFADE_NUMBER_SIZE, ">1e%d", (int)exponent);
    else
        (void)snprintf(text, RFADE_NUMBER_SIZE, ">%.6g", value);
}

/* "-0.00" is no number for people. */
static void drop_sign_of_zero(char *text)
{
    if (text[0] == '-' && strspn(text + 1, "0.") == strlen(text + 1))
        memmove(text, text + 1, strlen(text));
}

void rfade_number_rounded(double value, int place, char text[RFADE_NUMBER_SIZE])
{
    if (write_special(value, "-", text))
        return;
    if (fabs(value) >= 1e15) { /* more digits than a double holds */
        (void)snprintf(text, RFADE_NUMBER_SIZE, "%.6g", value);
        return;
    }
    if (value != 0 && fabs(value) < 1e-3 && place < floor(log10(fabs(value)))) {
        int digits = (int)floor(log10(fabs(value))) - place;
        (void)snprintf(text, RFADE_NUMBER_SIZE, "%.*e",
                       digits < MAX_DECIMALS ? digits : MAX_DECIMALS, value);
        return;
    }
    int decimals = place < 0 ? -place : 0;
    if (place > 0) {
        double unit = pow(10, place);
        value = round(value / unit) * unit;
    }
    (void)snprintf(text, RFADE_NUMBER_SIZE, "%.*f",
                   decimals < MAX_DECIMALS ? decimals : MAX_DECIMALS, value);
    drop_sign_of_zero(text);
}

void rfade_probability_rounded(double value, int place, char text[RFADE_NUMBER_SIZE])
{
    if (value == 0) {
        (void)snprintf(text, RFADE_NUMBER_SIZE, "0");
        return;
    }
    if (!isfinite(value) || value >= 1e-3 || value < 0) {
        int shown = place;
        if (value > 0 && value < 1 && floor(log10(value)) < shown)
            shown = (int)floor(log10(value));
        rfade_number_rounded(value, shown, text);
        return;
    }
    int digits = (int)floor(log10(value)) - place;
    if (digits < 0)
        digits = 0;
    (void)snprintf(text, RFADE_NUMBER_SIZE, "%.*e",
                   digits < MAX_DECIMALS ? digits : MAX_DECIMALS, value);
}
