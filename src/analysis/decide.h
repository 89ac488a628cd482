/* SPDX-License-Identifier: GPL-3.0-or-later */
/* decide.h: from measures to conditions, decisions and a recommendation.
 *
 * Every decision is evaluated at every analysis; it acts only where it applies. At an interim
 * analysis those apply whose `from` and `min_observed` are reached; at the last one only `final`
 * does. Thread-safe for different outputs and judgements.
 */
#ifndef TERRACE_DECIDE_H
#define TERRACE_DECIDE_H

#include "analysis/analysis.h"
#include "analysis/judge.h"

/* Fills out->decision, out->final_success and out->recommendation (as if trusted). */
void decide(struct analysis *out, const struct judgement *j, const struct analysis_request *r);

#endif
