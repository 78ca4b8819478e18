/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file list.h  What the survey holds. Arrays are the caller's to free(). */
#ifndef ROUTEFADE_SURVEY_LIST_H
#define ROUTEFADE_SURVEY_LIST_H

#include <stddef.h>

#include "survey/name.h"

struct rfade_logger_file {
    int64_t logger_file_id;
    unsigned char sha256[32];
    char name[512]; /**< cut if longer */
    int64_t size_bytes;
    int64_t line_count;
    int64_t reading_count;
    int64_t fix_count;
    int64_t differing_fix_count;
    int64_t refused_count;
};

/** The readings of one channel by one vehicle in one campaign, over all files. */
struct rfade_stream {
    int64_t vehicle_id;
    int64_t channel_id;
    int64_t campaign_id;
    char vehicle[RFADE_NAME_SIZE];
    char channel[RFADE_NAME_SIZE];
    char campaign[RFADE_NAME_SIZE];
    int64_t extent_count;
    int64_t reading_count; /**< as stored: repeated readings counted each time */
    int64_t start_us;
    int64_t end_us;
};

/** What the last fit found in the data of a stream, over its traces. NaN, -1: nothing. */
struct rfade_stream_found {
    char vehicle[RFADE_NAME_SIZE];
    char channel[RFADE_NAME_SIZE];
    char campaign[RFADE_NAME_SIZE];
    int64_t reading_count; /**< each once */
    double step_db;        /**< the coarsest of those found */
    double floor_dbm;      /**< the highest level that readings pile up at from below */
    double ceiling_dbm;    /**< the lowest that they pile up at from above */
    int64_t lost_count;    /**< by sequence number; -1: there are no numbers */
    int64_t missing_count; /**< by a regular interval; -1: it isn't regular, or numbered */
};

struct rfade_survey_counts {
    int64_t logger_files;
    int64_t campaigns;
    int64_t vehicles;
    int64_t channels;
    int64_t routes;
    int64_t segments;
    int64_t extents;
    int64_t readings;
    int64_t fixes;
    int64_t refused_lines;
    int64_t generation;        /**< counts changes of what results are made from */
    int64_t fitted_generation; /**< the one that results stand for; 0: none */
    int64_t size_bytes;        /**< of the survey file */
};

/** By name and SHA-256. */
enum rfade_status rfade_survey_logger_files(struct rfade_survey *survey,
                                            struct rfade_logger_file **files, size_t *count,
                                            struct rfade_error *error);

/** By names of vehicle, channel and campaign: the order doesn't depend on ids. */
enum rfade_status rfade_survey_streams(struct rfade_survey *survey,
                                       struct rfade_stream **streams, size_t *count,
                                       struct rfade_error *error);

/** By names; streams along no route have none. */
enum rfade_status rfade_survey_found(struct rfade_survey *survey,
                                     struct rfade_stream_found **found, size_t *count,
                                     struct rfade_error *error);

enum rfade_status rfade_survey_count(struct rfade_survey *survey,
                                     struct rfade_survey_counts *counts,
                                     struct rfade_error *error);

#endif
