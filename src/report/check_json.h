/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_json.h: check.json, a design and what it implies, for scripts.
 *
 *   {"terrace": 1, "program", "kind": "check",
 *    "design": {"title", "sha256", "resolved_sha256", "resolved": the design with every default in
 *               place and notes out},
 *    "seed",
 *    "levels": [{"label", "value", "control",
 *                "prior": {"response": {"q05", "q50", "q95"}, "gain": the same or null,
 *                          "pr_positive", "pr_target": {TARGET: p}, "pr_meets": {TARGET: p}}}],
 *    "targets": {TARGET: {"sentence", "prior_pr_none"}},
 *    "priors": [{"name", "sentence", "q05", "q50", "q95"}],
 *    "analyses": {"counted", "enrolment_end", "adapts_from",
 *                 "expected": [{"analysis", "last", "point", "held", "time", "randomized",
 *                               "observed", "pending", "dropped"}]},
 *    "decisions": [{"action", "sentence"}], "final": sentence or null,
 *    "scenarios": [{"name", "null", "response": by level or null, "gain": by level or null,
 *                   "sd": by level or null, "trend", "true_level": {TARGET: label or null}}],
 *    "warnings": [], "remarks": [], "reminders": []}
 *
 * A number that does not exist is null. In a scenario whose truth is drawn from the prior
 * `response`, `gain` and `true_level` are null.
 */
#ifndef TERRACE_CHECK_JSON_H
#define TERRACE_CHECK_JSON_H

#include "base/text.h"
#include "report/check_report.h"

/* Appends the whole document, a newline at its end. */
void check_json(struct text *out, const struct check_report *r);

#endif
