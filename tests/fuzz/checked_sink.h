/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file checked_sink.h  A sink that requires of all that comes that it is in range. */
#ifndef ROUTEFADE_TESTS_FUZZ_CHECKED_SINK_H
#define ROUTEFADE_TESTS_FUZZ_CHECKED_SINK_H

#include "ingest/sink.h"

struct counts {
    size_t readings, fixes, refused;
};

/** Counts into `counts`, which is borrowed. */
struct rfade_sink checked_sink(struct counts *counts);

#endif
