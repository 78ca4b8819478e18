/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/name.h"

#include <stdio.h>
#include <string.h>

#include "common/text.h"

static const struct {
    const char *word;
    const char *find;
    const char *add;
    const char *remedy;
} kinds[] = {
    [RFADE_NAMED_CAMPAIGN] = {"campaign", "SELECT campaign_id FROM campaign WHERE name = ?1",
                              "INSERT INTO campaign (name) VALUES (?1)",
                              "`routefade status` lists the campaigns"},
    [RFADE_NAMED_VEHICLE] = {"vehicle", "SELECT vehicle_id FROM vehicle WHERE name = ?1",
                             "INSERT INTO vehicle (name) VALUES (?1)",
                             "`routefade vehicle` lists the vehicles"},
    [RFADE_NAMED_CHANNEL] = {"channel", "SELECT channel_id FROM channel WHERE name = ?1",
                             "INSERT INTO channel (name) VALUES (?1)",
                             "`routefade channel` lists the channels"},
    [RFADE_NAMED_ROUTE] = {"route", "SELECT route_id FROM route WHERE name = ?1", NULL,
                           "`routefade route` lists the routes"},
};

enum rfade_status rfade_name_check(enum rfade_named kind, const char *name,
                                   struct rfade_error *error)
{
    char printable[RFADE_NAME_SIZE];
    size_t length = strnlen(name, RFADE_NAME_SIZE);
    if (length == 0)
        return rfade_error_set(error, RFADE_INPUT, "give it a name", "the %s has an empty name",
                               kinds[kind].word);
    if (length == RFADE_NAME_SIZE)
        return rfade_error_set(error, RFADE_INPUT, "use at most 200 bytes",
                               "the %s's name is too long: %.40s...", kinds[kind].word, name);
    memcpy(printable, name, length + 1);
    rfade_text_printable(printable);
    if (strcmp(printable, name) != 0)
        return rfade_error_set(error, RFADE_INPUT, "use letters, digits and signs in UTF-8",
                               "the %s's name holds control characters or bytes that are not "
                               "UTF-8: %s",
                               kinds[kind].word, printable);
    return RFADE_OK;
}

enum rfade_status rfade_name_find(struct rfade_survey *survey, enum rfade_named kind,
                                  const char *name, int64_t *id, bool *found,
                                  struct rfade_error *error)
{
    return rfade_survey_integer(survey, id, found, error, kinds[kind].find, "t", name);
}

enum rfade_status rfade_name_require(struct rfade_survey *survey, enum rfade_named kind,
                                     const char *name, int64_t *id, struct rfade_error *error)
{
    bool found = false;
    enum rfade_status status = rfade_name_find(survey, kind, name, id, &found, error);
    if (status != RFADE_OK || found)
        return status;
    rfade_error_set(error, RFADE_INPUT, kinds[kind].remedy, "the survey has no %s '%s'",
                    kinds[kind].word, name);
    rfade_error_at(error, rfade_survey_path(survey), 0);
    return RFADE_INPUT;
}

enum rfade_status rfade_name_add(struct rfade_survey *survey, enum rfade_named kind,
                                 const char *name, int64_t *id, struct rfade_error *error)
{
    bool found = false;
    enum rfade_status status = rfade_name_find(survey, kind, name, id, &found, error);
    if (status != RFADE_OK || found)
        return status;
    status = rfade_survey_run(survey, error, kinds[kind].add, "t", name);
    if (status == RFADE_OK)
        *id = sqlite3_last_insert_rowid(rfade_survey_database(survey));
    return status;
}

void rfade_name_copy(char name[RFADE_NAME_SIZE], sqlite3_stmt *statement, int column)
{
    const unsigned char *text = sqlite3_column_text(statement, column);
    (void)snprintf(name, RFADE_NAME_SIZE, "%s", text ? (const char *)text : "");
}
