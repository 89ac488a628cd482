/* SPDX-License-Identifier: GPL-3.0-or-later */
/* sigmoid_emax.c: the saturating curve with a steepness of its own (Hill). */
#include "base/vecmath.h"
#include "models/curves.h"

enum { E0, EMAX, ED50, H };

static const struct parameter parameters[] = {
    COEFFICIENT("E0", "mean (binary: logit) at level 0"),
    COEFFICIENT("Emax", "change from E0 to far above ED50; negative where the curve falls"),
    POSITIVE_SHAPE("ED50", "level of half of that change"),
    POSITIVE_SHAPE("h", "steepness; at 1 the curve is emax"),
    PARAMETERS_END,
};

static struct prior default_prior(size_t i, const struct default_scales *s, bool *scaled)
{
    *scaled = i == E0 || i == EMAX;
    if (i == ED50)
        return saturating_ED50(s->levels);
    if (i == H)
        return prior_lognormal(0, 0.5);
    return prior_normal(i == E0 ? s->C : 0, s->A);
}

/* d^h / (ED50^h + d^h) = logistic(h (ln d - ln ED50)), which no power can overflow. */
static void basis(const struct curve_levels *levels, size_t n,
                  const double *const shape[SHAPES_MAX], const double *const log_shape[SHAPES_MAX],
                  double *x)
{
    const struct vecmath *math = vecmath();

    for (size_t k = 0; k < levels->count; k++) {
        const double d = levels->value[k], log_d = d > 0.0 ? vm_log(d) : 0.0;
        double *row = x + k * n;

        if (d <= 0.0) {
            fill_row(n, 0.0, row);
            continue;
        }
        for (size_t i = 0; i < n; i++)
            row[i] = shape[1][i] * (log_d - log_shape[0][i]);
        math->logistic(n, row, row);
    }
}

const struct curve curve_sigmoid_emax = {
    .key = "sigmoid_emax",
    .formula = "E0 + Emax * d^h / (ED50^h + d^h)",
    .kind = CURVE_BASIS,
    .parameters = parameters,
    .monotone = true,
    .levels_wanted = 5,
    .level_fault = saturating_level_fault,
    .default_prior = default_prior,
    .basis = basis,
};
