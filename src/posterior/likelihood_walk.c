/* SPDX-License-Identifier: GPL-3.0-or-later */
/* likelihood_walk.c: maximum likelihood of a random walk over the levels, continuous endpoint.
 *
 * Level means = X b + walk: b (the first level, for order 2 also the first step, and a control off
 * the curve) flat, the walk's covariance q M, means observed with variance s2 / n_k. The marginal
 * likelihood integrates b out (Harville 1974, Biometrika 61:383):
 *   -1/2 [ (m - r) ln 2 pi + ln|V| + ln|X'V^-1 X| + e'V^-1 e ],  V = q M + s2 diag(1 / n),
 * plus the density of the responses about their level means. With a flat first level it is the
 * likelihood of the later levels given the first (Durbin & Koopman 2012, Time Series Analysis by
 * State Space Methods, ch. 7). The ratio q / s2 is searched by NLopt, s2 given it is exact.
 */
#include <gsl/gsl_blas.h>
#include <gsl/gsl_linalg.h>
#include <math.h>

#include "base/base.h"
#include "posterior/climber.h"
#include "posterior/likelihood_parts.h"

#define LN_2_PI 1.83787706640934548356
#define RATIO_LOW (-20.0) /* ln of the ratio, scaled by the mean sample size */
#define RATIO_HIGH 20.0
#define FLAT 1e-7 /* a likelihood that varies less over the whole range tells nothing */

enum { FLAT_MAX = 3, SCAN = 60, NEWTON = 8 };

struct walk {
    struct likelihood_model *q;
    size_t m, r; /* levels with data; flat coefficients that are estimated */
    size_t flat[FLAT_MAX];
    gsl_matrix *M, *X;         /* walk's covariance; columns of flat coefficients, all of them */
    double offset[LEVELS_MAX]; /* of fixed ones */
    double drift_fixed;        /* sd of a step, NaN: free */
    /* at the last evaluation */
    gsl_matrix *L, *W, *XtWX; /* Cholesky factor of V0; V0^-1 X; X'V0^-1 X inverted */
    double b[FLAT_MAX], rss, log_det;
};

static double step_factor(const struct likelihood_model *q, size_t j)
{
    const double *x = q->x.at.value;
    const size_t K = q->x.at.count;
    const double mean = (x[K - 1] - x[0]) / (double)(K - 1);
    return q->m->spacing_actual ? (x[j] - x[j - 1]) / mean : 1;
}

/* Covariance of two places on the walk per unit of drift variance; the first place is 0. */
static double walk_covariance(const struct likelihood_model *q, int a, int b)
{
    const int least = a < b ? a : b;
    double sum = 0;
    if (a < 0 || b < 0)
        return 0; /* a control off the curve */
    if (q->m->order == 2)
        for (int j = 2; j <= least; j++)
            sum += (double)(a - j + 1) * (double)(b - j + 1);
    else
        for (int j = 1; j <= least; j++)
            sum += step_factor(q, (size_t)j);
    return sum;
}

/* Coefficient of flat number c (first level, first step, control) at a place. */
static double flat_column(const struct likelihood_model *q, size_t c, int place)
{
    const bool control = q->has_control && c == q->linear - 1;
    if (control || place < 0)
        return control && place < 0 ? 1 : 0;
    return c == 0 ? 1 : (double)place;
}

static void walk_init(struct walk *w, struct likelihood_model *q)
{
    *w = (struct walk){.q = q, .m = q->x.levels, .drift_fixed = NAN};
    if (prior_is_fixed(q->shape_prior[0]))
        w->drift_fixed = prior_quantile(q->shape_prior[0], 0.5);
    for (size_t c = 0; c < q->linear; c++)
        if (!prior_is_fixed(q->linear_prior[c]))
            w->flat[w->r++] = c;
    const size_t r = w->r > 0 ? w->r : 1;
    w->M = gsl_matrix_alloc(w->m, w->m);
    w->L = gsl_matrix_alloc(w->m, w->m);
    w->X = gsl_matrix_calloc(w->m, r);
    w->W = gsl_matrix_calloc(w->m, r);
    w->XtWX = gsl_matrix_calloc(r, r);
    for (size_t i = 0; i < w->m; i++) {
        for (size_t j = 0; j < w->m; j++)
            gsl_matrix_set(w->M, i, j, walk_covariance(q, q->x.place[i], q->x.place[j]));
        for (size_t f = 0; f < w->r; f++)
            gsl_matrix_set(w->X, i, f, flat_column(q, w->flat[f], q->x.place[i]));
        for (size_t c = 0; c < q->linear; c++)
            if (prior_is_fixed(q->linear_prior[c]))
                w->offset[i] += likelihood_known(q, c) * flat_column(q, c, q->x.place[i]);
    }
}

static void walk_release(struct walk *w)
{
    gsl_matrix *const all[] = {w->M, w->X, w->L, w->W, w->XtWX};
    for (size_t i = 0; i < sizeof all / sizeof *all; i++)
        gsl_matrix_free(all[i]);
}

static void solve_with(const gsl_matrix *L, const gsl_vector *y, gsl_vector *out)
{
    gsl_linalg_cholesky_solve(L, y, out);
}

/* Generalised least squares with covariance V0 = walk_part M + noise_part diag(1 / n). */
static bool evaluate(struct walk *w, double walk_part, double noise_part)
{
    const struct likelihood_data *x = &w->q->x;
    gsl_vector *y = gsl_vector_alloc(w->m), *Vy = gsl_vector_alloc(w->m);
    gsl_matrix_memcpy(w->L, w->M);
    gsl_matrix_scale(w->L, walk_part);
    for (size_t i = 0; i < w->m; i++) {
        gsl_matrix_set(w->L, i, i, gsl_matrix_get(w->L, i, i) + noise_part / x->n[i]);
        gsl_vector_set(y, i, x->y[i] - w->offset[i]);
    }
    bool fine = gsl_linalg_cholesky_decomp1(w->L) == GSL_SUCCESS;
    w->log_det = 0;
    for (size_t i = 0; fine && i < w->m; i++)
        w->log_det += 2 * log(gsl_matrix_get(w->L, i, i));
    for (size_t f = 0; fine && f < w->r; f++) {
        gsl_vector_view column = gsl_matrix_column(w->X, f), to = gsl_matrix_column(w->W, f);
        gsl_vector *solved = gsl_vector_alloc(w->m);
        solve_with(w->L, &column.vector, solved);
        gsl_vector_memcpy(&to.vector, solved);
        gsl_vector_free(solved);
    }
    if (fine && w->r > 0) {
        gsl_blas_dgemm(CblasTrans, CblasNoTrans, 1, w->X, w->W, 0, w->XtWX);
        gsl_matrix *copy = gsl_matrix_alloc(w->r, w->r);
        gsl_matrix_memcpy(copy, w->XtWX);
        fine = gsl_linalg_cholesky_decomp1(copy) == GSL_SUCCESS;
        for (size_t f = 0; fine && f < w->r; f++)
            w->log_det += 2 * log(gsl_matrix_get(copy, f, f));
        gsl_matrix_free(copy);
        fine = fine && likelihood_invert(w->XtWX);
    }
    for (size_t f = 0; fine && f < w->r; f++) {
        w->b[f] = 0;
        for (size_t g = 0; g < w->r; g++) {
            double dot;
            gsl_vector_view column = gsl_matrix_column(w->W, g);
            gsl_blas_ddot(&column.vector, y, &dot);
            w->b[f] += gsl_matrix_get(w->XtWX, f, g) * dot;
        }
    }
    for (size_t i = 0; fine && i < w->m; i++)
        for (size_t f = 0; f < w->r; f++)
            gsl_vector_set(y, i, gsl_vector_get(y, i) - gsl_matrix_get(w->X, i, f) * w->b[f]);
    if (fine) {
        solve_with(w->L, y, Vy);
        gsl_blas_ddot(y, Vy, &w->rss);
    }
    gsl_vector_free(y);
    gsl_vector_free(Vy);
    return fine && isfinite(w->rss) && isfinite(w->log_det);
}

/* degrees of freedom: responses about their levels, and levels beyond the flat coefficients */
static double within_df(const struct walk *w)
{
    return w->q->x.total - (double)w->m;
}

static double all_df(const struct walk *w)
{
    return within_df(w) + (double)w->m - (double)w->r;
}

/* log likelihood after evaluate() with V = scale V0 */
static double log_likelihood(const struct walk *w, double scale, double noise)
{
    const double between = (double)w->m - (double)w->r;
    double sum = between * (LN_2_PI + log(scale)) + w->log_det + w->rss / scale;
    sum += within_df(w) * (LN_2_PI + log(noise)) + w->q->x.ss / noise;
    for (size_t i = 0; i < w->m; i++)
        sum += log(w->q->x.n[i]);
    return -0.5 * sum;
}

/* the two variances at a ratio (q / s2 = e^c), or with one of them known */
struct variances {
    double drift, noise, value;
};

static struct variances at_coordinate(struct walk *w, double c)
{
    const bool drift_known = isfinite(w->drift_fixed), sd_known = !w->q->sd_free;
    const double s2 = w->q->sd_fixed * w->q->sd_fixed, q = w->drift_fixed * w->drift_fixed;
    struct variances v = {NAN, NAN, -INFINITY};
    if (drift_known || sd_known) {
        v.noise = sd_known ? s2 : exp(c);
        v.drift = drift_known ? q : exp(c);
        if (evaluate(w, v.drift, v.noise))
            v.value = log_likelihood(w, 1, v.noise);
        return v;
    }
    if (!evaluate(w, exp(c), 1))
        return v;
    v.noise = (w->rss + w->q->x.ss) / all_df(w);
    v.drift = exp(c) * v.noise;
    if (v.noise > 0)
        v.value = log_likelihood(w, v.noise, v.noise);
    return v;
}

static double objective(unsigned n, const double *c, double *gradient, void *walk)
{
    (void)n, (void)gradient;
    const double value = at_coordinate(walk, c[0]).value;
    return value > -INFINITY ? value : -1e300;
}

/* Newton steps with derivatives by differences, to all digits */
static double polish(struct walk *w, double c)
{
    const double h = 1e-3;
    for (int k = 0; k < NEWTON; k++) {
        const double a = at_coordinate(w, c - 2 * h).value, b = at_coordinate(w, c - h).value;
        const double d = at_coordinate(w, c + h).value, e = at_coordinate(w, c + 2 * h).value;
        const double middle = at_coordinate(w, c).value;
        const double slope = (a - 8 * b + 8 * d - e) / (12 * h);
        const double bend = (-a + 16 * b - 30 * middle + 16 * d - e) / (12 * h * h);
        if (!(bend < 0) || fabs(slope / bend) > 0.5)
            break;
        c -= slope / bend;
    }
    return c;
}

/* Where the coordinate is scanned: around the data's scale. */
static double centre_of(const struct walk *w)
{
    const struct likelihood_data *x = &w->q->x;
    double mean = 0, spread = 0;
    for (size_t i = 0; i < x->levels; i++)
        mean += x->y[i] / (double)x->levels;
    for (size_t i = 0; i < x->levels; i++)
        spread += pow(x->y[i] - mean, 2) / (double)x->levels;
    if (isfinite(w->drift_fixed) || !w->q->sd_free)
        return log(fmax(spread + x->ss / fmax(1, within_df(w)), 1e-300));
    return log((double)x->levels / x->total);
}

/* The best coordinate; *at_low: the likelihood is as high without any walk; *flat: wherever. */
static double maximise(struct walk *w, bool *at_low, bool *at_high, bool *flat)
{
    const double centre = centre_of(w), low = centre + RATIO_LOW, high = centre + RATIO_HIGH;
    double best = low, top = -INFINITY, bottom = INFINITY;
    for (int k = 0; k <= SCAN; k++) {
        const double c = low + (high - low) * k / SCAN, value = at_coordinate(w, c).value;
        bottom = fmin(bottom, value);
        if (value > top) {
            top = value;
            best = c;
        }
    }
    *flat = top - bottom < FLAT;
    const double step = (high - low) / SCAN;
    const struct climber climber = {.algorithm = NLOPT_LN_SBPLX,
                                    .dims = 1,
                                    .function = objective,
                                    .data = w,
                                    .low = &low,
                                    .high = &high,
                                    .step = &step,
                                    .place_tolerance = 1e-9,
                                    .most = 400};
    climber_run(&climber, &best);
    *at_low = best < low + 5;
    *at_high = best > high - 5;
    return *at_low || *at_high ? best : polish(w, best);
}

/* ---- results ---- */

/* Expected information of the two variances (Harville 1977, JASA 72:320), inverted. */
static void variance_errors(struct walk *w, const struct variances *v, double *drift_se,
                            double *noise_se)
{
    const bool drift_free = !isfinite(w->drift_fixed) && v->drift > 0, sd_free = w->q->sd_free;
    const size_t m = w->m;
    *drift_se = *noise_se = NAN;
    if (!evaluate(w, v->drift, v->noise))
        return;
    /* P = V^-1 - V^-1 X (X'V^-1 X)^-1 X'V^-1 */
    gsl_matrix *P = gsl_matrix_alloc(m, m), *A = gsl_matrix_alloc(m, m),
               *B = gsl_matrix_alloc(m, m);
    gsl_matrix_memcpy(P, w->L);
    gsl_linalg_cholesky_invert(P);
    for (size_t f = 0; f < w->r; f++)
        for (size_t g = 0; g < w->r; g++)
            for (size_t i = 0; i < m; i++)
                for (size_t j = 0; j < m; j++)
                    gsl_matrix_set(P, i, j,
                                   gsl_matrix_get(P, i, j) - gsl_matrix_get(w->W, i, f) *
                                                                 gsl_matrix_get(w->XtWX, f, g) *
                                                                 gsl_matrix_get(w->W, j, g));
    gsl_blas_dgemm(CblasNoTrans, CblasNoTrans, 1, P, w->M, 0, A);
    gsl_matrix_memcpy(B, P);
    for (size_t i = 0; i < m; i++)
        for (size_t j = 0; j < m; j++)
            gsl_matrix_set(B, i, j, gsl_matrix_get(B, i, j) / w->q->x.n[j]);
    double aa = 0, ab = 0, bb = within_df(w) / (v->noise * v->noise);
    for (size_t i = 0; i < m; i++)
        for (size_t j = 0; j < m; j++) {
            aa += gsl_matrix_get(A, i, j) * gsl_matrix_get(A, j, i);
            ab += gsl_matrix_get(A, i, j) * gsl_matrix_get(B, j, i);
            bb += gsl_matrix_get(B, i, j) * gsl_matrix_get(B, j, i);
        }
    const double det = 0.25 * (aa * bb - ab * ab);
    if (drift_free && sd_free && det > 0) {
        *drift_se = sqrt(0.5 * bb / det);
        *noise_se = sqrt(0.5 * aa / det);
    } else if (drift_free && aa > 0) {
        *drift_se = sqrt(2 / aa);
    } else if (sd_free && bb > 0) {
        *noise_se = sqrt(2 / bb);
    }
    gsl_matrix_free(P);
    gsl_matrix_free(A);
    gsl_matrix_free(B);
}

/* Smoothed mean of a place: X b + q M V^-1 e, after evaluate(). */
static double smoothed(struct walk *w, double drift, int place)
{
    const struct likelihood_data *x = &w->q->x;
    gsl_vector *e = gsl_vector_alloc(w->m), *Ve = gsl_vector_alloc(w->m);
    double value = 0;
    for (size_t i = 0; i < w->m; i++) {
        double fit = w->offset[i];
        for (size_t f = 0; f < w->r; f++)
            fit += gsl_matrix_get(w->X, i, f) * w->b[f];
        gsl_vector_set(e, i, x->y[i] - fit);
    }
    solve_with(w->L, e, Ve);
    for (size_t i = 0; i < w->m; i++)
        value += drift * walk_covariance(w->q, place, x->place[i]) * gsl_vector_get(Ve, i);
    for (size_t c = 0, f = 0; c < w->q->linear; c++) {
        const bool is_free = f < w->r && w->flat[f] == c;
        value += flat_column(w->q, c, place) * (is_free ? w->b[f] : likelihood_known(w->q, c));
        f += is_free ? 1 : 0;
    }
    gsl_vector_free(e);
    gsl_vector_free(Ve);
    return value + x->base;
}

static void put_flat(struct likelihood_fit *f, struct walk *w)
{
    const struct likelihood_model *q = w->q;
    size_t linear = 0, free = 0;
    for (size_t i = 0; i < q->m->parameters; i++) {
        const enum parameter_role role = q->m->parameter[i]->role;
        struct likelihood_row *row = likelihood_row(f, q->m->parameter[i]->name);
        if (role != ROLE_LINEAR && role != ROLE_CONTROL)
            continue;
        if (free < w->r && w->flat[free] == linear) {
            row->estimate = w->b[free] + likelihood_shift(q, linear);
            row->se = sqrt(gsl_matrix_get(w->XtWX, free, free));
            free++;
        } else {
            row->estimate = likelihood_known(q, linear) + likelihood_shift(q, linear);
        }
        linear++;
    }
}

static void put_variance(struct likelihood_fit *f, const char *root, const char *name,
                         double variance, double se)
{
    struct likelihood_row *row = likelihood_row(f, root);
    row->estimate = sqrt(variance);
    row->se = variance > 0 ? se / (2 * sqrt(variance)) : NAN;
    row = likelihood_row(f, name);
    row->estimate = variance;
    row->se = variance > 0 ? se : NAN;
}

static void put_results(struct likelihood_fit *f, struct walk *w, const struct variances *v)
{
    const struct likelihood_model *q = w->q;
    double drift_se, noise_se;
    int place = 0;
    variance_errors(w, v, &drift_se, &noise_se);
    (void)evaluate(w, v->drift, v->noise);
    put_flat(f, w);
    put_variance(f, "drift_sd", "drift_variance", v->drift, drift_se);
    put_variance(f, "sd", "variance", v->noise, noise_se);
    for (size_t k = 0; k < q->d->levels; k++) {
        const bool on = q->d->control_on_curve || (int)k != q->d->control;
        f->response[k] = smoothed(w, v->drift, on ? place++ : -1);
    }
    const double estimated =
        (double)w->r + (isfinite(w->drift_fixed) ? 0 : 1) + (q->sd_free ? 1 : 0);
    f->log_likelihood = v->value;
    f->aic = 2 * estimated - 2 * v->value;
    f->converged = true;
}

static const char too_few[] =
    "Too few levels have data to estimate the walk: the likelihood has no single maximum.";
static const char no_noise[] =
    "The likelihood rises without end as the residual sd falls to 0 (one response a level, or none "
    "that differ): the walk alone follows the data.";
static const char endless[] =
    "drift_sd runs off: the likelihood keeps rising as it goes to infinity.";

void likelihood_walk_run(struct likelihood_fit *f, struct likelihood_model *q)
{
    struct walk w;
    bool at_low = false, at_high = false, flat = false;
    walk_init(&w, q);
    const double unknown = (isfinite(w.drift_fixed) ? 0 : 1) + (q->sd_free ? 1 : 0);
    struct variances v = {NAN, NAN, -INFINITY};
    if (w.m < w.r || all_df(&w) < unknown || q->x.on_curve == 0) {
        likelihood_fails(f, too_few);
    } else {
        if (unknown > 0)
            v = at_coordinate(&w, maximise(&w, &at_low, &at_high, &flat));
        else
            v = at_coordinate(&w, 0);
        if (flat) {
            likelihood_fails(f, too_few);
        } else if (at_low && q->sd_free && isfinite(w.drift_fixed)) {
            likelihood_fails(f, no_noise);
        } else if (at_low) { /* no walk at all: the estimate is 0 */
            const struct variances none = at_coordinate(&w, -INFINITY);
            v = none.value > -INFINITY ? none : v;
            put_results(f, &w, &v);
        } else if (at_high) {
            likelihood_fails(f, q->sd_free && !isfinite(w.drift_fixed) ? no_noise : endless);
        } else if (!(v.value > -INFINITY)) {
            likelihood_fails(f, too_few);
        } else {
            put_results(f, &w, &v);
        }
    }
    walk_release(&w);
}
