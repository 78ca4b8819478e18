/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/survey.h"

#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "survey/layout.h"

enum { BUSY_TIMEOUT_MS = 10000, CACHE_KIB = 16384 };

struct rfade_survey {
    sqlite3 *database;
    char *path;
};

sqlite3 *rfade_survey_database(struct rfade_survey *survey)
{
    return survey->database;
}

const char *rfade_survey_path(const struct rfade_survey *survey)
{
    return survey->path;
}

/* What SQLite's result codes mean to somebody who never heard of SQLite. */
static const struct {
    int code;
    enum rfade_status status;
    const char *what;
    const char *remedy;
} meanings[] = {
    {SQLITE_BUSY, RFADE_STORAGE, "another program is using the survey",
     "wait until it has finished, then run the command again"},
    {SQLITE_LOCKED, RFADE_STORAGE, "another part of the program is using the survey",
     "run the command again"},
    {SQLITE_FULL, RFADE_STORAGE, "the disk is full", "make room, then run the command again"},
    {SQLITE_READONLY, RFADE_STORAGE, "the survey can't be written",
     "make the file and its folder writable for you"},
    {SQLITE_CANTOPEN, RFADE_STORAGE, "the survey can't be opened",
     "make the file and its folder readable and writable for you"},
    {SQLITE_IOERR, RFADE_STORAGE, "the disk failed to read or write",
     "check the disk and the folder's permissions"},
    {SQLITE_CORRUPT, RFADE_STORAGE, "the survey is damaged",
     "put a backup in its place, or import the logger files into a new one"},
    {SQLITE_NOTADB, RFADE_INPUT, "this is not a survey",
     "name another file with --survey; routefade makes a survey on import"},
    {SQLITE_NOMEM, RFADE_NO_MEMORY, "memory ran out", "close other programs"},
    {SQLITE_CONSTRAINT, RFADE_CONFLICT, "the survey refuses the value", ""},
};

enum rfade_status rfade_survey_failed(const struct rfade_survey *survey, const char *doing,
                                      struct rfade_error *error)
{
    int code = sqlite3_extended_errcode(survey->database);
    enum rfade_status status = RFADE_STORAGE;
    const char *what = "the survey can't be used";
    const char *remedy = "";
    for (size_t i = 0; i < sizeof meanings / sizeof meanings[0]; i++) {
        if (meanings[i].code != (code & 0xFF))
            continue;
        status = meanings[i].status;
        what = meanings[i].what;
        remedy = meanings[i].remedy;
    }
    if (code == SQLITE_READONLY_ROLLBACK || code == SQLITE_READONLY_CANTLOCK) {
        what = "a command was cut off while it wrote, and has to be undone first";
        remedy = "run `routefade fit`, which may write; it undoes what was left half done";
    }
    rfade_error_set(error, status, remedy, "%s (%s: %s)", what, doing,
                    sqlite3_errmsg(survey->database));
    rfade_error_at(error, survey->path, 0);
    return status;
}

static enum rfade_status refuse(const char *path, struct rfade_error *error, const char *remedy,
                                const char *what)
{
    rfade_error_set(error, RFADE_STORAGE, remedy, "%s", what);
    rfade_error_at(error, path, 0);
    return RFADE_STORAGE;
}

static enum rfade_status check_file(const char *path, enum rfade_survey_mode mode,
                                    struct rfade_error *error)
{
    struct stat about;
    if (stat(path, &about) != 0) {
        if (errno == ENOENT && mode == RFADE_SURVEY_CREATE)
            return RFADE_OK;
        if (errno == ENOENT)
            return refuse(path, error,
                          "import logger files first, or name another file with --survey",
                          "there is no such survey");
        return refuse(path, error, "check the path and its folders' permissions",
                      "the survey can't be reached");
    }
    if (S_ISDIR(about.st_mode))
        return refuse(path, error, "name a file with --survey",
                      "this is a folder, not a survey");
    if (!S_ISREG(about.st_mode))
        return refuse(path, error, "name an ordinary file with --survey",
                      "this is not an ordinary file");
    if (access(path, R_OK) != 0)
        return refuse(path, error, "make it readable for you (chmod u+r)",
                      "the survey can't be read");
    if (mode != RFADE_SURVEY_READ && access(path, W_OK) != 0)
        return refuse(path, error, "make it writable for you (chmod u+w)",
                      "the survey can't be written");
    if (about.st_size == 0 && mode != RFADE_SURVEY_CREATE)
        return refuse(path, error,
                      "import logger files first, or name another file with --survey",
                      "the file is empty, no survey");
    return RFADE_OK;
}

/* A survey may come from somebody else: its schema must not be able to do more than hold
 * data, and a mistyped column must not turn into a text. */
static bool configure(sqlite3 *database)
{
    static const struct {
        int option;
        int value;
    } options[] = {
        {SQLITE_DBCONFIG_DEFENSIVE, 1},   {SQLITE_DBCONFIG_TRUSTED_SCHEMA, 0},
        {SQLITE_DBCONFIG_ENABLE_FKEY, 1}, {SQLITE_DBCONFIG_DQS_DML, 0},
        {SQLITE_DBCONFIG_DQS_DDL, 0},
    };
    for (size_t i = 0; i < sizeof options / sizeof options[0]; i++)
        if (sqlite3_db_config(database, options[i].option, options[i].value, NULL) != SQLITE_OK)
            return false;
    char cache[64];
    (void)snprintf(cache, sizeof cache, "PRAGMA cache_size = -%d; PRAGMA temp_store = MEMORY",
                   CACHE_KIB);
    return sqlite3_busy_timeout(database, BUSY_TIMEOUT_MS) == SQLITE_OK &&
           sqlite3_exec(database, cache, NULL, NULL, NULL) == SQLITE_OK;
}

/* SQLite reads a meaning into names that start with a colon: the file is meant. */
static char *plain_path(const char *path)
{
    size_t size = strlen(path) + sizeof "./";
    char *plain = malloc(size);
    if (plain)
        (void)snprintf(plain, size, "%s%s", path[0] == ':' ? "./" : "", path);
    return plain;
}

enum rfade_status rfade_survey_open_as(const char *path, enum rfade_survey_mode mode,
                                       const struct rfade_layout *layout,
                                       struct rfade_survey **survey, struct rfade_error *error)
{
    static const int flags[] = {
        [RFADE_SURVEY_READ] = SQLITE_OPEN_READONLY,
        [RFADE_SURVEY_WRITE] = SQLITE_OPEN_READWRITE,
        [RFADE_SURVEY_CREATE] = SQLITE_OPEN_READWRITE | SQLITE_OPEN_CREATE,
    };
    *survey = NULL;
    if (path[0] == '\0')
        return refuse(path, error, "name a file with --survey", "the survey has no name");
    enum rfade_status status = check_file(path, mode, error);
    if (status != RFADE_OK)
        return status;

    struct rfade_survey *opened = calloc(1, sizeof *opened);
    if (!opened || !(opened->path = plain_path(path))) {
        free(opened);
        return rfade_error_no_memory(error);
    }
    if (sqlite3_open_v2(opened->path, &opened->database, flags[mode] | SQLITE_OPEN_NOMUTEX,
                        NULL) != SQLITE_OK ||
        !configure(opened->database))
        status = rfade_survey_failed(opened, "opening", error);
    if (status == RFADE_OK)
        status = rfade_layout_apply(opened, layout, mode, error);
    if (status != RFADE_OK) {
        rfade_survey_close(opened);
        return status;
    }
    *survey = opened;
    return RFADE_OK;
}

enum rfade_status rfade_survey_open(const char *path, enum rfade_survey_mode mode,
                                    struct rfade_survey **survey, struct rfade_error *error)
{
    const struct rfade_layout layout = rfade_layout_current();
    return rfade_survey_open_as(path, mode, &layout, survey, error);
}

void rfade_survey_close(struct rfade_survey *survey)
{
    if (!survey)
        return;
    /* _v2: a statement that a caller has not finalised yet doesn't leak the connection. */
    (void)sqlite3_close_v2(survey->database);
    free(survey->path);
    free(survey);
}
