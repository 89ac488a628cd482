/* SPDX-License-Identifier: GPL-3.0-or-later */
/* emax.c: the hyperbola that starts at level 0 and saturates. */
#include "models/curves.h"

enum { E0, EMAX, ED50 };

static const struct parameter parameters[] = {
    COEFFICIENT("E0", "mean (binary: logit) at level 0"),
    COEFFICIENT("Emax", "change from E0 to far above ED50; negative where the curve falls"),
    POSITIVE_SHAPE("ED50", "level of half of that change (of curve logistic it may be negative)"),
    PARAMETERS_END,
};

static struct prior default_prior(size_t i, const struct default_scales *s, bool *scaled)
{
    *scaled = i != ED50;
    if (i == ED50)
        return saturating_ED50(s->levels);
    return prior_normal(i == E0 ? s->C : 0, s->A);
}

static void basis(const struct curve_levels *levels, size_t n,
                  const double *const shape[SHAPES_MAX], const double *const log_shape[SHAPES_MAX],
                  double *x)
{
    (void)log_shape;
    for (size_t k = 0; k < levels->count; k++) {
        const double d = levels->value[k];
        double *row = x + k * n;

        for (size_t i = 0; i < n; i++)
            row[i] = d / (shape[0][i] + d);
    }
}

const struct curve curve_emax = {
    .key = "emax",
    .formula = "E0 + Emax * d / (ED50 + d)",
    .kind = CURVE_BASIS,
    .parameters = parameters,
    .monotone = true,
    .levels_wanted = 2,
    .level_fault = saturating_level_fault,
    .default_prior = default_prior,
    .basis = basis,
};
