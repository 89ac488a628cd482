/* SPDX-License-Identifier: GPL-3.0-or-later */
/* live_run.h: the live fit: lengths until everything is settled, a second method, trust.
 *
 * Lengths are fixed beforehand: 8,000 draws, doubled while below max_draws, the last being
 * max_draws. The run ends at the first length at which the draws have converged, every probability
 * and measure is as precise as asked and no measure lies near its threshold. On which side of it a
 * measure lies never matters.
 */
#ifndef TERRACE_LIVE_RUN_H
#define TERRACE_LIVE_RUN_H

#include "analysis/analysis.h"
#include "analysis/judge.h"

struct live_run {
    struct posterior *p; /* started */
    struct judgement *j, *second;
    struct analysis *out, *other;  /* `other`: what the second method finds */
    struct convergence *diagnosed; /* [parameters + levels] */
    const struct analysis_request *r;
};

/* Judges out (targets, decisions) and fills out->diagnostics, warnings included. On return j holds
 * the draws that count. */
void live_run(struct live_run *x);

/* The first length and the one after `length`. Lengths are multiples of 8. */
size_t live_first_length(const struct design *d);
size_t live_next_length(size_t length, const struct design *d);

#endif
