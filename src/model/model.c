/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "model/model.h"

#include <stddef.h>
#include <string.h>

/* In the order of enum rfade_model_id: a new model is one line here. */
static const struct rfade_model *const models[RFADE_MODEL_COUNT] = {
    &rfade_model_rayleigh,
    &rfade_model_rice,
    &rfade_model_nakagami,
    &rfade_model_lognormal,
};

const struct rfade_model *rfade_model(enum rfade_model_id id)
{
    const size_t index = (size_t)id;
    return index < RFADE_MODEL_COUNT ? models[index] : NULL;
}

const struct rfade_model *rfade_model_by_name(const char *name)
{
    for (size_t i = 0; name != NULL && i < RFADE_MODEL_COUNT; i++) {
        if (strcmp(name, models[i]->name) == 0) {
            return models[i];
        }
    }
    return NULL;
}
