/* SPDX-License-Identifier: GPL-3.0-or-later */
/* targets.h: target rules: pure functions on vectors of level responses.
 *
 * Every rule is a bar a draw: level k meets it when s m_k >= bar (s = +1 when higher is better,
 * else -1). The draw's target is the lowest open active level that meets it. All inputs are on the
 * target's scale and already turned (s m), so that larger is better. Thread-safe.
 */
#ifndef TERRACE_TARGETS_H
#define TERRACE_TARGETS_H

#include <stddef.h>

#include "design/design.h"
#include "design/vocabulary.h"

/* Arrays with one entry a draw. */
struct bar_inputs {
    const double *best_active; /* largest s m over the open active levels */
    const double *best_all;    /* ... and the control */
    const double *reference;   /* s m_reference; NULL in a design without gains */
    const double *of;          /* s m of the level named by `of`; best_all when none is named */
    double tolerance;          /* 0 for draws; what a true gain must exceed to be one */
};

extern const struct target_rule rule_optimal, rule_effective_dose, rule_minimum_effect,
    rule_within_margin;

/* The true target level under `response` (response scale, one entry a level; every active level is
 * open): index or LEVEL_NONE. Comparisons carry the tolerance 1e-9 x max(1, |effect|, largest
 * |gain|). */
int target_true_level(const struct design *d, const struct target *t, const double *response);

/* A response on the target's or condition's scale: itself, or its logit (finite also at 0 and 1).
 */
double response_on_scale(double response, bool link);

#endif
