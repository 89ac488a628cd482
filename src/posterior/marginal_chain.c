/* SPDX-License-Identifier: GPL-3.0-or-later */
/* marginal_chain.c: the collapsed Gaussian likelihood of a chain of levels.
 *
 * Kalman filter in covariance form and backward sampling (West & Harrison 1997, Bayesian
 * Forecasting and Dynamic Models, ch. 4; Fruehwirth-Schnatter 1994, J. Time Series Analysis
 * 15:183); weights instead of observation variances, so that an empty level has weight 0.
 * A control off the curve is a level of its own, last in the order.
 * Check value: one level, prior N(0, 1), y = 1, w = 1: mean 1/2, variance 1/2, log M = -1/2 ln 2 -
 * 1/4.
 */
#include "posterior/marginal_lanes.h"

enum { LOG_EVERY = 8 };

/* four vectors side by side hide the latency of the recursion over levels */
enum { ABREAST = 16 / VL };

static void factor(const struct problem *p, size_t n, const double *x, const double *shape0,
                   const struct observations *o, double *factor, double *log_m)
{
    const size_t K = p->levels;
    (void)x;
    for (size_t first = 0; first < n; first += ABREAST * VL) {
        const size_t abreast = n - first < ABREAST * VL ? (n - first) / VL : ABREAST;
        vd m[ABREAST], C[ABREAST], q[ABREAST], quad[ABREAST], logs[ABREAST], product[ABREAST];
        for (size_t v = 0; v < abreast; v++) {
            const size_t i = first + v * VL;
            const vd drift = shape0 ? v_load(shape0 + i) : v_set(0);
            q[v] = drift * drift;
            m[v] = C[v] = quad[v] = logs[v] = v_set(0);
            product[v] = v_set(1);
            v_store(factor + 2 * K * n + i, q[v]);
        }
        for (size_t at = 0; at < K; at++) {
            const size_t k = p->order[at];
            const double carry = p->carry[at], anew = 1.0 - carry;
            const double start = start_mean(p, k), start_variance = start_scale(p, k);
            for (size_t v = 0; v < abreast; v++) {
                const size_t i = first + v * VL;
                const vd w = weight_at(p, o, n, k, i);
                const vd a = carry * m[v] + anew * start;
                const vd R = carry * (C[v] + p->gap[at] * q[v]) + anew * start_variance;
                const vd e = value_at(p, o, n, k, i) - a;
                const vd F = 1.0 + R * w;
                const vd inverse = 1.0 / F;
                C[v] = R * inverse;
                m[v] = a + C[v] * w * e;
                quad[v] += w * e * e * inverse;
                product[v] *= F;
                v_store(factor + at * n + i, m[v]);
                v_store(factor + (K + at) * n + i, C[v]);
            }
            if (at % LOG_EVERY == LOG_EVERY - 1 || at == K - 1)
                for (size_t v = 0; v < abreast; v++) {
                    logs[v] += v_log_core(product[v]);
                    product[v] = v_set(1);
                }
        }
        for (size_t v = 0; v < abreast; v++)
            v_store(log_m + first + v * VL, -0.5 * (logs[v] + quad[v]));
    }
}

/* theta_K ~ N(m, C); theta_k | theta_k+1: gain B = C / (C + q) */
LANE_FN void chain_draw_at(const struct problem *p, size_t n, size_t i, const double *f,
                           const double *normal, double *theta)
{
    const size_t K = p->levels;
    const vd q = v_load(f + 2 * K * n + i);
    vd next = v_set(0);
    for (size_t at = K; at-- > 0;) {
        const vd m = v_load(f + at * n + i), C = v_load(f + (K + at) * n + i);
        const vd e = v_load(normal + at * n + i);
        const double carry = at + 1 < K ? p->carry[at + 1] : 0.0;
        const vd step = at + 1 < K ? p->gap[at + 1] * q : q;
        const vd B = carry * (C / v_max(C + step, v_set(1e-300)));
        next = (1.0 - B) * m + B * next + v_sqrt(C * (1.0 - B)) * e;
        v_store(theta + p->order[at] * n + i, next + p->centre);
    }
}

static void draw(const struct problem *p, size_t n, const double *x, const double *f,
                 const double *normal, double *theta, double *beta)
{
    (void)x;
    (void)beta;
    EACH_POINT (n)
        chain_draw_at(p, n, i, f, normal, theta);
}

/* Smoothed moments backward (Rauch, Tung & Striebel 1965, AIAA Journal 3:1445). Covariance of two
 * levels c < k of the chain: product of the gains between them times the variance at k. By
 * position; a row of the results belongs to the position's level. */
LANE_FN void chain_smooth_at(const struct problem *p, size_t n, size_t i, const double *f,
                             const struct moment_rows *out, vd *gain)
{
    const size_t K = p->levels;
    const vd q = v_load(f + 2 * K * n + i);
    vd mean = v_set(0), variance = v_set(0);
    for (size_t at = K; at-- > 0;) {
        const vd m = v_load(f + at * n + i), C = v_load(f + (K + at) * n + i);
        const double carry = at + 1 < K ? p->carry[at + 1] : 0.0;
        const vd step = at + 1 < K ? p->gap[at + 1] * q : q;
        const vd B = carry * (C / v_max(C + step, v_set(1e-300)));
        const size_t to = p->order[at] * out->stride + i;
        mean = (1.0 - B) * m + B * mean;
        variance = C * (1.0 - B) + B * B * variance;
        gain[at] = B; /* between this position and the next */
        v_store(out->mean + to, mean + p->centre);
        v_store(out->sd + to, variance); /* square root below */
    }
}

LANE_FN void chain_difference(const struct problem *p, const struct moment_rows *out, size_t i,
                              size_t position, vd between, vd later_variance)
{
    const size_t c = (size_t)p->reference * out->stride + i;
    const size_t at = p->order[position] * out->stride + i;
    const vd variance = v_load(out->sd + at) + v_load(out->sd + c) - 2.0 * between * later_variance;
    v_store(out->difference_mean + at, v_load(out->mean + at) - v_load(out->mean + c));
    v_store(out->difference_sd + at, v_sqrt(v_max(variance, v_set(0))));
}

LANE_FN void chain_moments_at(const struct problem *p, size_t n, size_t i, const double *f,
                              const struct moment_rows *out)
{
    vd gain[LEVELS_MAX];
    const size_t K = p->levels;
    chain_smooth_at(p, n, i, f, out, gain);
    if (out->difference_mean) {
        const size_t at = position_of(p, p->reference), c = (size_t)p->reference;
        vd between = v_set(1);
        v_store(out->difference_mean + c * out->stride + i, v_set(0));
        v_store(out->difference_sd + c * out->stride + i, v_set(0));
        for (size_t k = at + 1; k < K; k++) {
            between *= gain[k - 1];
            chain_difference(p, out, i, k, between,
                             v_load(out->sd + p->order[k] * out->stride + i));
        }
        between = v_set(1);
        for (size_t k = at; k-- > 0;) {
            between *= gain[k];
            chain_difference(p, out, i, k, between, v_load(out->sd + c * out->stride + i));
        }
    }
    for (size_t k = 0; k < K; k++)
        v_store(out->sd + k * out->stride + i, v_sqrt(v_load(out->sd + k * out->stride + i)));
}

static void moments(const struct problem *p, size_t n, const double *x, const double *f,
                    const struct moment_rows *out)
{
    (void)x;
    EACH_POINT (n)
        chain_moments_at(p, n, i, f, out);
}

const struct linear_part ISA_NAME(linear_chain) = {factor, draw, moments};
