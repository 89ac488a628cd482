/* SPDX-License-Identifier: GPL-3.0-or-later */
/* unit.h: the tiny runner of a unit test program, over CUnit.
 *
 * A program lists its tests and hands them to unit_main, which prints one line a test:
 * `ok - ROOM: TEST`, `not ok - ROOM: TEST` followed by the failed assertions, or
 * `skip - ROOM: TEST # reason`. tests/run counts these lines; a crash is counted there.
 */
#ifndef TERRACE_TEST_UNIT_H
#define TERRACE_TEST_UNIT_H

#include <CUnit/CUnit.h>
#include <stdbool.h>

struct unit_test {
    const char *name; /* unique in the program */
    void (*run)(void);
};
/* Ends the list of tests. */
#define UNIT_END   \
    {              \
        NULL, NULL \
    }

/* Calls base_init, runs every test in order; returns the program's exit status: 0 or 1. Text
 * in UNIT_ONLY (environment) runs only the tests whose names contain it. */
int unit_main(const char *room, const struct unit_test *tests);

/* Marks the running test as skipped; the test returns right after. A failed assertion before it
 * still counts. */
void unit_skip(const char *reason);

/* Whether FAST=1 asks for fewer draws (never for fewer tests). */
bool unit_fast(void);

#endif
