/* SPDX-License-Identifier: GPL-3.0-or-later */
/* density.c: the collapsed posterior density at a block of points. */
#include "posterior/density.h"

#include "base/isa.h"
#include "base/mem.h"
#include "base/vecmath.h"

/* the logarithm of a shape number is never taken below this: densities stay finite at 0 */
#define LOG_FLOOR (-700.0)
#define LEAST 1e-300
#define HALF_LN_2_PI 0.91893853320467274178
enum { BLOCK_MOST = 64 };

size_t problem_factor_rows(const struct problem *p)
{
    const size_t q = p->slopes;
    if (p->chain)
        return (p->second_order ? 5 : 2) * p->levels + 1;
    return 2 + 2 * q + q * (q + 1) / 2 + (p->control >= 0 ? 2 : 0);
}

size_t problem_basis_rows(const struct problem *p)
{
    return p->chain ? 0 : p->slopes * p->at.count;
}

size_t problem_normal_rows(const struct problem *p)
{
    return p->chain ? p->levels : p->slopes + 1 + (p->control >= 0 ? 1 : 0);
}

bool problem_draws_first(const struct problem *p)
{
    return p->binary || p->weighed;
}

const struct marginal *marginal_in_force(void)
{
    return isa_in_force() == ISA_AVX2 ? &marginal_avx2 : &marginal_sse2;
}

void points_init(struct points *pt, const struct problem *p, size_t capacity)
{
    *pt = (struct points){.capacity = capacity, .n = capacity};
    for (size_t j = 0; j < SHAPES_MAX; j++) {
        pt->coord[j] = mem_aligned(capacity, sizeof(double));
        pt->shape[j] = mem_aligned(capacity, sizeof(double));
        pt->log_shape[j] = mem_aligned(capacity, sizeof(double));
    }
    double **const rows[] = {&pt->log_prior_shape, &pt->v,     &pt->sd,     &pt->precision,
                             &pt->log_prior,       &pt->log_m, &pt->scratch};
    for (size_t r = 0; r < sizeof rows / sizeof *rows; r++)
        *rows[r] = mem_aligned(capacity, sizeof(double));
    pt->x = mem_aligned(capacity * (problem_basis_rows(p) + 1), sizeof(double));
    pt->factor = mem_aligned(capacity * problem_factor_rows(p), sizeof(double));
}

void points_release(struct points *pt)
{
    for (size_t j = 0; j < SHAPES_MAX; j++) {
        mem_free(pt->coord[j]);
        mem_free(pt->shape[j]);
        mem_free(pt->log_shape[j]);
    }
    mem_free(pt->v);
    mem_free(pt->sd);
    mem_free(pt->precision);
    mem_free(pt->log_prior_shape);
    mem_free(pt->log_prior);
    mem_free(pt->log_m);
    mem_free(pt->scratch);
    mem_free(pt->x);
    mem_free(pt->factor);
    *pt = (struct points){0};
}

static void shape_from_coordinate(const struct problem *p, struct points *pt, size_t dim)
{
    const size_t j = p->dim_shape[dim], n = pt->n;
    const double *c = pt->coord[dim];
    double *shape = pt->shape[j], *log_shape = pt->log_shape[j];
    if (p->coordinate[j] == COORDINATE_LOG) {
        for (size_t i = 0; i < n; i++)
            log_shape[i] = c[i];
        p->math->exp(n, c, shape);
        return;
    }
    for (size_t i = 0; i < n; i++)
        shape[i] = p->reflect[dim] && c[i] < 0.0 ? -c[i] : c[i];
    p->math->log(n, shape, log_shape);
    for (size_t i = 0; i < n; i++)
        log_shape[i] = log_shape[i] > LOG_FLOOR ? log_shape[i] : LOG_FLOOR;
}

static void fixed_shapes(const struct problem *p, struct points *pt)
{
    for (size_t j = 0; j < p->shapes; j++) {
        if (!prior_is_fixed(p->shape_prior[j]))
            continue;
        const double value = prior_quantile(p->shape_prior[j], 0.5);
        const double log_value = value > 0.0 ? vm_log(value) : LOG_FLOOR;
        for (size_t i = 0; i < pt->n; i++) {
            pt->shape[j][i] = value;
            pt->log_shape[j][i] = log_value;
        }
    }
}

/* sum[i] += log density of x, and the Jacobian of the coordinate */
static void add_prior(const struct points *pt, const struct prior *prior, const double *x,
                      const double *log_x, const double *jacobian, double *sum)
{
    prior_log_density(prior, pt->n, x, log_x, pt->scratch);
    for (size_t i = 0; i < pt->n; i++)
        sum[i] += pt->scratch[i] + (jacobian ? jacobian[i] : 0.0);
}

static void shape_prior(const struct problem *p, struct points *pt)
{
    for (size_t i = 0; i < pt->n; i++)
        pt->log_prior_shape[i] = 0.0;
    fixed_shapes(p, pt);
    for (size_t dim = 0; dim < p->dims; dim++) {
        const size_t j = p->dim_shape[dim];
        shape_from_coordinate(p, pt, dim);
        add_prior(pt, p->shape_prior[j], pt->shape[j], pt->log_shape[j],
                  p->coordinate[j] == COORDINATE_LOG ? pt->log_shape[j] : NULL,
                  pt->log_prior_shape);
    }
}

void density_prior(const struct problem *p, struct points *pt)
{
    if (!pt->same_shapes)
        shape_prior(p, pt);
    for (size_t i = 0; i < pt->n; i++)
        pt->log_prior[i] = pt->log_prior_shape[i];
    if (p->sd_free) {
        p->math->exp(pt->n, pt->v, pt->sd);
        add_prior(pt, p->sd_prior, pt->sd, pt->v, pt->v, pt->log_prior);
    } else {
        for (size_t i = 0; i < pt->n; i++)
            pt->sd[i] = p->sd_fixed;
    }
}

void density_at(const struct problem *p, struct points *pt)
{
    const size_t n = pt->n;
    density_prior(p, pt);
    for (size_t i = 0; i < n; i++)
        pt->precision[i] = 1.0 / (pt->sd[i] * pt->sd[i]);
    if (!p->chain && !pt->same_shapes) {
        const double *const shape[] = {pt->shape[0], pt->shape[1]};
        const double *const log_shape[] = {pt->log_shape[0], pt->log_shape[1]};
        p->curve->basis(&p->at, n, shape, log_shape, pt->x);
    }
    const struct observations o = {p->binary ? NULL : pt->precision, pt->y, pt->w};
    p->marginal->factor(p, n, pt->x, p->shapes ? pt->shape[0] : NULL, &o, pt->factor, pt->log_m);
    if (!p->binary && p->sd_free)
        for (size_t i = 0; i < n; i++)
            pt->log_m[i] -= p->n_total * pt->v[i] + 0.5 * p->ss_within * pt->precision[i];
}

/* sum[i] += log of the exact prior : its stand-in at x[n] (at most BLOCK_MOST points) */
static void add_ratio(const struct problem *p, size_t c, size_t n, const double *x, double *sum)
{
    double positive[BLOCK_MOST], log_x[BLOCK_MOST], exact[BLOCK_MOST];
    const double mean = p->stand_in_mean[c], inverse = 1.0 / p->stand_in_sd[c];
    const double top = -HALF_LN_2_PI + vm_log(inverse);
    for (size_t i = 0; i < n; i++)
        positive[i] = x[i] > LEAST ? x[i] : LEAST;
    p->math->log(n, positive, log_x);
    prior_log_density(p->exact[c], n, x, log_x, exact);
    for (size_t i = 0; i < n; i++) {
        const double z = (x[i] - mean) * inverse;
        sum[i] += exact[i] - (top - 0.5 * z * z);
    }
}

/* the chain's linear coefficients: its start (each level where none follows another), first step */
static void chain_ratios(const struct problem *p, size_t n, const double *theta, double *sum)
{
    double step[BLOCK_MOST];
    const double *first = theta + p->order[0] * n, *second = theta + p->order[1] * n;
    for (size_t j = 0; p->exact[0] && j < p->at.count; j++)
        if (p->carry[j] == 0.0)
            add_ratio(p, 0, n, theta + p->order[j] * n, sum);
    if (!p->exact[1])
        return;
    for (size_t i = 0; i < n; i++)
        step[i] = second[i] - first[i];
    add_ratio(p, 1, n, step, sum);
}

void density_correction(const struct problem *p, size_t n, const double *theta, const double *beta,
                        double *sum)
{
    if (!p->weighed)
        return;
    if (p->chain)
        chain_ratios(p, n, theta, sum);
    for (size_t c = 0; !p->chain && c <= p->slopes; c++)
        if (p->exact[c])
            add_ratio(p, c, n, beta + c * n, sum);
    if (p->exact[COLUMNS_MAX])
        add_ratio(p, COLUMNS_MAX, n, theta + (size_t)p->control * n, sum);
}
