/* SPDX-License-Identifier: GPL-3.0-or-later */
/* logistic.c: the S-shaped curve over the level values themselves. */
#include "base/vecmath.h"
#include "models/curves.h"

enum { E0, EMAX, ED50, SPREAD };

static const struct parameter parameters[] = {
    {.name = "E0",
     .role = ROLE_LINEAR,
     .coordinate = COORDINATE_SELF,
     .help = "mean (binary: logit) far below ED50"},
    {.name = "Emax",
     .role = ROLE_LINEAR,
     .coordinate = COORDINATE_SELF,
     .help = "change from far below ED50 to far above it"},
    {.name = "ED50",
     .role = ROLE_SHAPE,
     .coordinate = COORDINATE_SELF,
     .help = "level of half the change; may be negative"},
    {.name = "spread",
     .role = ROLE_SHAPE,
     .coordinate = COORDINATE_LOG,
     .positive = true,
     .help = "levels over which the rise is spread: from 27% to 73% of it within one to each side"},
    PARAMETERS_END};

static struct prior default_prior(size_t i, const struct default_scales *s, bool *scaled)
{
    const double low = lowest_level(s->levels), high = largest_level(s->levels);

    *scaled = i == E0 || i == EMAX;
    if (i == ED50)
        return prior_normal((low + high) / 2, (high - low) / 2);
    if (i == SPREAD)
        return prior_lognormal(vm_log((high - low) / 10), 0.75);
    return prior_normal(i == E0 ? s->C : 0, s->A);
}

static void basis(const struct curve_levels *levels, size_t n,
                  const double *const shape[SHAPES_MAX], const double *const log_shape[SHAPES_MAX],
                  double *x)
{
    const struct vecmath *math = vecmath();

    (void)log_shape;
    for (size_t k = 0; k < levels->count; k++) {
        const double d = levels->value[k];
        double *row = x + k * n;

        for (size_t i = 0; i < n; i++)
            row[i] = (d - shape[0][i]) / shape[1][i];
        math->logistic(n, row, row);
    }
}

const struct curve curve_logistic = {
    .key = "logistic",
    .formula = "E0 + Emax / (1 + exp((ED50 - d) / spread))",
    .kind = CURVE_BASIS,
    .parameters = parameters,
    .monotone = true,
    .levels_wanted = 5,
    .default_prior = default_prior,
    .basis = basis,
};
