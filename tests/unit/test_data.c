/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_data.c: what a data file gives, and that every fault of one is told with its line. */
#include <math.h>

#include "analysis/vocabulary_rows.h"
#include "design/data.h"
#include "design_files.h"
#include "message_rows.h"
#include "unit.h"

#define DIRECTORY "tests/data/"

struct bad_case {
    const char *file, *design; /* file below tests/data, without .csv */
    const char *cut;
    long asked;
    bool final;
    const char *expected; /* must stand in the printed fault */
};

static const struct bad_case cases[] = {
    {"bad/empty", "continuous", NULL, 0, false, "empty.csv: the file is empty"},
    {"bad/utf16", "continuous", NULL, 0, false, "UTF-16"},
    {"bad/utf8", "continuous", NULL, 0, false, "utf8.csv:2: byte 0xe9 is not valid UTF-8"},
    {"bad/nul", "continuous", NULL, 0, false, "nul.csv:2: a NUL byte"},
    {"bad/quote_inside", "continuous", NULL, 0, false, "quote_inside.csv:2: field 1 has a double"},
    {"bad/quote_after", "continuous", NULL, 0, false, "quote_after.csv:2: field 1 goes on"},
    {"bad/quote_open", "continuous", NULL, 0, false, "quote_open.csv:2: field 1 starts with"},
    {"bad/fields", "continuous", NULL, 0, false, "fields.csv:2: the row has 2"},
    {"bad/no_name", "continuous", NULL, 0, false, "no_name.csv:1: column 2 has no name"},
    {"bad/name_twice", "continuous", NULL, 0, false, "name_twice.csv:1: the column name \"level\""},
    {"bad/column", "continuous", NULL, 0, false,
     "column.csv:1: the column \"response\" is missing; the header"},
    {"bad/column_near", "continuous", NULL, 0, false, "is \"respons\" meant?"},
    {"bad/no_rows", "continuous", NULL, 0, false, "no_rows.csv:1: there is a header"},
    {"bad/no_subject", "continuous", NULL, 0, false, "no_subject.csv:2: the subject has no name"},
    {"bad/twice", "continuous", NULL, 0, false, "twice.csv:4: subject \"a\" stands on line 2"},
    {"bad/no_level", "continuous", NULL, 0, false, "no_level.csv:2: the level is empty"},
    {"bad/level", "continuous", NULL, 0, false, "level.csv:2: \"20 mg\" is not a level"},
    {"bad/number", "continuous", NULL, 0, false, "number.csv:2: the response \"1.2.3\""},
    {"bad/range", "continuous", NULL, 0, false,
     "the response 10.5 lies outside the endpoint's range, -10 to 10"},
    {"bad/binary", "binary", NULL, 0, false, "binary.csv:2: the response 2 of a binary"},
    {"bad/status", "continuous", NULL, 0, false, "status.csv:2: the status \"done\""},
    {"bad/observed", "continuous", NULL, 0, false, "observed.csv:2: the status is observed"},
    {"bad/conflict", "continuous", NULL, 0, false,
     "the status is dropped, but there is a response (1)"},
    {"bad/no_enrolled", "continuous", NULL, 0, false, "no_enrolled.csv:2: the enrolment is empty"},
    {"bad/enrolled", "continuous", NULL, 0, false, "the enrolment \"2026-02-30\" is neither"},
    {"bad/mixed", "continuous", NULL, 0, false, "mixed.csv:3: the enrolment is a date"},
    {"bad/date_unit", "quarter", NULL, 0, false, "not \"quarter\"; give numbers"},
    {"good/numbers", "continuous", "2026-03-01", 0, false, "--cut 2026-03-01 must be a number"},
    {"bad/not_finite", "continuous", "3", 0, false, "--cut needs enrolments"},
    {"good/numbers", "continuous", "6", 0, false,
     "numbers.csv:9: the subject was enrolled (6.5) after the data cut (6)"},
    {"good/dates", "binary", "2026-03-04", 0, false,
     "due only at 2026-03-05, after the data cut (2026-03-04)"},
    {"good/numbers", "continuous", NULL, 3, false, "--analysis 3 does not exist"},
    {"good/numbers", "unplanned", NULL, 0, false, "the design plans no interim analysis"},
    {"good/dates", "binary", NULL, 0, false,
     "no planned analysis is reached yet (3 of the first 4)"},
    {"bad/no_time", "timed", NULL, 0, false, "counted by time"},
    {"good/numbers", "continuous", NULL, 0, true, "2 subjects are pending"},
};

static struct design *design_of(const char *name)
{
    struct text path = TEXT_INIT;
    struct err e = ERR_INIT;
    struct design *d = NULL;
    to_root();
    text_addf(&path, DIRECTORY "%s.json", name);
    CU_ASSERT_EQUAL_FATAL(design_read(&d, text_s(&path), &terrace_vocabulary, &e), STATUS_OK);
    text_release(&path);
    return d;
}

static enum status read_case(struct data **data, struct design *d, const char *file,
                             const char *cut, struct err *e)
{
    struct text path = TEXT_INIT;
    text_addf(&path, DIRECTORY "%s.csv", file);
    const enum status status = data_read(data, text_s(&path), d, cut, e);
    text_release(&path);
    return status;
}

static void check_case(const struct bad_case *c)
{
    struct err e = ERR_INIT;
    struct design *d = design_of(c->design);
    struct data *data;
    long number;
    double point;
    if (read_case(&data, d, c->file, c->cut, &e) == STATUS_OK)
        data_analysis_number(data, d, c->asked, c->final, false, &number, &point, &e);
    CU_ASSERT_EQUAL(e.status, STATUS_INPUT);
    message_rows_earn(&e, c->expected, c->file);
    data_free(data);
    design_free(d);
    err_release(&e);
}

static void every_message(void)
{
    to_root();
    message_rows_read("src/design/", "data_messages");
    message_rows_read("src/base/", "csv_messages");
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++)
        check_case(&cases[i]);
    /* the warning is no fault: seen in its own test; here it is earned by its words */
    struct err e = ERR_INIT;
    err_add(&e, STATUS_INPUT, NULL, 0, NULL,
            "Line 3: subject b is pending although the response was due at 5.");
    message_rows_earn(&e, "pending although", "warning");
    err_release(&e);
    CU_ASSERT(message_rows_all_earned() > 30);
    message_rows_forget();
}

static void all_faults_in_one_run(void)
{
    static const char text[] = "subject,level,response\n,5 mg,1\nb,9 mg,1\nc,5 mg,99\nc,5 mg,x\n";
    struct err e = ERR_INIT;
    struct design *d = design_of("continuous");
    struct data *data;
    FILE *f = fopen("build/test-faults.csv", "wb");
    CU_ASSERT_PTR_NOT_NULL_FATAL(f);
    fwrite(text, 1, strlen(text), f);
    fclose(f);
    CU_ASSERT_EQUAL(data_read(&data, "build/test-faults.csv", d, NULL, &e), STATUS_INPUT);
    CU_ASSERT_EQUAL(e.count, 5);
    CU_ASSERT_PTR_NULL(data);
    remove("build/test-faults.csv");
    err_release(&e);
    design_free(d);
}

static void numbers(void)
{
    struct err e = ERR_INIT;
    struct design *d = design_of("continuous");
    struct data *x;
    long number;
    double point;
    CU_ASSERT_EQUAL_FATAL(read_case(&x, d, "good/numbers", NULL, &e), STATUS_OK);
    CU_ASSERT_EQUAL(x->subjects, 7);
    CU_ASSERT_EQUAL(x->observed, 4);
    CU_ASSERT_EQUAL(x->pending, 2);
    CU_ASSERT_EQUAL(x->dropped, 1);
    CU_ASSERT(isnan(x->dropped_as_failure));
    CU_ASSERT_EQUAL(x->by_level.randomized[2], 3);
    CU_ASSERT_EQUAL(x->by_level.n[1], 2);
    CU_ASSERT_DOUBLE_EQUAL(x->by_level.mean[1], 3.0, 1e-15);
    CU_ASSERT_DOUBLE_EQUAL(x->by_level.ss[1], 0.5, 1e-15);
    CU_ASSERT_DOUBLE_EQUAL(x->cut, 6.5, 1e-15); /* the latest: S-7 at 6.5, S-6 due at 6.5 */
    CU_ASSERT_EQUAL(x->warnings, 0);
    CU_ASSERT_EQUAL(x->subject[2].line, 5); /* a blank line counts */
    CU_ASSERT_EQUAL(data_analysis_number(x, d, 0, false, false, &number, &point, &e), STATUS_OK);
    CU_ASSERT_EQUAL(number, 1);
    CU_ASSERT_EQUAL(point, 4.0);
    CU_ASSERT_EQUAL(data_analysis_number(x, d, 0, true, true, &number, &point, &e), STATUS_OK);
    CU_ASSERT_EQUAL(number, 2);
    CU_ASSERT(isinf(point));
    data_free(x);
    CU_ASSERT_EQUAL_FATAL(read_case(&x, d, "good/numbers", "8", &e), STATUS_OK);
    CU_ASSERT_EQUAL(x->warnings, 1);
    CU_ASSERT_PTR_NOT_NULL(strstr(
        x->warning[0], "Line 7: subject S-5 is pending although the response was due at 7."));
    data_free(x);
    design_free(d);
    err_release(&e);
}

static void dates_and_failures(void)
{
    struct err e = ERR_INIT;
    struct design *d = design_of("binary");
    struct data *x;
    CU_ASSERT_EQUAL_FATAL(read_case(&x, d, "good/dates", NULL, &e), STATUS_OK);
    CU_ASSERT(x->dates);
    CU_ASSERT_DOUBLE_EQUAL(x->subject[1].enrolled, 2.0, 1e-12); /* 27 February to 1 March 2026 */
    CU_ASSERT_STRING_EQUAL(x->cut_text, "2026-03-05");
    CU_ASSERT_EQUAL(x->observed, 3);
    CU_ASSERT_EQUAL(x->dropped, 0);
    CU_ASSERT_EQUAL(x->dropped_as_failure, 1);
    CU_ASSERT_EQUAL(x->by_level.n[2], 1);
    CU_ASSERT_EQUAL(x->by_level.events[2], 0);
    CU_ASSERT_EQUAL(x->by_level.events[1], 1);
    data_free(x);
    design_free(d);
    err_release(&e);
}

static const struct unit_test tests[] = {
    {"each message is earned by one malformed file or call", every_message},
    {"all faults of a file in one run", all_faults_in_one_run},
    {"numbers, aliases, blank lines, sums by level, the cut", numbers},
    {"calendar dates, dropouts as failures", dates_and_failures},
    UNIT_END,
};

int main(void)
{
    return unit_main("data", tests);
}
