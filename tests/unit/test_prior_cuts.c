/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_prior_cuts.c: cut priors and the functions behind gamma and Student t, against GSL,
 * numerical integrals and published tables. */
#include <gsl/gsl_cdf.h>
#include <gsl/gsl_integration.h>
#include <gsl/gsl_sf_gamma.h>
#include <math.h>
#include <string.h>

#include "base/base.h"
#include "design/prior.h"
#include "design/special.h"
#include "unit.h"

static const struct cut_case {
    const char *key;
    double arg[PRIOR_ARGS], above, below;
    bool on_variance;
} cases[] = {
    {"normal", {20, 15}, 0, INFINITY, false},
    {"normal", {0, 1}, 8, INFINITY, false},
    {"normal", {0, 1}, -INFINITY, -9, false},
    {"normal", {0, 1}, -0.5, 0.25, false},
    {"normal", {0, 1}, 30, 31, false},
    {"half_normal", {2}, 1e-6, 2e-6, false},
    {"half_normal", {2}, 5, INFINITY, true},
    {"lognormal", {1, 0.5}, 2, 40, false},
    {"gamma", {2, 2}, -INFINITY, 6, false},
    {"gamma", {0.5, 3}, 0.01, 4, true},
    {"inverse_gamma", {2, 10}, 1, INFINITY, true},
    {"inverse_gamma", {0.5, 1}, -INFINITY, 50, false},
    {"uniform", {-10, 10}, -2, 3, false},
    {"student_t", {4, 0, 3}, 0, INFINITY, false},
    {"student_t", {1, 0, 1}, 50, INFINITY, false},
    {"student_t", {2.5, 1, 2}, -30, -4, false},
};

static struct prior make(const struct cut_case *c)
{
    struct prior p = {.family = prior_family_find(c->key),
                      .above = c->above,
                      .below = c->below,
                      .on_variance = c->on_variance};
    memcpy(p.arg, c->arg, sizeof p.arg);
    prior_settle(&p);
    return p;
}

static double density(double x, void *data)
{
    const struct prior *p = data;
    const double log_x = x > 0 ? log(x) : -700;
    double out;
    prior_log_density(p, 1, &x, &log_x, &out);
    return exp(out);
}

struct weighed {
    struct prior p;
    double about;
    int power;
};

static double weighed(double x, void *data)
{
    const struct weighed *w = data;
    struct prior p = w->p;
    return density(x, &p) * pow(x - w->about, w->power);
}

static double integral(double (*f)(double x, void *data), void *data, double low, double high)
{
    gsl_integration_workspace *w = gsl_integration_workspace_alloc(2000);
    gsl_function function = {f, data};
    double value = NAN, error;
    if (isinf(high))
        gsl_integration_qagiu(&function, low, 0, 1e-9, 2000, w, &value, &error);
    else
        gsl_integration_qag(&function, low, high, 0, 1e-9, 2000, GSL_INTEG_GAUSS31, w, &value,
                            &error);
    gsl_integration_workspace_free(w);
    return value;
}

/* The mass up to each quantile, by integrating the density from the lower cut on. */
static void quantiles_hold_their_mass(void)
{
    static const double q[] = {0.01, 0.3, 0.5, 0.9, 0.999};
    for (size_t i = 0; i < COUNT_OF(cases); i++) {
        struct prior p = make(&cases[i]);
        double low, high, before = prior_quantile(&p, 1e-3), mass = 1e-3;
        prior_support(&p, &low, &high);
        CU_ASSERT(before >= low && prior_quantile(&p, 0.999999) <= high);
        for (size_t j = 0; j < COUNT_OF(q); j++) {
            const double x = prior_quantile(&p, q[j]);
            CU_ASSERT_DOUBLE_EQUAL(integral(density, &p, before, x), q[j] - mass, 1e-7);
            before = x;
            mass = q[j];
        }
        if (isfinite(low) && low > 0) { /* nothing outside */
            CU_ASSERT_EQUAL(density(low * 0.999, &p), 0);
            CU_ASSERT(density(low * (1 + 1e-9), &p) > 0);
        }
        if (isfinite(high))
            CU_ASSERT_EQUAL(density(high + 0.001 * fabs(high), &p), 0);
    }
}

static void moments_by_integral(void)
{
    for (size_t i = 0; i < COUNT_OF(cases); i++) {
        struct weighed w = {make(&cases[i]), 0, 1};
        const double mean = prior_mean(&w.p), sd = prior_sd(&w.p);
        double low, high;
        prior_support(&w.p, &low, &high);
        if (!isfinite(low)) /* cut above only: mirror images are tested above */
            low = prior_quantile(&w.p, 1e-14);
        if (isfinite(mean))
            CU_ASSERT_DOUBLE_EQUAL(mean, integral(weighed, &w, low, high), 2e-7 * fabs(mean));
        w.about = mean;
        w.power = 2;
        if (isfinite(sd))
            CU_ASSERT_DOUBLE_EQUAL(sd, sqrt(integral(weighed, &w, low, high)), 3e-6 * sd);
    }
    CU_ASSERT(isnan(prior_mean(&(struct prior){.family = prior_family_find("student_t"),
                                               .arg = {1, 0, 1},
                                               .above = 50,
                                               .below = INFINITY})));
}

static void far_tails(void)
{
    const struct prior p = make(&cases[1]);
    CU_ASSERT_DOUBLE_EQUAL(prior_quantile(&p, 0.5),
                           gsl_cdf_ugaussian_Qinv(0.5 * gsl_cdf_ugaussian_Q(8)), 1e-8);
    CU_ASSERT_DOUBLE_EQUAL(prior_mass(&p), gsl_cdf_ugaussian_Q(8), 1e-8 * gsl_cdf_ugaussian_Q(8));
}

/* ---- the functions behind ---- */

static bool near(double a, double b, double relative)
{
    return fabs(a - b) <= relative * fabs(b);
}

static void gamma_agrees_with_gsl(void)
{
    static const double shapes[] = {0.001, 0.02, 0.5, 1, 3.7, 19.5, 20.5, 300, 1e4};
    static const double tails[] = {1e-250, 1e-30, 1e-9, 1e-3, 0.2, 0.5, 0.8, 0.999, 1 - 1e-9};
    for (double x = 1e-3; x < 1e8; x *= 1.9)
        CU_ASSERT_DOUBLE_EQUAL(special_log_gamma(x), gsl_sf_lngamma(x),
                               2e-14 * fmax(1, fabs(gsl_sf_lngamma(x))));
    for (size_t i = 0; i < COUNT_OF(shapes); i++)
        for (size_t j = 0; j < COUNT_OF(tails); j++)
            for (int upper = 0; upper < 2; upper++) {
                const double a = shapes[i], x = special_gamma_quantile(a, tails[j], upper);
                if (x < 1e-290)
                    continue; /* underflows: the quantile is 0 to all who ask */
                const double p = special_gamma_tail(a, x, upper);
                CU_ASSERT(near(p, tails[j], 1e-10));
                CU_ASSERT(
                    near(p, upper ? gsl_cdf_gamma_Q(x, a, 1) : gsl_cdf_gamma_P(x, a, 1), 1e-11));
            }
}

static void t_agrees_with_gsl(void)
{
    static const double dfs[] = {0.01, 0.5, 1, 2, 4.4, 12, 30}; /* beyond 30 GSL approximates */
    static const double tails[] = {1e-250, 1e-30, 1e-9, 1e-3, 0.2, 0.4999, 0.8, 1 - 1e-9};
    for (size_t i = 0; i < COUNT_OF(dfs); i++)
        for (size_t j = 0; j < COUNT_OF(tails); j++)
            for (int upper = 0; upper < 2; upper++) {
                const double t = special_t_quantile(dfs[i], tails[j], upper);
                if (fabs(t) > 1e140)
                    continue; /* its square is no number any more */
                const double p = special_t_tail(dfs[i], t, upper);
                CU_ASSERT(near(p, tails[j], 1e-10));
                CU_ASSERT(near(p, upper ? gsl_cdf_tdist_Q(t, dfs[i]) : gsl_cdf_tdist_P(t, dfs[i]),
                               1e-11));
            }
    for (double df = 40; df < 1e6; df *= 7) /* towards the normal: A&S 26.7.10, one more term */
        CU_ASSERT(near(special_t_quantile(df, 0.975, false),
                       1.959963984540054 + (pow(1.959963984540054, 3) + 1.959963984540054) / 4 / df,
                       3.5 / df / df));
}

/* Abramowitz & Stegun 1964, Handbook of Mathematical Functions, tables 6.1 (gamma), 26.8
 * (percentage points of chi-square) and 26.10 (of t); from memory. */
static void published_tables(void)
{
    static const struct {
        double df, q, x;
    } chi[] = {{1, 0.05, 3.84146},   {5, 0.05, 11.0705}, {10, 0.05, 18.3070}, {30, 0.05, 43.7729},
               {10, 0.001, 29.5883}, {1, 0.5, 0.454937}, {5, 0.975, 0.831211}};
    static const struct {
        double df, two_sided, t;
    } student[] = {{1, 0.95, 12.706}, {2, 0.95, 4.303},  {5, 0.95, 2.571},
                   {10, 0.95, 2.228}, {30, 0.99, 2.750}, {120, 0.95, 1.980}};
    CU_ASSERT_DOUBLE_EQUAL(exp(special_log_gamma(1.5)), 0.8862269255, 1e-10);
    CU_ASSERT_DOUBLE_EQUAL(exp(special_log_gamma(1.25)), 0.9064024771, 1e-10);
    for (size_t i = 0; i < COUNT_OF(chi); i++)
        CU_ASSERT(near(2 * special_gamma_quantile(chi[i].df / 2, chi[i].q, true), chi[i].x, 3e-6));
    for (size_t i = 0; i < COUNT_OF(student); i++)
        CU_ASSERT_DOUBLE_EQUAL(
            special_t_quantile(student[i].df, 0.5 * (1 - student[i].two_sided), true), student[i].t,
            5.1e-4);
}

static const struct unit_test tests[] = {
    {"quantiles hold their mass", quantiles_hold_their_mass},
    {"moments by numerical integral", moments_by_integral},
    {"cuts far in a tail keep their digits", far_tails},
    {"gamma against GSL", gamma_agrees_with_gsl},
    {"Student t against GSL", t_agrees_with_gsl},
    {"published tables", published_tables},
    UNIT_END,
};

int main(void)
{
    return unit_main("prior cuts", tests);
}
