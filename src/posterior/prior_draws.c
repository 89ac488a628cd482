/* SPDX-License-Identifier: GPL-3.0-or-later */
/* prior_draws.c: parameters by their priors' quantiles, level means by the exact Gaussian without
 * data. */
#include "posterior/prior_draws.h"

#include <string.h>

#include "base/mem.h"
#include "base/vecmath.h"

struct work {
    struct points pt;
    double *normal, *theta, *beta;
    struct level_data none;
    double *y;
};

static void work_init(struct work *w, const struct problem *p)
{
    points_init(&w->pt, p, BLOCK);
    w->normal = mem_aligned(problem_normal_rows(p) * BLOCK, sizeof(double));
    w->theta = mem_aligned(p->levels * BLOCK, sizeof(double));
    w->beta = mem_aligned(COLUMNS_MAX * BLOCK, sizeof(double));
    w->y = mem_aligned(p->levels * BLOCK, sizeof(double)); /* zero pseudo-data of zero weight */
    level_data_init(&w->none, p->levels);
}

static void work_release(struct work *w)
{
    points_release(&w->pt);
    mem_free(w->normal);
    mem_free(w->theta);
    mem_free(w->beta);
    mem_free(w->y);
    level_data_release(&w->none);
}

static void draw_coordinates(const struct problem *p, struct points *pt, struct rng_lanes *rng)
{
    double u[BLOCK];
    for (size_t d = 0; d < p->dims; d++) {
        p->kernel->uniforms(rng, BLOCK, u);
        for (size_t i = 0; i < BLOCK; i++)
            pt->coord[d][i] = problem_coordinate(p, d, u[i]);
    }
    if (!p->sd_free)
        return;
    p->kernel->uniforms(rng, BLOCK, u);
    for (size_t i = 0; i < BLOCK; i++)
        pt->v[i] = problem_log_quantile(p->sd_prior, u[i]);
}

void prior_draws(const struct plan *plan, const struct rng_key *key, size_t count,
                 const struct draw_rows *out)
{
    struct work w;
    struct rng_lanes rng;
    struct problem p = plan->problem;
    work_init(&w, &p);
    plan_problem(&p, plan, &w.none, w.y);
    memset(w.y, 0, p.levels * BLOCK * sizeof *w.y);
    w.pt.y = w.pt.w = w.y;
    rng_lanes_init(&rng, key);
    for (size_t at = 0; at < count; at += BLOCK) {
        draw_coordinates(&p, &w.pt, &rng);
        density_at(&p, &w.pt);
        p.kernel->normals(&rng, problem_normal_rows(&p) * BLOCK, w.normal);
        p.marginal->draw(&p, BLOCK, w.pt.x, w.pt.factor, w.normal, w.theta, w.beta);
        for (size_t k = 0; k < p.levels; k++) {
            double *link = out->link + k * out->stride + at;
            memcpy(link, w.theta + k * BLOCK, BLOCK * sizeof *link);
            if (p.binary)
                p.math->logistic(BLOCK, link, out->response + k * out->stride + at);
        }
        sampler_parameters(&p, BLOCK, BLOCK, w.pt.shape[0], w.pt.shape[1], w.pt.sd, w.beta, w.theta,
                           out, at);
    }
    work_release(&w);
}
