/* SPDX-License-Identifier: GPL-3.0-or-later */
/* data_messages.h: every sentence that a wrong data file, or a wrong analysis number, can earn. */
#ifndef TERRACE_DATA_MESSAGES_H
#define TERRACE_DATA_MESSAGES_H

/* Columns. */
#define DATA_MSG_COLUMN "the column \"%s\" is missing; the header has: %s"
#define DATA_MSG_COLUMN_NEAR "the column \"%s\" is missing; is \"%s\" meant? (data.columns renames)"
#define DATA_MSG_NO_ROWS "there is a header but no subject"

/* One subject. */
#define DATA_MSG_NO_SUBJECT "the subject has no name"
#define DATA_MSG_TWICE "subject \"%s\" stands on line %ld already; a subject has one row"
#define DATA_MSG_NO_LEVEL "the level is empty; it must be a label or a value of the design"
#define DATA_MSG_LEVEL "\"%s\" is not a level of the design; allowed are its labels and values: %s"
#define DATA_MSG_NUMBER "the response \"%s\" is not a finite number; leave it empty while pending"
#define DATA_MSG_RANGE "the response %s lies outside the endpoint's range, %s to %s"
#define DATA_MSG_BINARY "the response %s of a binary endpoint must be 0 or 1"
#define DATA_MSG_STATUS "the status \"%s\" is not known; allowed: observed, pending, dropped"
#define DATA_MSG_OBSERVED "the status is observed, but the response is empty"
#define DATA_MSG_CONFLICT "the status is %s, but there is a response (%s); empty one of the two"

/* Times. */
#define DATA_MSG_NO_ENROLLED \
    "the enrolment is empty; every subject needs one when the column is there"
#define DATA_MSG_ENROLLED \
    "the enrolment \"%s\" is neither a number nor a calendar date (YYYY-MM-DD)"
#define DATA_MSG_MIXED "the enrolment is a %s, but earlier rows have %ss; one kind a file"
#define DATA_MSG_DATE_UNIT \
    "calendar dates need the time_unit day, week, month or year, not \"%s\"; give numbers"
#define DATA_MSG_CUT "--cut %s must be a %s, as the enrolments of the file are"
#define DATA_MSG_CUT_ALONE "--cut needs enrolments, but the file has no column \"%s\""
#define DATA_MSG_AFTER_CUT "the subject was enrolled (%s) after the data cut (%s)"
#define DATA_MSG_EARLY "the response is there, but due only at %s, after the data cut (%s)"

/* Which analysis. */
#define DATA_MSG_ANALYSIS "--analysis %ld does not exist: the design plans %zu; allowed: 1 to %zu"
#define DATA_MSG_NONE_PLANNED \
    "the design plans no interim analysis; say --final, or plan one (analyses)"
#define DATA_MSG_NONE_REACHED \
    "no planned analysis is reached yet (%s of the first %s); say --analysis K or --final"
#define DATA_MSG_NO_TIME                                                                     \
    "the analyses are counted by time, but the file has no enrolments; say --analysis K or " \
    "--final"
#define DATA_MSG_PENDING \
    "%s subjects are pending; wait for their outcomes, or say --pending-ok with --final"

/* Warnings (not faults). */
#define DATA_WARN_OVERDUE "Line %ld: subject %s is pending although the response was due at %s."

#endif
