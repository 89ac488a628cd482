/* SPDX-License-Identifier: GPL-3.0-or-later */
/* measures.h: decision measures: a number between 0 and 1 with its Monte Carlo standard error.
 *
 * A measure is one row (design/vocabulary.h). Measures of a selected level are 0, without error,
 * when none is selected. For continuous endpoints the probability that one level's response or gain
 * passes a number is the average of its exact conditional probability given the draw's (phi, sd);
 * all other probabilities are shares of draws. `above` a number is strict.
 */
#ifndef TERRACE_MEASURES_H
#define TERRACE_MEASURES_H

#include <stdbool.h>
#include <stddef.h>

#include "analysis/judge.h"
#include "design/vocabulary.h"

extern const struct measure measure_pr_gain, measure_pr_any_gain, measure_pr_level,
    measure_pr_meets, measure_pr_response, measure_predictive_next;

/* Pr(gain of a level > `gain`), on the link or response scale. */
void measure_gain(const struct judgement *j, size_t level, double gain, bool link, double *value,
                  double *mcse);

/* pr_positive of every level, with its error (NaN without gains). */
void measure_gains(struct judgement *j);

/* Pr(response of a level better than `value`). */
void measure_response(const struct judgement *j, size_t level, double value, bool link,
                      double *probability, double *mcse);

/* Evaluates a condition's measure; *level is the level it looked at, or LEVEL_NONE. */
void measure_evaluate(const struct condition *c, const struct judgement *j, double *value,
                      double *mcse, int *level);

#endif
