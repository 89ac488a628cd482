/* SPDX-License-Identifier: GPL-3.0-or-later */
/* agreement.c: whether a second method finds the same probabilities and measures. */
#include "analysis/agreement.h"

#include <math.h>

#include "analysis/figure_walk.h"

static const double ERRORS_ALLOWED = 4, SLACK = 0.002;

/* Above 0: the two figures differ by more than is allowed. */
static double overstep(const struct walked_figure *x, const struct walked_figure *y)
{
    const double combined = sqrt(x->mcse * x->mcse + y->mcse * y->mcse);
    return fabs(x->value - y->value) - (ERRORS_ALLOWED * combined + SLACK);
}

struct agreement agreement_of(const struct judgement *first, const struct analysis *a,
                              const struct judgement *second, const struct analysis *b)
{
    struct agreement out = {true, 0, 0};
    double worst = -INFINITY;
    for (size_t i = 0; i < figure_count_all(first->d); i++) {
        const struct walked_figure x = figure_at(first, a, i), y = figure_at(second, b, i);
        const double over = overstep(&x, &y), difference = fabs(x.value - y.value);
        if (!(over <= 0))
            out.holds = false;
        if (difference > out.difference)
            out.difference = difference;
        if (over > worst) {
            worst = over;
            out.worst = i;
        }
    }
    return out;
}
