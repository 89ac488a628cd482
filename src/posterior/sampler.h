/* SPDX-License-Identifier: GPL-3.0-or-later */
/* sampler.h: independence Metropolis-Hastings over (phi, sd), with exact draws of the linear part.
 *
 * Eight lanes are eight chains. A block is eight steps of all chains. Within a chain the proposals
 * are independent; across chains the picks of a step are a rotated lattice. Kernels are compiled
 * once per instruction set.
 */
#ifndef TERRACE_SAMPLER_H
#define TERRACE_SAMPLER_H

#include <stdbool.h>
#include <stddef.h>

#include "base/rng.h"
#include "posterior/density.h"
#include "posterior/grid_inverse.h"
#include "posterior/proposal.h"

enum { BLOCK = 64, BLOCK_STEPS = BLOCK / RNG_LANES, TAIL_DF = 24 };

/* Where the draws of a block go: row r of an array at r * stride. NULL: not wanted. */
struct draw_rows {
    size_t stride;
    double *link, *response; /* response NULL for continuous */
    double *parameter;       /* natural values: shapes, sd and beta as `slot` tells */
    double *response_mean, *response_sd, *difference_mean, *difference_sd;
};

struct sampler {
    const struct problem *p;
    const struct proposal *q;
    struct rng_lanes rng;
    const struct lattice *lattice; /* NULL: proposals for chains */
    struct grid_inverse inverse;   /* with a lattice */
    struct points pt;              /* the proposals of a block */
    double *normal, *theta, *response, *beta, *pseudo_y, *pseudo_w;
    double *uniform[6]; /* pick, two jitters a dim; see sampler.c */
    double *uniform_v, *uniform_mix, *uniform_accept;
    double *log_weight, *scratch;
    /* rows that make a state: shapes, sd, then factor and basis, or theta, response and beta */
    size_t rows;
    const double **row;                     /* where a block's proposals have them */
    double *state, state_weight[RNG_LANES]; /* [rows][8] */
    double *accepted;                       /* [rows][BLOCK] */
    bool started;
    /* importance weights so far, relative to exp(top) */
    double top, sum, sum_squares, count;
    size_t stayed[RNG_LANES], longest_stay, steps;
};

void sampler_init(struct sampler *s, const struct problem *p, const struct proposal *q);
void sampler_release(struct sampler *s);
void sampler_start(struct sampler *s, const struct rng_key *key);

/* One block: proposals, acceptance, draws. out->... of draws [at, at + BLOCK). */
void sampler_block(struct sampler *s, const struct draw_rows *out, size_t at);

/* A block of proposals only: pt, log_weight and the sums of weights. */
void sampler_propose(struct sampler *s);
/* Once a fit, after sampler_start: from now on the shapes and ln sd of each set of consecutive
 * proposals are a lattice shifted at random: sets of 16, 32 or 64: the largest of them
 * that is not above `points`, at least 16. Not for chains. */
void sampler_lattice(struct sampler *s, size_t points);

/* Parameter rows of `count` of a block of n points: natural values into the model's parameter
 * order.
 */
void sampler_parameters(const struct problem *p, size_t n, size_t count, const double *shape0,
                        const double *shape1, const double *sd, const double *beta,
                        const double *theta, const struct draw_rows *out, size_t at);

struct sampler_kernel {
    void (*uniforms)(struct rng_lanes *r, size_t n, double *out); /* n a multiple of 8; (0, 1) */
    void (*normals)(struct rng_lanes *r, size_t n, double *out);  /* n a multiple of 16 */
    /* interpolated weight (density of the grid), mode and scale at the block's coordinates */
    void (*interpolate)(const struct proposal *q, size_t n, double *const coord[SHAPES_MAX],
                        double *density, double *mode, double *scale);
    void (*propose_v)(size_t n, const double *u, const double *mode, const double *scale,
                      double *v);
    void (*logistic_density)(size_t n, const double *v, const double *mode, const double *scale,
                             double *density);
    void (*log_mixture)(size_t n, const double *density, const double *log_prior, double share,
                        double *out);
    /* scratch: 1 where the proposal is taken; moves `state` and fills `accepted` */
    void (*accept)(struct sampler *s);
};
extern const struct sampler_kernel sampler_kernel_sse2, sampler_kernel_avx2;
const struct sampler_kernel *sampler_kernel_in_force(void);

#endif
