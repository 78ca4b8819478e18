/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file response.h  How the outage at one place moves with the power there. */
#ifndef ROUTEFADE_PREDICT_RESPONSE_H
#define ROUTEFADE_PREDICT_RESPONSE_H

#include "routefade/model.h"
#include "routefade/status.h"

struct rfade_response {
    double level; /**< d outage / d mean level, per dB, but for its sign */
    double slow;  /**< the same per relative power when it is scatter in step with the direct
                       ray that varies, the rest of the scatter staying as it is */
};

enum rfade_status rfade_response(const struct rfade_model *model, double parameter, double x_db,
                                 struct rfade_response *response);

#endif
