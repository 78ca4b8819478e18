/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file text.h  Text from outside made safe to show, and numbers read without a locale. */
#ifndef ROUTEFADE_COMMON_TEXT_H
#define ROUTEFADE_COMMON_TEXT_H

#include <stdbool.h>
#include <stddef.h>

/**
 * Makes a text safe for a terminal, in place: control characters (C0, DEL and C1) and bytes
 * that are not UTF-8 become '?'. Never grows.
 */
void rfade_text_printable(char *text);

/**
 * Reads a whole text as a number with a decimal point, blanks around it allowed. False for
 * anything else: empty, trailing letters, hexadecimal, nan, inf.
 */
bool rfade_text_to_double(const char *text, double *value);

#endif
