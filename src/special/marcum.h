/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file marcum.h  Marcum's Q for a caller who knows b - a better than the difference. */
#ifndef ROUTEFADE_SPECIAL_MARCUM_H
#define ROUTEFADE_SPECIAL_MARCUM_H

#include "routefade/special.h"

/** As rfade_marcum_tails(), for finite a, b >= 0 and offset = b - a; no checks. */
struct rfade_tails rfade_marcum_tails_at(double a, double b, double offset);

#endif
