/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_tables.h: the tables of an analysis, built once for the terminal and for the page. Each
 * is owned by the caller (table_free). */
#ifndef TERRACE_ANALYSIS_TABLES_H
#define TERRACE_ANALYSIS_TABLES_H

#include "report/analysis_report.h"
#include "report/table.h"

/* The named figures (figures.h) that exist for this analysis, by level. keys: NULL-terminated. */
struct table *table_levels(const struct analysis_report *r, const char *const *keys);
/* pr_target of every target by level, and Pr(none). */
struct table *table_targets(const struct analysis_report *r);
/* One target by level: Pr(is the target), Pr(meets it), and before any data where known. */
struct table *table_target(const struct analysis_report *r, size_t target);
/* One row a condition; brief: the measure by its key, not in words. */
struct table *table_decisions(const struct analysis_report *r, bool brief);

/* "Placebo (control)", "80 mg (closed)". */
void add_level_name(struct text *out, const struct analysis_report *r, size_t level);
/* The design's own words: "pr_gain, ED90". */
void add_measure_brief(struct text *out, const struct design *d, const struct condition *c);
/* The condition in words with its side and threshold. */
void add_condition(struct text *out, const struct analysis_report *r, const struct condition *c);
/* The value and its threshold with as many decimals as both need to be told apart. */
struct digits digits_condition(const struct condition *c, const struct condition_result *x);
const char *action_words(enum action a); /* "Stop for success" */
/* "met", "not met", "not read yet", "undetermined": what one condition or a whole decision says. */
const char *verdict_words(const struct analysis_report *r, bool applies, bool met);

#endif
