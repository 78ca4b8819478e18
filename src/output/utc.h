/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file utc.h  Times for people and programs alike: ISO 8601 in UTC. */
#ifndef ROUTEFADE_OUTPUT_UTC_H
#define ROUTEFADE_OUTPUT_UTC_H

#include <stdint.h>

enum { RFADE_UTC_SIZE = 40 };

/** "2027-01-12T20:00:00Z"; with six decimals if the second isn't whole. */
void rfade_utc_text(int64_t time_us, char text[RFADE_UTC_SIZE]);

#endif
