/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fit_words.h: what there is to say of one fitted model: its likelihood fit, how well the curve
 * suits the level means. Plain text, whole sentences, appended without a newline. */
#ifndef TERRACE_FIT_WORDS_H
#define TERRACE_FIT_WORDS_H

#include "analysis/analysis.h"
#include "base/text.h"

/* "ndlm, order 2, actual gaps": the model without its priors, no full stop. */
void words_model_name(struct text *out, const struct model *m);
/* "lognormal, meanlog 2.996, sdlog 1", rounded. */
void words_prior(struct text *out, const struct prior *p);
/* "E0 normal, mean -1, sd 2; Emax ...": no full stop. */
void words_model_priors(struct text *out, const struct model *m);
bool model_is_shifted(const struct model *m); /* its `shift` means something */

void words_likelihood(struct text *out, const struct analysis *a);
void words_lack_of_fit(struct text *out, const struct analysis *a);

#endif
