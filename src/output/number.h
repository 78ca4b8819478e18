/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file number.h  Numbers as text: exact for programs, rounded for people. No locale. */
#ifndef ROUTEFADE_OUTPUT_NUMBER_H
#define ROUTEFADE_OUTPUT_NUMBER_H

#include <stdbool.h>

/** Room for every text made here. */
enum { RFADE_NUMBER_SIZE = 48 };

/** Fewest significant digits, 15 to 17, that read back to the same double; finite only. */
int rfade_number_exact_digits(double value);

/** The number with those digits; "inf", "-inf", and an empty text for NaN. */
void rfade_number_exact(double value, char text[RFADE_NUMBER_SIZE]);

/**
 * Power of ten of the last digit worth showing: the second significant digit of half the
 * interval's width [JCGM 100:2008, 7.2.6]. With one infinite end the distance from the
 * estimate to the other end counts. `fallback` where the interval says nothing.
 */
int rfade_number_place(double estimate, double low, double high, int fallback);

/** The place, or the one of the value's own second significant digit where that is finer. */
int rfade_number_second_digit(double value, int place);

/** "more than this": ">1e5" of a power of ten, else ">" and up to six digits; finite only. */
void rfade_number_limit(double value, char text[RFADE_NUMBER_SIZE]);

/**
 * The number rounded to the decimal place 10^place; "inf", "-inf", and "-" for NaN. Never
 * "-0". Without exponent, except below 0.001 where two digits or more are shown.
 */
void rfade_number_rounded(double value, int place, char text[RFADE_NUMBER_SIZE]);

/**
 * A probability rounded to 10^place, with exponent below 0.001. Where less than one digit
 * would be left, one digit is shown, so that a small probability never reads as 0.
 */
void rfade_probability_rounded(double value, int place, char text[RFADE_NUMBER_SIZE]);

#endif
