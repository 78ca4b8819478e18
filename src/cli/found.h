/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file found.h  What a fit found in the data, in sentences for a person. */
#ifndef ROUTEFADE_CLI_FOUND_H
#define ROUTEFADE_CLI_FOUND_H

#include <stdio.h>

#include "survey/list.h"

/** A line for each thing found that a person should know of; nothing if there is none. */
void rfade_write_found(FILE *stream, const struct rfade_stream_found *found, size_t count);

/** Says where regular logs have gaps: nobody else would know that readings may be lost. */
enum rfade_status rfade_note_gaps(struct rfade_survey *survey, FILE *notes,
                                  struct rfade_error *error);

#endif
