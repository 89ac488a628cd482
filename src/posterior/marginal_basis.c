/* SPDX-License-Identifier: GPL-3.0-or-later */
/* marginal_basis.c: the collapsed Gaussian likelihood of a basis, and of a control off the curve.
 *
 * With z ~ N(0, I), r_k = y_k - X_k m, W = sum w, weighted means xbar_j, rbar, S_ij = sum w
 * (x_i - xbar_i)(x_j - xbar_j), kappa = W / (1 + s0^2 W):
 *   H = I + s_i s_j (S_ij + kappa xbar_i xbar_j),  h_i = s_i (S_ir + kappa xbar_i rbar),
 *   slopes zhat = H^-1 h, intercept given slopes N(s0 W (rbar - sum s_j z_j xbar_j) / (1 + s0^2 W),
 *   1 / (1 + s0^2 W)), ln det = ln(1 + s0^2 W) + ln det H.
 * Centring the columns keeps all digits where columns nearly coincide. Bayesian linear model:
 * Lindley & Smith 1972, JRSS B 34:1.
 */
#include "posterior/marginal_lanes.h"

enum { SLOPES_MAX = COLUMNS_MAX - 1 };

/* what a basis draw needs from a factor block, by row */
struct basis_rows {
    const double *W, *rbar, *xbar, *zhat, *chol;
};

static inline struct basis_rows basis_rows(const double *factor, size_t n, size_t q)
{
    return (struct basis_rows){factor, factor + n, factor + 2 * n, factor + (2 + q) * n,
                               factor + (2 + 2 * q) * n};
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
    const size_t m = p->at.count;
    vd w_sum = v_set(p->n_curve), y_sum = v_set(0);
    for (size_t j = 0; j < q; j++)
        xbar[j] = v_set(0);
    if (!o->precision) {
        w_sum = v_set(0);
        for (size_t at = 0; at < m; at++) {
            const size_t k = p->order[at];
            w_sum += v_load(o->w + k * n + i);
            y_sum += v_load(o->w + k * n + i) * v_load(o->y + k * n + i);
        }
    }
    for (size_t at = 0; at < m; at++)
        for (size_t j = 0; j < q; j++)
            xbar[j] += unit_weight_at(p, o, n, p->order[at], i) * v_load(x + (j * m + at) * n + i);
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
    const size_t m = p->at.count;
    for (size_t at = 0; at < m; at++) {
        const size_t k = p->order[at];
        const vd w = unit_weight_at(p, o, n, k, i);
        vd dx[SLOPES_MAX], r = value_at(p, o, n, k, i) - ybar;
        for (size_t a = 0; a < q; a++) {
            dx[a] = v_load(x + (a * m + at) * n + i) - xbar[a];
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

/* A level of its own: mean and variance into two rows; adds its part to log M. */
LANE_FN void control_factor_at(const struct problem *p, size_t n, size_t i,
                               const struct observations *o, double *rows, double *log_m)
{
    const size_t k = (size_t)p->control;
    const double variance = p->control_scale * p->control_scale;
    const vd w = weight_at(p, o, n, k, i), F = 1.0 + variance * w;
    const vd e = value_at(p, o, n, k, i) - p->control_mean, C = variance / F;
    v_store(rows + i, p->control_mean + C * w * e);
    v_store(rows + n + i, C);
    v_store(log_m + i, v_load(log_m + i) - 0.5 * (v_log_core(F) + w * e * e / F));
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
    for (size_t at = 0; at < p->at.count; at++) {
        const size_t k = p->order[at];
        vd e = value_at(p, o, n, k, i) - b0;
        for (size_t j = 0; j < q; j++)
            e -= b[j] * v_load(x + (j * p->at.count + at) * n + i);
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
    if (p->control >= 0)
        control_factor_at(p, n, i, o, factor + (2 + 2 * q + q * (q + 1) / 2) * n, log_m);
}

static void factor(const struct problem *p, size_t n, const double *x, const double *shape0,
                   const struct observations *o, double *factor, double *log_m)
{
    (void)shape0;
    if (p->slopes == 1)
        EACH_POINT (n)
            basis_factor_at(p, n, i, x, o, 1, factor, log_m);
    else
        EACH_POINT (n)
            basis_factor_at(p, n, i, x, o, p->slopes, factor, log_m);
}

LANE_FN void control_draw_at(const struct problem *p, size_t n, size_t i, const double *rows,
                             vd normal, double *theta)
{
    v_store(theta + (size_t)p->control * n + i,
            v_load(rows + i) + v_sqrt(v_load(rows + n + i)) * normal + p->centre);
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
    for (size_t at = 0; at < p->at.count; at++) {
        vd t = b0;
        for (size_t j = 0; j < q; j++)
            t += b[j] * v_load(x + (j * p->at.count + at) * n + i);
        v_store(theta + p->order[at] * n + i, t);
    }
    if (p->control >= 0)
        control_draw_at(p, n, i, r.chol + q * (q + 1) / 2 * n, v_load(normal + (q + 1) * n + i),
                        theta);
}

static void draw(const struct problem *p, size_t n, const double *x, const double *f,
                 const double *normal, double *theta, double *beta)
{
    if (p->slopes == 1)
        EACH_POINT (n)
            basis_draw_at(p, n, i, x, f, normal, 1, theta, beta);
    else
        EACH_POINT (n)
            basis_draw_at(p, n, i, x, f, normal, p->slopes, theta, beta);
}

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

/* centre of a basis: intercept, slopes and the variance of the intercept given the slopes */
struct basis_centre {
    vd b0, variance0, shrink; /* shrink: s0^2 W / (1 + s0^2 W) */
    vd b[SLOPES_MAX];
};

LANE_FN struct basis_centre basis_centre(const struct problem *p, size_t n, size_t i,
                                         const struct basis_rows *r)
{
    const vd W = v_load(r->W + i), s2W = p->scale[0] * p->scale[0] * W, spread0 = 1.0 + s2W;
    struct basis_centre c = {.variance0 = p->scale[0] * p->scale[0] / spread0,
                             .shrink = s2W / spread0};
    vd centre = v_load(r->rbar + i);
    for (size_t j = 0; j < p->slopes; j++) {
        const vd z = v_load(r->zhat + j * n + i);
        c.b[j] = p->mean[j + 1] + p->scale[j + 1] * z;
        centre -= p->scale[j + 1] * z * v_load(r->xbar + j * n + i);
    }
    c.b0 = p->mean[0] + s2W * centre / spread0 + p->centre;
    return c;
}

/* moments of a level on the curve, and of its difference from another one */
LANE_FN void basis_level(const struct problem *p, size_t n, size_t i, const double *x,
                         const struct basis_rows *r, const struct basis_centre *c, size_t at,
                         const struct moment_rows *out)
{
    const size_t q = p->slopes, m = p->at.count, to = p->order[at] * out->stride + i;
    vd mean = c->b0, u[SLOPES_MAX];
    for (size_t j = 0; j < q; j++) {
        const vd xk = v_load(x + (j * m + at) * n + i);
        mean += c->b[j] * xk;
        u[j] = p->scale[j + 1] * (xk - c->shrink * v_load(r->xbar + j * n + i));
    }
    v_store(out->mean + to, mean);
    v_store(out->sd + to, v_sqrt(c->variance0 + quadratic_form(r, n, i, q, u)));
}

LANE_FN void basis_difference(const struct problem *p, size_t n, size_t i, const double *x,
                              const struct basis_rows *r, const struct basis_centre *c, size_t at,
                              size_t reference, const struct moment_rows *out)
{
    const size_t q = p->slopes, m = p->at.count, to = p->order[at] * out->stride + i;
    vd difference = v_set(0), d[SLOPES_MAX];
    for (size_t j = 0; j < q; j++) {
        const vd dx = v_load(x + (j * m + at) * n + i) - v_load(x + (j * m + reference) * n + i);
        difference += c->b[j] * dx;
        d[j] = p->scale[j + 1] * dx;
    }
    v_store(out->difference_mean + to, difference);
    v_store(out->difference_sd + to, v_sqrt(quadratic_form(r, n, i, q, d)));
}

/* two levels that share no coefficient */
LANE_FN void apart(const struct moment_rows *out, size_t i, size_t level, size_t reference)
{
    const size_t to = level * out->stride + i, from = reference * out->stride + i;
    const vd a = v_load(out->sd + to), b = v_load(out->sd + from);
    const vd same = v_set(level == reference ? 0.0 : 1.0);
    v_store(out->difference_mean + to, v_load(out->mean + to) - v_load(out->mean + from));
    v_store(out->difference_sd + to, same * v_sqrt(a * a + b * b));
}

LANE_FN void basis_moments_at(const struct problem *p, size_t n, size_t i, const double *x,
                              const double *f, const struct moment_rows *out)
{
    const size_t q = p->slopes, m = p->at.count, control = (size_t)p->control;
    const struct basis_rows r = basis_rows(f, n, q);
    const struct basis_centre c = basis_centre(p, n, i, &r);
    for (size_t at = 0; at < m; at++)
        basis_level(p, n, i, x, &r, &c, at, out);
    if (p->control >= 0) {
        const double *rows = r.chol + q * (q + 1) / 2 * n;
        v_store(out->mean + control * out->stride + i, v_load(rows + i) + p->centre);
        v_store(out->sd + control * out->stride + i, v_sqrt(v_load(rows + n + i)));
    }
    if (!out->difference_mean)
        return;
    const size_t reference = position_of(p, p->reference);
    for (size_t at = 0; at < p->levels; at++)
        if (at < m && reference < m)
            basis_difference(p, n, i, x, &r, &c, at, reference, out);
        else
            apart(out, i, p->order[at], p->order[reference]);
}

static void moments(const struct problem *p, size_t n, const double *x, const double *f,
                    const struct moment_rows *out)
{
    EACH_POINT (n)
        basis_moments_at(p, n, i, x, f, out);
}

const struct linear_part ISA_NAME(linear_basis) = {factor, draw, moments};
