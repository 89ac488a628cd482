/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_words.h: the sentences of an analysis, for the terminal and for the page. Plain text
 * (not escaped), written for readers on a data monitoring committee. Each appends whole sentences
 * without a newline, unless it says otherwise.
 */
#ifndef TERRACE_ANALYSIS_WORDS_H
#define TERRACE_ANALYSIS_WORDS_H

#include "base/text.h"
#include "report/analysis_report.h"

#define NOT_TO_BE_USED "Not to be used"

/* Short phrases without a full stop. */
void words_occasion(struct text *out,
                    const struct analysis_report *r);              /* "Interim analysis 2 of 6" */
void words_cut(struct text *out, const struct analysis_report *r); /* "week 26"; "" without a cut */
const char *words_recommendation(const struct analysis_report *r); /* "Continue" */

/* Sentences. */
void words_subjects(struct text *out, const struct analysis_report *r);
void words_endpoint(struct text *out, const struct analysis_report *r);
void words_model(struct text *out, const struct analysis_report *r);
void words_why(struct text *out, const struct analysis_report *r);
void words_decision(struct text *out, const struct analysis_report *r, size_t decision);
void words_final_success(struct text *out, const struct analysis_report *r);
void words_target(struct text *out, const struct analysis_report *r, size_t target);
void words_selection(struct text *out, const struct analysis_report *r, size_t target);
void words_computation(struct text *out, const struct analysis_report *r);

/* Hands every reason for caution to `each`, one sentence at a time: failed checks, warnings, close
 * calls, subjects without outcomes. Returns how many there were. */
size_t words_distrust(struct text *out, const struct analysis_report *r,
                      void (*each)(struct text *out, const char *sentence));

#endif
