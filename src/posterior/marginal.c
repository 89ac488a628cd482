/* SPDX-License-Identifier: GPL-3.0-or-later */
/* marginal.c: collapsed Gaussian likelihoods of a basis and of a chain of levels, on lanes.
 *
 * Basis. With z ~ N(0, I), r_k = y_k - X_k m, W = sum w, weighted means xbar_j, rbar, S_ij = sum w
 * (x_i - xbar_i)(x_j - xbar_j), kappa = W / (1 + s0^2 W):
 *   H = I + s_i s_j (S_ij + kappa xbar_i xbar_j),  h_i = s_i (S_ir + kappa xbar_i rbar),
 *   slopes zhat = H^-1 h, intercept given slopes N(s0 W (rbar - sum s_j z_j xbar_j) / (1 + s0^2 W),
 *   1 / (1 + s0^2 W)), ln det = ln(1 + s0^2 W) + ln det H.
 * Centring the columns keeps all digits where columns nearly coincide. Bayesian linear model:
 * Lindley & Smith 1972, JRSS B 34:1.
 *
 * Chain. Kalman filter in covariance form and backward sampling (West & Harrison 1997, Bayesian
 * Forecasting and Dynamic Models, ch. 4; Fruehwirth-Schnatter 1994, J. Time Series Analysis
 * 15:183); weights instead of observation variances, so that an empty level has weight 0.
 * Check value: one level, prior N(0, 1), y = 1, w = 1: mean 1/2, variance 1/2, log M = -1/2 ln 2 -
 * 1/4.
 */
#include "posterior/marginal.h"

#include "base/isa_name.h"
#include "base/vecmath_lanes.h"

enum { SLOPES_MAX = COLUMNS_MAX - 1, LOG_EVERY = 8 };

/* what a basis draw needs from a factor block, by row */
struct basis_rows {
    const double *W, *rbar, *xbar, *zhat, *chol;
};

static inline struct basis_rows basis_rows(const double *factor, size_t n, size_t q)
{
    return (struct basis_rows){factor, factor + n, factor + 2 * n, factor + (2 + q) * n,
                               factor + (2 + 2 * q) * n};
}

LANE_FN vd weight_at(const struct problem *p, const struct observations *o, size_t n, size_t k,
                     size_t i)
{
    return o->precision ? p->n[k] * v_load(o->precision + i) : v_load(o->w + k * n + i);
}

LANE_FN vd value_at(const struct problem *p, const struct observations *o, size_t n, size_t k,
                    size_t i)
{
    return o->precision ? v_set(p->y[k]) : v_load(o->y + k * n + i);
}

/* Of a basis the sums are taken with weights in units of the point's precision, which multiplies
 * the sums: n_k for a continuous endpoint, the pseudo-weights (and unit 1) for a binary one. */
LANE_FN vd unit_weight_at(const struct problem *p, const struct observations *o, size_t n, size_t k,
                          size_t i)
{
    return o->precision ? v_set(p->n[k]) : v_load(o->w + k * n + i);
}

LANE_FN vd unit_at(const struct observations *o, size_t i)
{
    return o->precision ? v_load(o->precision + i) : v_set(1);
}

/* W, weighted means of the columns and of y. A continuous endpoint's y are centred on their mean.
 */
LANE_FN void basis_means(const struct problem *p, const struct observations *o, size_t n, size_t i,
                         const double *x, size_t q, vd *W, vd *ybar, vd *xbar)
{
    vd w_sum = v_set(p->n_total), y_sum = v_set(0);
    for (size_t j = 0; j < q; j++)
        xbar[j] = v_set(0);
    if (!o->precision) {
        w_sum = v_set(0);
        for (size_t k = 0; k < p->levels; k++) {
            w_sum += v_load(o->w + k * n + i);
            y_sum += v_load(o->w + k * n + i) * v_load(o->y + k * n + i);
        }
    }
    for (size_t k = 0; k < p->levels; k++)
        for (size_t j = 0; j < q; j++)
            xbar[j] += unit_weight_at(p, o, n, k, i) * v_load(x + (j * p->levels + k) * n + i);
    const vd inverse = v_pick(w_sum > 0.0, 1.0 / v_pick(w_sum > 0.0, w_sum, v_set(1)), v_set(0));
    *W = w_sum * unit_at(o, i);
    *ybar = y_sum * inverse;
    for (size_t j = 0; j < q; j++)
        xbar[j] *= inverse;
}

/* H (lower triangle by rows) and h */
LANE_FN void basis_equations(const struct problem *p, const struct observations *o, size_t n,
                             size_t i, const double *x, size_t q, vd kappa, vd ybar, vd rbar,
                             const vd *xbar, vd *H, vd *h)
{
    for (size_t a = 0, c = 0; a < q; a++) {
        h[a] = v_set(0);
        for (size_t b = 0; b <= a; b++)
            H[c++] = v_set(0);
    }
    for (size_t k = 0; k < p->levels; k++) {
        const vd w = unit_weight_at(p, o, n, k, i);
        vd dx[SLOPES_MAX], r = value_at(p, o, n, k, i) - ybar;
        for (size_t a = 0; a < q; a++) {
            dx[a] = v_load(x + (a * p->levels + k) * n + i) - xbar[a];
            r -= p->mean[a + 1] * dx[a];
        }
        for (size_t a = 0, c = 0; a < q; a++) {
            const vd wx = w * dx[a];
            h[a] += wx * r;
            for (size_t b = 0; b <= a; b++)
                H[c++] += wx * dx[b];
        }
    }
    const vd unit = unit_at(o, i);
    for (size_t a = 0, c = 0; a < q; a++) {
        h[a] = p->scale[a + 1] * (unit * h[a] + kappa * xbar[a] * rbar);
        for (size_t b = 0; b <= a; b++, c++)
            H[c] = p->scale[a + 1] * p->scale[b + 1] * (unit * H[c] + kappa * xbar[a] * xbar[b]) +
                   (a == b ? 1.0 : 0.0);
    }
}

/* H -> its lower Cholesky factor in place; h -> H^-1 h; returns the product of the pivots */
LANE_FN vd solve(size_t q, vd *H, vd *h)
{
    vd determinant = v_set(1);
    for (size_t a = 0, row = 0; a < q; a++, row += a) {
        for (size_t b = 0, column = 0; b <= a; b++, column += b) {
            vd sum = H[row + b];
            for (size_t c = 0; c < b; c++)
                sum -= H[row + c] * H[column + c];
            H[row + b] = a == b ? v_sqrt(v_max(sum, v_set(1e-300))) : sum / H[column + b];
        }
        determinant *= H[row + a] * H[row + a];
    }
    for (size_t a = 0, row = 0; a < q; a++, row += a) {
        for (size_t c = 0; c < a; c++)
            h[a] -= H[row + c] * h[c];
        h[a] /= H[row + a];
    }
    for (size_t a = q; a-- > 0;) {
        for (size_t c = a + 1; c < q; c++)
            h[a] -= H[c * (c + 1) / 2 + a] * h[c];
        h[a] /= H[a * (a + 1) / 2 + a];
    }
    return determinant;
}

LANE_FN void basis_factor_at(const struct problem *p, size_t n, size_t i, const double *x,
                             const struct observations *o, size_t q, double *factor, double *log_m)
{
    vd W, ybar, xbar[SLOPES_MAX], H[SLOPES_MAX * (SLOPES_MAX + 1) / 2], h[SLOPES_MAX];
    basis_means(p, o, n, i, x, q, &W, &ybar, xbar);
    vd rbar = ybar - p->mean[0];
    for (size_t j = 0; j < q; j++)
        rbar -= p->mean[j + 1] * xbar[j];
    const vd spread0 = 1.0 + p->scale[0] * p->scale[0] * W;
    basis_equations(p, o, n, i, x, q, W / spread0, ybar, rbar, xbar, H, h);
    const vd determinant = solve(q, H, h) * spread0;
    vd centre = rbar, penalty = v_set(0);
    for (size_t j = 0; j < q; j++) {
        centre -= p->scale[j + 1] * h[j] * xbar[j];
        penalty += h[j] * h[j];
    }
    const vd z0 = p->scale[0] * W * centre / spread0;
    vd misfit = v_set(0), b[SLOPES_MAX];
    for (size_t j = 0; j < q; j++)
        b[j] = p->mean[j + 1] + p->scale[j + 1] * h[j];
    const vd b0 = p->mean[0] + p->scale[0] * z0;
    for (size_t k = 0; k < p->levels; k++) {
        vd e = value_at(p, o, n, k, i) - b0;
        for (size_t j = 0; j < q; j++)
            e -= b[j] * v_load(x + (j * p->levels + k) * n + i);
        misfit += unit_weight_at(p, o, n, k, i) * e * e;
    }
    penalty += z0 * z0 + unit_at(o, i) * misfit;
    v_store(log_m + i, -0.5 * (v_log_core(determinant) + penalty));
    v_store(factor + i, W);
    v_store(factor + n + i, rbar);
    for (size_t j = 0; j < q; j++) {
        v_store(factor + (2 + j) * n + i, xbar[j]);
        v_store(factor + (2 + q + j) * n + i, h[j]);
    }
    for (size_t c = 0; c < q * (q + 1) / 2; c++)
        v_store(factor + (2 + 2 * q + c) * n + i, H[c]);
}

#define EACH_POINT(n) for (size_t i = 0; i < (n); i += VL)

static void basis_factor(const struct problem *p, size_t n, const double *x,
                         const struct observations *o, double *factor, double *log_m)
{
    if (p->slopes == 1)
        EACH_POINT (n)
            basis_factor_at(p, n, i, x, o, 1, factor, log_m);
    else
        EACH_POINT (n)
            basis_factor_at(p, n, i, x, o, p->slopes, factor, log_m);
}

/* four vectors side by side hide the latency of the recursion over levels */
enum { ABREAST = 16 / VL };

static void chain_factor(const struct problem *p, size_t n, const double *shape0,
                         const struct observations *o, double *factor, double *log_m)
{
    const size_t K = p->levels;
    const double start_variance = p->scale[0] * p->scale[0];
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
        for (size_t k = 0; k < K; k++) {
            const double carry = p->carry[k], anew = 1.0 - carry;
            for (size_t v = 0; v < abreast; v++) {
                const size_t i = first + v * VL;
                const vd w = weight_at(p, o, n, k, i);
                const vd a = carry * m[v] + anew * p->mean[0];
                const vd R = carry * (C[v] + p->gap[k] * q[v]) + anew * start_variance;
                const vd e = value_at(p, o, n, k, i) - a;
                const vd F = 1.0 + R * w;
                const vd inverse = 1.0 / F;
                C[v] = R * inverse;
                m[v] = a + C[v] * w * e;
                quad[v] += w * e * e * inverse;
                product[v] *= F;
                v_store(factor + k * n + i, m[v]);
                v_store(factor + (K + k) * n + i, C[v]);
            }
            if (k % LOG_EVERY == LOG_EVERY - 1 || k == K - 1)
                for (size_t v = 0; v < abreast; v++) {
                    logs[v] += v_log_core(product[v]);
                    product[v] = v_set(1);
                }
        }
        for (size_t v = 0; v < abreast; v++)
            v_store(log_m + first + v * VL, -0.5 * (logs[v] + quad[v]));
    }
}

static void factor(const struct problem *p, size_t n, const double *x, const double *shape0,
                   const struct observations *o, double *out, double *log_m)
{
    if (p->chain)
        chain_factor(p, n, shape0, o, out, log_m);
    else
        basis_factor(p, n, x, o, out, log_m);
}

LANE_FN void basis_draw_at(const struct problem *p, size_t n, size_t i, const double *x,
                           const double *f, const double *normal, size_t q, double *theta,
                           double *beta)
{
    const struct basis_rows r = basis_rows(f, n, q);
    const vd W = v_load(r.W + i), spread0 = 1.0 + p->scale[0] * p->scale[0] * W;
    vd z[SLOPES_MAX], centre = v_load(r.rbar + i), b[SLOPES_MAX];
    for (size_t a = q; a-- > 0;) { /* L'^-1 of the normals */
        z[a] = v_load(normal + (a + 1) * n + i);
        for (size_t c = a + 1; c < q; c++)
            z[a] -= v_load(r.chol + (c * (c + 1) / 2 + a) * n + i) * z[c];
        z[a] /= v_load(r.chol + (a * (a + 1) / 2 + a) * n + i);
    }
    for (size_t j = 0; j < q; j++) {
        z[j] += v_load(r.zhat + j * n + i);
        b[j] = p->mean[j + 1] + p->scale[j + 1] * z[j];
        centre -= p->scale[j + 1] * z[j] * v_load(r.xbar + j * n + i);
        v_store(beta + (j + 1) * n + i, b[j]);
    }
    const vd z0 = p->scale[0] * W * centre / spread0 + v_load(normal + i) / v_sqrt(spread0);
    const vd b0 = p->mean[0] + p->scale[0] * z0 + p->centre;
    v_store(beta + i, b0);
    for (size_t k = 0; k < p->levels; k++) {
        vd t = b0;
        for (size_t j = 0; j < q; j++)
            t += b[j] * v_load(x + (j * p->levels + k) * n + i);
        v_store(theta + k * n + i, t);
    }
}

/* theta_K ~ N(m, C); theta_k | theta_k+1: gain B = C / (C + q) */
LANE_FN void chain_draw_at(const struct problem *p, size_t n, size_t i, const double *f,
                           const double *normal, double *theta)
{
    const size_t K = p->levels;
    const vd q = v_load(f + 2 * K * n + i);
    vd next = v_set(0);
    for (size_t k = K; k-- > 0;) {
        const vd m = v_load(f + k * n + i), C = v_load(f + (K + k) * n + i);
        const vd e = v_load(normal + k * n + i);
        const double carry = k + 1 < K ? p->carry[k + 1] : 0.0;
        const vd step = k + 1 < K ? p->gap[k + 1] * q : q;
        const vd B = carry * (C / v_max(C + step, v_set(1e-300)));
        next = (1.0 - B) * m + B * next + v_sqrt(C * (1.0 - B)) * e;
        v_store(theta + k * n + i, next + p->centre);
    }
}

static void draw(const struct problem *p, size_t n, const double *x, const double *f,
                 const double *normal, double *theta, double *beta)
{
    if (p->chain)
        EACH_POINT (n)
            chain_draw_at(p, n, i, f, normal, theta);
    else if (p->slopes == 1)
        EACH_POINT (n)
            basis_draw_at(p, n, i, x, f, normal, 1, theta, beta);
    else
        EACH_POINT (n)
            basis_draw_at(p, n, i, x, f, normal, p->slopes, theta, beta);
}

struct moment_rows {
    double *mean, *sd, *difference_mean, *difference_sd;
    size_t stride;
};

/* |L^-1 u|^2 = u' H^-1 u */
LANE_FN vd quadratic_form(const struct basis_rows *r, size_t n, size_t i, size_t q, vd *u)
{
    vd sum = v_set(0);
    for (size_t a = 0, row = 0; a < q; a++, row += a) {
        for (size_t c = 0; c < a; c++)
            u[a] -= v_load(r->chol + (row + c) * n + i) * u[c];
        u[a] /= v_load(r->chol + (row + a) * n + i);
        sum += u[a] * u[a];
    }
    return sum;
}

LANE_FN void basis_moments_at(const struct problem *p, size_t n, size_t i, const double *x,
                              const double *f, const struct moment_rows *out)
{
    const size_t q = p->slopes, K = p->levels;
    const struct basis_rows r = basis_rows(f, n, q);
    const vd W = v_load(r.W + i), s2W = p->scale[0] * p->scale[0] * W, spread0 = 1.0 + s2W;
    vd b[SLOPES_MAX], centre = v_load(r.rbar + i);
    for (size_t j = 0; j < q; j++) {
        const vd z = v_load(r.zhat + j * n + i);
        b[j] = p->mean[j + 1] + p->scale[j + 1] * z;
        centre -= p->scale[j + 1] * z * v_load(r.xbar + j * n + i);
    }
    const vd b0 = p->mean[0] + s2W * centre / spread0 + p->centre;
    const vd variance0 = p->scale[0] * p->scale[0] / spread0;
    for (size_t k = 0; k < K; k++) {
        vd mean = b0, u[SLOPES_MAX], d[SLOPES_MAX], difference = v_set(0);
        for (size_t j = 0; j < q; j++) {
            const vd xk = v_load(x + (j * K + k) * n + i);
            mean += b[j] * xk;
            u[j] = p->scale[j + 1] * (xk - s2W / spread0 * v_load(r.xbar + j * n + i));
            if (out->difference_mean) {
                const vd dx = xk - v_load(x + (j * K + (size_t)p->reference) * n + i);
                difference += b[j] * dx;
                d[j] = p->scale[j + 1] * dx;
            }
        }
        v_store(out->mean + k * out->stride + i, mean);
        v_store(out->sd + k * out->stride + i, v_sqrt(variance0 + quadratic_form(&r, n, i, q, u)));
        if (out->difference_mean) {
            v_store(out->difference_mean + k * out->stride + i, difference);
            v_store(out->difference_sd + k * out->stride + i,
                    v_sqrt(quadratic_form(&r, n, i, q, d)));
        }
    }
}

/* Smoothed moments backward (Rauch, Tung & Striebel 1965, AIAA Journal 3:1445). Covariance of two
 * levels c < k of the chain: product of the gains between them times the variance at k. */
LANE_FN void chain_smooth_at(const struct problem *p, size_t n, size_t i, const double *f,
                             const struct moment_rows *out, vd *gain)
{
    const size_t K = p->levels;
    const vd q = v_load(f + 2 * K * n + i);
    vd mean = v_set(0), variance = v_set(0);
    for (size_t k = K; k-- > 0;) {
        const vd m = v_load(f + k * n + i), C = v_load(f + (K + k) * n + i);
        const double carry = k + 1 < K ? p->carry[k + 1] : 0.0;
        const vd step = k + 1 < K ? p->gap[k + 1] * q : q;
        const vd B = carry * (C / v_max(C + step, v_set(1e-300)));
        mean = (1.0 - B) * m + B * mean;
        variance = C * (1.0 - B) + B * B * variance;
        gain[k] = B; /* between k and k + 1 */
        v_store(out->mean + k * out->stride + i, mean + p->centre);
        v_store(out->sd + k * out->stride + i, variance); /* square root below */
    }
}

LANE_FN void chain_difference(const struct problem *p, const struct moment_rows *out, size_t i,
                              size_t k, vd between, vd later_variance)
{
    const size_t c = (size_t)p->reference * out->stride + i, at = k * out->stride + i;
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
        const size_t c = (size_t)p->reference;
        vd between = v_set(1);
        v_store(out->difference_mean + c * out->stride + i, v_set(0));
        v_store(out->difference_sd + c * out->stride + i, v_set(0));
        for (size_t k = c + 1; k < K; k++) {
            between *= gain[k - 1];
            chain_difference(p, out, i, k, between, v_load(out->sd + k * out->stride + i));
        }
        between = v_set(1);
        for (size_t k = c; k-- > 0;) {
            between *= gain[k];
            chain_difference(p, out, i, k, between, v_load(out->sd + c * out->stride + i));
        }
    }
    for (size_t k = 0; k < K; k++)
        v_store(out->sd + k * out->stride + i, v_sqrt(v_load(out->sd + k * out->stride + i)));
}

static void moments(const struct problem *p, size_t n, const double *x, const double *f,
                    size_t stride, double *mean, double *sd, double *difference_mean,
                    double *difference_sd)
{
    const struct moment_rows out = {mean, sd, difference_mean, difference_sd, stride};
    if (p->chain)
        EACH_POINT (n)
            chain_moments_at(p, n, i, f, &out);
    else
        EACH_POINT (n)
            basis_moments_at(p, n, i, x, f, &out);
}

static void binomial(const struct problem *p, size_t n, const double *theta,
                     const struct observations *o, double *out, double *response)
{
    EACH_POINT (n) {
        vd sum = v_set(0);
        for (size_t k = 0; k < p->levels; k++) {
            const vd t = v_load(theta + k * n + i);
            const vd d = t - v_load(o->y + k * n + i);
            vd rate;
            const vd softplus = v_softplus(t, &rate);
            sum += p->events[k] * t - p->n[k] * softplus + 0.5 * v_load(o->w + k * n + i) * d * d;
            v_store(response + k * n + i, rate);
        }
        v_store(out + i, sum);
    }
}

/* y = theta + (events - n rate) / w, w = n rate (1 - rate): Fisher scoring as weighted least
 * squares (McCullagh & Nelder 1989, Generalized Linear Models, 2.5) */
static void pseudo(const struct problem *p, size_t n, const double *theta, double *y, double *w)
{
    EACH_POINT (n)
        for (size_t k = 0; k < p->levels; k++) {
            const vd t = v_load(theta + k * n + i);
            const vd rate = v_logistic(t);
            const vd weight = v_max(p->n[k] * (rate * (1.0 - rate)), v_set(1e-10 * p->n[k]));
            const vd safe = v_pick(weight > 0.0, weight, v_set(1));
            v_store(w + k * n + i, weight);
            v_store(y + k * n + i, t + (p->events[k] - p->n[k] * rate) / safe);
        }
}

const struct marginal ISA_NAME(marginal) = {factor, draw, moments, binomial, pseudo};
