/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file bessel.h  What the Rice density and its slopes need of I0 and I1, in one go. */
#ifndef ROUTEFADE_SPECIAL_BESSEL_H
#define ROUTEFADE_SPECIAL_BESSEL_H

struct rfade_bessel_pair {
    double i0_scaled;   /**< exp(-z) I0(z) */
    double complement;  /**< 1 - I1(z)/I0(z) */
    double half_excess; /**< 1 - 2 I1(z)/(z I0(z)), without cancellation at small z */
};

/** For finite z >= 0; no checks. Relative accuracy 2e-15, mostly 2e-16. */
struct rfade_bessel_pair rfade_bessel_pair(double z);

#endif
