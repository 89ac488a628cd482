/* SPDX-License-Identifier: GPL-3.0-or-later */
/* expected.h: how far a trial is expected to be at each planned analysis, in closed form.
 *
 * A fluid approximation: the random numbers of arrivals and dropouts are replaced by their means,
 * so the counts are the means at a given time, and times are those at which the mean reaches the
 * planned number. Nothing here is simulated and no stop is assumed.
 */
#ifndef TERRACE_EXPECTED_H
#define TERRACE_EXPECTED_H

#include <stdbool.h>
#include <stddef.h>

#include "design/design.h"

/* Counts of subjects at one data cut; a figure that cannot be known (no accrual rates) is NaN. */
struct expected_cut {
    double point; /* the planned point, in its unit; NaN for the last analysis */
    double time;  /* in time_unit since opening */
    double randomized, observed, pending, dropped;
    bool held;    /* false: expected only at or after the end of enrolment, so not held */
    bool delayed; /* the cut waits until the previous decision is in force */
};

struct expected {
    bool timed;               /* accrual rates are given */
    size_t count;             /* planned analyses */
    struct expected_cut *cut; /* owned */
    struct expected_cut last; /* the last analysis: everybody followed up */
    double enrolment_end;     /* NaN without rates */
    double adapts_from;       /* time from which adapted shares are expected in force; NaN: never
                                 or unknown */
};

/* Fills *out from the design's accrual, dropout (averaged over levels by the fixed ratio) and
 * observed_after. */
void expected_init(struct expected *out, const struct design *d);
void expected_release(struct expected *x);

/* Expected number randomized by time t >= 0, and the time at which n are (INFINITY: never). No end
 * of enrolment. */
double expected_arrivals(const struct accrual *a, double t);
double expected_arrival_time(const struct accrual *a, double n);

/* Gain of a level under true responses: s (m_k - m_reference); NaN in a design without gains. */
double expected_gain(const struct design *d, const double *response, size_t level);

#endif
