/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file status.h  What every function of the library that can fail returns. */
#ifndef ROUTEFADE_STATUS_H
#define ROUTEFADE_STATUS_H

#ifdef __cplusplus
extern "C" {
#endif

/* Marks what the shared library exports; everything else stays hidden. */
#if defined(__GNUC__)
#define RFADE_API __attribute__((visibility("default")))
#else
#define RFADE_API
#endif

/**
 * The library switches nothing off in GSL: a host must call gsl_set_error_handler_off()
 * once before it starts threads, since GSL's default handler aborts the process.
 */
enum rfade_status {
    RFADE_OK = 0,
    RFADE_DOMAIN,         /**< an argument lies outside the stated domain */
    RFADE_NO_CONVERGENCE, /**< an iteration did not meet its stated accuracy */
    RFADE_NO_MEMORY,      /**< an allocation failed */
    RFADE_NO_DATA,        /**< too little data for what was asked */
    RFADE_OVERFLOW,       /**< a count or sum does not fit its integer */
    RFADE_INPUT,          /**< a file or text says something that can't be used */
    RFADE_CONFLICT,       /**< a definition contradicts one that is already there */
    RFADE_STORAGE,        /**< the survey or a file could not be read or written */
    RFADE_USAGE           /**< the command line can't be understood */
};

/** One plain sentence about a status, without a full stop. Never NULL. Static storage. */
RFADE_API const char *rfade_status_text(enum rfade_status status);

#ifdef __cplusplus
}
#endif
#endif
