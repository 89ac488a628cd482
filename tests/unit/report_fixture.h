/* SPDX-License-Identifier: GPL-3.0-or-later */
/* report_fixture.h: hand-filled analyses for the tests of the writers. The numbers are invented
 * (no fit is behind them); they are only consistent enough to be read. */
#ifndef TERRACE_REPORT_FIXTURE_H
#define TERRACE_REPORT_FIXTURE_H

#include "report/analysis_report.h"

enum fixture_kind {
    FIXTURE_ITCH,       /* continuous, lower is better, placebo + 5 doses, 3 targets */
    FIXTURE_DAYS,       /* binary, 7 durations, no control, a closed level, an empty level */
    FIXTURE_DISTRUSTED, /* the itch analysis, not trusted */
    FIXTURE_FINAL,      /* the itch analysis as the final one, with pending subjects; a likelihood
                           fit that did not converge */
    FIXTURE_MODELS,     /* the itch analysis with a likelihood fit and three sensitivity models: a
                           sound one, one not trusted, one that could not be fitted */
    FIXTURE_MANY        /* 128 levels, labels that need escaping */
};

struct fixture;

struct fixture *fixture_new(enum fixture_kind kind);
const struct analysis_report *fixture_report(const struct fixture *f);
void fixture_free(struct fixture *f);

#endif
