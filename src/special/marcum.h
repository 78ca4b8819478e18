/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file marcum.h  Marcum's Q for a caller who knows b - a better than the difference. */
#ifndef ROUTEFADE_SPECIAL_MARCUM_H
#define ROUTEFADE_SPECIAL_MARCUM_H

#include "special/tails.h"

/** The small tail for a >= 0, b > 0 and offset = b - a, over exp(-offset^2/2); no checks. */
struct rfade_scaled_tail rfade_marcum_scaled(double a, double b, double offset);

/** As rfade_marcum_tails(), for finite a, b >= 0 and offset = b - a; no checks. */
struct rfade_tails rfade_marcum_tails_at(double a, double b, double offset);

#endif
