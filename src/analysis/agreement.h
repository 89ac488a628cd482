/* SPDX-License-Identifier: GPL-3.0-or-later */
/* agreement.h: whether a second method finds the same probabilities and measures. */
#ifndef TERRACE_AGREEMENT_H
#define TERRACE_AGREEMENT_H

#include <stdbool.h>
#include <stddef.h>

#include "analysis/analysis.h"
#include "analysis/judge.h"

struct agreement {
    bool holds;        /* every figure within 4 combined standard errors + 0.002 */
    double difference; /* largest absolute difference */
    size_t worst;      /* the figure (figure_walk.h) that oversteps most, or differs most */
};

/* `first` with its analysis against `second` with its own: both judged for the same levels
 * selected. */
struct agreement agreement_of(const struct judgement *first, const struct analysis *a,
                              const struct judgement *second, const struct analysis *b);

#endif
