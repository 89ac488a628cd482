/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_likelihood.c: the likelihood fit against certified and published tables. */
#include <math.h>
#include <string.h>

#include "analysis/vocabulary_rows.h"
#include "base/base.h"
#include "design/fit_table.h"
#include "posterior/likelihood_fit.h"
#include "selfcheck/check_list.h"

/* A table of `fit` without a file. */
static void add_row(struct fit_table *t, double level, double n, double mean, double ss,
                    double events)
{
    struct level_data *x = &t->data.by_level;
    size_t k = t->levels;
    if (k > 0 && t->value[k - 1] == level)
        k--;
    else
        t->value[t->levels++] = level;
    const double before = x->n[k], all = before + n, off = mean - x->mean[k];
    x->n[k] = x->randomized[k] = all;
    x->ss[k] += ss + off * off * before * n / all;
    x->mean[k] += off * n / all;
    x->events[k] += events;
}

static void table_open(struct fit_table *t, bool binary)
{
    *t = (struct fit_table){.binary = binary};
    level_data_init(&t->data.by_level, LEVELS_MAX);
}

/* The fit of a curve, parameters fixed by words NAME=VALUE; closes the table. */
static void fit(struct likelihood_fit *out, struct fit_table *t, const char *curve,
                const char *const *fix, size_t fixes)
{
    const struct fit_request q = {
        .curve = curve, .fix = fix, .fixes = fixes, .higher_is_better = true, .seed = 1};
    struct err e = ERR_INIT;
    struct design *d;
    if (fit_design(&d, t, &q, &terrace_vocabulary, &e) != STATUS_OK)
        BUG("the design of a built-in check is not accepted");
    t->data.by_level.levels = t->levels;
    likelihood_fit_run(out, d, &d->model, &t->data.by_level);
    /* names live as long as the curves do */
    design_free(d);
    level_data_release(&t->data.by_level);
}

static const struct likelihood_row *row_of(const struct likelihood_fit *f, const char *name)
{
    for (size_t i = 0; i < f->rows; i++)
        if (strcmp(f->row[i].name, name) == 0)
            return &f->row[i];
    BUG("a built-in check asks for a parameter that is not there");
}

static void add_estimate(struct check_result *r, const struct likelihood_fit *f, const char *name,
                         double estimate, double se)
{
    const struct likelihood_row *row = row_of(f, name);
    check_add(r, estimate, row->estimate, check_digits(estimate, 6), "%s", name);
    check_add(r, se, row->se, check_digits(se, 6), "standard error of %s", name);
}

/* ---- Rat42 ---- */

static void run_rat42(struct check_result *r, double nudge)
{
    static const double x[] = {9, 14, 21, 28, 42, 57, 63, 70, 79};
    static const double y[] = {8.93, 10.8, 18.59, 22.33, 39.35, 56.11, 61.73, 64.62, 67.08};
    static const char *const fix[] = {"E0=0"};
    struct fit_table t;
    struct likelihood_fit f;
    table_open(&t, false);
    for (size_t i = 0; i < COUNT_OF(x); i++)
        add_row(&t, x[i], 1, y[i] + (i == 4 ? nudge : 0), 0, 0);
    fit(&f, &t, "logistic", fix, 1);
    const struct likelihood_row *spread = row_of(&f, "spread");
    add_estimate(r, &f, "Emax", 72.462237576, 1.7340283401);
    check_add(r, 2.6180768402, row_of(&f, "ED50")->estimate / spread->estimate,
              check_digits(2.6180768402, 6), "b2 = ED50 / spread");
    check_add(r, 0.067359200066, 1 / spread->estimate, check_digits(0.067359200066, 6),
              "b3 = 1 / spread");
    check_add(r, 0.0034465663377, spread->se / (spread->estimate * spread->estimate),
              check_digits(0.0034465663377, 6), "standard error of b3");
    check_add(r, 1.1587725499, row_of(&f, "sd")->estimate, check_digits(1.1587725499, 6),
              "residual sd");
    likelihood_fit_release(&f);
}

const struct check check_rat42 = {
    "rat42",
    "Likelihood fit",
    "NIST Statistical Reference Datasets, nonlinear regression, Rat42 (Ratkowsky 1983, Nonlinear "
    "Regression Modeling, pp. 61 and 88): certified values (recalled, and reproduced to 8e-10)",
    "y = b1 / (1 + exp(b2 - b3 x)) as curve logistic with E0 = 0, Emax = b1, ED50 = b2 / b3, "
    "spread = "
    "1 / b3; six significant digits.",
    run_rat42,
    true};

/* ---- five dose means ---- */

static void run_five_doses(struct check_result *r, double nudge)
{
    static const double dose[] = {0, 0.05, 0.2, 0.6, 1};
    static const double mean[] = {0.34491, 0.45675, 0.81032, 0.93444, 0.94869};
    struct fit_table t;
    struct likelihood_fit f;
    table_open(&t, false);
    for (size_t i = 0; i < COUNT_OF(dose); i++)
        add_row(&t, dose[i], 20, mean[i] + (i == 2 ? nudge : 0), 19, 0);
    fit(&f, &t, "emax", NULL, 0);
    const double sd = row_of(&f, "sd")->estimate;
    for (size_t i = 0; i < f.rows; i++)
        f.row[i].se /= sd;
    add_estimate(r, &f, "E0", 0.32161254, 0.2154333576);
    add_estimate(r, &f, "Emax", 0.7462807255, 0.3339143894);
    add_estimate(r, &f, "ED50", 0.1421812056, 0.255573174);
    likelihood_fit_release(&f);
}

const struct check check_five_doses = {
    "five_dose_means",
    "Likelihood fit",
    "Bretz, Pinheiro & Branson 2005, Biometrics 61:738: five dose means (from memory), 20 subjects "
    "each; least squares with the Emax curve",
    "Standard errors per unit residual sd; six significant digits.",
    run_five_doses,
    true};

/* ---- ryegrass ---- */

static void run_ryegrass(struct check_result *r, double nudge)
{
    static const double x[] = {0,    0,    0,    0,   0,   0,   0.94, 0.94, 0.94, 1.88, 1.88, 1.88,
                               3.75, 3.75, 3.75, 7.5, 7.5, 7.5, 15,   15,   15,   30,   30,   30};
    static const double y[] = {7.58,      8,         8.3285714, 7.25,      7.375,     7.9625,
                               8.3555556, 6.9142857, 7.75,      6.8714286, 6.45,      5.9222222,
                               1.925,     2.8857143, 4.2333333, 1.1875,    0.8571429, 1.0571429,
                               0.6875,    0.525,     0.825,     0.25,      0.22,      0.44};
    struct fit_table t;
    struct likelihood_fit f;
    table_open(&t, false);
    for (size_t i = 0; i < COUNT_OF(x); i++)
        add_row(&t, x[i], 1, y[i] + (i == 12 ? nudge : 0), 0, 0);
    fit(&f, &t, "sigmoid_emax", NULL, 0);
    add_estimate(r, &f, "h", 2.982228666, 0.4584288182);
    add_estimate(r, &f, "ED50", 3.057955167, 0.1858289038);
    add_estimate(r, &f, "E0", 7.792962328, 0.1897332604);
    check_add(r, 0.4814099511, row_of(&f, "E0")->estimate + row_of(&f, "Emax")->estimate,
              check_digits(0.4814099511, 6), "lower limit E0 + Emax");
    likelihood_fit_release(&f);
}

const struct check check_ryegrass = {
    "ryegrass",
    "Likelihood fit",
    "Inderjit, Streibig & Olofsdotter 2002, Physiologia Plantarum 114:422: root length of "
    "perennial "
    "ryegrass against ferulic acid (data from memory; the published estimates are met to 1e-5)",
    "Sigmoid Emax, falling; standard errors from the expected information; six significant digits.",
    run_ryegrass,
    true};

/* ---- beetles ---- */

static void run_beetles(struct check_result *r, double nudge)
{
    static const double x[] = {1.6907, 1.7242, 1.7552, 1.7842, 1.8113, 1.8369, 1.861, 1.8839};
    static const double n[] = {59, 60, 62, 56, 63, 59, 62, 60};
    static const double killed[] = {6, 13, 18, 28, 52, 53, 61, 60};
    struct fit_table t;
    struct likelihood_fit f;
    table_open(&t, true);
    for (size_t i = 0; i < COUNT_OF(x); i++)
        add_row(&t, x[i], n[i], 0, 0, killed[i] + (i == 3 && nudge != 0 ? 1 : 0));
    fit(&f, &t, "linear", NULL, 0);
    add_estimate(r, &f, "E0", -60.71745456, 5.180711463);
    add_estimate(r, &f, "slope", 34.27032573, 2.912140071);
    check_add(r, -18.71513466, f.log_likelihood, 5e-7, "log likelihood");
    likelihood_fit_release(&f);
}

const struct check check_beetles = {
    "beetles",
    "Likelihood fit",
    "Bliss 1935, Annals of Applied Biology 22:134: beetles killed; linear logit in log dose (also "
    "Dobson, An Introduction to Generalized Linear Models)",
    "Binomial likelihood with its coefficient; six significant digits.",
    run_beetles,
    true};

/* ---- Nile ---- */

static void run_nile(struct check_result *r, double nudge)
{
    static const double flow[] = {
        1120, 1160, 963, 1210, 1160, 1160, 813,  1230, 1370, 1140, 995,  935,  1110, 994,  1020,
        960,  1180, 799, 958,  1140, 1100, 1210, 1150, 1250, 1260, 1220, 1030, 1100, 774,  840,
        874,  694,  940, 833,  701,  916,  692,  1020, 1050, 969,  831,  726,  456,  824,  702,
        1120, 1100, 832, 764,  821,  768,  845,  864,  862,  698,  845,  744,  796,  1040, 759,
        781,  865,  845, 944,  984,  897,  822,  1010, 771,  676,  649,  846,  812,  742,  801,
        1040, 860,  874, 848,  890,  744,  749,  838,  1050, 918,  986,  797,  923,  975,  815,
        1020, 906,  901, 1170, 912,  746,  919,  718,  714,  740};
    struct fit_table t;
    struct likelihood_fit f;
    table_open(&t, false);
    for (size_t i = 0; i < COUNT_OF(flow); i++)
        add_row(&t, 1871 + (double)i, 1, flow[i] + (i == 50 ? nudge : 0), 0, 0);
    fit(&f, &t, "ndlm", NULL, 0);
    check_add(r, 1469.1, row_of(&f, "drift_variance")->estimate, 0.1, "level variance, published");
    check_add(r, 15098.5, row_of(&f, "variance")->estimate, 0.1, "residual variance, published");
    check_add(r, 1469.176367, row_of(&f, "drift_variance")->estimate, check_digits(1469.176367, 6),
              "level variance, exact diffuse filter");
    check_add(r, 15098.51831, row_of(&f, "variance")->estimate, check_digits(15098.51831, 6),
              "residual variance, exact diffuse filter");
    check_add(r, -632.5456251, f.log_likelihood, 5e-6, "log likelihood");
    check_add(r, 1111.668679, f.response[0], check_digits(1111.668679, 6), "smoothed level, 1871");
    check_add(r, 63.49938866, row_of(&f, "theta")->se, check_digits(63.49938866, 6),
              "its standard error");
    check_add(r, 834.7629519, f.response[49], check_digits(834.7629519, 6), "smoothed level, 1920");
    check_add(r, 798.3672931, f.response[99], check_digits(798.3672931, 6), "smoothed level, 1970");
    likelihood_fit_release(&f);
}

const struct check check_nile = {
    "nile",
    "Likelihood fit",
    "Annual flow of the Nile 1871 to 1970 (Cobb 1978, Biometrika 65:243), local level model: "
    "Durbin & "
    "Koopman 2012, Time Series Analysis by State Space Methods, ch. 2; further digits by an exact "
    "diffuse filter",
    "A random walk over 100 levels with a flat start; the digits of the book, then six.",
    run_nile,
    true};
