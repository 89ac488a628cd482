/* SPDX-License-Identifier: GPL-3.0-or-later */
/* figures.h: the one table of figures by level that all writers show to people, and the one place
 * that decides how many digits a figure deserves (from its Monte Carlo error).
 */
#ifndef TERRACE_FIGURES_H
#define TERRACE_FIGURES_H

#include <stdbool.h>
#include <stddef.h>

#include "base/text.h"
#include "report/analysis_report.h"

/* How numbers of one kind are written. */
struct digits {
    int decimals;    /* after the point; used when significant is 0 */
    int significant; /* for numbers too large or too small for a fixed number of decimals */
};

struct digits digits_for(double error, double largest, int fallback);
struct digits digits_response(const struct analysis_report *r); /* responses and gains */
struct digits digits_target(const struct analysis_report *r);   /* probabilities by level */

/* All of these append; NaN gives an en dash. */
void figure_number(struct text *out, double x, struct digits g);
void figure_interval(struct text *out, double low, double high, struct digits g); /* "a to b" */
/* A probability: "<0.001" and ">0.999" instead of 0 and 1, which draws cannot establish. */
void figure_probability(struct text *out, double p, struct digits g);
void figure_share(struct text *out, double share); /* "25.0%" */
void figure_count(struct text *out, double n);
void figure_error(struct text *out, double mcse); /* two significant digits */

enum figure_unit { UNIT_COUNT, UNIT_RESPONSE, UNIT_PROBABILITY, UNIT_SHARE };
enum figure_needs { NEEDS_NOTHING, NEEDS_GAIN, NEEDS_SD, NEEDS_LIKELIHOOD };

/* One figure by level. `upper` makes it an interval. Getters return NaN for what does not exist or
 * means nothing to a reader (a gain of the reference over itself). */
struct level_figure {
    const char *key;
    const char *heading[2]; /* continuous, binary */
    enum figure_unit unit;
    enum figure_needs needs;
    double (*get)(const struct analysis_report *r, size_t level);
    double (*upper)(const struct analysis_report *r, size_t level);
};

const struct level_figure *level_figure_find(const char *key); /* unknown: BUG */
bool level_figure_exists(const struct level_figure *f, const struct analysis_report *r);
void level_figure_add(struct text *out, const struct level_figure *f,
                      const struct analysis_report *r, size_t level);

/* Whether there are likelihood estimates to show. */
bool likelihood_is_shown(const struct analysis *a);
/* Whether they include levels (not for a walk). */
bool likelihood_has_levels(const struct analysis *a);
/* Share of all subjects randomized so far (0 when there are none). */
double share_so_far(const struct analysis_report *r, size_t level);
/* Whether any next share exists (not at the last analysis, not when distrusted). */
bool has_next_shares(const struct analysis_report *r);
/* Whether the level can be a target: active and not closed. */
bool level_can_be_target(const struct analysis_report *r, size_t level);

#endif
