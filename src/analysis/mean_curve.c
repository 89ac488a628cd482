/* SPDX-License-Identifier: GPL-3.0-or-later */
/* mean_curve.c: the posterior of the mean curve between the levels, for the figure. */
#include "analysis/mean_curve.h"

#include <math.h>

#include "base/mem.h"
#include "base/vecmath.h"
#include "posterior/diagnostics.h"

/* A band in a figure needs no more draws than this. */
enum { POINTS = 61, DRAWS_MOST = 8000 };

static void fill_point(struct curve_result *out, size_t i, const struct plan *p,
                       const struct design *d, const struct draws *draws)
{
    static const double q[2] = {0.025, 0.975};
    double band[2];
    double *x = mem_new(draws->n, sizeof *x);
    if (posterior_curve_at(p, draws, out->value[i], x)) {
        if (d->type == ENDPOINT_BINARY)
            vecmath()->logistic(draws->n, x, x);
        out->mean[i] = diag_mean(x, draws->n);
        diag_quantiles(x, draws->n, 2, q, band);
        out->q025[i] = band[0];
        out->q975[i] = band[1];
    }
    mem_free(x);
}

void mean_curve_fill(struct curve_result *out, const struct plan *p, const struct design *d,
                     const struct draws *draws, int threads)
{
    double value[LEVELS_MAX];
    const struct curve_levels at = design_curve_levels(d, &d->model, value);
    const double low = at.value[0], high = at.value[at.count - 1];
    struct draws used = *draws;
    mean_curve_release(out);
    if (d->model.curve->kind != CURVE_BASIS)
        return;
    if (used.n > DRAWS_MOST)
        used.n = DRAWS_MOST;
    double **arrays[] = {&out->value, &out->mean, &out->q025, &out->q975, &out->likelihood};
    for (size_t i = 0; i < sizeof arrays / sizeof *arrays; i++)
        *arrays[i] = mem_new(POINTS, sizeof(double));
    out->points = POINTS;
    for (size_t i = 0; i < POINTS; i++)
        out->value[i] =
            i + 1 < POINTS ? low + (high - low) * ((double)i / (double)(POINTS - 1)) : high;
#pragma omp parallel for schedule(dynamic) num_threads(threads)
    for (size_t i = 0; i < POINTS; i++)
        fill_point(out, i, p, d, &used);
    for (size_t i = 0; i < POINTS; i++)
        out->likelihood[i] = NAN;
}

void mean_curve_release(struct curve_result *c)
{
    mem_free(c->value);
    mem_free(c->mean);
    mem_free(c->q025);
    mem_free(c->q975);
    mem_free(c->likelihood);
    *c = (struct curve_result){0, NULL, NULL, NULL, NULL, NULL};
}
