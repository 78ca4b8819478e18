/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "routefade/status.h"

const char *rfade_status_text(enum rfade_status status)
{
    switch (status) {
    case RFADE_OK:
        return "done";
    case RFADE_DOMAIN:
        return "an argument lies outside its domain";
    case RFADE_NO_CONVERGENCE:
        return "an iteration did not reach its accuracy";
    case RFADE_NO_MEMORY:
        return "out of memory";
    case RFADE_NO_DATA:
        return "too little data";
    case RFADE_OVERFLOW:
        return "a count or sum is too large";
    case RFADE_INPUT:
        return "the input can't be used";
    case RFADE_CONFLICT:
        return "a definition contradicts an earlier one";
    case RFADE_STORAGE:
        return "a file could not be read or written";
    case RFADE_USAGE:
        return "the command line can't be understood";
    }
    return "unknown status";
}
