/* SPDX-License-Identifier: GPL-3.0-or-later */
/* data.h: what is known at a data cut: subjects as read, and the sums by level that a fit sees. */
#ifndef TERRACE_DATA_H
#define TERRACE_DATA_H

#include <stdbool.h>
#include <stddef.h>

#include "base/sha256.h"
#include "base/status.h"
#include "base/text.h"
#include "design/design.h"

/* Sums by level; arrays have `levels` entries, all levels of the design in list order. Simulated
 * trials fill the same struct. n counts are whole numbers held as doubles. */
struct level_data {
    size_t levels;
    double *randomized; /* all subjects of the level */
    double *n;          /* outcomes in hand (with dropped = failure: those too) */
    double *mean;       /* continuous: mean response, 0 where n is 0 */
    double *ss;         /* continuous: within-level sum of squares about the mean */
    double *events;     /* binary: events */
};

void level_data_init(struct level_data *d, size_t levels); /* zeroed */
void level_data_release(struct level_data *d);

enum subject_status { SUBJECT_OBSERVED, SUBJECT_PENDING, SUBJECT_DROPPED };
struct subject {
    char *id;
    size_t level;
    enum subject_status status;
    bool has_response;
    double response;
    double enrolled; /* in time_unit; NaN when the file has no such column */
    long line;
};

struct data {
    char *file;
    char sha256[SHA256_HEX];
    size_t subjects;
    struct subject *subject;
    bool has_enrolled, dates; /* dates: `enrolled` were calendar dates */
    double cut;               /* NaN when there is none */
    char *cut_text;           /* as a person reads it: the number, or the calendar date; NULL */
    double observed, pending, dropped; /* observed + pending + dropped = subjects */
    double dropped_as_failure;         /* NaN unless dropped = failure */
    struct level_data by_level;
    size_t warnings;
    char **warning; /* sentences with their line */
};

/* Reads `path` against the design. cut: the --cut argument as typed, or NULL. Every fault is added
 * with its line. On STATUS_OK *out is owned by the caller. */
enum status data_read(struct data **out, const char *path, const struct design *d, const char *cut,
                      struct err *e);
/* The same of bytes in hand; `file` is for messages. */
enum status data_parse(struct data **out, const char *bytes, size_t length, const char *file,
                       const struct design *d, const char *cut, struct err *e);
void data_free(struct data *data);

/* Which analysis this is: `asked` > 0: --analysis K (1 to the number planned); 0: the number of
 * planned points reached; final: planned points reached + 1, and with pending subjects needs
 * pending_ok. STATUS_INPUT with a fault otherwise. *point is the planned point of that analysis
 * (`from` of decisions is compared with it); for the final analysis INFINITY. */
enum status data_analysis_number(const struct data *data, const struct design *d, long asked,
                                 bool final, bool pending_ok, long *number, double *point,
                                 struct err *e);

#endif
