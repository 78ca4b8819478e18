/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file ray.h  The directions of the direct ray that are told apart. */
#ifndef ROUTEFADE_SEPARATE_RAY_H
#define ROUTEFADE_SEPARATE_RAY_H

/** Cosine of direction i against the road, [0, 1]. */
double rfade_ray_cosine(int i);

#endif
