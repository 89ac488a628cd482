/* SPDX-License-Identifier: GPL-3.0-or-later */
/* grouped.c: propose on a lattice, resample by weight, draw in antithetic pairs. */
#include "posterior/grouped.h"

#include <string.h>

#include "base/mem.h"
#include "base/vecmath.h"

enum { SET_LEAST = 16 }; /* points of the smallest lattice */

struct grouped {
    size_t rows;    /* of a state, as the sampler lists them */
    size_t room;    /* points that fit */
    double *state;  /* [rows][proposed] */
    double *weight; /* [proposed]; then running sums */
    double *block;  /* [rows][BLOCK]: resampled points */
    double *normal, *centre, *theta, *beta_centre, *beta; /* rows of BLOCK */
};

static size_t padded(size_t points)
{
    return (points + BLOCK - 1) / BLOCK * BLOCK;
}

static size_t draws_a_point(const struct problem *p)
{
    return p->dims == 2 ? 2 : 4;
}

size_t grouped_points(const struct problem *p, size_t draws)
{
    const size_t each = draws_a_point(p), points = draws / each;
    const bool enough = padded(points) >= SETS_LEAST * SET_LEAST;
    return problem_draws_first(p) || draws % each != 0 || !enough ? 0 : points;
}

static double *block_rows(size_t rows)
{
    return mem_aligned(rows * BLOCK, sizeof(double));
}

struct grouped *grouped_new(const struct problem *p)
{
    struct grouped *g = mem_new(1, sizeof *g);
    g->rows = 3 + problem_factor_rows(p) + problem_basis_rows(p);
    g->block = block_rows(g->rows);
    g->normal = block_rows(problem_normal_rows(p));
    g->centre = block_rows(p->levels);
    g->theta = block_rows(p->levels);
    g->beta_centre = block_rows(COLUMNS_MAX);
    g->beta = block_rows(COLUMNS_MAX);
    return g;
}

void grouped_free(struct grouped *g)
{
    if (!g)
        return;
    double *const all[] = {g->state,  g->weight, g->block,       g->normal,
                           g->centre, g->theta,  g->beta_centre, g->beta};
    for (size_t i = 0; i < sizeof all / sizeof *all; i++)
        mem_free(all[i]);
    mem_free(g);
}

static void make_room(struct grouped *g, size_t proposed)
{
    if (proposed <= g->room)
        return;
    mem_free(g->state);
    mem_free(g->weight);
    g->state = mem_aligned(g->rows * proposed, sizeof *g->state);
    g->weight = mem_aligned(proposed, sizeof *g->weight);
    g->room = proposed;
}

/* Running sums of the weights; false where nothing holds mass. */
static bool sum_weights(struct grouped *g, const struct sampler *s, size_t proposed)
{
    double sum = 0.0;
    if (!(s->sum > 0.0))
        return false;
    for (size_t i = 0; i < proposed; i++)
        g->weight[i] -= s->top;
    s->p->math->exp(proposed, g->weight, g->weight);
    for (size_t i = 0; i < proposed; i++)
        g->weight[i] = sum += g->weight[i];
    return sum > 0.0;
}

static void propose_all(struct grouped *g, struct sampler *s, size_t proposed)
{
    for (size_t at = 0; at < proposed; at += BLOCK) {
        sampler_propose(s);
        memcpy(g->weight + at, s->log_weight, BLOCK * sizeof *g->weight);
        for (size_t r = 0; r < g->rows; r++)
            memcpy(g->state + r * proposed + at, s->row[r], BLOCK * sizeof *g->state);
    }
}

/* The points of one block: the j-th of all stands at (j + u) / points of the running sums. */
static size_t gather(struct grouped *g, size_t proposed, size_t points, size_t at, double u,
                     size_t from)
{
    const double step = g->weight[proposed - 1] / (double)points;
    size_t chosen[BLOCK];
    for (size_t i = 0; i < BLOCK; i++) {
        const double place = ((double)(at + i) + u) * step;
        while (from + 1 < proposed && g->weight[from] <= place)
            from++;
        chosen[i] = from;
    }
    for (size_t r = 0; r < g->rows; r++)
        for (size_t i = 0; i < BLOCK; i++)
            g->block[r * BLOCK + i] = g->state[r * proposed + chosen[i]];
    return from;
}

static void put(const struct grouped *g, const struct problem *p, const double *theta,
                const double *beta, size_t count, const struct draw_rows *out, size_t at)
{
    const double *shape0 = g->block, *shape1 = shape0 + BLOCK, *sd = shape1 + BLOCK;
    for (size_t k = 0; k < p->levels; k++)
        memcpy(out->link + k * out->stride + at, theta + k * BLOCK, count * sizeof *theta);
    sampler_parameters(p, BLOCK, count, shape0, shape1, sd, beta, theta, out, at);
}

/* x -> 2 centre - x */
static void mirror(double *x, const double *centre, size_t rows)
{
    for (size_t i = 0; i < rows * BLOCK; i++)
        x[i] = 2.0 * centre[i] - x[i];
}

static void draw_block(struct grouped *g, struct sampler *s, size_t points, size_t at,
                       const struct draw_rows *out)
{
    const struct problem *p = s->p;
    const double *factor = g->block + 3 * BLOCK, *x = factor + problem_factor_rows(p) * BLOCK;
    const size_t normals = problem_normal_rows(p) * BLOCK;
    const size_t count = points - at < BLOCK ? points - at : BLOCK;
    if (out->response_mean)
        p->marginal->moments(p, BLOCK, x, factor, out->stride, out->response_mean + at,
                             out->response_sd + at,
                             out->difference_mean ? out->difference_mean + at : NULL,
                             out->difference_sd ? out->difference_sd + at : NULL);
    memset(g->normal, 0, normals * sizeof *g->normal);
    p->marginal->draw(p, BLOCK, x, factor, g->normal, g->centre, g->beta_centre);
    for (size_t pair = 0; pair < draws_a_point(p) / 2; pair++) {
        p->kernel->normals(&s->rng, normals, g->normal);
        p->marginal->draw(p, BLOCK, x, factor, g->normal, g->theta, g->beta);
        put(g, p, g->theta, g->beta, count, out, 2 * pair * points + at);
        mirror(g->theta, g->centre, p->levels);
        mirror(g->beta, g->beta_centre, COLUMNS_MAX);
        put(g, p, g->theta, g->beta, count, out, (2 * pair + 1) * points + at);
    }
}

void grouped_run(struct grouped *g, struct sampler *s, size_t draws, const struct draw_rows *out)
{
    const size_t points = grouped_points(s->p, draws), proposed = padded(points);
    double u[RNG_LANES];
    make_room(g, proposed);
    sampler_lattice(s, proposed / SETS_LEAST);
    propose_all(g, s, proposed);
    if (!sum_weights(g, s, proposed)) /* nothing found: kish is 0, which no check accepts */
        for (size_t i = 0; i < proposed; i++)
            g->weight[i] = (double)(i + 1);
    s->p->kernel->uniforms(&s->rng, RNG_LANES, u);
    size_t from = 0;
    for (size_t at = 0; at < points; at += BLOCK) {
        from = gather(g, proposed, points, at, u[0], from);
        draw_block(g, s, points, at, out);
    }
}
