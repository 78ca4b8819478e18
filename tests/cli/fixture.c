/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "fixture.h"

#include <stdio.h>
#include <stdlib.h>

#include "program.h"

int fixture_setup(void **state)
{
    struct fixture *fixture = calloc(1, sizeof *fixture);
    if (!fixture)
        return -1;
    (void)snprintf(fixture->folder, sizeof fixture->folder, "%s", folder_create());
    (void)snprintf(fixture->survey, sizeof fixture->survey, "%s/night.routefade",
                   fixture->folder);
    *state = fixture;
    return 0;
}

int fixture_teardown(void **state)
{
    struct fixture *fixture = *state;
    folder_remove(fixture->folder);
    free(fixture);
    return 0;
}
