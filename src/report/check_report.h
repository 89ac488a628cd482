/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_report.h: what the writers of `check` read: a design, what its priors imply, what is
 * expected of it, and what its reader should be told. All borrowed.
 */
#ifndef TERRACE_CHECK_REPORT_H
#define TERRACE_CHECK_REPORT_H

#include "analysis/analysis.h"
#include "analysis/prior_bands.h"
#include "design/design.h"
#include "design/expected.h"

/* Sentences, owned. */
struct sentences {
    size_t count;
    char **list;
};

struct check_notes {
    struct sentences warnings;  /* something that probably is not meant */
    struct sentences remarks;   /* how to read what is written */
    struct sentences reminders; /* common practice; nothing is forbidden */
};

struct check_report {
    const struct design *d;
    const struct analysis *prior;    /* NULL: this version cannot compute these priors */
    const struct prior_bands *bands; /* with `prior` */
    const struct expected *expected;
    const struct check_notes *notes;
};

#endif
