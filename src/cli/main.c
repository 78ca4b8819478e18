/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <gsl/gsl_errno.h>
#include <signal.h>

#include "cli/command.h"

int main(int argc, char **argv)
{
    /* A closed pipe is a write error with its own message, not a sudden end. */
    (void)signal(SIGPIPE, SIG_IGN);
    (void)gsl_set_error_handler_off();
    return (int)rfade_program(argc, argv, stdout, stderr);
}
