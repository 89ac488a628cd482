/* SPDX-License-Identifier: GPL-3.0-or-later */
/* kernel.c: the inner loops of the sampler, on lanes: random numbers, interpolation, acceptance. */
#include "base/isa_name.h"
#include "base/vecmath_lanes.h"
#include "posterior/sampler.h"

struct stream {
    vu s0, s1, s2, s3;
};

LANE_FN vu rotate(vu x, int by)
{
    return x << by | x >> (64 - by);
}

/* xoshiro256++ (Blackman & Vigna 2021, ACM TOMS 47:36), a generator a lane */
LANE_FN vu next_bits(struct stream *g)
{
    const vu result = rotate(g->s0 + g->s3, 23) + g->s0;
    const vu t = g->s1 << 17;
    g->s2 ^= g->s0;
    g->s3 ^= g->s1;
    g->s1 ^= g->s2;
    g->s0 ^= g->s3;
    g->s2 ^= t;
    g->s3 = rotate(g->s3, 45);
    return result;
}

/* (k + 1/2) / 2^52, strictly inside (0, 1) */
LANE_FN vd open_uniform(vu bits)
{
    return (vd)(bits >> 12 | v_set_bits(0x3ff0000000000000ULL)) - (1.0 - 0x1p-53);
}

LANE_FN struct stream stream_load(const struct rng_lanes *r, size_t lane)
{
    return (struct stream){v_load_bits(r->s[0] + lane), v_load_bits(r->s[1] + lane),
                           v_load_bits(r->s[2] + lane), v_load_bits(r->s[3] + lane)};
}

LANE_FN void stream_store(struct rng_lanes *r, size_t lane, const struct stream *g)
{
    v_store_bits(r->s[0] + lane, g->s0);
    v_store_bits(r->s[1] + lane, g->s1);
    v_store_bits(r->s[2] + lane, g->s2);
    v_store_bits(r->s[3] + lane, g->s3);
}

static void uniforms(struct rng_lanes *r, size_t n, double *out)
{
    for (size_t lane = 0; lane < RNG_LANES; lane += VL) {
        struct stream g = stream_load(r, lane);
        for (size_t i = lane; i < n; i += RNG_LANES)
            v_store(out + i, open_uniform(next_bits(&g)));
        stream_store(r, lane, &g);
    }
}

/* Box & Muller 1958, Annals of Mathematical Statistics 29:610. The angle is drawn within a quarter
 * turn; two spare bits swap the axes and turn the sign, which covers the circle. */
static void normals(struct rng_lanes *r, size_t n, double *out)
{
    for (size_t lane = 0; lane < RNG_LANES; lane += VL) {
        struct stream g = stream_load(r, lane);
        for (size_t i = lane; i < n; i += 2 * RNG_LANES) {
            const vd u = open_uniform(next_bits(&g));
            const vu bits = next_bits(&g);
            vd sine, cosine;
            v_sin_cos_quarter(open_uniform(bits) - 0.5, &sine, &cosine);
            const vd radius = v_sqrt(-2.0 * v_log_core(u));
            const vu sign = bits << 63;
            const vi swap = (vi)((bits & v_set_bits(2)) != v_set_bits(0));
            const vd a = (vd)((vu)(radius * cosine) ^ sign), b = (vd)((vu)(radius * sine) ^ sign);
            v_store(out + i, v_pick(swap, b, a));
            v_store(out + i + RNG_LANES, v_pick(swap, a, b));
        }
        stream_store(r, lane, &g);
    }
}

/* position of a coordinate in the grid with its border: cell index and fraction; `inside` is 0
 * beyond the border */
static inline size_t locate(const struct proposal *q, size_t d, double c, double *fraction,
                            double *inside)
{
    double at = (c - q->low[d]) * q->inverse_step[d] + 1.0;
    const double last = (double)q->nodes[d] + 1.0;
    *inside = at >= 0.0 && at < last ? 1.0 : 0.0;
    at = at > 0.0 ? at : 0.0; /* NaN ends here too */
    at = at < last - 1e-9 ? at : last - 1e-9;
    const size_t cell = (size_t)at;
    *fraction = at - (double)cell;
    return cell;
}

static void interpolate_one(const struct proposal *q, size_t n, const double *c, double *density,
                            double *mode, double *scale)
{
    for (size_t i = 0; i < n; i++) {
        double t, inside;
        const size_t at = locate(q, 0, c[i], &t, &inside);
        const struct cell *a = q->cell + at * 3 + 1, *b = a + 3;
        density[i] = inside * q->density_scale * (a->weight + t * (b->weight - a->weight));
        mode[i] = a->mode + t * (b->mode - a->mode);
        scale[i] = a->scale + t * (b->scale - a->scale);
    }
}

static void interpolate_two(const struct proposal *q, size_t n, double *const coord[SHAPES_MAX],
                            double *density, double *mode, double *scale)
{
    const size_t columns = q->nodes[1] + 2;
    for (size_t i = 0; i < n; i++) {
        double t, u, inside_t, inside_u;
        const size_t r = locate(q, 0, coord[0][i], &t, &inside_t);
        const size_t c = locate(q, 1, coord[1][i], &u, &inside_u);
        const struct cell *a = q->cell + r * columns + c, *b = a + columns;
        const double corner[4] = {(1.0 - t) * (1.0 - u), (1.0 - t) * u, t * (1.0 - u), t * u};
        double sum[4]; /* weight, mode, scale: a cell at a time */
        for (size_t part = 0; part < 4; part += VL)
            v_store(sum + part, corner[0] * v_load(&a[0].weight + part) +
                                    corner[1] * v_load(&a[1].weight + part) +
                                    (corner[2] * v_load(&b[0].weight + part) +
                                     corner[3] * v_load(&b[1].weight + part)));
        density[i] = inside_t * inside_u * q->density_scale * sum[0];
        mode[i] = sum[1];
        scale[i] = sum[2];
    }
}

static void interpolate(const struct proposal *q, size_t n, double *const coord[SHAPES_MAX],
                        double *density, double *mode, double *scale)
{
    if (q->dims == 2) {
        interpolate_two(q, n, coord, density, mode, scale);
    } else if (q->dims == 1) {
        interpolate_one(q, n, coord[0], density, mode, scale);
    } else {
        const struct cell *only = q->cell + 4; /* a 1 x 1 grid with its border */
        for (size_t i = 0; i < n; i++) {
            density[i] = 1.0;
            mode[i] = only->mode;
            scale[i] = only->scale;
        }
    }
}

/* v by the logistic quantile around its mode */
static void propose_v(size_t n, const double *u, const double *mode, const double *scale, double *v)
{
    for (size_t i = 0; i < n; i += VL) {
        const vd p = v_load(u + i);
        v_store(v + i, v_load(mode + i) + v_load(scale + i) * v_log_core(p / (1.0 - p)));
    }
}

/* density[i] *= the logistic density of v */
static void logistic_density(size_t n, const double *v, const double *mode, const double *scale,
                             double *density)
{
    for (size_t i = 0; i < n; i += VL) {
        const vd s = v_load(scale + i);
        const vd t = v_abs((v_load(v + i) - v_load(mode + i)) / s);
        const vd e = v_exp_core(v_max(-t, v_set(-708.0)));
        v_store(density + i, v_load(density + i) * e / (s * ((1.0 + e) * (1.0 + e))));
    }
}

/* log of the mixture of the grid's density and the prior's */
static void log_mixture(size_t n, const double *density, const double *log_prior, double share,
                        double *out)
{
    for (size_t i = 0; i < n; i += VL) {
        const vd prior =
            v_exp_core(v_min(v_max(v_load(log_prior + i), v_set(-708.0)), v_set(708.0)));
        const vd q = v_load(density + i) * (1.0 - share) + prior * share;
        v_store(out + i, v_log_core(v_max(q, v_set(1e-300))));
    }
}

/* log u < difference of log weights: the proposal is taken. First which, then every row in turn, so
 * that a row's state stays in a register. */
static void accept(struct sampler *s)
{
    for (size_t lane = 0; lane < RNG_LANES; lane += VL) {
        vd weight = v_load(s->state_weight + lane);
        vi taken[BLOCK_STEPS];
        for (size_t step = 0; step < BLOCK_STEPS; step++) {
            const size_t at = step * RNG_LANES + lane;
            const vd proposed = v_load(s->log_weight + at);
            taken[step] = (vi)(v_log_core(v_load(s->uniform_accept + at)) < proposed - weight);
            weight = v_pick(taken[step], proposed, weight);
            v_store(s->scratch + at, v_pick(taken[step], v_set(1), v_set(0)));
        }
        v_store(s->state_weight + lane, weight);
        for (size_t r = 0; r < s->rows; r++) {
            const double *from = s->row[r] + lane;
            double *to = s->accepted + r * BLOCK + lane;
            vd now = v_load(s->state + r * RNG_LANES + lane);
            for (size_t step = 0; step < BLOCK_STEPS; step++) {
                now = v_pick(taken[step], v_load(from + step * RNG_LANES), now);
                v_store(to + step * RNG_LANES, now);
            }
            v_store(s->state + r * RNG_LANES + lane, now);
        }
    }
}

const struct sampler_kernel ISA_NAME(sampler_kernel) = {
    uniforms, normals, interpolate, propose_v, logistic_density, log_mixture, accept};
