/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A stranger's program: the probability that Rayleigh power stays below its mean. */
#include <gsl/gsl_errno.h>
#include <routefade/model.h>
#include <stdio.h>

int main(void)
{
    gsl_set_error_handler_off();
    struct rfade_tails tails;
    if (rfade_model(RFADE_RAYLEIGH)->tails(0.0, 0.0, &tails) != RFADE_OK)
        return 1;
    printf("%.6f\n", tails.lower);
    return 0;
}
