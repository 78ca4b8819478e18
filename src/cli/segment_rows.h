/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file segment_rows.h  What the by-segment commands share: narrowing, order, first columns.
 */
#ifndef ROUTEFADE_CLI_SEGMENT_ROWS_H
#define ROUTEFADE_CLI_SEGMENT_ROWS_H

#include "analyse/results.h"
#include "analyse/settings.h"
#include "cli/command.h"

struct rfade_segment_options {
    const char *route;
    const char *channel;
    const char *campaign;
    int64_t segment;
    double from_m;
    double to_m;
    int64_t worst;
    bool by_estimate;
};

/** No narrowing, along the route. */
#define RFADE_SEGMENT_DEFAULTS                                                                 \
    {                                                                                          \
        .from_m = NAN, .to_m = NAN                                                             \
    }

/** Lines of a command's option table; `type` has a member `segments` of the struct above. */
#define RFADE_SEGMENT_OPTION_LINES(type)                                                       \
    {"route", "NAME", RFADE_OPTION_TEXT, offsetof(type, segments.route), 0,                    \
     0,       NULL,   "only this route"},                                                      \
        {"channel", "NAME", RFADE_OPTION_TEXT,  offsetof(type, segments.channel), 0,           \
         0,         NULL,   "only this channel"},                                              \
        {"campaign", "NAME", RFADE_OPTION_TEXT,   offsetof(type, segments.campaign), 0,        \
         0,          NULL,   "only this campaign"},                                            \
        {"segment",                                                                            \
         "N",                                                                                  \
         RFADE_OPTION_INTEGER,                                                                 \
         offsetof(type, segments.segment),                                                     \
         1,                                                                                    \
         1e9,                                                                                  \
         NULL,                                                                                 \
         "only the segment of this number"},                                                   \
        {"from-m",                                                                             \
         "A",                                                                                  \
         RFADE_OPTION_NUMBER,                                                                  \
         offsetof(type, segments.from_m),                                                      \
         0,                                                                                    \
         1e9,                                                                                  \
         NULL,                                                                                 \
         "only segments that reach past chainage A metres"},                                   \
        {"to-m",                                                                               \
         "B",                                                                                  \
         RFADE_OPTION_NUMBER,                                                                  \
         offsetof(type, segments.to_m),                                                        \
         0,                                                                                    \
         1e9,                                                                                  \
         NULL,                                                                                 \
         "only segments that begin before chainage B metres"},                                 \
        {"worst",                                                                              \
         "N",                                                                                  \
         RFADE_OPTION_INTEGER,                                                                 \
         offsetof(type, segments.worst),                                                       \
         1,                                                                                    \
         1e9,                                                                                  \
         NULL,                                                                                 \
         "the N worst segments, worst first, ranked by the better end of the interval (where " \
         "there is one)"},                                                                     \
    {                                                                                          \
        "by-estimate", NULL, RFADE_OPTION_FLAG, offsetof(type, segments.by_estimate), 0, 0,    \
            NULL, "with --worst: ranked by the estimate itself"                                \
    }

/**
 * Opens the run's survey for reading and reads the rows that the options ask for. A note says
 * if the survey changed since they were made.
 * @return RFADE_USAGE (options that contradict each other) | RFADE_NO_DATA (no fit yet) | ...
 */
enum rfade_status rfade_segment_read(const struct rfade_run *run,
                                     const struct rfade_command *command,
                                     const struct rfade_segment_options *options,
                                     struct rfade_segment_results *results,
                                     struct rfade_error *error);

/** Says in a note how many segments had one pass, which knows nothing of how passes differ. */
void rfade_segment_note_passes(const struct rfade_run *run,
                               const struct rfade_segment_results *results);

/** A model's parameter; one at the end of the model's domain may well be larger. */
struct rfade_value rfade_parameter_value(const struct rfade_model *model, double parameter);

/** What a by-segment command adds to the first columns, which all of them share. */
struct rfade_segment_table {
    const struct rfade_column *columns;
    size_t column_count;
    /** Fills a value a column for line number `index`: row number index / lines of the results;
     * borrowed from them. */
    void (*values)(const void *context, const struct rfade_segment_result *row, size_t index,
                   struct rfade_value *values);
    /** How bad row number `index` is, by the better end of its interval or by the estimate
     * itself: the larger, the worse; rows of NaN go last. */
    double (*badness)(const void *context, const struct rfade_segment_result *row, size_t index,
                      bool by_estimate);
    const void *context;
    size_t lines; /**< that each row gives; 0: one */
};

enum { RFADE_SEGMENT_OWN_COLUMNS = 24 }; /**< room for a command's own */

/**
 * Prints the rows: route ... model, then the command's own. With --worst worst first and cut
 * to N, else as they are.
 */
enum rfade_status rfade_segment_print(const struct rfade_run *run,
                                      const struct rfade_segment_table *table,
                                      const struct rfade_segment_options *options,
                                      const struct rfade_segment_results *results,
                                      struct rfade_error *error);

#endif
