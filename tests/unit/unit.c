/* SPDX-License-Identifier: GPL-3.0-or-later */
/* unit.c: runs the tests of one program and prints a line for each. */
#include "unit.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/base.h"

static const char *skip_reason; /* of the running test; NULL: not skipped */

void unit_skip(const char *reason)
{
    skip_reason = reason;
}

bool unit_fast(void)
{
    const char *fast = getenv("FAST");
    return fast != NULL && strcmp(fast, "1") == 0;
}

static void print_failures(void)
{
    for (const CU_FailureRecord *f = CU_get_failure_list(); f != NULL; f = f->pNext)
        printf("    %s:%u: %s\n", f->strFileName, f->uiLineNumber, f->strCondition);
}

/* CUnit prints nothing by itself when no handler is set; each line is flushed, so that a crash
 * takes no finished test with it. */
static bool run_one(const char *room, const char *name, CU_pSuite suite, CU_pTest test)
{
    skip_reason = NULL;
    CU_ErrorCode code = CU_run_test(suite, test);
    bool failed = code != CUE_SUCCESS || CU_get_number_of_failures() > 0;
    if (failed) {
        printf("not ok - %s: %s\n", room, name);
        print_failures();
    } else if (skip_reason != NULL) {
        printf("skip - %s: %s # %s\n", room, name, skip_reason);
    } else if (CU_get_number_of_asserts() == 0) {
        printf("not ok - %s: %s\n    the test asserted nothing\n", room, name);
        failed = true;
    } else {
        printf("ok - %s: %s\n", room, name);
    }
    fflush(stdout);
    return !failed;
}

static int give_up(const char *room, const char *what)
{
    printf("not ok - %s: %s (CUnit: %s)\n", room, what, CU_get_error_msg());
    return 1;
}

int unit_main(const char *room, const struct unit_test *tests)
{
    base_init();
    if (CU_initialize_registry() != CUE_SUCCESS)
        return give_up(room, "no registry of tests");
    CU_pSuite suite = CU_add_suite(room, NULL, NULL);
    if (suite == NULL)
        return give_up(room, "no suite of tests");
    const char *only = getenv("UNIT_ONLY");
    bool good = true;
    for (const struct unit_test *t = tests; t->name != NULL; t++) {
        if (only != NULL && strstr(t->name, only) == NULL)
            continue;
        CU_pTest test = CU_add_test(suite, t->name, t->run);
        if (test == NULL || CU_get_error() != CUE_SUCCESS)
            return give_up(room, t->name);
        good = run_one(room, t->name, suite, test) && good;
    }
    CU_cleanup_registry();
    return good ? 0 : 1;
}
