/* SPDX-License-Identifier: GPL-3.0-or-later */
/* marginal_trend.c: the collapsed Gaussian likelihood of a walk of order 2.
 *
 * The state is a level and the step into it, (theta_k, s_k): s_k+1 = s_k + N(0, q), theta_k+1 =
 * theta_k + s_k+1 (local linear trend: West & Harrison 1997, Bayesian Forecasting and Dynamic
 * Models, ch. 7). Backward, theta_k = theta_k+1 - s_k+1 is known and s_k is Gaussian.
 */
#include "posterior/marginal_lanes.h"

/* second order: the filter's state at one point */
struct trend {
    vd mean, step, variance, covariance, step_variance;
};

LANE_FN struct trend trend_start(const struct problem *p, size_t level)
{
    const double step_scale = (int)level == p->control ? 0.0 : p->scale[1];
    return (struct trend){v_set(start_mean(p, level)),
                          v_set((int)level == p->control ? 0.0 : p->mean[1]),
                          v_set(start_scale(p, level)), v_set(0), v_set(step_scale * step_scale)};
}

LANE_FN struct trend trend_next(const struct trend *s, vd q)
{
    const vd step_variance = s->step_variance + q, covariance = s->covariance + step_variance;
    return (struct trend){s->mean + s->step, s->step, s->variance + s->covariance + covariance,
                          covariance, step_variance};
}

/* takes in the observation e = y - mean of weight w; returns F */
LANE_FN vd trend_update(struct trend *s, vd e, vd w)
{
    const vd F = 1.0 + s->variance * w, gain = w / F;
    s->mean += s->variance * gain * e;
    s->step += s->covariance * gain * e;
    s->step_variance -= s->covariance * s->covariance * gain;
    s->covariance /= F;
    s->variance /= F;
    return F;
}

LANE_FN struct trend trend_load(const double *f, size_t n, size_t K, size_t at, size_t i)
{
    return (struct trend){v_load(f + at * n + i), v_load(f + (2 * K + 1 + at) * n + i),
                          v_load(f + (K + at) * n + i), v_load(f + (3 * K + 1 + at) * n + i),
                          v_load(f + (4 * K + 1 + at) * n + i)};
}

LANE_FN void trend_store(const struct trend *s, double *f, size_t n, size_t K, size_t at, size_t i)
{
    v_store(f + at * n + i, s->mean);
    v_store(f + (K + at) * n + i, s->variance);
    v_store(f + (2 * K + 1 + at) * n + i, s->step);
    v_store(f + (3 * K + 1 + at) * n + i, s->covariance);
    v_store(f + (4 * K + 1 + at) * n + i, s->step_variance);
}

static void factor(const struct problem *p, size_t n, const double *x, const double *shape0,
                   const struct observations *o, double *factor, double *log_m)
{
    const size_t K = p->levels;
    (void)x;
    EACH_POINT (n) {
        const vd drift = shape0 ? v_load(shape0 + i) : v_set(0), q = drift * drift;
        vd sum = v_set(0);
        struct trend s = trend_start(p, p->order[0]);
        v_store(factor + 2 * K * n + i, q);
        for (size_t at = 0; at < K; at++) {
            const size_t k = p->order[at];
            if (at > 0) /* the first step is the slope itself */
                s = p->carry[at] > 0.0 ? trend_next(&s, at > 1 ? q : v_set(0)) : trend_start(p, k);
            const vd w = weight_at(p, o, n, k, i), e = value_at(p, o, n, k, i) - s.mean;
            const vd F = trend_update(&s, e, w);
            sum += v_log_core(F) + w * e * e / F;
            trend_store(&s, factor, n, K, at, i);
        }
        v_store(log_m + i, -0.5 * sum);
    }
}

/* theta by position (without the centre) from standard normals by position: backward sampling */
LANE_FN void trend_draw(const struct problem *p, size_t n, size_t i, const double *f,
                        const vd *normal, vd *theta)
{
    const size_t K = p->levels, m = p->at.count;
    const vd q = v_load(f + 2 * K * n + i), least = v_set(1e-300);
    vd step = v_set(0);
    for (size_t at = K; at-- > 0;) {
        const struct trend s = trend_load(f, n, K, at, i);
        theta[at] = at + 1 < m ? theta[at + 1] - step : s.mean + v_sqrt(s.variance) * normal[at];
        if (at == 0 || at >= m)
            continue; /* the first step is the next position's; a control has none */
        const vd gain = s.covariance / v_max(s.variance, least);
        const vd mean = s.step + gain * (theta[at] - s.mean);
        const vd V = v_max(s.step_variance - gain * s.covariance, v_set(0));
        if (at + 1 == m) {
            step = mean + v_sqrt(V) * normal[0];
        } else {
            const vd share = V / v_max(V + q, least);
            step = mean + share * (step - mean) + v_sqrt(share * q) * normal[at];
        }
    }
}

LANE_FN void trend_draw_at(const struct problem *p, size_t n, size_t i, const double *f,
                           const double *normal, double *theta)
{
    vd z[LEVELS_MAX], t[LEVELS_MAX];
    for (size_t at = 0; at < p->levels; at++)
        z[at] = v_load(normal + at * n + i);
    trend_draw(p, n, i, f, z, t);
    for (size_t at = 0; at < p->levels; at++)
        v_store(theta + p->order[at] * n + i, t[at] + p->centre);
}

static void draw(const struct problem *p, size_t n, const double *x, const double *f,
                 const double *normal, double *theta, double *beta)
{
    (void)x;
    (void)beta;
    EACH_POINT (n)
        trend_draw_at(p, n, i, f, normal, theta);
}

/* A draw is linear in its normals: their coefficients, one normal at a time, give the variances. */
LANE_FN void trend_moments_at(const struct problem *p, size_t n, size_t i, const double *f,
                              const struct moment_rows *out)
{
    vd z[LEVELS_MAX], mean[LEVELS_MAX], t[LEVELS_MAX], sum[LEVELS_MAX], apart_sum[LEVELS_MAX];
    const size_t K = p->levels;
    const size_t reference = out->difference_mean ? position_of(p, p->reference) : 0;
    for (size_t at = 0; at < K; at++)
        z[at] = sum[at] = apart_sum[at] = v_set(0);
    trend_draw(p, n, i, f, z, mean);
    for (size_t r = 0; r < K; r++) {
        z[r] = v_set(1);
        trend_draw(p, n, i, f, z, t);
        z[r] = v_set(0);
        for (size_t at = 0; at < K; at++) {
            const vd own = t[at] - mean[at], other = t[reference] - mean[reference];
            sum[at] += own * own;
            apart_sum[at] += (own - other) * (own - other);
        }
    }
    for (size_t at = 0; at < K; at++) {
        const size_t to = p->order[at] * out->stride + i;
        v_store(out->mean + to, mean[at] + p->centre);
        v_store(out->sd + to, v_sqrt(sum[at]));
        if (out->difference_mean) {
            v_store(out->difference_mean + to, mean[at] - mean[reference]);
            v_store(out->difference_sd + to, v_sqrt(apart_sum[at]));
        }
    }
}

static void moments(const struct problem *p, size_t n, const double *x, const double *f,
                    const struct moment_rows *out)
{
    (void)x;
    EACH_POINT (n)
        trend_moments_at(p, n, i, f, out);
}

const struct linear_part ISA_NAME(linear_trend) = {factor, draw, moments};
