/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_report.h: what every writer of one analysis reads: a finished analysis with its design
 * and data. All borrowed; nothing here is changed or computed anew.
 */
#ifndef TERRACE_ANALYSIS_REPORT_H
#define TERRACE_ANALYSIS_REPORT_H

#include <stdint.h>

#include "analysis/analysis.h"
#include "design/data.h"
#include "design/design.h"
#include "posterior/posterior.h"

struct analysis_report {
    const struct design *d;
    const struct data *data;
    const struct analysis *a;
    struct draws draws; /* for draws.csv only; all zero when it is not asked for */
    const char *by;     /* --by as typed, or NULL */
    uint64_t seed;      /* the seed in force, below 2^53 */
};

#endif
