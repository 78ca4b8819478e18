/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "routefade/special.h"

double rfade_log_odds(double probability)
{
    return log(probability) - log1p(-probability);
}

double rfade_from_log_odds(double log_odds)
{
    return log_odds > 0 ? 1.0 / (1.0 + exp(-log_odds)) : exp(log_odds) / (1.0 + exp(log_odds));
}
