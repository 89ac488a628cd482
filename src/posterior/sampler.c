/* SPDX-License-Identifier: GPL-3.0-or-later */
/* sampler.c: a block of the independence sampler: propose, weigh, accept, draw. */
#include "posterior/sampler.h"

#include <math.h>
#include <string.h>

#include "base/base.h"
#include "base/isa.h"
#include "base/mem.h"
#include "base/vecmath.h"

/* Rank-1 lattices: generators of the second shape and of ln sd (the first shape's is 1), spread
 * evenly in every pair of coordinates. */
struct lattice {
    size_t points;
    double second, v;
};
static const struct lattice lattices[] = {{16, 5, 7}, {32, 7, 12}, {64, 19, 27}};

enum { PICK, JITTER_A0, JITTER_B0, JITTER_A1, JITTER_B1, SPARE };

const struct sampler_kernel *sampler_kernel_in_force(void)
{
    return isa_in_force() == ISA_AVX2 ? &sampler_kernel_avx2 : &sampler_kernel_sse2;
}

static double *block_rows(size_t rows)
{
    return mem_aligned((rows ? rows : 1) * BLOCK, sizeof(double));
}

static void list_rows(struct sampler *s, const double *first, size_t rows)
{
    for (size_t r = 0; r < rows; r++)
        s->row[s->rows++] = first + r * BLOCK;
}

/* The rows of a state, in the order that draw_accepted reads them. */
static void list_state(struct sampler *s)
{
    const struct problem *p = s->p;
    list_rows(s, s->pt.shape[0], 1);
    list_rows(s, s->pt.shape[1], 1);
    list_rows(s, s->pt.sd, 1);
    if (problem_draws_first(p)) {
        list_rows(s, s->theta, p->levels);
        list_rows(s, s->response, p->levels);
        list_rows(s, s->beta, COLUMNS_MAX);
    } else {
        list_rows(s, s->pt.factor, problem_factor_rows(p));
        list_rows(s, s->pt.x, problem_basis_rows(p));
    }
}

void sampler_init(struct sampler *s, const struct problem *p, const struct proposal *q)
{
    *s = (struct sampler){.p = p, .q = q};
    points_init(&s->pt, p, BLOCK);
    s->normal = block_rows(problem_normal_rows(p));
    s->theta = block_rows(p->levels);
    s->response = block_rows(p->levels);
    s->beta = block_rows(COLUMNS_MAX);
    s->pseudo_y = block_rows(p->levels);
    s->pseudo_w = block_rows(p->levels);
    for (size_t i = 0; i < sizeof s->uniform / sizeof *s->uniform; i++)
        s->uniform[i] = block_rows(1);
    double **const one[] = {&s->uniform_v, &s->uniform_mix, &s->uniform_accept, &s->log_weight,
                            &s->scratch};
    for (size_t i = 0; i < sizeof one / sizeof *one; i++)
        *one[i] = block_rows(4);
    const size_t most =
        3 + 2 * p->levels + COLUMNS_MAX + problem_factor_rows(p) + problem_basis_rows(p);
    s->row = mem_new(most, sizeof *s->row);
    list_state(s);
    s->state = mem_aligned(s->rows * RNG_LANES, sizeof(double));
    s->accepted = block_rows(s->rows);
}

void sampler_release(struct sampler *s)
{
    points_release(&s->pt);
    double *const all[] = {s->normal,         s->theta,      s->response,  s->beta,
                           s->pseudo_y,       s->pseudo_w,   s->uniform_v, s->uniform_mix,
                           s->uniform_accept, s->log_weight, s->scratch,   s->state,
                           s->accepted};
    for (size_t i = 0; i < sizeof all / sizeof *all; i++)
        mem_free(all[i]);
    for (size_t i = 0; i < sizeof s->uniform / sizeof *s->uniform; i++)
        mem_free(s->uniform[i]);
    mem_free(s->row);
    *s = (struct sampler){0};
}

void sampler_start(struct sampler *s, const struct rng_key *key)
{
    rng_lanes_init(&s->rng, key);
    for (size_t lane = 0; lane < RNG_LANES; lane++) {
        s->state_weight[lane] = -INFINITY;
        s->stayed[lane] = 0;
    }
    s->top = -INFINITY;
    s->sum = s->sum_squares = s->count = 0.0;
    s->longest_stay = s->steps = 0;
    s->lattice = NULL;
    s->started = false;
}

static size_t pick_node(const struct proposal *q, double u)
{
    size_t node = q->guide[(size_t)(u * GUIDE)];
    while (q->cumulative[node] <= u)
        node++;
    return node;
}

static double wrapped(double u)
{
    return u >= 1.0 ? u - 1.0 : u;
}

/* The chains' picks of a step are spread evenly over (0, 1) by a common random rotation, so that
 * each chain's are uniform and independent. */
static void spread_over_chains(double *u)
{
    for (size_t i = 0; i < BLOCK; i++)
        u[i] = wrapped(u[i / RNG_LANES * RNG_LANES] + (double)(i % RNG_LANES) / RNG_LANES);
}

/* Every set of numbers: multiples of generator / points (mod 1) from a common random shift on. */
static void spread_as_lattice(const struct lattice *l, double generator, double *u)
{
    const double step = generator / (double)l->points;
    for (size_t i = 0; i < BLOCK; i += l->points)
        for (size_t j = 1; j < l->points; j++)
            u[i + j] = wrapped(u[i + j - 1] + step);
}

/* The same density as propose_shapes has, smooth in the uniforms. */
static void place_lattice(struct sampler *s)
{
    double *const u[SHAPES_MAX] = {s->uniform[PICK], s->uniform[JITTER_A0]};
    if (s->q->dims == 0)
        return;
    spread_as_lattice(s->lattice, 1.0, u[0]);
    spread_as_lattice(s->lattice, s->lattice->second, u[1]);
    grid_inverse_place(&s->inverse, s->q, BLOCK, u, s->pt.coord);
}

/* A node by weight, moved by a tent. */
static void propose_shapes(struct sampler *s)
{
    const struct proposal *q = s->q;
    size_t node[BLOCK];
    for (size_t i = 0; q->dims > 0 && i < BLOCK; i++) {
        node[i] = pick_node(q, s->uniform[PICK][i]);
    }
    for (size_t d = 0; d < q->dims && d < SHAPES_MAX; d++) {
        const double *a = s->uniform[JITTER_A0 + 2 * d], *b = s->uniform[JITTER_B0 + 2 * d];
        double *c = s->pt.coord[d];
        for (size_t i = 0; i < BLOCK; i++)
            c[i] = q->node[d][node[i]] + q->step[d] * (a[i] + b[i] - 1.0);
        for (size_t i = 0; q->folds_low[d] && i < BLOCK; i++)
            c[i] = c[i] < q->low[d] ? 2.0 * q->low[d] - c[i] : c[i];
        for (size_t i = 0; q->folds_high[d] && i < BLOCK; i++)
            c[i] = c[i] > q->high[d] ? 2.0 * q->high[d] - c[i] : c[i];
    }
}

static bool from_prior(const struct sampler *s, size_t i)
{
    return s->uniform_mix[i] < s->p->prior_share;
}

static void propose_shapes_from_prior(struct sampler *s)
{
    const struct problem *p = s->p;
    for (size_t i = 0; i < BLOCK; i++) {
        if (!from_prior(s, i))
            continue;
        for (size_t d = 0; d < p->dims && d < SHAPES_MAX; d++)
            s->pt.coord[d][i] = problem_coordinate(p, d, s->uniform[JITTER_A0 + 2 * d][i]);
    }
}

/* v by the logistic quantile, or from its prior */
static void propose_v(struct sampler *s, const double *mode, const double *scale)
{
    const struct problem *p = s->p;
    p->kernel->uniforms(&s->rng, BLOCK, s->uniform_v);
    if (s->lattice)
        spread_as_lattice(s->lattice, s->lattice->v, s->uniform_v);
    if (!s->q->v_from_prior)
        p->kernel->propose_v(BLOCK, s->uniform_v, mode, scale, s->pt.v);
    for (size_t i = 0; i < BLOCK; i++)
        if (s->q->v_from_prior || from_prior(s, i))
            s->pt.v[i] = problem_log_quantile(p->sd_prior, s->uniform_v[i]);
}

/* log q of the mixture of grid and prior at the block's points; density: of the grid */
static void log_proposal(struct sampler *s, double *density, const double *mode,
                         const double *scale, double *out)
{
    const struct problem *p = s->p;
    double *prior_v = s->scratch;
    if (p->sd_free && !s->q->v_from_prior) {
        p->kernel->logistic_density(BLOCK, s->pt.v, mode, scale, density);
    } else if (p->sd_free) {
        for (size_t i = 0; i < BLOCK; i++)
            prior_v[i] = s->pt.log_prior[i] - s->pt.log_prior_shape[i];
        p->math->exp(BLOCK, prior_v, prior_v);
        for (size_t i = 0; i < BLOCK; i++)
            density[i] *= prior_v[i];
    }
    p->kernel->log_mixture(BLOCK, density, s->pt.log_prior, p->prior_share, out);
}

/* The pseudo-data of the node nearest to each point. */
static void gather_pseudo(struct sampler *s)
{
    const struct proposal *q = s->q;
    const size_t K = s->p->levels;
    for (size_t i = 0; i < BLOCK; i++) {
        size_t node = 0;
        for (size_t d = 0; d < q->dims; d++) {
            double at = (s->pt.coord[d][i] - q->low[d]) * q->inverse_step[d] + 0.5;
            at = at > 0.0 ? at : 0.0;
            at = at < (double)q->nodes[d] - 0.5 ? at : (double)q->nodes[d] - 0.5;
            node = node * q->nodes[d] + (size_t)at;
        }
        for (size_t k = 0; k < K; k++) {
            s->pseudo_y[k * BLOCK + i] = q->pseudo_y[node * K + k];
            s->pseudo_w[k * BLOCK + i] = q->pseudo_w[node * K + k];
        }
    }
    s->pt.y = s->pseudo_y;
    s->pt.w = s->pseudo_w;
}

/* Turns normals into t(24) deviates of a common radius and returns the log ratio of the densities
 * normal : t in out. */
static void heavy_tails(struct sampler *s, double *out)
{
    const size_t rows = problem_normal_rows(s->p);
    double *product = s->scratch, *squares = out;
    for (size_t i = 0; i < BLOCK; i++)
        product[i] = 1.0;
    for (int k = 0; k < TAIL_DF / 2; k++) { /* chi-square(24) = -2 log of twelve uniforms */
        s->p->kernel->uniforms(&s->rng, BLOCK, s->uniform[SPARE]);
        for (size_t i = 0; i < BLOCK; i++)
            product[i] *= s->uniform[SPARE][i];
    }
    s->p->math->log(BLOCK, product, product);
    for (size_t i = 0; i < BLOCK; i++) {
        product[i] = sqrt(TAIL_DF / (-2.0 * product[i]));
        squares[i] = 0.0;
    }
    for (size_t r = 0; r < rows; r++)
        for (size_t i = 0; i < BLOCK; i++) {
            s->normal[r * BLOCK + i] *= product[i];
            squares[i] += s->normal[r * BLOCK + i] * s->normal[r * BLOCK + i];
        }
    for (size_t i = 0; i < BLOCK; i++)
        product[i] = 1.0 + squares[i] / TAIL_DF;
    s->p->math->log(BLOCK, product, product);
    for (size_t i = 0; i < BLOCK; i++)
        out[i] = -0.5 * squares[i] + 0.5 * (double)(TAIL_DF + rows) * product[i];
}

/* Level means from the proposal's Gaussian (binary: of the pseudo-data); adds exact : proposed to
 * the log weights. */
static void weigh_linear(struct sampler *s)
{
    const struct problem *p = s->p;
    double *correction = s->scratch + BLOCK;
    p->kernel->normals(&s->rng, problem_normal_rows(p) * BLOCK, s->normal);
    memset(correction, 0, BLOCK * sizeof *correction);
    if (s->q->heavy_tails)
        heavy_tails(s, correction);
    p->marginal->draw(p, BLOCK, s->pt.x, s->pt.factor, s->normal, s->theta, s->beta);
    density_correction(p, BLOCK, s->theta, s->beta, correction);
    if (p->binary) {
        const struct observations o = {NULL, s->pseudo_y, s->pseudo_w};
        p->marginal->binomial(p, BLOCK, s->theta, &o, s->scratch, s->response);
        for (size_t i = 0; i < BLOCK; i++)
            correction[i] += s->scratch[i];
    }
    for (size_t i = 0; i < BLOCK; i++)
        s->log_weight[i] += correction[i];
}

static void propose(struct sampler *s)
{
    const struct problem *p = s->p;
    double *density = s->scratch + BLOCK, *mode = density + BLOCK, *scale = mode + BLOCK;
    for (size_t i = 0; i <= 2 * p->dims; i++)
        p->kernel->uniforms(&s->rng, BLOCK, s->uniform[i]);
    p->kernel->uniforms(&s->rng, BLOCK, s->uniform_mix);
    if (s->lattice) {
        place_lattice(s);
    } else {
        spread_over_chains(s->uniform[PICK]);
        propose_shapes(s);
    }
    propose_shapes_from_prior(s);
    p->kernel->interpolate(s->q, BLOCK, s->pt.coord, density, mode, scale);
    if (p->sd_free)
        propose_v(s, mode, scale);
    if (p->binary)
        gather_pseudo(s);
    density_at(p, &s->pt);
    log_proposal(s, density, mode, scale, s->log_weight);
    for (size_t i = 0; i < BLOCK; i++)
        s->log_weight[i] = s->pt.log_prior[i] + s->pt.log_m[i] - s->log_weight[i];
    if (problem_draws_first(p))
        weigh_linear(s);
    for (size_t i = 0; i < BLOCK; i++) /* an impossible point is never taken */
        if (!(s->log_weight[i] < INFINITY))
            s->log_weight[i] = -INFINITY;
}

static void count_weights(struct sampler *s)
{
    double top = s->top;
    for (size_t i = 0; i < BLOCK; i++)
        top = s->log_weight[i] > top ? s->log_weight[i] : top;
    if (top > s->top) {
        const double shrink = s->top > -INFINITY ? vm_exp(s->top - top) : 0.0;
        s->sum *= shrink;
        s->sum_squares *= shrink * shrink;
        s->top = top;
    }
    double *weight = s->scratch + BLOCK;
    for (size_t i = 0; i < BLOCK; i++)
        weight[i] = top > -INFINITY ? s->log_weight[i] - top : -INFINITY;
    s->p->math->exp(BLOCK, weight, weight);
    for (size_t i = 0; i < BLOCK; i++) {
        s->sum += weight[i];
        s->sum_squares += weight[i] * weight[i];
    }
    s->count += BLOCK;
}

/* scratch holds 1 where a proposal was taken */
static void count_stays(struct sampler *s)
{
    for (size_t i = 0; i < BLOCK; i++) {
        size_t *stayed = s->stayed + i % RNG_LANES;
        *stayed = s->scratch[i] > 0.0 ? 0 : *stayed + 1;
        if (*stayed > s->longest_stay)
            s->longest_stay = *stayed;
    }
    s->steps += BLOCK_STEPS;
}

void sampler_parameters(const struct problem *p, size_t n, size_t count, const double *shape0,
                        const double *shape1, const double *sd, const double *beta,
                        const double *theta, const struct draw_rows *out, size_t at)
{
    const double *first = theta + p->order[0] * n, *second = theta + p->order[1] * n;
    double *to = out->parameter + at;
    size_t linear = 0, shape = 0;
    for (const struct parameter *a = p->curve->parameters; a->name; a++) {
        if (a->order > 1 && !p->second_order)
            continue;
        if (a->role == ROLE_SHAPE)
            memcpy(to, shape++ == 0 ? shape0 : shape1, count * sizeof *to);
        else if (p->chain && linear++ == 0)
            memcpy(to, first, count * sizeof *to);
        else if (!p->chain)
            memcpy(to, beta + linear++ * n, count * sizeof *to);
        else
            for (size_t i = 0; i < count; i++) /* the first step of the walk */
                to[i] = second[i] - first[i];
        to += out->stride;
    }
    if (p->control >= 0) {
        memcpy(to, theta + (size_t)p->control * n, count * sizeof *to);
        to += out->stride;
    }
    if (!p->binary)
        memcpy(to, sd, count * sizeof *sd);
}

static void copy_rows(double *to, size_t stride, size_t at, const double *from, size_t rows)
{
    for (size_t r = 0; r < rows; r++)
        memcpy(to + r * stride + at, from + r * BLOCK, BLOCK * sizeof *from);
}

static void draw_accepted(struct sampler *s, const struct draw_rows *out, size_t at)
{
    const struct problem *p = s->p;
    const double *shape0 = s->accepted, *shape1 = shape0 + BLOCK, *sd = shape1 + BLOCK;
    const double *rest = sd + BLOCK;
    const double *theta = rest, *beta = rest + 2 * p->levels * BLOCK;
    if (!problem_draws_first(p)) {
        const double *factor = rest, *x = rest + problem_factor_rows(p) * BLOCK;
        p->kernel->normals(&s->rng, problem_normal_rows(p) * BLOCK, s->normal);
        p->marginal->draw(p, BLOCK, x, factor, s->normal, s->theta, s->beta);
        theta = s->theta;
        beta = s->beta;
        if (out->response_mean)
            p->marginal->moments(p, BLOCK, x, factor, out->stride, out->response_mean + at,
                                 out->response_sd + at,
                                 out->difference_mean ? out->difference_mean + at : NULL,
                                 out->difference_sd ? out->difference_sd + at : NULL);
    }
    copy_rows(out->link, out->stride, at, theta, p->levels);
    if (p->binary)
        copy_rows(out->response, out->stride, at, rest + p->levels * BLOCK, p->levels);
    sampler_parameters(p, BLOCK, BLOCK, shape0, shape1, sd, beta, theta, out, at);
}

/* Each chain starts from the best of its first proposals, so that no draw is a chance find far out.
 */
static void start_chains(struct sampler *s)
{
    for (size_t lane = 0; lane < RNG_LANES; lane++) {
        size_t best = lane;
        for (size_t i = lane; i < BLOCK; i += RNG_LANES)
            if (s->log_weight[i] > s->log_weight[best])
                best = i;
        s->state_weight[lane] = s->log_weight[best];
        for (size_t r = 0; r < s->rows; r++)
            s->state[r * RNG_LANES + lane] = s->row[r][best];
    }
    s->started = true;
}

void sampler_lattice(struct sampler *s, size_t points)
{
    s->lattice = &lattices[0];
    for (size_t i = 1; i < COUNT_OF(lattices) && lattices[i].points <= points; i++)
        s->lattice = &lattices[i];
    if (s->q->dims > 0)
        grid_inverse_fill(&s->inverse, s->q);
}

void sampler_propose(struct sampler *s)
{
    propose(s);
    count_weights(s);
}

void sampler_block(struct sampler *s, const struct draw_rows *out, size_t at)
{
    sampler_propose(s);
    if (!s->started)
        start_chains(s);
    s->p->kernel->uniforms(&s->rng, BLOCK, s->uniform_accept);
    s->p->kernel->accept(s);
    count_stays(s);
    draw_accepted(s, out, at);
}
