/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_exact.c: posteriors against brute-force integration written here from the model alone, with
 * dense matrices (GSL) and libm, nothing of the engine: probabilities within 0.002.
 *
 * Continuous, emax: grid over (ln ED50, ln sd), two coefficients exact (Lindley & Smith 1972, JRSS
 * B 34:1). ndlm: grid over (drift sd, ln sd), level means by the dense multivariate normal. Binary
 * emax: grid over all three unknowns.
 */
#include <gsl/gsl_cdf.h>
#include <gsl/gsl_linalg.h>
#include <gsl/gsl_randist.h>
#include <math.h>

#include "posterior/posterior.h"
#include "small_design.h"
#include "unit.h"

enum { K = 5, DRAWS = 256000 };

static const double dose[K] = {0, 10, 20, 30, 50};

struct exact {
    double mean[K], sd[K], positive[K]; /* theta; Pr(theta_k > theta_0) */
    double top_is[K]; /* Pr(level k is the lowest with >= 90% of the largest gain) */
};

struct observed {
    double n[K], mean[K], ss[K], events[K];
};

static const struct observed informative = {
    {12, 12, 12, 12, 12}, {0.1, 1.4, 2.2, 2.3, 2.6}, {30, 41, 38, 29, 35}, {2, 5, 6, 7, 8}};
static const struct observed flat = {
    {9, 9, 0, 9, 9}, {0.2, -0.1, 0, 0.1, 0.0}, {20, 25, 0, 22, 18}, {3, 3, 0, 4, 3}};

static struct level_data as_level_data(const struct observed *o, struct observed *copy)
{
    *copy = *o;
    return (struct level_data){K, copy->n, copy->n, copy->mean, copy->ss, copy->events};
}

/* normal posterior of K means: prior N(m, V), data mean_k ~ N(theta_k, sd^2 / n_k); returns the log
 * marginal likelihood */
static double dense_normal(const struct observed *o, double sd, const gsl_vector *m,
                           const gsl_matrix *V, gsl_vector *mean, gsl_matrix *covariance)
{
    size_t with[K], rows = 0;
    for (size_t k = 0; k < K; k++)
        if (o->n[k] > 0)
            with[rows++] = k;
    gsl_matrix *S = gsl_matrix_alloc(rows, rows), *G = gsl_matrix_alloc(rows, K);
    gsl_vector *r = gsl_vector_alloc(rows), *solved = gsl_vector_alloc(rows);
    double log_marginal = 0.0;
    for (size_t a = 0; a < rows; a++) {
        for (size_t b = 0; b < rows; b++)
            gsl_matrix_set(S, a, b,
                           gsl_matrix_get(V, with[a], with[b]) +
                               (a == b ? sd * sd / o->n[with[a]] : 0.0));
        for (size_t k = 0; k < K; k++)
            gsl_matrix_set(G, a, k, gsl_matrix_get(V, with[a], k));
        gsl_vector_set(r, a, o->mean[with[a]] - gsl_vector_get(m, with[a]));
        log_marginal -= (o->n[with[a]] - 1.0) * log(sd) + o->ss[with[a]] / (2.0 * sd * sd);
    }
    gsl_linalg_cholesky_decomp1(S);
    gsl_linalg_cholesky_solve(S, r, solved);
    for (size_t a = 0; a < rows; a++)
        log_marginal -=
            log(gsl_matrix_get(S, a, a)) + 0.5 * gsl_vector_get(r, a) * gsl_vector_get(solved, a);
    for (size_t k = 0; k < K; k++) {
        double value = gsl_vector_get(m, k);
        for (size_t a = 0; a < rows; a++)
            value += gsl_matrix_get(G, a, k) * gsl_vector_get(solved, a);
        gsl_vector_set(mean, k, value);
    }
    for (size_t j = 0; j < K; j++) {
        gsl_vector_view column = gsl_matrix_column(G, j);
        gsl_linalg_cholesky_solve(S, &column.vector, solved);
        for (size_t k = 0; k < K; k++) {
            double value = gsl_matrix_get(V, k, j);
            for (size_t a = 0; a < rows; a++)
                value -= gsl_matrix_get(G, a, k) * gsl_vector_get(solved, a);
            gsl_matrix_set(covariance, k, j, value);
        }
    }
    gsl_matrix_free(S);
    gsl_matrix_free(G);
    gsl_vector_free(r);
    gsl_vector_free(solved);
    /* the scale of sums over n observations: n sd^-n in all, n - 1 of it above */
    for (size_t k = 0; k < K; k++)
        log_marginal += o->n[k] > 0 ? 0.5 * log(1.0 / o->n[k]) : 0.0;
    return log_marginal;
}

/* Prior covariance of the level means given the shape number; defaults for range [-8, 8]: A = 4, C
 * = 0. */
static void emax_prior(double ed50, gsl_matrix *V)
{
    for (size_t a = 0; a < K; a++)
        for (size_t b = 0; b < K; b++)
            gsl_matrix_set(V, a, b,
                           16.0 + 16.0 * dose[a] / (ed50 + dose[a]) * dose[b] / (ed50 + dose[b]));
}

static void walk_prior(double drift, gsl_matrix *V)
{
    for (size_t a = 0; a < K; a++)
        for (size_t b = 0; b < K; b++)
            gsl_matrix_set(V, a, b, 16.0 + drift * drift * (double)(a < b ? a : b));
}

static size_t ed90_level(double ed50)
{
    const double most = dose[K - 1] / (ed50 + dose[K - 1]);
    for (size_t k = 1; k < K; k++)
        if (dose[k] / (ed50 + dose[k]) >= 0.9 * most)
            return k;
    return K - 1;
}

static void add_point(struct exact *x, double w, const gsl_vector *mean, const gsl_matrix *C)
{
    for (size_t k = 0; k < K; k++) {
        const double m = gsl_vector_get(mean, k), v = gsl_matrix_get(C, k, k);
        x->mean[k] += w * m;
        x->sd[k] += w * (m * m + v);
        const double difference = m - gsl_vector_get(mean, 0);
        const double variance = v + gsl_matrix_get(C, 0, 0) - 2.0 * gsl_matrix_get(C, 0, k);
        if (k > 0)
            x->positive[k] += w * gsl_cdf_ugaussian_P(difference / sqrt(fmax(variance, 1e-30)));
    }
}

static void finish(struct exact *x, double total)
{
    for (size_t k = 0; k < K; k++) {
        x->mean[k] /= total;
        x->sd[k] = sqrt(x->sd[k] / total - x->mean[k] * x->mean[k]);
        x->positive[k] /= total;
        x->top_is[k] /= total;
    }
}

/* integral over (shape, ln sd); sd ~ half_normal(4) */
static struct exact exact_continuous(const struct observed *o, bool emax)
{
    enum { S = 300, T = 120 };
    struct exact x = {{0}, {0}, {0}, {0}};
    gsl_vector *m = gsl_vector_calloc(K), *mean = gsl_vector_alloc(K);
    gsl_matrix *V = gsl_matrix_alloc(K, K), *C = gsl_matrix_alloc(K, K);
    double total = 0.0, shift = NAN;
    for (size_t i = 0; i < S; i++) {
        const double u = ((double)i + 0.5) / S;
        /* emax: ln ED50 ~ N(ln sqrt(500), 1) over +-5 sd; walk: drift ~ half_normal(4 / sqrt 4) */
        const double c = emax ? -5.0 + 10.0 * u : 5.0 * u;
        const double shape = emax ? sqrt(500.0) * exp(c) : 2.0 * c;
        emax ? emax_prior(shape, V) : walk_prior(shape, V);
        for (size_t j = 0; j < T; j++) {
            const double ln_sd = log(1.7) - 1.2 + 2.4 * ((double)j + 0.5) / T, sd = exp(ln_sd);
            const double lp =
                dense_normal(o, sd, m, V, mean, C) - 0.5 * c * c + ln_sd - 0.5 * sd * sd / 16.0;
            if (shift != shift)
                shift = lp;
            const double w = exp(lp - shift);
            total += w;
            add_point(&x, w, mean, C);
            if (emax) { /* all gains share the sign of Emax */
                const double gain = gsl_vector_get(mean, K - 1) - gsl_vector_get(mean, 0);
                const double v = gsl_matrix_get(C, K - 1, K - 1) + gsl_matrix_get(C, 0, 0) -
                                 2.0 * gsl_matrix_get(C, 0, K - 1);
                x.top_is[ed90_level(shape)] += w * gsl_cdf_ugaussian_P(gain / sqrt(v));
            }
        }
    }
    finish(&x, total);
    gsl_vector_free(m);
    gsl_vector_free(mean);
    gsl_matrix_free(V);
    gsl_matrix_free(C);
    return x;
}

/* binary emax: E0, Emax ~ N(0, 1.5), ln ED50 as above; the whole cube on a grid */
static struct exact exact_binary(const struct observed *o)
{
    enum { S = 120 };
    struct exact x = {{0}, {0}, {0}, {0}};
    double total = 0.0;
    for (size_t i = 0; i < S; i++) {
        const double c = -5.0 + 10.0 * ((double)i + 0.5) / S, ed50 = sqrt(500.0) * exp(c);
        for (size_t j = 0; j < S; j++)
            for (size_t l = 0; l < S; l++) {
                const double e0 = -6.0 + 12.0 * ((double)j + 0.5) / S;
                const double emax = -7.5 + 15.0 * ((double)l + 0.5) / S;
                double lp = -0.5 * c * c - 0.5 * (e0 * e0 + emax * emax) / 2.25, theta[K];
                for (size_t k = 0; k < K; k++) {
                    theta[k] = e0 + emax * dose[k] / (ed50 + dose[k]);
                    lp += o->events[k] * theta[k] - o->n[k] * log1p(exp(theta[k]));
                }
                const double w = exp(lp + 25.0);
                total += w;
                for (size_t k = 0; k < K; k++) {
                    x.mean[k] += w * theta[k];
                    x.sd[k] += w * theta[k] * theta[k];
                    x.positive[k] += k > 0 && emax > 0 ? w : 0.0;
                }
            }
    }
    finish(&x, total);
    return x;
}

static struct posterior *fitted(struct design *d, const struct observed *o, struct observed *copy,
                                struct level_data *x, struct plan **plan)
{
    struct err e = ERR_INIT;
    *x = as_level_data(o, copy);
    *plan = plan_new(d, &d->model);
    struct posterior *p = posterior_new(*plan);
    CU_ASSERT_EQUAL_FATAL(posterior_start(p, x, (struct rng_key){.seed = 3}, &e), STATUS_OK);
    return p;
}

static void compare(const struct draws *r, const struct exact *x, bool ed90)
{
    for (size_t k = 0; k < K; k++) {
        const double *row = r->link + k * r->stride, *first = r->link;
        double sum = 0, squares = 0, positive = 0, top = 0;
        for (size_t i = 0; i < r->n; i++) {
            sum += row[i];
            squares += row[i] * row[i];
            positive += row[i] > first[i] ? 1.0 : 0.0;
            if (ed90 && r->link[(K - 1) * r->stride + i] > first[i] && k > 0) {
                const double bar = 0.9 * (r->link[(K - 1) * r->stride + i] - first[i]);
                top += row[i] - first[i] >= bar && (k == 1 || row[i - r->stride] - first[i] < bar)
                           ? 1.0
                           : 0.0;
            }
        }
        const double n = (double)r->n, mean = sum / n, sd = sqrt(squares / n - mean * mean);
        const double near = (unit_fast() ? 0.06 : 0.02) * x->sd[k];
        CU_ASSERT_DOUBLE_EQUAL(mean, x->mean[k], near);
        CU_ASSERT_DOUBLE_EQUAL(sd, x->sd[k], near);
        const double allowed = unit_fast() ? 0.02 : 0.002 + 3e-3; /* and 3 Monte Carlo errors */
        if (k > 0)
            CU_ASSERT_DOUBLE_EQUAL(positive / n, x->positive[k], allowed);
        if (ed90 && k > 0)
            CU_ASSERT_DOUBLE_EQUAL(top / n, x->top_is[k], allowed);
    }
}

/* the sampler, the slice sampler and the second method, all against the integral */
static void all_methods(const char *curve, bool binary, const struct observed *o,
                        const struct exact *x, bool ed90)
{
    struct design *d = small_design(curve, binary, K, "", "");
    struct observed copy;
    struct level_data data;
    struct plan *plan;
    const char *name;
    struct posterior *p = fitted(d, o, &copy, &data, &plan);
    posterior_extend(p, unit_fast() ? DRAWS / 8 : DRAWS);
    struct draws r = posterior_draws(p);
    compare(&r, x, ed90);
    r = posterior_second(p, &name);
    CU_ASSERT_STRING_EQUAL(name, "quadrature");
    compare(&r, x, ed90);
    posterior_use_slice(p);
    posterior_extend(p, unit_fast() ? DRAWS / 8 : DRAWS / 2);
    r = posterior_draws(p);
    compare(&r, x, ed90);
    posterior_free(p);
    plan_free(plan);
    design_free(d);
}

static void emax_informative(void)
{
    const struct exact x = exact_continuous(&informative, true);
    all_methods("emax", false, &informative, &x, true);
}

static void emax_flat(void)
{
    const struct exact x = exact_continuous(&flat, true);
    all_methods("emax", false, &flat, &x, true);
}

static void walk_informative(void)
{
    const struct exact x = exact_continuous(&informative, false);
    all_methods("ndlm", false, &informative, &x, false);
}

static void walk_flat(void)
{
    const struct exact x = exact_continuous(&flat, false);
    all_methods("ndlm", false, &flat, &x, false);
}

static void binary_informative(void)
{
    const struct exact x = exact_binary(&informative);
    all_methods("emax", true, &informative, &x, false);
}

static void binary_flat(void)
{
    const struct exact x = exact_binary(&flat);
    all_methods("emax", true, &flat, &x, false);
}

static const struct unit_test tests[] = {
    {"emax, continuous, informative", emax_informative},
    {"emax, continuous, flat with an empty level", emax_flat},
    {"ndlm, continuous, informative", walk_informative},
    {"ndlm, continuous, flat with an empty level", walk_flat},
    {"emax, binary, informative", binary_informative},
    {"emax, binary, flat with an empty level", binary_flat},
    UNIT_END,
};

int main(void)
{
    return unit_main("exact", tests);
}
