/* SPDX-License-Identifier: GPL-3.0-or-later */
/* logistic.c: the S-shaped curve over the level values themselves. */
#include "base/vecmath.h"
#include "models/curves.h"

enum { E0, EMAX, ED50, SPREAD };

static const struct parameter parameters[] = {
    COEFFICIENT("E0", "mean (binary: logit) far below ED50"),
    COEFFICIENT("Emax", "change from E0 to far above ED50; negative where the curve falls"),
    SHAPE("ED50", NULL, COORDINATE_SELF, false, "level of half of that change; may be negative"),
    POSITIVE_SHAPE("spread", "width of the rise: one spread to each side of ED50 it is at 27% "
                             "and 73%"),
    PARAMETERS_END,
};

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
