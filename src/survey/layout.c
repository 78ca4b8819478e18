/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/layout.h"

#include <sha2.h>
#include <stdio.h>
#include <string.h>

struct rfade_layout rfade_layout_current(void)
{
    return (struct rfade_layout){
        .version = RFADE_SCHEMA_VERSION,
        .schema = &rfade_sql_schema,
        .derived = &rfade_sql_derived,
        .views = &rfade_sql_views,
        .migrations = rfade_sql_migrations,
    };
}

static enum rfade_status refuse(const struct rfade_survey *survey, struct rfade_error *error,
                                const char *remedy, const char *what)
{
    rfade_error_set(error, RFADE_INPUT, remedy, "%s", what);
    rfade_error_at(error, rfade_survey_path(survey), 0);
    return RFADE_INPUT;
}

static enum rfade_status pragma(struct rfade_survey *survey, const char *name, int64_t *value,
                                struct rfade_error *error)
{
    char sql[64];
    bool found = false;
    (void)snprintf(sql, sizeof sql, "PRAGMA %s", name);
    return rfade_survey_integer(survey, value, &found, error, sql, "");
}

static enum rfade_status set_pragma(struct rfade_survey *survey, const char *name, int value,
                                    struct rfade_error *error)
{
    char sql[64];
    (void)snprintf(sql, sizeof sql, "PRAGMA %s = %d", name, value);
    return rfade_survey_execute(survey, sql, error);
}

struct identity {
    int64_t application_id;
    int64_t version;
    int64_t object_count;
};

static enum rfade_status identify(struct rfade_survey *survey, struct identity *identity,
                                  struct rfade_error *error)
{
    bool found = false;
    enum rfade_status status =
        pragma(survey, "application_id", &identity->application_id, error);
    if (status == RFADE_OK)
        status = pragma(survey, "user_version", &identity->version, error);
    if (status == RFADE_OK)
        status = rfade_survey_integer(survey, &identity->object_count, &found, error,
                                      "SELECT count(*) FROM sqlite_schema", "");
    return status;
}

static void derived_sha256(const struct rfade_layout *layout, unsigned char sha256[32])
{
    SHA2_CTX context;
    SHA256Init(&context);
    SHA256Update(&context, (const uint8_t *)layout->derived->text, layout->derived->size);
    SHA256Update(&context, (const uint8_t *)layout->views->text, layout->views->size);
    SHA256Final(sha256, &context);
}

/* Makes results and views, and notes what was made by comparing the schema before and after:
 * a later version can drop them without knowing their names. */
static enum rfade_status make_derived(struct rfade_survey *survey,
                                      const struct rfade_layout *layout,
                                      struct rfade_error *error)
{
    unsigned char sha256[32];
    derived_sha256(layout, sha256);
    enum rfade_status status = rfade_survey_execute(
        survey, "CREATE TEMP TABLE object_before AS SELECT name FROM main.sqlite_schema",
        error);
    if (status == RFADE_OK)
        status = rfade_survey_execute(survey, layout->derived->text, error);
    if (status == RFADE_OK)
        status = rfade_survey_execute(survey, layout->views->text, error);
    if (status == RFADE_OK)
        status = rfade_survey_run(
            survey, error,
            "INSERT INTO derived_object SELECT name, type, ?1 FROM main.sqlite_schema "
            "WHERE type IN ('table', 'view') AND name NOT IN (SELECT name FROM object_before)",
            "b", (const void *)sha256, sizeof sha256);
    if (status == RFADE_OK)
        status = rfade_survey_execute(survey, "DROP TABLE temp.object_before", error);
    return status;
}

/* Tables last made first: what refers to another goes before it. */
static enum rfade_status drop_derived(struct rfade_survey *survey, struct rfade_error *error)
{
    for (;;) {
        sqlite3_stmt *statement = NULL;
        bool row = false;
        char sql[512] = "";
        enum rfade_status status =
            rfade_survey_prepare(survey, &statement, error,
                                 "SELECT printf('DROP %s IF EXISTS \"%w\"', derived.type, "
                                 "derived.name) FROM derived_object AS derived "
                                 "JOIN sqlite_schema AS made USING (name) "
                                 "ORDER BY derived.type = 'table', made.rowid DESC LIMIT 1",
                                 "");
        if (status == RFADE_OK)
            status = rfade_survey_step(survey, statement, &row, error);
        if (status == RFADE_OK && row)
            (void)snprintf(sql, sizeof sql, "%s",
                           (const char *)sqlite3_column_text(statement, 0));
        sqlite3_finalize(statement);
        if (status != RFADE_OK)
            return status;
        if (!row)
            return rfade_survey_execute(survey, "DELETE FROM derived_object", error);
        status = rfade_survey_execute(survey, sql, error);
        if (status != RFADE_OK)
            return status;
    }
}

static enum rfade_status derived_is_current(struct rfade_survey *survey,
                                            const struct rfade_layout *layout, bool *current,
                                            struct rfade_error *error)
{
    unsigned char sha256[32];
    derived_sha256(layout, sha256);
    int64_t count = 0;
    return rfade_survey_integer(
        survey, &count, current, error,
        "SELECT 1 FROM derived_object WHERE made_by_sha256 = ?1 LIMIT 1", "b",
        (const void *)sha256, sizeof sha256);
}

static enum rfade_status create_inside(struct rfade_survey *survey,
                                       const struct rfade_layout *layout,
                                       struct rfade_error *error)
{
    enum rfade_status status = rfade_survey_execute(survey, layout->schema->text, error);
    if (status == RFADE_OK)
        status = make_derived(survey, layout, error);
    if (status == RFADE_OK)
        status = set_pragma(survey, "application_id", RFADE_APPLICATION_ID, error);
    if (status == RFADE_OK)
        status = set_pragma(survey, "user_version", layout->version, error);
    return status;
}

static enum rfade_status create(struct rfade_survey *survey, const struct rfade_layout *layout,
                                struct rfade_error *error)
{
    struct identity identity = {0};
    enum rfade_status status = set_pragma(survey, "page_size", RFADE_PAGE_SIZE, error);
    if (status == RFADE_OK)
        status = rfade_survey_execute(survey, "PRAGMA journal_mode = DELETE", error);
    if (status == RFADE_OK)
        status = rfade_survey_begin(survey, error);
    /* Another program may have made it since it was found empty. */
    if (status == RFADE_OK)
        status = identify(survey, &identity, error);
    if (status == RFADE_OK && identity.object_count == 0)
        status = create_inside(survey, layout, error);
    if (status == RFADE_OK)
        status = rfade_survey_commit(survey, error);
    rfade_survey_rollback(survey);
    return status;
}

/* Results and views go first: SQLite doesn't let a table be made anew under a view. */
static enum rfade_status run_migrations(struct rfade_survey *survey,
                                        const struct rfade_layout *layout, int64_t version,
                                        struct rfade_error *error)
{
    enum rfade_status status = drop_derived(survey, error);
    for (const struct rfade_sql *step = layout->migrations; status == RFADE_OK && step->text;
         step++) {
        if (step->version <= version)
            continue;
        status = rfade_survey_execute(survey, step->text, error);
        if (status == RFADE_OK)
            status = set_pragma(survey, "user_version", step->version, error);
    }
    if (status == RFADE_OK)
        status = make_derived(survey, layout, error);
    return status;
}

static enum rfade_status migrate_inside(struct rfade_survey *survey,
                                        const struct rfade_layout *layout,
                                        struct rfade_error *error)
{
    struct identity identity = {0};
    bool current = false;
    bool broken = false;
    int64_t ignored = 0;
    /* Another program may have done it since the version was read. */
    enum rfade_status status = identify(survey, &identity, error);
    if (status == RFADE_OK)
        status = derived_is_current(survey, layout, &current, error);
    if (status != RFADE_OK || (current && identity.version == layout->version))
        return status;
    status = run_migrations(survey, layout, identity.version, error);
    if (status == RFADE_OK)
        status = rfade_survey_integer(survey, &ignored, &broken, error,
                                      "SELECT 1 FROM pragma_foreign_key_check", "");
    if (status == RFADE_OK)
        status = identify(survey, &identity, error);
    if (status == RFADE_OK && (broken || identity.version != layout->version))
        status = refuse(survey, error, "put a backup in its place and report this",
                        "the survey could not be brought to this version; nothing was changed");
    return status;
}

/* Foreign keys are off meanwhile: a table that is made anew must not take along the rows
 * that refer to it. They are checked before the commit. */
static enum rfade_status migrate(struct rfade_survey *survey, const struct rfade_layout *layout,
                                 struct rfade_error *error)
{
    enum rfade_status status = set_pragma(survey, "foreign_keys", 0, error);
    if (status == RFADE_OK)
        status = rfade_survey_begin(survey, error);
    if (status == RFADE_OK)
        status = migrate_inside(survey, layout, error);
    if (status == RFADE_OK)
        status = rfade_survey_commit(survey, error);
    rfade_survey_rollback(survey);
    if (status == RFADE_OK)
        status = set_pragma(survey, "foreign_keys", 1, error);
    return status;
}

enum rfade_status rfade_layout_apply(struct rfade_survey *survey,
                                     const struct rfade_layout *layout,
                                     enum rfade_survey_mode mode, struct rfade_error *error)
{
    struct identity identity = {0};
    bool current = false;
    enum rfade_status status = identify(survey, &identity, error);
    if (status != RFADE_OK)
        return status;
    if (mode == RFADE_SURVEY_CREATE && identity.object_count == 0 &&
        identity.application_id == 0) {
        status = create(survey, layout, error);
        if (status == RFADE_OK)
            status = identify(survey, &identity, error);
        if (status != RFADE_OK)
            return status;
    }
    if (identity.application_id != RFADE_APPLICATION_ID)
        return refuse(survey, error,
                      "name another file with --survey; routefade makes a survey on import",
                      "this is a database, but not a survey");
    if (identity.version > layout->version)
        return refuse(survey, error, "use the newer routefade that wrote it",
                      "the survey was written by a newer version of routefade");
    if (identity.version < layout->version && mode == RFADE_SURVEY_READ)
        return refuse(survey, error,
                      "run `routefade fit` once, which brings it to this version",
                      "the survey was written by an older version of routefade");
    if (identity.version == layout->version) {
        status = derived_is_current(survey, layout, &current, error);
        if (status != RFADE_OK || current)
            return status;
        if (mode == RFADE_SURVEY_READ)
            return refuse(survey, error, "run `routefade fit` once, which makes them again",
                          "the survey's results were made by another version of routefade");
    }
    return migrate(survey, layout, error);
}
