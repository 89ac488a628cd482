/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_likelihood.c: published least-squares and likelihood tables, and what every maximum must be:
 * no neighbour is better, no random point is. */
#include <gsl/gsl_math.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "analysis/vocabulary_rows.h"
#include "base/base.h"
#include "base/mem.h"
#include "base/text.h"
#include "posterior/likelihood_fit.h"
#include "unit.h"

/* ---- a design and data from rows ---- */

struct table {
    size_t levels;
    double value[LEVELS_MAX], n[LEVELS_MAX], mean[LEVELS_MAX], ss[LEVELS_MAX], events[LEVELS_MAX];
};

static struct design *design_of(const struct table *t, bool binary, const char *model,
                                const char *levels)
{
    struct text s = TEXT_INIT;
    struct err e = ERR_INIT;
    struct design *d = NULL;
    text_addf(&s, "{\"terrace\":1,\"title\":\"t\",\"levels\":{%s\"list\":[", levels);
    for (size_t k = 0; k < t->levels; k++)
        text_addf(&s, "%s{\"label\":\"L%zu\",\"value\":%.10g}", k ? "," : "", k, t->value[k]);
    text_addf(&s,
              "]},\"endpoint\":{\"name\":\"y\",\"type\":\"%s\",\"better\":\"higher\"%s},"
              "\"model\":%s,\"subjects\":100}",
              binary ? "binary" : "continuous", binary ? "" : ",\"range\":[-100,100]", model);
    if (design_parse(&d, text_s(&s), s.length, "test", &terrace_vocabulary, &e) != STATUS_OK) {
        struct text m = TEXT_INIT;
        err_text(&e, &m);
        fputs(text_s(&m), stderr);
        text_release(&m);
        CU_FAIL_FATAL("the test's design is not accepted");
    }
    text_release(&s);
    return d;
}

static struct level_data data_of(struct table *t)
{
    return (struct level_data){t->levels, t->n, t->n, t->mean, t->ss, t->events};
}

static struct likelihood_fit fit_of(struct table *t, bool binary, const char *model)
{
    struct design *d = design_of(t, binary, model, "");
    const struct level_data x = data_of(t);
    struct likelihood_fit f;
    likelihood_fit_run(&f, d, &d->model, &x);
    for (size_t i = 0; i < f.rows; i++) { /* names must outlive the design: they are literals */
        CU_ASSERT(f.row[i].name != NULL);
    }
    design_free(d);
    return f;
}

static const struct likelihood_row *row_of(const struct likelihood_fit *f, const char *name)
{
    static const struct likelihood_row none = {"", NAN, NAN};
    for (size_t i = 0; i < f->rows; i++)
        if (strcmp(f->row[i].name, name) == 0)
            return &f->row[i];
    CU_FAIL("no such row");
    return &none;
}

static double estimate(const struct likelihood_fit *f, const char *name)
{
    return row_of(f, name)->estimate;
}

static double error(const struct likelihood_fit *f, const char *name)
{
    return row_of(f, name)->se;
}

/* agreement to so many significant digits */
#define CLOSE(a, b, digits) \
    CU_ASSERT_DOUBLE_EQUAL(a, b, 0.51 * pow(10, 1 - (digits)) * fabs((double)(b)))

/* one response a row: sums by level */
static void table_of_rows(struct table *t, const double *x, const double *y, size_t rows)
{
    *t = (struct table){0};
    for (size_t i = 0; i < rows; i++) {
        size_t k = t->levels;
        if (k > 0 && t->value[k - 1] == x[i])
            k--;
        else
            t->value[t->levels++] = x[i];
        const double off = y[i] - t->mean[k];
        t->n[k] += 1;
        t->mean[k] += off / t->n[k];
        t->ss[k] += off * (y[i] - t->mean[k]);
    }
}

/* ---- published tables ---- */

/* NIST StRD nonlinear regression, Rat42 (Ratkowsky 1983, Nonlinear Regression Modeling, pp. 61,
 * 88), certified: y = b1 / (1 + exp(b2 - b3 x)). Here E0 = 0, Emax = b1, ED50 = b2 / b3, spread = 1
 * / b3; se(spread) = se(b3) / b3^2 (the information is that of the same model in other
 * coordinates). */
static void rat42(void)
{
    static const double x[] = {9, 14, 21, 28, 42, 57, 63, 70, 79};
    static const double y[] = {8.93, 10.8, 18.59, 22.33, 39.35, 56.11, 61.73, 64.62, 67.08};
    const double b2 = 2.6180768402, b3 = 0.067359200066, se3 = 0.0034465663377;
    struct table t;
    table_of_rows(&t, x, y, 9);
    struct likelihood_fit f =
        fit_of(&t, false, "{\"curve\":\"logistic\",\"priors\":{\"E0\":{\"fixed\":{\"value\":0}}}}");
    CU_ASSERT_FATAL(f.converged);
    CLOSE(estimate(&f, "Emax"), 72.462237576, 8);
    CLOSE(error(&f, "Emax"), 1.7340283401, 7);
    CLOSE(estimate(&f, "ED50") / estimate(&f, "spread"), b2, 8);
    CLOSE(1 / estimate(&f, "spread"), b3, 8);
    CLOSE(error(&f, "spread"), se3 / (b3 * b3), 7);
    CLOSE(estimate(&f, "sd"), 1.1587725499, 8);
    CU_ASSERT_EQUAL(estimate(&f, "E0"), 0);
    CU_ASSERT(isnan(error(&f, "E0")));
    likelihood_fit_release(&f);
}

/* Five dose means, n = 20 each (Bretz, Pinheiro & Branson 2005, Biometrics 61:738; means from
 * memory), least squares with the Emax curve; standard errors per unit residual sd. */
static void five_dose_means(void)
{
    struct table t = {5,
                      {0, 0.05, 0.2, 0.6, 1},
                      {20, 20, 20, 20, 20},
                      {0.34491, 0.45675, 0.81032, 0.93444, 0.94869},
                      {19, 19, 19, 19, 19},
                      {0}};
    struct likelihood_fit f = fit_of(&t, false, "{\"curve\":\"emax\"}");
    const double sd = estimate(&f, "sd");
    CLOSE(estimate(&f, "E0"), 0.32161254, 7);
    CLOSE(estimate(&f, "Emax"), 0.7462807255, 7);
    CLOSE(estimate(&f, "ED50"), 0.1421812056, 7);
    CLOSE(error(&f, "E0") / sd, 0.2154333576, 7);
    CLOSE(error(&f, "Emax") / sd, 0.3339143894, 7);
    CLOSE(error(&f, "ED50") / sd, 0.255573174, 7);
    CLOSE(sd * sd * 97, 95 + 0.1513398906, 8);
    likelihood_fit_release(&f);
}

/* Root length of perennial ryegrass against ferulic acid (mM): Inderjit, Streibig & Olofsdotter
 * 2002, Physiologia Plantarum 114:422; data from memory, accepted because the published estimates
 * come out. */
static void ryegrass(void)
{
    static const double x[] = {0,    0,    0,    0,   0,   0,   0.94, 0.94, 0.94, 1.88, 1.88, 1.88,
                               3.75, 3.75, 3.75, 7.5, 7.5, 7.5, 15,   15,   15,   30,   30,   30};
    static const double y[] = {7.58,      8,         8.3285714, 7.25,      7.375,     7.9625,
                               8.3555556, 6.9142857, 7.75,      6.8714286, 6.45,      5.9222222,
                               1.925,     2.8857143, 4.2333333, 1.1875,    0.8571429, 1.0571429,
                               0.6875,    0.525,     0.825,     0.25,      0.22,      0.44};
    struct table t;
    table_of_rows(&t, x, y, 24);
    struct likelihood_fit f = fit_of(&t, false, "{\"curve\":\"sigmoid_emax\"}");
    CLOSE(estimate(&f, "h"), 2.982228666, 7);
    CLOSE(estimate(&f, "E0"), 7.792962328, 7);
    CLOSE(estimate(&f, "E0") + estimate(&f, "Emax"), 0.4814099511, 7);
    CLOSE(estimate(&f, "ED50"), 3.057955167, 7);
    CLOSE(error(&f, "h"), 0.4584288182, 6);
    CLOSE(error(&f, "E0"), 0.1897332604, 6);
    CLOSE(error(&f, "ED50"), 0.1858289038, 6);
    likelihood_fit_release(&f);
}

/* Bliss 1935, Annals of Applied Biology 22:134: beetles killed, linear logit in log dose. */
static void beetles(void)
{
    struct table t = {8,
                      {1.6907, 1.7242, 1.7552, 1.7842, 1.8113, 1.8369, 1.861, 1.8839},
                      {59, 60, 62, 56, 63, 59, 62, 60},
                      {0},
                      {0},
                      {6, 13, 18, 28, 52, 53, 61, 60}};
    struct likelihood_fit f = fit_of(&t, true, "{\"curve\":\"linear\"}");
    CLOSE(estimate(&f, "E0"), -60.71745456, 7);
    CLOSE(estimate(&f, "slope"), 34.27032573, 7);
    CLOSE(error(&f, "E0"), 5.180711463, 6);
    CLOSE(error(&f, "slope"), 2.912140071, 6);
    CLOSE(f.log_likelihood, -18.71513466, 8);
    CLOSE(f.aic, 4 + 2 * 18.71513466, 8);
    likelihood_fit_release(&f);
}

/* Annual flow of the Nile, 1871 to 1970 (Cobb 1978, Biometrika 65:243), local level model (Durbin &
 * Koopman 2012, Time Series Analysis by State Space Methods, ch. 2: 1469.1 and 15098.5); log
 * likelihood and smoothed levels of an exact diffuse filter. */
static void nile(void)
{
    static const double flow[] = {
        1120, 1160, 963, 1210, 1160, 1160, 813,  1230, 1370, 1140, 995,  935,  1110, 994,  1020,
        960,  1180, 799, 958,  1140, 1100, 1210, 1150, 1250, 1260, 1220, 1030, 1100, 774,  840,
        874,  694,  940, 833,  701,  916,  692,  1020, 1050, 969,  831,  726,  456,  824,  702,
        1120, 1100, 832, 764,  821,  768,  845,  864,  862,  698,  845,  744,  796,  1040, 759,
        781,  865,  845, 944,  984,  897,  822,  1010, 771,  676,  649,  846,  812,  742,  801,
        1040, 860,  874, 848,  890,  744,  749,  838,  1050, 918,  986,  797,  923,  975,  815,
        1020, 906,  901, 1170, 912,  746,  919,  718,  714,  740};
    struct table t = {.levels = 100};
    for (size_t k = 0; k < 100; k++) {
        t.value[k] = 1871 + (double)k;
        t.n[k] = 1;
        t.mean[k] = flow[k];
    }
    struct likelihood_fit f = fit_of(&t, false, "{\"curve\":\"ndlm\"}");
    CU_ASSERT_FATAL(f.converged);
    CLOSE(estimate(&f, "drift_variance"), 1469.176367, 7);
    CLOSE(estimate(&f, "variance"), 15098.51831, 7);
    CLOSE(f.log_likelihood, -632.5456251, 9);
    CLOSE(estimate(&f, "theta"), 1111.668679, 8);
    CLOSE(error(&f, "theta"), 63.49938866, 7);
    CLOSE(f.response[19], 1073.093134, 8);
    CLOSE(f.response[28], 950.9286856, 8);
    CLOSE(f.response[99], 798.3672931, 8);
    CU_ASSERT(error(&f, "drift_variance") > 0 && error(&f, "variance") > 0);
    likelihood_fit_release(&f);
}

/* By hand: y = 1, 3, 2, 5 at 0, 1, 2, 3: slope 1.1, E0 1.1, RSS 2.7, se(slope) = sqrt(1.35 / 5). */
static void straight_line_by_hand(void)
{
    static const double x[] = {0, 1, 2, 3}, y[] = {1, 3, 2, 5};
    struct table t;
    table_of_rows(&t, x, y, 4);
    struct likelihood_fit f = fit_of(&t, false, "{\"curve\":\"linear\"}");
    CLOSE(estimate(&f, "slope"), 1.1, 12);
    CLOSE(estimate(&f, "E0"), 1.1, 12);
    CLOSE(estimate(&f, "sd"), sqrt(1.35), 12);
    CLOSE(error(&f, "slope"), sqrt(1.35 / 5), 12);
    CLOSE(error(&f, "E0"), sqrt(1.35 * (0.25 + 2.25 / 5)), 12);
    CLOSE(f.log_likelihood, -2 * (log(2 * M_PI) + log(2.7 / 4) + 1), 12);
    likelihood_fit_release(&f);
}

/* ---- any curve: no point is better ---- */

static double theta_at(const struct model *m, const struct curve_levels *at, const double *value,
                       size_t k)
{
    double theta[LEVELS_MAX];
    curve_mean(m->curve, at, value, theta);
    return theta[k];
}

/* what is maximised, from the definition */
static double criterion(const struct design *d, const struct table *t, const double *value)
{
    double places[LEVELS_MAX], sum = 0;
    const struct curve_levels at = design_curve_levels(d, &d->model, places);
    for (size_t k = 0; k < t->levels; k++) {
        const double m = theta_at(&d->model, &at, value, k);
        if (d->type == ENDPOINT_BINARY)
            sum += t->events[k] * m - t->n[k] * log1p(exp(m));
        else
            sum -= t->n[k] * pow(t->mean[k] - m, 2);
    }
    return sum;
}

static void make_data(struct table *t, gsl_rng *r, bool binary)
{
    static const double dose[] = {0, 2, 5, 10, 20, 40, 60};
    *t = (struct table){.levels = 7};
    for (size_t k = 0; k < 7; k++) {
        const double shape = pow(dose[k], 1.5) / (pow(12, 1.5) + pow(dose[k], 1.5));
        t->value[k] = dose[k];
        t->n[k] = 30;
        t->mean[k] = 1 + 4 * shape + 0.3 * (gsl_rng_uniform(r) - 0.5);
        t->ss[k] = 29;
        t->events[k] = binary ? floor(30 * (0.15 + 0.6 * shape) + 3 * gsl_rng_uniform(r)) : 0;
    }
}

static void beats_all(const char *key, bool binary, gsl_rng *r)
{
    struct table t;
    struct text model = TEXT_INIT;
    make_data(&t, r, binary);
    text_addf(&model, "{\"curve\":\"%s\"}", key);
    struct design *d = design_of(&t, binary, text_s(&model), "");
    const struct level_data x = data_of(&t);
    struct likelihood_fit f;
    likelihood_fit_run(&f, d, &d->model, &x);
    if (f.converged) {
        double value[CURVE_PARAMETERS_MAX] = {0}, other[CURVE_PARAMETERS_MAX];
        size_t p = 0;
        for (const struct parameter *a = d->model.curve->parameters; a->name; a++, p++)
            value[p] = f.row[p].estimate;
        const double top = criterion(d, &t, value);
        for (size_t i = 0; i < p; i++) { /* the slope is 0 in units of the standard error */
            memcpy(other, value, sizeof other);
            other[i] += 1e-4 * f.row[i].se;
            const double up = criterion(d, &t, other);
            other[i] -= 2e-4 * f.row[i].se;
            const double down = criterion(d, &t, other);
            CU_ASSERT(top >= up - 1e-12 * fabs(top) && top >= down - 1e-12 * fabs(top));
            CU_ASSERT(fabs(up - down) < 1e-3 * (2 * top - up - down) + 1e-9 * fabs(top));
        }
        for (int k = 0; k < 3000; k++) {
            for (size_t i = 0; i < p; i++)
                other[i] = value[i] + f.row[i].se * 6 * (gsl_rng_uniform(r) - 0.5);
            const double v = criterion(d, &t, other);
            CU_ASSERT(!(v > top));
        }
        double response;
        CU_ASSERT(likelihood_fit_at(&f, d, &d->model, t.value[3], &response));
        CU_ASSERT_DOUBLE_EQUAL(response, f.response[3], 1e-9);
    } else {
        CU_ASSERT(f.message != NULL && isnan(f.row[0].estimate) && isnan(f.log_likelihood));
    }
    likelihood_fit_release(&f);
    design_free(d);
    text_release(&model);
}

static void no_point_is_better(void)
{
    gsl_rng *r = gsl_rng_alloc(gsl_rng_mt19937);
    for (size_t i = 0; curves[i] != NULL; i++)
        for (int binary = 0; binary < 2 && curves[i]->kind == CURVE_BASIS; binary++)
            for (int k = 0; k < (unit_fast() ? 2 : 6); k++)
                beats_all(curves[i]->key, binary, r);
    gsl_rng_free(r);
}

/* ---- special cases ---- */

static void control_of_its_own(void)
{
    struct table t = {4, {0, 1, 2, 3}, {10, 10, 10, 10}, {5, 1, 2, 3.5}, {9, 9, 9, 9}, {0}};
    struct design *d = design_of(&t, false, "{\"curve\":\"linear\"}",
                                 "\"control\":\"L0\",\"control_on_curve\":false,");
    const struct level_data x = data_of(&t);
    struct likelihood_fit f;
    likelihood_fit_run(&f, d, &d->model, &x);
    CLOSE(estimate(&f, "slope"), 1.25, 10); /* of 1, 2, 3.5 */
    CLOSE(estimate(&f, "control"), 5, 12);
    CLOSE(error(&f, "control"), estimate(&f, "sd") / sqrt(10), 10);
    CLOSE(f.response[0], 5, 12);
    likelihood_fit_release(&f);
    design_free(d);
}

static void known_sd(void)
{
    struct table t = {3, {0, 1, 2}, {4, 4, 4}, {1, 2, 4}, {0, 0, 0}, {0}};
    struct likelihood_fit f =
        fit_of(&t, false, "{\"curve\":\"linear\",\"priors\":{\"sd\":{\"fixed\":{\"value\":2}}}}");
    CU_ASSERT(f.converged);
    CLOSE(error(&f, "slope"), 2 / sqrt(8), 10);
    CU_ASSERT(isnan(error(&f, "sd")) && estimate(&f, "sd") == 2);
    CLOSE(f.aic, 4 - 2 * f.log_likelihood, 12); /* sd is not counted */
    likelihood_fit_release(&f);
}

static void each_level_alone(void)
{
    struct table t = {2, {0, 1}, {10, 10}, {1, 3}, {18, 18}, {0}};
    struct likelihood_fit f = fit_of(&t, false, "{\"curve\":\"independent\"}");
    CLOSE(estimate(&f, "theta"), 1, 12);
    CLOSE(error(&f, "theta"), sqrt(2.0 / 10), 10);
    CLOSE(f.log_likelihood, -10 * (log(2 * M_PI) + log(36.0 / 20) + 1), 10);
    likelihood_fit_release(&f);
}

/* Where there is no maximum, a sentence and no number. */
static void says_no(struct table *t, bool binary, const char *model, const char *word)
{
    struct likelihood_fit f = fit_of(t, binary, model);
    CU_ASSERT(f.exists && !f.converged);
    CU_ASSERT(f.message != NULL && strstr(f.message, word) != NULL);
    if (f.message && !strstr(f.message, word))
        fprintf(stderr, "%s %s: %s\n", model, word, f.message);
    for (size_t i = 0; i < f.rows; i++)
        CU_ASSERT(isnan(f.row[i].estimate) && isnan(f.row[i].se));
    CU_ASSERT(isnan(f.log_likelihood) && isnan(f.aic));
    likelihood_fit_release(&f);
}

static void where_there_is_none(void)
{
    struct table two = {2, {0, 1}, {9, 9}, {1, 2}, {8, 8}, {0}};
    struct table single = {3, {0, 1, 2}, {1, 1, 1}, {1, 2, 2.5}, {0}, {0}};
    struct table exact = {4, {0, 1, 2, 3}, {2, 2, 2, 2}, {1, 2, 3, 4}, {0}, {0}};
    struct table straight = {
        4, {0, 10, 20, 30}, {20, 20, 20, 20}, {0, 1, 2, 3.2}, {19, 19, 19, 19}, {0}};
    struct table split = {4, {0, 1, 2, 3}, {9, 9, 9, 9}, {0}, {0}, {0, 0, 9, 9}};
    struct table none = {4, {0, 1, 2, 3}, {9, 9, 9, 9}, {0}, {0}, {0, 0, 0, 0}};
    says_no(&two, false, "{\"curve\":\"emax\"}", "Fewer levels");
    says_no(&single, false, "{\"curve\":\"quadratic\"}", "Too few responses");
    says_no(&exact, false, "{\"curve\":\"linear\"}", "exactly");
    says_no(&straight, false, "{\"curve\":\"emax\"}", "ED50 runs off");
    says_no(&split, true, "{\"curve\":\"linear\"}", "separated");
    says_no(&none, true, "{\"curve\":\"linear\"}", "separated");
    struct likelihood_fit f = fit_of(&split, true, "{\"curve\":\"ndlm\"}");
    CU_ASSERT(!f.exists);
    likelihood_fit_release(&f);
}

/* A walk without drift is a common mean; order 2 without drift a straight line. */
static void walks_without_drift(void)
{
    struct table t = {4, {0, 1, 2, 3}, {5, 5, 5, 5}, {1, 2, 3, 4}, {40, 40, 40, 40}, {0}};
    struct likelihood_fit f = fit_of(
        &t, false,
        "{\"curve\":\"ndlm\",\"order\":2,\"priors\":{\"drift_sd\":{\"fixed\":{\"value\":0}}}}");
    CU_ASSERT_FATAL(f.converged);
    CLOSE(estimate(&f, "theta"), 1, 9);
    CLOSE(estimate(&f, "slope"), 1, 9);
    CLOSE(estimate(&f, "variance"), 160.0 / 18, 9); /* 16 within, 2 beyond the line */
    likelihood_fit_release(&f);
    f = fit_of(&t, false,
               "{\"curve\":\"ndlm\",\"priors\":{\"drift_sd\":{\"fixed\":{\"value\":0}}}}");
    CLOSE(estimate(&f, "theta"), 2.5, 9);
    CLOSE(f.response[3], 2.5, 9);
    likelihood_fit_release(&f);
}

static const struct unit_test tests[] = {
    {"Rat42", rat42},
    {"five dose means", five_dose_means},
    {"ryegrass", ryegrass},
    {"beetles", beetles},
    {"Nile", nile},
    {"a straight line by hand", straight_line_by_hand},
    {"no point is better", no_point_is_better},
    {"a control of its own", control_of_its_own},
    {"a known sd", known_sd},
    {"each level alone", each_level_alone},
    {"where there is no maximum", where_there_is_none},
    {"walks without drift", walks_without_drift},
    UNIT_END,
};

int main(void)
{
    return unit_main("likelihood", tests);
}
