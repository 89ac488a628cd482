/* SPDX-License-Identifier: GPL-3.0-or-later */
/* exponential.c: slow at first, then ever steeper. */
#include "base/vecmath.h"
#include "models/curves.h"

enum { E0, RISE, SCALE };

/* d / scale is taken up to here (a factor of 1e13), so that a coefficient times its column keeps
 * its digits; a steeper curve is a jump at the highest level */
#define LARGEST_EXPONENT 30.0
#define SMALL 1e-5

static const struct parameter parameters[] = {
    COEFFICIENT("E0", "mean (binary: logit) at level 0"),
    COEFFICIENT("rise", "change from E0 at level scale * ln 2; negative where the curve falls"),
    POSITIVE_SHAPE("scale", "level over which the distance to E0 - rise grows e-fold"),
    PARAMETERS_END,
};

static struct prior default_prior(size_t i, const struct default_scales *s, bool *scaled)
{
    *scaled = i != SCALE;
    if (i == SCALE)
        return prior_lognormal(vm_log(largest_level(s->levels) - lowest_level(s->levels)), 0.5);
    return prior_normal(i == E0 ? s->C : 0, i == E0 ? s->A : s->A / 2);
}

/* e - 1 for e = exp(t), with its digits kept where t is small */
static double less_one(double e, double t)
{
    return t < SMALL && t > -SMALL ? t * (1.0 + t / 2.0 * (1.0 + t / 3.0)) : e - 1.0;
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

        for (size_t i = 0; i < n; i++) {
            const double t = d / shape[0][i];
            row[i] = t < LARGEST_EXPONENT ? t : LARGEST_EXPONENT;
        }
        math->exp(n, row, row);
        for (size_t i = 0; i < n; i++)
            row[i] = less_one(row[i], d / shape[0][i]);
    }
}

const struct curve curve_exponential = {
    .key = "exponential",
    .formula = "E0 + rise * (exp(d / scale) - 1)",
    .kind = CURVE_BASIS,
    .parameters = parameters,
    .monotone = true,
    .levels_wanted = 2,
    .default_prior = default_prior,
    .basis = basis,
};
