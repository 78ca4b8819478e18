/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/outage_route.h"

#include <stdlib.h>

#include "analyse/settings.h"
#include "analyse/whole_route.h"

enum { COLUMNS = 18 };

static void make_columns(const struct rfade_threshold_asked *threshold,
                         struct rfade_column columns[COLUMNS])
{
    const struct rfade_column made[COLUMNS] = {
        {"route", RFADE_COLUMN_TEXT, 0, false, true},
        {"channel", RFADE_COLUMN_TEXT, 0, false, true},
        {"campaign", RFADE_COLUMN_TEXT, 0, false, true},
        {"length_m", RFADE_COLUMN_NUMBER, 0, false, false},
        {"predicted_m", RFADE_COLUMN_NUMBER, 0, false, false},
        {"not_predicted_m", RFADE_COLUMN_NUMBER, 0, false, false},
        {"unseen_m", RFADE_COLUMN_NUMBER, 0, false, false},
        {"readings", RFADE_COLUMN_INTEGER, 0, false, false},
        {threshold->column, RFADE_COLUMN_NUMBER, 1, false, true},
        {"outage", RFADE_COLUMN_PROBABILITY, 3, true, false},
        {"outage_low", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"outage_high", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"observed", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"observed_low", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"observed_high", RFADE_COLUMN_PROBABILITY, 3, false, false},
        {"local_mean_dbm", RFADE_COLUMN_NUMBER, 1, false, false},
        {"local_sigma_db", RFADE_COLUMN_NUMBER, 1, false, false},
        {"lognormal_outage", RFADE_COLUMN_PROBABILITY, 3, false, false},
    };
    for (size_t i = 0; i < COLUMNS; i++)
        columns[i] = made[i];
}

static enum rfade_status write_row(struct rfade_rows *rows,
                                   const struct rfade_segment_result *first,
                                   const struct rfade_threshold_asked *threshold,
                                   const struct rfade_whole_route *whole,
                                   struct rfade_error *error)
{
    const struct rfade_value values[COLUMNS] = {
        rfade_value_text(first->route),
        rfade_value_text(first->channel),
        rfade_value_text(first->campaign),
        rfade_value_number(whole->length_m),
        rfade_value_number(whole->predicted_m),
        rfade_value_number(whole->not_predicted_m),
        rfade_value_number(whole->unseen_m),
        rfade_value_integer(whole->readings),
        rfade_value_number(threshold->value),
        rfade_value_number(whole->outage),
        rfade_value_number(whole->low),
        rfade_value_number(whole->high),
        rfade_value_number(whole->observed.fraction),
        rfade_value_number(whole->observed.low),
        rfade_value_number(whole->observed.high),
        rfade_value_number(whole->local_mean_dbm),
        rfade_value_number(whole->local_sigma_db),
        rfade_value_number(whole->lognormal_outage),
    };
    return rfade_rows_row(rows, values, error);
}

static enum rfade_status show_group(struct rfade_rows *rows,
                                    const struct rfade_route_group *group,
                                    const struct rfade_threshold_asked *threshold,
                                    struct rfade_error *error)
{
    struct rfade_threshold *here = malloc(group->count * sizeof *here);
    if (!here)
        return rfade_error_no_memory(error);
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; i < group->count && status == RFADE_OK; i++)
        status = rfade_threshold_here(group->rows[i], threshold, &here[i], error);
    struct rfade_whole_route whole;
    if (status == RFADE_OK)
        status =
            rfade_whole_route(group, here, rfade_analysis_defaults().confidence, &whole, error);
    if (status == RFADE_OK)
        status = write_row(rows, group->rows[0], threshold, &whole, error);
    free(here);
    return status;
}

enum rfade_status rfade_outage_whole_route(const struct rfade_run *run,
                                           struct rfade_segment_results *results,
                                           const struct rfade_threshold_asked *threshold,
                                           struct rfade_error *error)
{
    struct rfade_column columns[COLUMNS];
    struct rfade_route_groups groups;
    struct rfade_rows *rows = NULL;
    make_columns(threshold, columns);
    if (rfade_route_groups_make(results, &groups) != RFADE_OK)
        return rfade_error_no_memory(error);
    enum rfade_status status = rfade_rows_begin(run->common->format, run->output, NULL, columns,
                                                COLUMNS, &rows, error);
    for (size_t i = 0; i < groups.count && status == RFADE_OK; i++)
        status = show_group(rows, &groups.groups[i], threshold, error);
    if (status == RFADE_OK)
        status = rfade_rows_end(rows, error);
    rfade_rows_destroy(rows);
    rfade_route_groups_clear(&groups);
    return status;
}
