/* SPDX-License-Identifier: GPL-3.0-or-later */
/* ndlm.c: a normal random walk over the levels (normal dynamic linear model). */
#include "models/curves.h"

enum { THETA, SLOPE, DRIFT_SD };

static const struct parameter parameters[] = {
    COEFFICIENT("theta", "level mean (binary: logit): of the first level of a walk, or of each "
                         "independent one"),
    COEFFICIENT_OF(2, "slope", "first step of a walk of order 2"),
    SHAPE("drift_sd", "drift_variance", COORDINATE_SELF, true,
          "standard deviation of a step of the walk (order 2: of a change of step)"),
    PARAMETERS_END,
};

static struct prior default_prior(size_t i, const struct default_scales *s, bool *scaled)
{
    const double steps = (double)(s->levels->count - 1);

    *scaled = true;
    if (i == THETA)
        return prior_normal(s->C, s->A);
    if (i == SLOPE)
        return prior_normal(0, s->A / steps);
    if (s->order == 2)
        return prior_half_normal(s->A / (steps * __builtin_sqrt(steps)));
    return prior_half_normal(s->A / __builtin_sqrt(steps));
}

const struct curve curve_ndlm = {
    .key = "ndlm",
    .formula = "theta_k ~ N(theta_(k-1), g_k drift_sd^2), g_k = 1 for equal steps",
    .formula_second = "theta_k ~ N(2 theta_(k-1) - theta_(k-2), drift_sd^2)",
    .kind = CURVE_WALK,
    .parameters = parameters,
    .levels_wanted = 2,
    .default_prior = default_prior,
};
