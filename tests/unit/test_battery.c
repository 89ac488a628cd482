/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_battery.c: the contract battery: every curve and variant x endpoint x family of priors, each
 * live fit against an independent reference written here: importance sampling from the prior with
 * GSL's generators, the curves' formulas and libm. Distributions are compared at the reference's
 * quartiles, for every level mean and parameter. */
#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "analysis/analysis.h"
#include "analysis/vocabulary_rows.h"
#include "base/base.h"
#include "base/mem.h"
#include "base/text.h"
#include "unit.h"

enum { K = 5, ROWS = K + MODEL_PARAMETERS_MAX };

static const double dose[K] = {0, 5, 10, 20, 40};

/* few subjects, one level without any: priors matter, and the reference keeps effective draws */
static double n[K] = {3, 2, 0, 3, 3}, mean[K] = {0.3, 0.9, 0, 1.6, 1.9},
              ss[K] = {2.2, 0.9, 0, 3.1, 1.8};
static double events[K] = {1, 0, 0, 2, 2};
static const struct level_data data = {K, n, n, mean, ss, events};

/* ---- variants ---- */

struct variant {
    const char *curve, *more;
    bool off_curve;
};

static const struct variant extra[] = {{"ndlm", ",\"spacing\":\"actual\"", false},
                                       {"ndlm", ",\"order\":2", false},
                                       {"emax", "", true},
                                       {"ndlm", "", true},
                                       {"ndlm", ",\"order\":2", true},
                                       {"independent", "", true}};

/* a number of the right size for a parameter, by name */
static double size_of(const char *name)
{
    static const struct {
        const char *name;
        double size;
    } sizes[] = {{"ED50", 12}, {"h", 1.2},     {"spread", 6}, {"scale", 30}, {"drift_sd", 0.6},
                 {"sd", 1.1},  {"slope", 0.5}, {"E0", 0.8},   {"Emax", 1.5}};
    for (size_t i = 0; i < COUNT_OF(sizes); i++)
        if (strcmp(sizes[i].name, name) == 0)
            return sizes[i].size;
    return 1;
}

static bool is_slope_of_dose(const char *curve, const char *name)
{
    return strcmp(name, "slope") == 0 && strcmp(curve, "linear") == 0;
}

/* A prior of the family for a parameter, as JSON; positive numbers get positive mass. */
static void add_prior(struct text *t, const char *curve, const struct parameter *p,
                      const char *family)
{
    const double s = size_of(p->name) * (is_slope_of_dose(curve, p->name) ? 0.1 : 1);
    const char *cut = p->positive ? ",\"above\":0" : "";
    const bool variance = p->variance && strcmp(family, "inverse_gamma") == 0;
    text_addf(t, "\"%s\":{\"%s\":{", variance ? p->variance : p->name, family);
    if (strcmp(family, "normal") == 0)
        text_addf(t, "\"mean\":%g,\"sd\":%g,\"above\":%g", s, s, p->positive ? 0.2 * s : -0.8 * s);
    else if (strcmp(family, "half_normal") == 0)
        text_addf(t, "\"sd\":%g", s);
    else if (strcmp(family, "lognormal") == 0)
        text_addf(t, "\"meanlog\":%g,\"sdlog\":0.6", log(s));
    else if (strcmp(family, "gamma") == 0)
        text_addf(t, "\"shape\":2,\"rate\":%g", 2 / s);
    else if (strcmp(family, "inverse_gamma") == 0)
        text_addf(t, "\"shape\":3,\"scale\":%g", 2 * (variance ? s * s : s));
    else if (strcmp(family, "uniform") == 0)
        text_addf(t, "\"min\":%g,\"max\":%g", p->positive ? 0.2 * s : -s, 2.5 * s);
    else if (strcmp(family, "student_t") == 0)
        text_addf(t, "\"df\":4,\"location\":%g,\"scale\":%g%s", 0.5 * s, s, cut);
    else
        text_addf(t, "\"value\":%g", s);
    text_add(t, "}}");
}

/* Every parameter has the family; `fixed`: only the last of the curve and the residual sd. */
static struct design *make_design(const struct variant *v, bool binary, const char *family)
{
    const struct curve *c = curve_find(v->curve);
    const bool second = strstr(v->more, "order") != NULL;
    static const struct parameter sd = {.name = "sd", .variance = "variance", .positive = true};
    static const struct parameter control = {.name = "control"};
    struct text t = TEXT_INIT;
    struct err e = ERR_INIT;
    struct design *d = NULL;
    size_t count = 0, last = 0;
    for (size_t i = 0; c->parameters[i].name; i++)
        last = i;
    text_addf(&t, "{\"terrace\":1,\"title\":\"t\",\"levels\":{\"control\":\"0\",%s\"list\":[",
              v->off_curve ? "\"control_on_curve\":false," : "");
    for (size_t k = 0; k < K; k++)
        text_addf(&t, "%s{\"label\":\"%g\",\"value\":%g}", k ? "," : "", dose[k], dose[k]);
    text_addf(&t,
              "]},\"endpoint\":{\"name\":\"y\",\"type\":\"%s\",\"better\":\"higher\"%s},"
              "\"model\":{\"curve\":\"%s\"%s,\"priors\":{",
              binary ? "binary" : "continuous", binary ? "" : ",\"range\":[-4,4]", v->curve,
              v->more);
    for (size_t i = 0; c->parameters[i].name; i++) {
        if ((c->parameters[i].order > 1 && !second) ||
            (strcmp(family, "fixed") == 0 && i != last && c->parameters[i].role == ROLE_LINEAR))
            continue;
        text_add(&t, count++ ? "," : "");
        add_prior(&t, v->curve, &c->parameters[i], family);
    }
    if (v->off_curve) {
        text_add(&t, count++ ? "," : "");
        add_prior(&t, v->curve, &control, family);
    }
    if (!binary) {
        text_add(&t, count++ ? "," : "");
        add_prior(&t, v->curve, &sd, family);
    }
    text_add(&t, "}},\"subjects\":100,\"analyses\":{\"at\":[9]},\"mcmc\":{\"precision\":0.02}}");
    if (design_parse(&d, text_s(&t), t.length, "battery", &terrace_vocabulary, &e) != STATUS_OK) {
        struct text m = TEXT_INIT;
        err_text(&e, &m);
        fputs(text_s(&m), stderr);
        fputs(text_s(&t), stderr);
        CU_FAIL_FATAL("the battery's design is not accepted");
    }
    text_release(&t);
    return d;
}

/* ---- the reference ---- */

static double draw_family(gsl_rng *r, const char *key, const double *a)
{
    if (strcmp(key, "normal") == 0)
        return a[0] + gsl_ran_gaussian_ziggurat(r, a[1]);
    if (strcmp(key, "half_normal") == 0)
        return fabs(gsl_ran_gaussian_ziggurat(r, a[0]));
    if (strcmp(key, "lognormal") == 0)
        return exp(a[0] + gsl_ran_gaussian_ziggurat(r, a[1]));
    if (strcmp(key, "gamma") == 0)
        return gsl_ran_gamma(r, a[0], 1 / a[1]);
    if (strcmp(key, "inverse_gamma") == 0)
        return a[1] / gsl_ran_gamma(r, a[0], 1);
    if (strcmp(key, "uniform") == 0)
        return a[0] + (a[1] - a[0]) * gsl_rng_uniform_pos(r);
    if (strcmp(key, "student_t") == 0)
        return a[1] + a[2] * gsl_ran_tdist(r, a[0]);
    return a[0];
}

static double draw_prior(gsl_rng *r, const struct prior *p)
{
    double x;
    do
        x = draw_family(r, p->family->key, p->arg);
    while (x < p->above || x > p->below);
    return p->on_variance ? sqrt(x) : x;
}

/* The interface's formulas; v: the parameters in the model's order. */
static double formula(const char *curve, double d, const double *v)
{
    if (strcmp(curve, "linear") == 0)
        return v[0] + v[1] * d;
    if (strcmp(curve, "log_linear") == 0)
        return v[0] + v[1] * log(d + 1);
    if (strcmp(curve, "quadratic") == 0)
        return v[0] + v[1] * d / dose[K - 1] + v[2] * pow(d / dose[K - 1], 2);
    if (strcmp(curve, "emax") == 0)
        return v[0] + v[1] * d / (v[2] + d);
    if (strcmp(curve, "sigmoid_emax") == 0)
        return v[0] + v[1] * (d > 0 ? 1 / (1 + pow(v[2] / d, v[3])) : 0);
    if (strcmp(curve, "logistic") == 0)
        return v[0] + v[1] / (1 + exp((v[2] - d) / v[3]));
    if (strcmp(curve, "exponential") == 0)
        return v[0] + v[1] * expm1(fmin(d / v[2], 30));
    CU_FAIL("a curve without a formula in the battery: write it down");
    return NAN;
}

static const double *value_of(const struct model *m, const double *v, const char *name)
{
    for (size_t i = 0; i < m->parameters; i++)
        if (strcmp(m->parameter[i]->name, name) == 0)
            return &v[i];
    CU_FAIL_FATAL("no such parameter");
    return NULL;
}

static void draw_walk(gsl_rng *r, const struct design *d, const double *v, double *theta)
{
    const struct model *m = &d->model;
    const size_t first = d->control_on_curve ? 0 : 1;
    const double drift = *value_of(m, v, "drift_sd");
    const double mean_gap = (dose[K - 1] - dose[first]) / (double)(K - 1 - first);
    double step = 0;
    theta[first] = *value_of(m, v, "theta");
    for (size_t k = first + 1; k < K; k++) {
        const double gap = m->spacing_actual ? (dose[k] - dose[k - 1]) / mean_gap : 1;
        if (m->order == 2)
            step = k == first + 1 ? *value_of(m, v, "slope")
                                  : step + gsl_ran_gaussian_ziggurat(r, drift);
        else
            step = gsl_ran_gaussian_ziggurat(r, drift * sqrt(gap));
        theta[k] = theta[k - 1] + step;
    }
}

static void draw_truth(gsl_rng *r, const struct design *d, double *v, double *theta)
{
    const struct model *m = &d->model;
    for (size_t i = 0; i < m->parameters; i++)
        v[i] = draw_prior(r, &m->prior[i]);
    for (size_t k = 0; k < K; k++) {
        if (m->curve->kind == CURVE_FREE)
            theta[k] = k == 0 ? v[0] : draw_prior(r, &m->prior[0]);
        else if (m->curve->kind == CURVE_BASIS)
            theta[k] = formula(m->curve->key, dose[k], v);
    }
    if (m->curve->kind == CURVE_WALK)
        draw_walk(r, d, v, theta);
    if (!d->control_on_curve) {
        theta[0] = *value_of(m, v, "control");
        if (m->curve->kind == CURVE_FREE)
            v[0] = theta[1]; /* the parameter row stands for the first level on the curve */
    }
}

static double log_likelihood(const struct design *d, const double *v, const double *theta)
{
    double sum = 0;
    const double sd = d->type == ENDPOINT_BINARY ? 1 : *value_of(&d->model, v, "sd");
    for (size_t k = 0; k < K; k++)
        if (d->type == ENDPOINT_BINARY)
            sum += events[k] * theta[k] -
                   n[k] * (theta[k] > 0 ? theta[k] + log1p(exp(-theta[k])) : log1p(exp(theta[k])));
        else
            sum -= n[k] * log(sd) + (ss[k] + n[k] * pow(mean[k] - theta[k], 2)) / (2 * sd * sd);
    return sum;
}

struct reference {
    size_t n, rows;
    double *x[ROWS], *w; /* level means, then parameters; weights sum to 1 */
};

static void reference_make(struct reference *q, const struct design *d, gsl_rng *r, size_t size)
{
    double top = -INFINITY, sum = 0;
    q->n = size;
    q->rows = K + d->model.parameters;
    q->w = mem_new(size, sizeof *q->w);
    for (size_t j = 0; j < q->rows; j++)
        q->x[j] = mem_new(size, sizeof(double));
    for (size_t i = 0; i < size; i++) {
        double v[MODEL_PARAMETERS_MAX], theta[K];
        draw_truth(r, d, v, theta);
        q->w[i] = log_likelihood(d, v, theta);
        top = q->w[i] > top ? q->w[i] : top;
        for (size_t j = 0; j < q->rows; j++)
            q->x[j][i] = j < K ? theta[j] : v[j - K];
    }
    for (size_t i = 0; i < size; i++)
        sum += q->w[i] = exp(q->w[i] - top);
    for (size_t i = 0; i < size; i++)
        q->w[i] /= sum;
}

static void reference_free(struct reference *q)
{
    for (size_t j = 0; j < q->rows; j++)
        mem_free(q->x[j]);
    mem_free(q->w);
}

struct weighed {
    double x, w;
};

static int by_x(const void *a, const void *b)
{
    const struct weighed *p = a, *q = b;
    return (p->x > q->x) - (p->x < q->x);
}

static void quartiles(const struct reference *q, size_t row, double out[3])
{
    struct weighed *s = mem_new(q->n, sizeof *s);
    double sum = 0;
    size_t next = 0;
    for (size_t i = 0; i < q->n; i++)
        s[i] = (struct weighed){q->x[row][i], q->w[i]};
    qsort(s, q->n, sizeof *s, by_x);
    for (size_t i = 0; i < q->n && next < 3; i++) {
        sum += s[i].w;
        while (next < 3 && sum >= 0.25 * (double)(next + 1))
            out[next++] = s[i].x;
    }
    mem_free(s);
}

/* ---- one case ---- */

static double share_below(const struct reference *q, size_t row, double c, double *error)
{
    double p = 0, variance = 0;
    for (size_t i = 0; i < q->n; i++)
        p += q->x[row][i] <= c ? q->w[i] : 0;
    for (size_t i = 0; i < q->n; i++)
        variance += pow(q->w[i] * ((q->x[row][i] <= c) - p), 2);
    *error = sqrt(variance);
    return p;
}

/* The worst distance, in combined standard errors, of a row's distribution at the quartiles. */
static double distance(const struct reference *q, size_t row, const double *x,
                       const struct draws *r, double ess)
{
    double c[3], worst = 0;
    quartiles(q, row, c);
    if (c[0] == c[2])
        return x[0] == c[0] || fabs(x[0] - c[0]) < 1e-9 * fabs(c[0]) ? 0 : INFINITY; /* fixed */
    for (size_t j = 0; j < 3; j++) {
        double error, below = 0;
        const double p = share_below(q, row, c[j], &error);
        for (size_t i = 0; i < r->n; i++)
            below += x[i] <= c[j] ? 1.0 / (double)r->n : 0;
        const double own = sqrt(p * (1 - p) / ess);
        const double z = fabs(below - p) / sqrt(error * error + own * own);
        worst = z > worst ? z : worst;
    }
    return worst;
}

struct tally {
    size_t cases, distrusted, wrong;
    double worst;
};

static void run_case(const struct variant *v, bool binary, const char *family, gsl_rng *rng,
                     struct tally *t)
{
    struct design *d = make_design(v, binary, family);
    struct analyst *w = analyst_new(d);
    struct analysis a;
    struct err e = ERR_INIT;
    struct reference q;
    const struct analysis_request request = {.number = 1, .seed = 7, .live = true, .threads = 2};
    analysis_init(&a, d);
    const enum status status = analysis_run(&a, w, &data, &request, &e);
    t->cases++;
    if (status == STATUS_DISTRUSTED) {
        t->distrusted++;
        fprintf(stderr, "# distrusted: %s%s%s %s %s\n", v->curve, v->more,
                v->off_curve ? " off" : "", binary ? "binary" : "continuous", family);
    } else {
        CU_ASSERT_EQUAL(status, STATUS_OK);
        const struct draws r = analyst_draws(w);
        reference_make(&q, d, rng, unit_fast() ? 25000 : 80000);
        for (size_t row = 0; row < q.rows; row++) {
            const double *x =
                row < K ? r.link + row * r.stride : r.parameter + (row - K) * r.stride;
            const double z = distance(&q, row, x, &r, a.diagnostics.min_ess_bulk);
            t->worst = z > t->worst ? z : t->worst;
            if (!(z < 5)) {
                t->wrong++;
                fprintf(stderr, "# wrong: %s%s%s %s %s, row %zu: %.2f standard errors\n", v->curve,
                        v->more, v->off_curve ? " off" : "", binary ? "binary" : "continuous",
                        family, row, z);
            }
        }
        reference_free(&q);
    }
    analysis_release(&a);
    analyst_free(w);
    design_free(d);
}

static void every_family(const struct variant *v, struct tally *t, gsl_rng *rng)
{
    for (int binary = 0; binary < 2; binary++)
        for (size_t f = 0; prior_families[f]; f++)
            run_case(v, binary, prior_families[f]->key, rng, t);
}

static void every_curve(void)
{
    struct tally t = {0, 0, 0, 0};
    gsl_rng *rng = gsl_rng_alloc(gsl_rng_mt19937);
    for (size_t i = 0; curves[i]; i++)
        every_family(&(struct variant){curves[i]->key, "", false}, &t, rng);
    for (size_t i = 0; i < COUNT_OF(extra); i++)
        every_family(&extra[i], &t, rng);
    fprintf(stderr, "# %zu cases, %zu distrusted, worst distance %.2f standard errors\n", t.cases,
            t.distrusted, t.worst);
    CU_ASSERT_EQUAL(t.wrong, 0);
    /* independent levels with positive priors, each weighed apart, may need more draws: said so */
    CU_ASSERT(t.distrusted <= 2);
    gsl_rng_free(rng);
}

static const struct unit_test tests[] = {
    {"every curve, endpoint and family of priors against importance sampling", every_curve},
    UNIT_END,
};

int main(void)
{
    return unit_main("battery", tests);
}
