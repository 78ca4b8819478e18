/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/common_options.h"

#include <stdlib.h>

#define TARGET(member) offsetof(struct rfade_common_options, member)

const struct rfade_option rfade_common_option_table[] = {
    {"survey", "FILE", RFADE_OPTION_TEXT, TARGET(survey), 0, 0, NULL,
     "the survey file; default $ROUTEFADE_SURVEY, else routefade.survey"},
    {"format", "NAME", RFADE_OPTION_CHOICE, TARGET(format_name), 0, 0, rfade_rows_format_name,
     "how rows are printed, table if not told"},
    {"quiet", NULL, RFADE_OPTION_FLAG, TARGET(quiet), 0, 0, NULL,
     "no progress and no notes on standard error"},
    {"help", NULL, RFADE_OPTION_FLAG, TARGET(help), 0, 0, NULL, "this text"},
};
const size_t rfade_common_option_count =
    sizeof rfade_common_option_table / sizeof rfade_common_option_table[0];

struct rfade_common_options rfade_common_option_defaults(void)
{
    /* NOLINTNEXTLINE(concurrency-mt-unsafe): before any thread is started */
    const char *survey = getenv("ROUTEFADE_SURVEY");
    return (struct rfade_common_options){
        .survey = survey && *survey ? survey : "routefade.survey",
        .format_name = rfade_rows_format_name(0),
    };
}
