/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file branches.h  The law of the SNR of combined branches about the mean of one of them. */
#ifndef ROUTEFADE_PREDICT_BRANCHES_H
#define ROUTEFADE_PREDICT_BRANCHES_H

#include "routefade/error_rate.h"

/** Whether the link's numbers lie in the stated domain, the mean SNR apart. */
enum rfade_status rfade_link_check(const struct rfade_link *link);

/** Both tails of the combined SNR, x_db over one branch's local mean; a model is there. */
enum rfade_status rfade_branches_tails(const struct rfade_link *link, double x_db,
                                       struct rfade_tails *tails);

/** ln of its density per neper; -infinity where there is none. */
double rfade_branches_log_density(const struct rfade_link *link, double x_db);

/** Scale on which the logarithm of the density bends, nepers: up to 1. */
double rfade_branches_spread(const struct rfade_link *link);

/** dB of the median of the local mean (of one branch) below the mean over everything. */
double rfade_link_median_db(const struct rfade_link *link);

/** Nepers by which combined unfaded branches lie over one of them. */
double rfade_link_log_gain(const struct rfade_link *link);

#endif
