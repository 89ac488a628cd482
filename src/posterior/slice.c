/* SPDX-License-Identifier: GPL-3.0-or-later */
/* slice.c: collapsed slice sampling, eight chains in step. */
#include "posterior/slice.h"

#include <math.h>
#include <string.h>

#include "base/mem.h"
#include "base/vecmath.h"

enum {
    N = RNG_LANES,
    BURN_IN = 200,
    STEP_OUT = 10,
    SHRINK = 200,
    MOVES_WEIGHED = 5,
    ATTEMPTS = 4000
};

struct slice {
    struct problem p;
    const struct proposal *q;
    struct rng_lanes rng;
    struct points pt;
    double *eps, *nu, *trial;        /* binary: [normals][8] */
    double *theta, *response, *beta; /* at the last evaluated point */
    double *y, *w;                   /* fixed pseudo-data [levels][8] */
    double current[N];               /* log density at the state */
    double width[SHAPES_MAX], width_v;
};

static double *lanes(size_t rows)
{
    return mem_aligned((rows ? rows : 1) * 2 * N,
                       sizeof(double)); /* normals come in pairs of rows */
}

struct slice *slice_new(const struct problem *p)
{
    struct slice *s = mem_new(1, sizeof *s);
    const size_t normals = problem_normal_rows(p);
    points_init(&s->pt, p, N);
    double **const per_normal[] = {&s->eps, &s->nu, &s->trial};
    for (size_t i = 0; i < sizeof per_normal / sizeof *per_normal; i++)
        *per_normal[i] = lanes(normals);
    double **const per_level[] = {&s->theta, &s->response, &s->y, &s->w};
    for (size_t i = 0; i < sizeof per_level / sizeof *per_level; i++)
        *per_level[i] = lanes(p->levels);
    s->beta = lanes(COLUMNS_MAX);
    return s;
}

void slice_free(struct slice *s)
{
    if (!s)
        return;
    points_release(&s->pt);
    double *const all[] = {s->eps, s->nu, s->trial, s->theta, s->response, s->beta, s->y, s->w};
    for (size_t i = 0; i < sizeof all / sizeof *all; i++)
        mem_free(all[i]);
    mem_free(s);
}

/* Whether the coordinates of lane i lie between the ends of their priors' supports. */
static bool is_inside(const struct slice *s, size_t i)
{
    const struct problem *p = &s->p;
    for (size_t d = 0; d < p->dims; d++) {
        const double c = p->reflect[d] ? fabs(s->pt.coord[d][i]) : s->pt.coord[d][i];
        if (c < p->edge_low[d] || c > p->edge_high[d])
            return false;
    }
    return !p->sd_free || (s->pt.v[i] >= p->v_edge_low && s->pt.v[i] <= p->v_edge_high);
}

/* log density at the points' coordinates and these normals (binary), NaN counting as impossible */
static void evaluate(struct slice *s, const double *normals, double *out)
{
    const struct problem *p = &s->p;
    double extra[N] = {0};
    density_at(p, &s->pt);
    if (problem_draws_first(p))
        p->marginal->draw(p, N, s->pt.x, s->pt.factor, normals, s->theta, s->beta);
    if (p->binary) {
        const struct observations o = {NULL, s->y, s->w};
        p->marginal->binomial(p, N, s->theta, &o, extra, s->response);
    }
    density_correction(p, N, s->theta, s->beta, extra);
    for (size_t i = 0; i < N; i++) {
        out[i] = s->pt.log_prior[i] + s->pt.log_m[i] + extra[i];
        if (!(out[i] < INFINITY) || !is_inside(s, i))
            out[i] = -INFINITY;
    }
}

static void uniform_lanes(struct slice *s, double *out)
{
    s->p.kernel->uniforms(&s->rng, N, out);
}

static void slice_level(struct slice *s, double *level)
{
    uniform_lanes(s, level);
    for (size_t i = 0; i < N; i++)
        level[i] = s->current[i] + vm_log(level[i]);
}

/* Moves one end of the brackets outward while it lies inside the slice. */
static void step_out(struct slice *s, double *x, const double *level, double *end, double step,
                     const double *room)
{
    double value[N];
    bool inside[N];
    for (size_t i = 0; i < N; i++)
        inside[i] = true;
    for (int round = 0; round < STEP_OUT; round++) {
        bool any = false;
        memcpy(x, end, N * sizeof *x);
        evaluate(s, s->eps, value);
        for (size_t i = 0; i < N; i++) {
            inside[i] = inside[i] && round < (int)room[i] && value[i] > level[i];
            if (inside[i])
                end[i] += step;
            any = any || inside[i];
        }
        if (!any)
            break;
    }
}

/* Shrinks the brackets until every lane has a point inside the slice. */
static void shrink(struct slice *s, double *x, const double *level, const double *from, double *low,
                   double *high)
{
    double value[N], u[N];
    bool done[N] = {false};
    double taken[N];
    memcpy(taken, from, sizeof taken);
    for (int round = 0; round < SHRINK; round++) {
        bool all = true;
        uniform_lanes(s, u);
        for (size_t i = 0; i < N; i++)
            x[i] = done[i] ? taken[i] : low[i] + u[i] * (high[i] - low[i]);
        evaluate(s, s->eps, value);
        for (size_t i = 0; i < N; i++) {
            if (!done[i] && value[i] > level[i]) {
                done[i] = true;
                taken[i] = x[i];
                s->current[i] = value[i];
            } else if (!done[i]) {
                *(x[i] < from[i] ? &low[i] : &high[i]) = x[i];
            }
            all = all && done[i];
        }
        if (all)
            break;
    }
    memcpy(x, taken, sizeof taken);
}

static void update_coordinate(struct slice *s, double *x, double width)
{
    double level[N], u[N], from[N], low[N], high[N], left[N], right[N];
    slice_level(s, level);
    memcpy(from, x, sizeof from);
    uniform_lanes(s, u);
    for (size_t i = 0; i < N; i++) {
        low[i] = from[i] - width * u[i];
        high[i] = low[i] + width;
    }
    uniform_lanes(s, u); /* the steps allowed are split at random (Neal 2003, figure 3) */
    for (size_t i = 0; i < N; i++) {
        left[i] = (double)(int)(STEP_OUT * u[i]);
        right[i] = STEP_OUT - 1 - left[i];
    }
    step_out(s, x, level, low, -width, left);
    step_out(s, x, level, high, width, right);
    shrink(s, x, level, from, low, high);
}

/* Elliptical slice step of all normals at fixed coordinates. */
static void update_normals(struct slice *s)
{
    const size_t rows = problem_normal_rows(&s->p);
    double level[N], u[N], low[N], high[N], angle[N], value[N];
    bool done[N] = {false};
    slice_level(s, level);
    s->p.kernel->normals(&s->rng, (rows + 1) / 2 * 2 * N, s->nu);
    uniform_lanes(s, angle);
    for (size_t i = 0; i < N; i++) {
        low[i] = angle[i] - 1.0;
        high[i] = angle[i];
    }
    memcpy(s->trial, s->eps, rows * N * sizeof *s->eps);
    for (int round = 0; round < SHRINK; round++) {
        bool all = true;
        for (size_t i = 0; i < N; i++) {
            double sine, cosine;
            if (done[i])
                continue;
            vm_sin_cos_turns(angle[i] < 0.0 ? angle[i] + 1.0 : angle[i], &sine, &cosine);
            for (size_t r = 0; r < rows; r++)
                s->trial[r * N + i] = s->eps[r * N + i] * cosine + s->nu[r * N + i] * sine;
        }
        evaluate(s, s->trial, value);
        uniform_lanes(s, u);
        for (size_t i = 0; i < N; i++) {
            if (!done[i] && value[i] > level[i]) {
                done[i] = true;
                s->current[i] = value[i];
            } else if (!done[i]) {
                *(angle[i] < 0.0 ? &low[i] : &high[i]) = angle[i];
                angle[i] = low[i] + u[i] * (high[i] - low[i]);
            }
            all = all && done[i];
        }
        if (all)
            break;
    }
    for (size_t i = 0; i < N; i++)
        for (size_t r = 0; done[i] && r < rows; r++)
            s->eps[r * N + i] = s->trial[r * N + i];
}

static void sweep(struct slice *s)
{
    for (size_t d = 0; d < s->p.dims; d++)
        update_coordinate(s, s->pt.coord[d], s->width[d]);
    if (s->p.sd_free)
        update_coordinate(s, s->pt.v, s->width_v);
    /* ratios of priors make the normals' target less Gaussian: more of their moves a sweep */
    for (int i = 0; problem_draws_first(&s->p) && i < (s->p.weighed ? MOVES_WEIGHED : 1); i++)
        update_normals(s);
}

static void start_pseudo(struct slice *s)
{
    for (size_t k = 0; k < s->p.levels; k++)
        for (size_t i = 0; i < N; i++) {
            s->y[k * N + i] = s->q->pseudo_y[s->q->best * s->p.levels + k];
            s->w[k * N + i] = s->q->pseudo_w[s->q->best * s->p.levels + k];
        }
    s->pt.y = s->y;
    s->pt.w = s->w;
}

static bool is_possible(double value)
{
    return value > -INFINITY;
}

bool slice_is_lost(const struct slice *s)
{
    for (size_t i = 0; i < N; i++)
        if (!is_possible(s->current[i]))
            return true;
    return false;
}

/* Lanes that start where the prior has no mass get other normals, ever further out, until they are
 * inside. */
static void find_support(struct slice *s)
{
    const size_t rows = problem_normal_rows(&s->p);
    double value[N];
    for (int attempt = 0; attempt < ATTEMPTS && slice_is_lost(s); attempt++) {
        const double reach = (double)(1 + attempt % 12);
        s->p.kernel->normals(&s->rng, (rows + 1) / 2 * 2 * N, s->nu);
        for (size_t r = 0; r < rows * N; r++)
            s->trial[r] = s->nu[r] * reach;
        evaluate(s, s->trial, value);
        for (size_t i = 0; i < N; i++) {
            if (is_possible(s->current[i]) || !is_possible(value[i]))
                continue;
            s->current[i] = value[i];
            for (size_t r = 0; r < rows; r++)
                s->eps[r * N + i] = s->trial[r * N + i];
        }
    }
}

void slice_start(struct slice *s, const struct problem *p, const struct proposal *q,
                 const struct rng_key *key)
{
    s->p = *p;
    s->q = q;
    rng_lanes_init(&s->rng, key);
    if (p->binary)
        start_pseudo(s);
    s->p.kernel->normals(&s->rng, (problem_normal_rows(p) + 1) / 2 * 2 * N, s->eps);
    const struct cell *middle =
        q->cell + (q->best / q->nodes[1] + 1) * (q->nodes[1] + 2) + q->best % q->nodes[1] + 1;
    s->width_v = 4.0 * middle->scale;
    double u[N];
    for (size_t d = 0; d < p->dims; d++) {
        s->width[d] = 4.0 * q->step[d];
        uniform_lanes(s, u);
        for (size_t i = 0; i < N; i++)
            s->pt.coord[d][i] = q->mode[d] + q->step[d] * (u[i] - 0.5);
    }
    for (size_t i = 0; p->sd_free && i < N; i++)
        s->pt.v[i] = q->mode_v;
    evaluate(s, s->eps, s->current);
    find_support(s);
    for (int i = 0; i < BURN_IN; i++)
        sweep(s);
}

static void put_rows(double *to, size_t stride, size_t at, const double *from, size_t rows)
{
    for (size_t r = 0; r < rows; r++)
        memcpy(to + r * stride + at, from + r * N, N * sizeof *from);
}

void slice_sweep(struct slice *s, const struct draw_rows *out, size_t at)
{
    const struct problem *p = &s->p;
    double value[N];
    sweep(s);
    evaluate(s, s->eps, value); /* everything at the state itself */
    if (!problem_draws_first(p)) {
        p->kernel->normals(&s->rng, (problem_normal_rows(p) + 1) / 2 * 2 * N, s->nu);
        p->marginal->draw(p, N, s->pt.x, s->pt.factor, s->nu, s->theta, s->beta);
        if (out->response_mean)
            p->marginal->moments(p, N, s->pt.x, s->pt.factor, out->stride, out->response_mean + at,
                                 out->response_sd + at,
                                 out->difference_mean ? out->difference_mean + at : NULL,
                                 out->difference_sd ? out->difference_sd + at : NULL);
    }
    if (p->binary)
        put_rows(out->response, out->stride, at, s->response, p->levels);
    put_rows(out->link, out->stride, at, s->theta, p->levels);
    sampler_parameters(p, N, N, s->pt.shape[0], s->pt.shape[1], s->pt.sd, s->beta, s->theta, out,
                       at);
}
