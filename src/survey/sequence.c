/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/sequence.h"

#include "survey/read.h"

/* Numbers from one to the next, 0 for the same again; negative: a restart. */
static int64_t steps_on(const struct rfade_sequence *sequence, int64_t number)
{
    int64_t steps = number - sequence->last;
    if (sequence->modulus > 0) {
        steps = (steps % sequence->modulus + sequence->modulus) % sequence->modulus;
        if (steps > sequence->modulus / 2)
            return -1;
    }
    return steps > RFADE_MOST_LOST + 1 ? -1 : steps;
}

int32_t rfade_sequence_lost(struct rfade_sequence *sequence, bool numbered, int64_t number)
{
    if (!numbered) {
        sequence->unnumbered++;
        return RFADE_LOST_UNKNOWN;
    }
    int64_t steps = sequence->begun ? steps_on(sequence, number) : -1;
    int64_t lost = steps - 1 - sequence->unnumbered;
    sequence->begun = true;
    sequence->last = number;
    sequence->unnumbered = 0;
    if (steps < 0)
        return RFADE_LOST_UNKNOWN;
    return lost > 0 ? (int32_t)lost : 0;
}
