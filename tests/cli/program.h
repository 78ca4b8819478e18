/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file program.h  Runs the built program and keeps what it printed. */
#ifndef ROUTEFADE_TESTS_CLI_PROGRAM_H
#define ROUTEFADE_TESTS_CLI_PROGRAM_H

#include <jansson.h>
#include <stddef.h>

/** One run: zero it first, program_clear it afterwards. */
struct program {
    const char *input;       /**< standard input; NULL: empty */
    const char *output_path; /**< where standard output goes; NULL: kept; "-": closed; "|": a
                                   pipe that nobody reads */
    int status;              /**< exit status; -1: ended by a signal */
    char *output;            /**< standard output, if kept */
    char *errors;            /**< standard error */
};

/** Runs the program with these arguments, NULL at the end; fails the test if it can't. */
void program_run(struct program *program, const char *const *arguments);
void program_clear(struct program *program);

#define RUN(program, ...) program_run((program), (const char *const[]){__VA_ARGS__, NULL})

/** The program does what these arguments say, without a word on standard error. */
void assert_done(const char *const *arguments);

/** The same, and what it prints; free() it. */
char *output_of(const char *const *arguments);

/** The same, read as JSON; json_decref it. */
json_t *json_of(const char *const *arguments);

#define DONE(...) assert_done((const char *const[]){__VA_ARGS__, NULL})
#define OUTPUT_OF(...) output_of((const char *const[]){__VA_ARGS__, NULL})
#define JSON_OF(...)                                                                           \
    json_of((const char *const[]){__VA_ARGS__, "--quiet", "--format", "json", NULL})

/** A member of an object, and of an object in an array: NaN if it is no number, "" if it is no
 * text. */
double number_of(const json_t *object, const char *name);
double number_at(const json_t *rows, size_t row, const char *name);
const char *text_of(const json_t *object, const char *name);
const char *text_at(const json_t *rows, size_t row, const char *name);

/**
 * The program refuses these arguments: this exit status, nothing on standard output, and
 * exactly one line on standard error that begins with "routefade: " and holds `part`.
 */
void assert_refused(int status, const char *part, const char *const *arguments);

/** As assert_refused, with an input. */
void assert_input_refused(const char *input, int status, const char *part,
                          const char *const *arguments);

#define REFUSED(status, part, ...)                                                             \
    assert_refused((status), (part), (const char *const[]){__VA_ARGS__, NULL})
#define INPUT_REFUSED(input, status, part, ...)                                                \
    assert_input_refused((input), (status), (part), (const char *const[]){__VA_ARGS__, NULL})

/** A new empty folder; its path is valid until the next call. Remove it with folder_remove. */
const char *folder_create(void);
void folder_remove(const char *path);

/** Writes a file of that name in the folder; the path is valid until the next call. */
const char *file_create(const char *folder, const char *name, const char *text);

/** The whole file as text; free() it. */
char *file_text(const char *path);

#endif
