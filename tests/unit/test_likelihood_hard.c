/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_likelihood_hard.c: the likelihood fit on data that are hard for it, and more published
 * tables. */
#include <gsl/gsl_math.h>
#include <gsl/gsl_rng.h>
#include <math.h>

#include "base/base.h"
#include "fit_cases.h"
#include "unit.h"

#define CLOSE(what, got, want, relative) CU_ASSERT(fit_close(what, got, want, relative))

static void assert_row(const struct fit_case *c, const char *name, double estimate, double se,
                       double relative)
{
    const struct likelihood_row row = fit_row(c, name);
    CLOSE(name, row.estimate, estimate, relative);
    CLOSE("its se", row.se, se, relative);
}

/* ---- published tables ---- */

/* NIST StRD linear regression, Norris (ozone monitors, 36 observations), certified values; data and
 * values from memory, accepted because all certified digits come out. */
static void norris(void)
{
    static const double y[] = {0.1,   338.8, 118.1, 888.0, 9.2,   228.1, 668.5, 998.5, 449.1,
                               778.9, 559.2, 0.3,   0.1,   778.1, 668.8, 339.3, 448.9, 10.8,
                               557.7, 228.3, 998.0, 888.8, 119.6, 0.3,   0.6,   557.6, 339.3,
                               888.0, 998.5, 778.9, 10.2,  117.6, 228.9, 668.4, 449.2, 0.2};
    static const double x[] = {0.2,   337.4, 118.2, 884.6, 10.1,  226.5, 666.3, 996.3, 448.6,
                               777.0, 558.2, 0.4,   0.6,   775.5, 666.9, 338.0, 447.5, 11.6,
                               556.0, 228.1, 995.8, 887.6, 120.2, 0.3,   0.3,   556.8, 339.1,
                               887.2, 999.0, 779.0, 11.1,  118.3, 229.2, 669.1, 448.9, 0.5};
    struct fit_case c = fit_rows("linear", COUNT_OF(x), x, y, "");
    assert_row(&c, "E0", -0.262323073774029, 0.232818234301152, 1e-10);
    assert_row(&c, "slope", 1.00211681802045, 0.429796848199937e-3, 1e-10);
    CLOSE("sd", fit_row(&c, "sd").estimate, 0.884796396144373, 1e-10);
    fit_case_release(&c);
}

/* NIST StRD linear regression, Pontius (load cells, 40 observations), certified values; data and
 * values from memory, accepted likewise. Curve quadratic takes x as shares of the largest, 3e6. */
static void pontius(void)
{
    static const double y[] = {
        .11019,  .21956,  .32949,  .43899,  .54803,  .65694,  .76562,  .87487,  .98292,  1.09146,
        1.20001, 1.30822, 1.41599, 1.52399, 1.63194, 1.73947, 1.84646, 1.95392, 2.06128, 2.16844,
        .11052,  .22018,  .32939,  .43886,  .54798,  .65739,  .76596,  .87474,  .98300,  1.09150,
        1.20004, 1.30818, 1.41613, 1.52408, 1.63159, 1.73965, 1.84696, 1.95445, 2.06177, 2.16829};
    const double largest = 3e6;
    double x[COUNT_OF(y)];
    for (size_t i = 0; i < COUNT_OF(y); i++)
        x[i] = 150000.0 * (double)(i % 20 + 1);
    struct fit_case c = fit_rows("quadratic", COUNT_OF(y), x, y, "");
    assert_row(&c, "E0", 0.673565789473684e-3, 0.107938612033077e-3, 1e-8);
    assert_row(&c, "b1", 0.732059160401003e-6 * largest, 0.157817399981659e-9 * largest, 1e-8);
    assert_row(&c, "b2", -0.316081871345029e-14 * largest * largest,
               0.486652849992036e-16 * largest * largest, 1e-8);
    fit_case_release(&c);
}

/* Reaction rates of an enzyme treated with puromycin (Bates & Watts 1988, Nonlinear Regression
 * Analysis and Its Applications, A1.3): Vm d / (K + d), which is curve emax with E0 = 0. Values of
 * base R 4.2's nls, 212.7 (6.95) and 0.0641 (0.0083) in print. */
static void puromycin(void)
{
    static const double x[] = {.02, .02, .06, .06, .11, .11, .22, .22, .56, .56, 1.1, 1.1};
    static const double y[] = {76, 47, 97, 107, 123, 139, 159, 152, 191, 201, 207, 200};
    struct fit_case c =
        fit_rows("emax", COUNT_OF(x), x, y, ",\"priors\":{\"E0\":{\"fixed\":{\"value\":0}}}");
    assert_row(&c, "Emax", 212.68357998, 6.94714626, 1e-5);
    assert_row(&c, "ED50", 0.06412102739, 0.00828092242, 1e-5);
    CLOSE("log-likelihood", c.fit.log_likelihood, -44.63548432, 1e-9);
    fit_case_release(&c);
}

/* NIST StRD, Rat42 (Ratkowsky 1983): the certified standard error of b2 = ED50 / spread by the
 * delta method. The correlation of the two comes from a second fit with spread at its estimate: it
 * leaves var(ED50) (1 - correlation^2) per unit variance; ED50 and spread grow together. */
static void rat42_ratio(void)
{
    static const double x[] = {9, 14, 21, 28, 42, 57, 63, 70, 79};
    static const double y[] = {8.93, 10.8, 18.59, 22.33, 39.35, 56.11, 61.73, 64.62, 67.08};
    struct text known = TEXT_INIT;
    struct fit_case c =
        fit_rows("logistic", 9, x, y, ",\"priors\":{\"E0\":{\"fixed\":{\"value\":0}}}");
    const struct likelihood_row a = fit_row(&c, "ED50"), b = fit_row(&c, "spread");
    text_addf(&known,
              ",\"priors\":{\"E0\":{\"fixed\":{\"value\":0}},\"spread\":{\"fixed\":{\"value\":"
              "%.17g}}}",
              b.estimate);
    struct fit_case k = fit_rows("logistic", 9, x, y, text_s(&known));
    const double left =
        fit_row(&k, "ED50").se / fit_row(&k, "sd").estimate * fit_row(&c, "sd").estimate / a.se;
    const double together = sqrt(1 - left * left) * a.se * b.se, s = b.estimate;
    const double variance = pow(a.se / s, 2) - 2 * a.estimate / pow(s, 3) * together +
                            pow(a.estimate * b.se / (s * s), 2);
    CLOSE("se(b2)", sqrt(variance), 0.088295217536, 5e-7);
    fit_case_release(&c);
    fit_case_release(&k);
    text_release(&known);
}

/* ---- hard data ---- */

/* Residuals so large that Gauss-Newton steps crawl (base R's nls gives up); R's optimize and lm. */
static void large_residuals(void)
{
    static const double v[] = {0, 0.7, 0.9, 1.2, 1.3, 2.0, 2.8, 2.9};
    static const double n[] = {38, 60, 38, 24, 53, 36, 28, 22};
    static const double m[] = {184, 220, 302, 19, 25, 221, 155, 135};
    static const double ss[] = {49, 121, 75, 92, 83, 81, 43, 29};
    struct fit_case c = fit_groups("emax", 8, v, n, m, ss, "", "");
    CU_ASSERT(c.fit.converged);
    CLOSE("E0", fit_row(&c, "E0").estimate, 206.18876, 1e-6);
    CLOSE("Emax", fit_row(&c, "Emax").estimate, -119.44586, 1e-6);
    CLOSE("ED50", fit_row(&c, "ED50").estimate, 1.8787164, 1e-6);
    CLOSE("RSS", pow(fit_row(&c, "sd").estimate, 2) * (299 - 3), 2458972.108 + 573, 1e-8);
    fit_case_release(&c);
}

/* A control with rate 1/2 has logit 0: an estimate of 0 must not look unfinished. R's glm. */
static void logit_of_zero(void)
{
    static const double v[] = {0.5, 1, 2, 3, 4}, n[] = {4, 6, 4, 7, 7}, e[] = {2, 3, 3, 5, 6};
    struct fit_case c = fit_groups("quadratic", 5, v, n, e, NULL, "",
                                   ",\"control\":\"L0\",\"control_on_curve\":false");
    assert_row(&c, "E0", -0.5538580349, 2.418080247, 1e-6);
    assert_row(&c, "b1", 2.6466004194, 9.352136298, 1e-6);
    assert_row(&c, "b2", -0.4353714830, 7.614864199, 1e-6);
    CU_ASSERT_DOUBLE_EQUAL(fit_row(&c, "control").estimate, 0, 1e-9);
    CLOSE("control", fit_row(&c, "control").se, 1, 1e-9);
    CLOSE("log-likelihood", c.fit.log_likelihood, -4.234282105 + log(6.0 / 16), 1e-8);
    fit_case_release(&c);
}

/* The best rise lies between two close levels, and a coarse scan steps over it. R's optim. */
static void hidden_rise(void)
{
    static const double v[] = {0, 0.03, 0.045, 0.074, 0.08, 0.108, 0.13};
    static const double n[] = {5, 6, 8, 6, 6, 5, 7}, ss[] = {0.0013, 0, 0, 0, 0, 0, 0};
    static const double m[] = {5.5994, 5.6097, 5.6066, 5.6075, 5.6176, 5.6184, 5.6215};
    struct fit_case c = fit_groups("logistic", 7, v, n, m, ss, "", "");
    CU_ASSERT(c.fit.converged);
    CLOSE("ED50", fit_row(&c, "ED50").estimate, 0.077369349, 1e-5);
    CLOSE("spread", fit_row(&c, "spread").estimate, 0.0017316576, 1e-4);
    CLOSE("log-likelihood", c.fit.log_likelihood, 157.8775095, 1e-8);
    fit_case_release(&c);
}

/* Levels within a narrow range need a steep power: Bliss 1935's beetles by ln dose. */
static void narrow_levels(void)
{
    static const double v[] = {1.6907, 1.7242, 1.7552, 1.7842, 1.8113, 1.8369, 1.861, 1.8839};
    static const double n[] = {59, 60, 62, 56, 63, 59, 62, 60};
    static const double mean[] = {6, 13, 18, 28, 52, 53, 61, 60};
    static const double ss[] = {58, 59, 61, 55, 62, 58, 61, 59};
    struct fit_case c = fit_groups("sigmoid_emax", 8, v, n, mean, ss, "", "");
    CU_ASSERT(c.fit.converged);
    CU_ASSERT(fit_row(&c, "h").estimate > 30);
    fit_case_release(&c);
}

/* A billion on every response changes nothing but the intercept. */
static void large_responses(void)
{
    static const double v[] = {0, 5, 10, 20, 40, 80}, n[] = {9, 9, 9, 9, 9, 9};
    static const double m[] = {1.5, 2.25, 2.75, 3.5, 3.875, 4.25}, ss[] = {8, 8, 8, 8, 8, 8};
    static const char *const curve[] = {"linear", "emax", "sigmoid_emax", "ndlm", "independent"};
    for (size_t f = 0; f < COUNT_OF(curve); f++) {
        double up[6];
        for (size_t k = 0; k < 6; k++)
            up[k] = m[k] + 1048576.0 * 1024;
        struct fit_case a = fit_groups(curve[f], 6, v, n, m, ss, "", "");
        struct fit_case b = fit_groups(curve[f], 6, v, n, up, ss, "", "");
        CU_ASSERT(a.fit.converged && b.fit.converged);
        CLOSE("log-likelihood", b.fit.log_likelihood, a.fit.log_likelihood, 1e-9);
        for (size_t i = 0; i < a.fit.rows; i++) {
            CLOSE(a.fit.row[i].name, b.fit.row[i].estimate - (i == 0 ? 1048576.0 * 1024 : 0),
                  a.fit.row[i].estimate, 1e-6);
            CU_ASSERT(isnan(a.fit.row[i].se) ||
                      fabs(b.fit.row[i].se - a.fit.row[i].se) <= 1e-6 * a.fit.row[i].se);
        }
        fit_case_release(&a);
        fit_case_release(&b);
    }
}

/* ---- where there is no maximum ---- */

static void says_no(struct fit_case c, const char *word)
{
    CU_ASSERT(c.fit.exists && !c.fit.converged);
    CU_ASSERT_PTR_NOT_NULL_FATAL(c.fit.message);
    CU_ASSERT(strstr(c.fit.message, word) != NULL);
    if (strstr(c.fit.message, word) == NULL)
        fprintf(stderr, "not \"%s\": %s\n", word, c.fit.message);
    for (size_t i = 0; i < c.fit.rows; i++)
        CU_ASSERT(isnan(c.fit.row[i].estimate) && isnan(c.fit.row[i].se));
    CU_ASSERT(isnan(c.fit.log_likelihood) && isnan(c.fit.aic));
    fit_case_release(&c);
}

static void no_maximum(void)
{
    static const char off[] = ",\"control\":\"L0\",\"control_on_curve\":false";
    static const double v[] = {0, 1, 2, 3}, n[] = {9, 9, 9, 9}, e[] = {0, 0, 4, 9};
    static const double holes[] = {9, 0, 9, 0}, no_control[] = {0, 9, 9, 9};
    static const double m[] = {1, 2, 4, 5}, ss[] = {8, 8, 8, 8};
    static const double close[] = {0, 8.5, 24, 34.7, 43.8, 47.6, 67.2};
    static const double many[] = {22, 53, 31, 46, 0, 32, 25}, all[] = {6, 48, 31, 46, 0, 32, 25};
    /* separated but for one level between */
    says_no(fit_groups("linear", 4, v, n, e, NULL, "", ""), "separated");
    says_no(fit_groups("logistic", 7, close, many, all, NULL, "", ""), "separated");
    /* two levels leave a walk of order 2 no step to change */
    says_no(fit_groups("ndlm", 4, v, holes, m, ss, ",\"order\":2", ""), "Too few levels");
    says_no(fit_groups("ndlm", 4, v, no_control, m, ss, "", off), "control has no responses");
    says_no(fit_groups("linear", 4, v, no_control, m, ss, "", off), "control has no responses");
}

/* The walk's starting values are estimated too, and AIC counts them (Durbin & Koopman 2012, 7.4).
 */
static void aic_of_a_walk(void)
{
    static const double v[] = {0, 1, 2, 3, 4}, n[] = {9, 9, 9, 9, 9};
    static const double m[] = {1, 4, 2, 6, 3}, ss[] = {8, 8, 8, 8, 8};
    struct fit_case c = fit_groups("ndlm", 5, v, n, m, ss, "", "");
    CU_ASSERT_DOUBLE_EQUAL(c.fit.aic, 2 * 3 - 2 * c.fit.log_likelihood, 1e-12);
    fit_case_release(&c);
}

/* ---- any data ---- */

static double noise(gsl_rng *r)
{
    double sum = -6;
    for (int i = 0; i < 12; i++)
        sum += gsl_rng_uniform(r);
    return sum;
}

enum { LEVELS = 6 };

struct world {
    double v[LEVELS], n[LEVELS], m[LEVELS], ss[LEVELS];
};

/* Flat, steep or straight; single or many responses; empty levels; any scale. */
static void make_world(struct world *w, bool binary, gsl_rng *r)
{
    const double scale = pow(10, 4 * gsl_rng_uniform(r) - 2), size = pow(10, noise(r));
    const double steep = exp(noise(r)), top = gsl_rng_uniform(r) < 0.2 ? 0 : 3 * noise(r);
    const double many = gsl_rng_uniform(r) < 0.3 ? 1 : 25, middle = 5 * gsl_rng_uniform(r);
    for (size_t k = 0; k < LEVELS; k++) {
        const double x = (double)k, rise = x > 0 ? 1 / (1 + pow(middle / x, steep)) : 0;
        w->v[k] = x * scale;
        w->n[k] = gsl_rng_uniform(r) < 0.1 ? 0 : many;
        w->ss[k] = (w->n[k] - 1 > 0 ? w->n[k] - 1 : 0) * size * size * (0.5 + gsl_rng_uniform(r));
        w->m[k] = size * (top * rise + noise(r) / sqrt(many));
        if (binary)
            w->m[k] = floor(w->n[k] / (1 + exp(1 - top * rise)) + 0.99 * gsl_rng_uniform(r));
    }
}

/* Least squares of one column beside an intercept: the residual sum of squares. */
static double rss_of(const struct world *w, const double *x)
{
    double n = 0, mx = 0, my = 0, xx = 0, xy = 0, yy = 0;
    for (size_t k = 0; k < LEVELS; k++) {
        n += w->n[k];
        mx += w->n[k] * x[k];
        my += w->n[k] * w->m[k];
    }
    for (size_t k = 0; k < LEVELS; k++) {
        const double a = x[k] - mx / n, b = w->m[k] - my / n;
        xx += w->n[k] * a * a;
        xy += w->n[k] * a * b;
        yy += w->n[k] * b * b;
    }
    return xx > 0 ? yy - xy * xy / xx : yy;
}

static double within(const struct world *w)
{
    double sum = 0;
    for (size_t k = 0; k < LEVELS; k++)
        sum += w->n[k] > 0 ? w->ss[k] : 0;
    return sum;
}

/* A continuous fit with shape numbers: no random shapes do better, whatever the linear part. */
static void beats_any_shape(const struct fit_case *c, const struct world *w, gsl_rng *r)
{
    const struct model *m = &c->d->model;
    const struct curve_levels at = {.count = LEVELS, .value = w->v};
    double n = 0, value[CURVE_PARAMETERS_MAX] = {0, 1}, theta[LEVELS];
    for (size_t k = 0; k < LEVELS; k++)
        n += w->n[k];
    for (int i = 0; i < 2000; i++) {
        for (size_t j = 2; m->curve->parameters[j].name; j++) {
            const struct parameter *a = &m->curve->parameters[j];
            value[j] = c->fit.row[j].estimate;
            if (a->positive)
                value[j] *= exp(0.5 * noise(r));
            else
                value[j] = w->v[LEVELS - 1] * (2 * gsl_rng_uniform(r) - 0.5);
        }
        curve_mean(m->curve, &at, value, theta);
        const double rss = rss_of(w, theta) + within(w);
        CU_ASSERT(-0.5 * n * (log(2 * M_PI * rss / n) + 1) <= c->fit.log_likelihood + 1e-7);
    }
}

/* Numbers where there is a maximum, none and a sentence where not. */
static void check_numbers(const struct fit_case *c)
{
    if (!c->fit.exists)
        return;
    CU_ASSERT(c->fit.converged == isfinite(c->fit.log_likelihood));
    CU_ASSERT(c->fit.converged == isfinite(c->fit.aic));
    CU_ASSERT((c->fit.message != NULL) == !c->fit.converged);
    for (size_t i = 0; i < c->fit.rows; i++) {
        const struct likelihood_row *row = &c->fit.row[i];
        const bool may_lack = c->d->model.curve->kind == CURVE_FREE; /* theta: the first level's */
        CU_ASSERT(!isinf(row->estimate) && !isinf(row->se) && !(row->se < 0));
        CU_ASSERT(may_lack || c->fit.converged == isfinite(row->estimate));
        CU_ASSERT(isnan(row->se) || (c->fit.converged && isfinite(row->estimate)));
    }
}

static void any_data(void)
{
    static const char *const more[] = {"", ",\"order\":2", ",\"spacing\":\"actual\""};
    gsl_rng *r = gsl_rng_alloc(gsl_rng_mt19937);
    size_t fitted = 0;
    for (int turn = 0; turn < (unit_fast() ? 10 : 60); turn++)
        for (size_t i = 0; curves[i] != NULL; i++)
            for (int kind = 0; kind < (curves[i]->kind == CURVE_WALK ? 6 : 2); kind++) {
                struct world w;
                make_world(&w, kind % 2, r);
                const bool off = gsl_rng_uniform(r) < 0.2;
                struct fit_case c = fit_groups(
                    curves[i]->key, LEVELS, w.v, w.n, w.m, kind % 2 ? NULL : w.ss, more[kind / 2],
                    off ? ",\"control\":\"L0\",\"control_on_curve\":false" : "");
                check_numbers(&c);
                fitted += c.fit.converged;
                if (c.fit.converged && !off && kind == 0 && curves[i]->kind == CURVE_BASIS &&
                    curves[i]->parameters[2].name && curves[i]->parameters[2].role == ROLE_SHAPE)
                    beats_any_shape(&c, &w, r);
                fit_case_release(&c);
            }
    CU_ASSERT(fitted > (unit_fast() ? 60 : 360));
    gsl_rng_free(r);
}

static const struct unit_test tests[] = {
    {"Norris", norris},
    {"Pontius", pontius},
    {"puromycin", puromycin},
    {"Rat42: a ratio", rat42_ratio},
    {"large residuals", large_residuals},
    {"a logit of 0", logit_of_zero},
    {"a hidden rise", hidden_rise},
    {"narrow levels", narrow_levels},
    {"large responses", large_responses},
    {"no maximum", no_maximum},
    {"AIC of a walk", aic_of_a_walk},
    {"any data", any_data},
    UNIT_END,
};

int main(void)
{
    return unit_main("likelihood, hard data", tests);
}
