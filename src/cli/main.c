/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <fcntl.h>
#include <gsl/gsl_errno.h>
#include <signal.h>
#include <unistd.h>

#include "cli/command.h"

/*
 * A program started with standard output closed would get that descriptor for the first file
 * it opens, and then print into the survey. Each closed descriptor is opened the wrong way
 * round, so that using it fails as it should.
 */
static void occupy_standard_descriptors(void)
{
    for (int descriptor = STDIN_FILENO; descriptor <= STDERR_FILENO; descriptor++)
        if (fcntl(descriptor, F_GETFD) == -1)
            (void)open("/dev/null", descriptor == STDIN_FILENO ? O_WRONLY : O_RDONLY);
}

int main(int argc, char **argv)
{
    occupy_standard_descriptors();
    /* A closed pipe is a write error with its own message, not a sudden end. */
    (void)signal(SIGPIPE, SIG_IGN);
    (void)gsl_set_error_handler_off();
    return (int)rfade_program(argc, argv, stdout, stderr);
}
