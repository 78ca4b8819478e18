/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file fixture.h  A folder of a test's own, and the name of a survey in it. */
#ifndef ROUTEFADE_TESTS_CLI_FIXTURE_H
#define ROUTEFADE_TESTS_CLI_FIXTURE_H

struct fixture {
    char folder[64];
    char survey[96]; /**< nothing is there yet */
};

/** For cmocka: *state is the fixture. */
int fixture_setup(void **state);
int fixture_teardown(void **state);

#endif
