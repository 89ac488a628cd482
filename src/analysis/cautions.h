/* SPDX-License-Identifier: GPL-3.0-or-later */
/* cautions.h: what a reader of an analysis is warned of, in sentences a statistician can act on. */
#ifndef TERRACE_CAUTIONS_H
#define TERRACE_CAUTIONS_H

#include "analysis/agreement.h"
#include "analysis/allocate.h"
#include "analysis/analysis.h"
#include "analysis/judge.h"
#include "base/text.h"
#include "design/data.h"

/* Appends the sentence to the diagnostics' warnings; the text is taken over. */
void caution_add(struct analysis_diagnostics *g, struct text *sentence);

/* No outcomes, one level only, levels without, no events or only events. */
void caution_data(struct analysis *a, const struct design *d, const struct level_data *data);
/* Parameters that are set by the prior (analysis.h), unless there are no outcomes at all. */
void caution_set_by_prior(struct analysis *a, const struct level_data *data);
/* The curve does not fit the level means: lack_of_fit_p below 0.05. */
void caution_fit(struct analysis *a);
/* The slice sampler was used; `kish` is the share that the usual one had. */
void caution_slice(struct analysis *a, double kish);
/* R-hat or effective sample sizes were not reached. */
void caution_convergence(struct analysis *a);
/* Two methods differ. */
void caution_agreement(struct analysis *a, const struct judgement *first, const struct analysis *b,
                       const struct judgement *second, const struct agreement *x);
/* The figure with the largest error above precision, and measures close to their threshold. */
void caution_precision(struct analysis *a, const struct judgement *j);
void caution_close(struct analysis *a, const struct judgement *j);

/* Sentences about shares, appended to the analysis' notes. */
void note_shares(struct analysis *a, const struct share_remarks *remarks);

void caution_release(struct analysis *a); /* warnings and notes */

#endif
