/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_posterior.c: posteriors against closed forms, numerical integrals and a second method. */
#include <gsl/gsl_cdf.h>
#include <gsl/gsl_integration.h>
#include <math.h>
#include <string.h>

#include "analysis/analysis.h"
#include "analysis/vocabulary_rows.h"
#include "base/base.h"
#include "base/mem.h"
#include "base/text.h"
#include "posterior/diagnostics.h"
#include "selfcheck/check_list.h"

/* A design of `levels` levels 0, 10, 20, ... against the first. */
static struct design *small_design(size_t levels, bool binary, const char *model)
{
    struct text t = TEXT_INIT;
    struct err e = ERR_INIT;
    struct design *d = NULL;
    text_add(&t, "{\"terrace\":1,\"title\":\"check\",\"levels\":{\"control\":\"0\",\"list\":[");
    for (size_t k = 0; k < levels; k++)
        text_addf(&t, "%s{\"label\":\"%zu\",\"value\":%zu}", k ? "," : "", 10 * k, 10 * k);
    text_addf(&t,
              "]},\"endpoint\":{\"name\":\"y\",\"type\":\"%s\",\"better\":\"higher\"%s},"
              "\"model\":%s,\"subjects\":100,"
              "\"targets\":{\"ED90\":{\"rule\":\"effective_dose\",\"fraction\":0.9}}}",
              binary ? "binary" : "continuous", binary ? "" : ",\"range\":[-8,8]", model);
    if (design_parse(&d, text_s(&t), t.length, "check", &terrace_vocabulary, &e) != STATUS_OK)
        BUG("the design of a built-in check is not accepted");
    text_release(&t);
    return d;
}

static const struct analysis_request live = {.number = 1, .seed = 1, .live = true, .threads = 1};

/* ---- normal mean, known variance ---- */

static void run_known_variance(struct check_result *r, double nudge)
{
    /* theta_k ~ N(1, 2^2), sd 3 known; n and means of two levels */
    static double n[] = {8, 12}, ss[] = {60, 100}, events[2];
    double mean[] = {0.4, 2.3 + nudge};
    const struct level_data x = {2, n, n, mean, ss, events};
    struct design *d = small_design(
        2, false,
        "{\"curve\":\"independent\",\"priors\":{\"theta\":{\"normal\":{\"mean\":1,\"sd\":2}},"
        "\"sd\":{\"fixed\":{\"value\":3}}}}");
    struct analyst *w = analyst_new(d);
    struct analysis a;
    struct err e = ERR_INIT;
    double m[2], v[2];
    analysis_init(&a, d);
    if (analysis_run(&a, w, &x, &live, &e) != STATUS_OK)
        check_add(r, 1, 0, 0, "the computation is trusted");
    for (size_t k = 0; k < 2; k++) { /* of the data without the nudge */
        v[k] = 1 / (1 / 4.0 + n[k] / 9);
        m[k] = v[k] * (1 / 4.0 + n[k] * (k ? 2.3 : 0.4) / 9);
        const double error = 4.5 * sqrt(v[k] / (double)a.diagnostics.min_ess_bulk);
        check_add(r, m[k], a.level[k].response.mean, error, "posterior mean of level %zu", k);
        check_add(r, sqrt(v[k]), a.level[k].response.sd, error, "posterior sd of level %zu", k);
    }
    check_add(r, gsl_cdf_ugaussian_P((m[1] - m[0]) / sqrt(v[0] + v[1])), a.level[1].pr_positive,
              1e-12, "Pr(gain > 0), exact given the variance");
    analysis_release(&a);
    analyst_free(w);
    design_free(d);
}

const struct check check_known_variance = {
    "known_variance",
    "Posterior",
    "Closed form: Gelman, Carlin, Stern, Dunson, Vehtari & Rubin 2013, Bayesian Data Analysis, 3rd "
    "ed., section 2.5 (normal mean with known variance)",
    "Two independent levels; means and sds within 4.5 Monte Carlo errors, the probability exact.",
    run_known_variance,
    false};

/* ---- two binomials ---- */

/* The logit of a rate: prior N(0, 1.5^2), events of n; on [-12, 12] */
struct logit {
    double n, events, other_n, other_events;
};

static double kernel(double t, double n, double events)
{
    const double softplus = t > 0 ? t + log1p(exp(-t)) : log1p(exp(t));
    return exp(events * t - n * softplus - 0.5 * t * t / 2.25 + 0.69 * n);
}

static double integrate(double (*f)(double, void *), void *data, double low, double high)
{
    gsl_integration_workspace *w = gsl_integration_workspace_alloc(1000);
    gsl_function function = {f, data};
    double value = NAN, error;
    gsl_integration_qag(&function, low, high, 0, 1e-9, 1000, GSL_INTEG_GAUSS31, w, &value, &error);
    gsl_integration_workspace_free(w);
    return value;
}

static double own(double t, void *data)
{
    const struct logit *x = data;
    return kernel(t, x->n, x->events);
}

static double other(double t, void *data)
{
    const struct logit *x = data;
    return kernel(t, x->other_n, x->other_events);
}

static double own_above(double t, void *data)
{
    return own(t, data) * integrate(other, data, -12, t);
}

static double pr_above(double n, double events, double other_n, double other_events)
{
    struct logit x = {n, events, other_n, other_events};
    return integrate(own_above, &x, -12, 12) /
           (integrate(own, &x, -12, 12) * integrate(other, &x, -12, 12));
}

static void run_two_binomials(struct check_result *r, double nudge)
{
    static const double cases[][4] = {{20, 4, 20, 9}, {15, 7, 15, 7}, {12, 0, 12, 3}};
    struct design *d = small_design(2, true, "{\"curve\":\"independent\"}");
    struct analyst *w = analyst_new(d);
    struct err e = ERR_INIT;
    for (size_t i = 0; i < COUNT_OF(cases); i++) {
        double n[] = {cases[i][0], cases[i][2]}, none[2] = {0, 0};
        double events[] = {cases[i][1] + (nudge != 0 ? 2 : 0), cases[i][3]};
        const struct level_data x = {2, n, n, none, none, events};
        struct analysis a;
        analysis_init(&a, d);
        if (analysis_run(&a, w, &x, &live, &e) != STATUS_OK)
            check_add(r, 1, 0, 0, "the computation is trusted");
        const double exact = cases[i][1] == cases[i][3]
                                 ? 0.5 /* by symmetry */
                                 : pr_above(cases[i][2], cases[i][3], cases[i][0], cases[i][1]);
        check_add(r, exact, a.level[1].pr_positive,
                  4.5 * sqrt(exact * (1 - exact) / a.diagnostics.min_ess_bulk) + 1e-4,
                  "Pr(p_b > p_a), %g of %g against %g of %g", cases[i][3], cases[i][2], cases[i][1],
                  cases[i][0]);
        analysis_release(&a);
    }
    analyst_free(w);
    design_free(d);
}

const struct check check_two_binomials = {
    "two_binomials",
    "Posterior",
    "Closed form by symmetry (1/2 where both arms have the same data), else the double integral by "
    "adaptive Gauss-Kronrod quadrature (Piessens, de Doncker-Kapenga, Ueberhuber & Kahaner 1983, "
    "QUADPACK)",
    "Logits with normal priors; closed forms in sums (Altham 1969, JRSS B 31:261) need beta "
    "priors, "
    "which are not among ours; within 4.5 Monte Carlo errors.",
    run_two_binomials,
    false};

/* ---- the sampler and quadrature, every continuous curve ---- */

enum { LEVELS = 6 };

/* Pr(gain of a level over the first > 1) on draws, and its Monte Carlo standard error */
static double gain_share(const struct draws *r, size_t level, double *mark, double *error)
{
    double sum = 0;
    for (size_t i = 0; i < r->n; i++) {
        mark[i] = r->link[level * r->stride + i] > r->link[i] + 1 ? 1 : 0;
        sum += mark[i];
    }
    const double p = sum / (double)r->n;
    *error = diag_mcse_probability(p, diag_ess(mark, r->n, r->chains));
    return p;
}

static void compare_methods(struct check_result *r, const char *name, const char *model,
                            double nudge)
{
    enum { DRAWS = 128000 };
    static double n[] = {12, 10, 0, 11, 12, 10}, events[LEVELS];
    static double ss[] = {40, 31, 0, 38, 44, 35};
    double mean[] = {0.2, 0.9, 0, 1.7, 1.9, 2.3};
    const struct level_data x = {LEVELS, n, n, mean, ss, events};
    struct design *d = small_design(LEVELS, false, model);
    struct plan *plan = plan_new(d, &d->model);
    struct posterior *p = posterior_new(plan);
    struct err e = ERR_INIT;
    const char *method;
    double first[LEVELS], error[LEVELS], other_error, *mark = mem_new(SECOND_DRAWS, sizeof *mark);
    enum status status = posterior_start(p, &x, (struct rng_key){.seed = 1}, &e);
    posterior_extend(p, DRAWS);
    const struct draws a = posterior_draws(p);
    for (size_t k = 1; k < LEVELS; k++)
        first[k] = gain_share(&a, k, mark, &error[k]);
    mean[5] += nudge;
    status = status == STATUS_OK ? posterior_start(p, &x, (struct rng_key){.seed = 1}, &e) : status;
    const struct draws b = posterior_second(p, &method);
    for (size_t k = 1; k < LEVELS; k++) {
        const double second = gain_share(&b, k, mark, &other_error);
        check_add(r, second, first[k],
                  0.002 + 4 * sqrt(error[k] * error[k] + other_error * other_error),
                  "%s, Pr(gain at %zu > 1)", name, 10 * k);
    }
    check_add(r, 1, status == STATUS_OK && strcmp(method, "quadrature") == 0, 0,
              "%s: the second method is quadrature", name);
    mem_free(mark);
    posterior_free(p);
    plan_free(plan);
    design_free(d);
}

static void run_two_methods(struct check_result *r, double nudge)
{
    for (size_t i = 0; curves[i]; i++) {
        struct text model = TEXT_INIT;
        text_addf(&model, "{\"curve\":\"%s\"}", curves[i]->key);
        compare_methods(r, curves[i]->key, text_s(&model), nudge);
        text_release(&model);
    }
    compare_methods(r, "ndlm of order 2", "{\"curve\":\"ndlm\",\"order\":2}", nudge);
}

const struct check check_two_methods = {
    "two_methods",
    "Posterior",
    "Two methods within this program: independence sampling (Tierney 1994, Annals of Statistics "
    "22:1701) and quadrature over shape and residual sd",
    "Every curve, continuous endpoint, one level without data; quadrature stands as published, the "
    "sampler as ours; 0.002 and 4 combined Monte Carlo errors.",
    run_two_methods,
    false};
