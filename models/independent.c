/* SPDX-License-Identifier: GPL-3.0-or-later */
/* independent.c: every level on its own. */
#include "models/curves.h"

static const struct parameter parameters[] = {
    COEFFICIENT("theta", "mean (binary: logit) of each level"),
    PARAMETERS_END,
};

static struct prior default_prior(size_t i, const struct default_scales *s, bool *scaled)
{
    (void)i;
    *scaled = true;
    return prior_normal(s->C, s->A);
}

const struct curve curve_independent = {
    .key = "independent",
    .formula = "theta_k, each level on its own",
    .kind = CURVE_FREE,
    .parameters = parameters,
    .levels_wanted = 2,
    .default_prior = default_prior,
};
