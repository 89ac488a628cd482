/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_prior.c: every family of priors against GSL, closed forms and numerical integrals. */
#include <gsl/gsl_cdf.h>
#include <gsl/gsl_integration.h>
#include <gsl/gsl_math.h>
#include <gsl/gsl_randist.h>
#include <math.h>
#include <string.h>

#include "base/base.h"
#include "design/prior.h"
#include "unit.h"

enum { POINTS = 203, WORKSPACE = 1000 }; /* points: no multiple of any block or lane */

/* A family with numbers, and what GSL says of it. */
struct known {
    const char *key;
    double arg[PRIOR_ARGS];
    double (*pdf)(double x, const double *arg);
    double (*cdf)(double x, const double *arg);
    double (*quantile)(double p, const double *arg);
};

static double normal_pdf(double x, const double *a)
{
    return gsl_ran_gaussian_pdf(x - a[0], a[1]);
}

static double normal_cdf(double x, const double *a)
{
    return gsl_cdf_gaussian_P(x - a[0], a[1]);
}

static double normal_quantile(double p, const double *a)
{
    return a[0] + gsl_cdf_gaussian_Pinv(p, a[1]);
}

static double half_normal_pdf(double x, const double *a)
{
    return x < 0 ? 0 : 2 * gsl_ran_gaussian_pdf(x, a[0]);
}

static double half_normal_cdf(double x, const double *a)
{
    return x < 0 ? 0 : gsl_cdf_chisq_P(x * x / (a[0] * a[0]), 1); /* x^2 / sd^2 is chi-squared */
}

static double half_normal_quantile(double p, const double *a)
{
    return a[0] * sqrt(gsl_cdf_chisq_Pinv(p, 1));
}

static double lognormal_pdf(double x, const double *a)
{
    return gsl_ran_lognormal_pdf(x, a[0], a[1]);
}

static double lognormal_cdf(double x, const double *a)
{
    return x <= 0 ? 0 : gsl_cdf_lognormal_P(x, a[0], a[1]);
}

static double lognormal_quantile(double p, const double *a)
{
    return gsl_cdf_lognormal_Pinv(p, a[0], a[1]);
}

static double uniform_pdf(double x, const double *a)
{
    return x < a[0] || x > a[1] ? 0 : 1 / (a[1] - a[0]);
}

static double uniform_cdf(double x, const double *a)
{
    return gsl_cdf_flat_P(x, a[0], a[1]);
}

static double uniform_quantile(double p, const double *a)
{
    return gsl_cdf_flat_Pinv(p, a[0], a[1]);
}

static double gamma_pdf(double x, const double *a)
{
    return gsl_ran_gamma_pdf(x, a[0], 1 / a[1]);
}

static double inverse_gamma_pdf(double x, const double *a)
{
    return x <= 0 ? 0 : gsl_ran_gamma_pdf(1 / x, a[0], 1 / a[1]) / (x * x);
}

static double student_t_pdf(double x, const double *a)
{
    return gsl_ran_tdist_pdf((x - a[1]) / a[2], a[0]) / a[2];
}

static double gamma_cdf(double x, const double *a)
{
    return x <= 0 ? 0 : gsl_cdf_gamma_P(x, a[0], 1 / a[1]);
}

static double gamma_quantile(double p, const double *a)
{
    return gsl_cdf_gamma_Pinv(p, a[0], 1 / a[1]);
}

static double inverse_gamma_cdf(double x, const double *a)
{
    return x <= 0 ? 0 : gsl_cdf_gamma_Q(1 / x, a[0], 1 / a[1]);
}

static double inverse_gamma_quantile(double p, const double *a)
{
    return 1 / gsl_cdf_gamma_Qinv(p, a[0], 1 / a[1]);
}

static double student_t_cdf(double x, const double *a)
{
    return gsl_cdf_tdist_P((x - a[1]) / a[2], a[0]);
}

static double student_t_quantile(double p, const double *a)
{
    return a[1] + a[2] * gsl_cdf_tdist_Pinv(p, a[0]);
}

static const struct known known[] = {
    {"normal", {-1.5, 2.25}, normal_pdf, normal_cdf, normal_quantile},
    {"normal", {3e4, 1e-3}, normal_pdf, normal_cdf, normal_quantile},
    {"half_normal", {4}, half_normal_pdf, half_normal_cdf, half_normal_quantile},
    {"half_normal", {0.03}, half_normal_pdf, half_normal_cdf, half_normal_quantile},
    {"lognormal", {2.996, 1}, lognormal_pdf, lognormal_cdf, lognormal_quantile},
    {"lognormal", {-4, 0.2}, lognormal_pdf, lognormal_cdf, lognormal_quantile},
    {"uniform", {0.5, 12}, uniform_pdf, uniform_cdf, uniform_quantile},
    {"uniform", {-7, -2}, uniform_pdf, uniform_cdf, uniform_quantile},
    {"gamma", {2.5, 0.8}, gamma_pdf, gamma_cdf, gamma_quantile},
    {"gamma", {0.4, 3}, gamma_pdf, gamma_cdf, gamma_quantile},
    {"inverse_gamma", {4.5, 3}, inverse_gamma_pdf, inverse_gamma_cdf, inverse_gamma_quantile},
    {"inverse_gamma", {0.7, 20}, inverse_gamma_pdf, inverse_gamma_cdf, inverse_gamma_quantile},
    {"student_t", {7, -2, 1.5}, student_t_pdf, student_t_cdf, student_t_quantile},
    {"student_t", {1, 5, 0.1}, student_t_pdf, student_t_cdf, student_t_quantile},
};

static struct prior make(const char *key, const double *arg)
{
    struct prior p = {.family = prior_family_find(key), .above = -INFINITY, .below = INFINITY};

    memcpy(p.arg, arg, sizeof p.arg);
    return p;
}

static double log_density_at(const struct prior *p, double x)
{
    const double log_x = log(x);
    double out;

    prior_log_density(p, 1, &x, &log_x, &out);
    return out;
}

static bool near(double a, double b, double relative)
{
    return fabs(a - b) <= relative * fmax(1e-300, fabs(b));
}

static void agrees_with_gsl(void)
{
    for (size_t f = 0; f < COUNT_OF(known); f++) {
        const struct known *k = &known[f];
        const struct prior p = make(k->key, k->arg);

        for (int i = 1; i < 200; i++) {
            const double q = i / 200.0, x = prior_quantile(&p, q);
            const double size = fabs(x) + fabs(k->quantile(0.9, k->arg));

            CU_ASSERT_DOUBLE_EQUAL(x, k->quantile(q, k->arg), 1e-9 * size);
            CU_ASSERT_DOUBLE_EQUAL(p.family->cdf(p.arg, x), k->cdf(x, k->arg), 1e-11);
            CU_ASSERT_DOUBLE_EQUAL(p.family->cdf(p.arg, x), q, 1e-8);
            CU_ASSERT_DOUBLE_EQUAL(log_density_at(&p, x), log(k->pdf(x, k->arg)), 1e-11);
        }
    }
}

/* Far in the tails GSL's density underflows; the log density must not. */
static void tails_are_finite(void)
{
    const struct prior n = prior_normal(1, 2), h = prior_half_normal(2), l = prior_lognormal(0, 1);

    CU_ASSERT_DOUBLE_EQUAL(log_density_at(&n, 401), -20000 - log(2) - 0.5 * log(2 * M_PI), 1e-8);
    CU_ASSERT_DOUBLE_EQUAL(log_density_at(&h, 400), -20000 - 0.5 * log(2 * M_PI), 1e-8);
    CU_ASSERT_DOUBLE_EQUAL(log_density_at(&l, exp(200)), -20000 - 200 - 0.5 * log(2 * M_PI), 1e-8);
    CU_ASSERT(near(n.family->cdf(n.arg, -59), gsl_cdf_gaussian_P(-60, 2), 1e-9));
    CU_ASSERT(near(l.family->cdf(l.arg, exp(-20)), gsl_cdf_gaussian_P(-20, 1), 1e-9));
}

static void nothing_outside_the_support(void)
{
    const struct prior h = prior_half_normal(2), l = prior_lognormal(0, 1),
                       u = make("uniform", (const double[PRIOR_ARGS]){1, 3});
    const double x[] = {-1, 0, 0.5, 1, 3, 3.5}, log_x[] = {-700, -700, log(0.5), 0, log(3), 1.3};
    double out[COUNT_OF(x)];

    prior_log_density(&h, COUNT_OF(x), x, log_x, out);
    CU_ASSERT(out[0] == -INFINITY && isfinite(out[1]) && isfinite(out[5]));
    prior_log_density(&l, COUNT_OF(x), x, log_x, out);
    CU_ASSERT(out[0] == -INFINITY && out[1] == -INFINITY && isfinite(out[2]));
    prior_log_density(&u, COUNT_OF(x), x, log_x, out);
    CU_ASSERT(out[2] == -INFINITY && isfinite(out[3]) && isfinite(out[4]) && out[5] == -INFINITY);
    CU_ASSERT_EQUAL(h.family->cdf(h.arg, -1), 0);
    CU_ASSERT_EQUAL(l.family->cdf(l.arg, 0), 0);
    CU_ASSERT_EQUAL(u.family->cdf(u.arg, 0), 0);
    CU_ASSERT_EQUAL(u.family->cdf(u.arg, 4), 1);
    CU_ASSERT_EQUAL(prior_quantile(&u, 0.25), 1.5);
}

/* --- numerical integrals --- */

static double density(double x, void *prior)
{
    return exp(log_density_at(prior, x));
}

static double integral(double (*f)(double x, void *data), void *data, double low, double high)
{
    gsl_integration_workspace *w = gsl_integration_workspace_alloc(WORKSPACE);
    gsl_function function = {f, data};
    double value = NAN, error;

    if (isinf(high))
        gsl_integration_qagiu(&function, low, 0, 1e-10, WORKSPACE, w, &value, &error);
    else
        gsl_integration_qag(&function, low, high, 0, 1e-10, WORKSPACE, GSL_INTEG_GAUSS31, w, &value,
                            &error);
    gsl_integration_workspace_free(w);
    return value;
}

/* The mass between two quantiles is what the quantiles say: as given, and on the variance, where
 * a wrong Jacobian would show. */
static void mass_between_quantiles(void)
{
    static const double q[] = {0.001, 0.05, 0.5, 0.8, 0.999};

    for (size_t f = 0; f < COUNT_OF(known); f++)
        for (int on_variance = 0; on_variance < 2; on_variance++) {
            struct prior p = make(known[f].key, known[f].arg);

            p.on_variance = on_variance == 1;
            if (p.on_variance && !(p.family->cdf(p.arg, 0) == 0))
                continue; /* no prior of a variance */
            for (size_t i = 0; i + 1 < COUNT_OF(q); i++)
                CU_ASSERT_DOUBLE_EQUAL(
                    integral(density, &p, prior_quantile(&p, q[i]), prior_quantile(&p, q[i + 1])),
                    q[i + 1] - q[i], 1e-8);
        }
}

static void variance_in_closed_form(void)
{
    struct prior p = prior_lognormal(1.2, 0.6);
    const struct prior half = prior_lognormal(0.6, 0.3); /* ln x = ln x^2 / 2 */

    p.on_variance = true;
    for (int i = 1; i < 50; i++) {
        const double q = i / 50.0, x = prior_quantile(&half, q);

        CU_ASSERT(near(prior_quantile(&p, q), x, 1e-14));
        CU_ASSERT_DOUBLE_EQUAL(log_density_at(&p, x), log_density_at(&half, x), 1e-13);
    }
}

/* One point at a time or many: the same bits. */
static void blocks_do_not_show(void)
{
    double x[POINTS], log_x[POINTS], many[POINTS], one;

    for (size_t i = 0; i < POINTS; i++) {
        x[i] = 0.05 * ((double)i + 1);
        log_x[i] = log(x[i]);
    }
    for (size_t f = 0; f < COUNT_OF(known); f++)
        for (int on_variance = 0; on_variance < 2; on_variance++) {
            struct prior p = make(known[f].key, known[f].arg);

            p.on_variance = on_variance == 1;
            prior_log_density(&p, POINTS, x, log_x, many);
            for (size_t i = 0; i < POINTS; i++) {
                prior_log_density(&p, 1, x + i, log_x + i, &one);
                CU_ASSERT(memcmp(&one, &many[i], sizeof one) == 0);
            }
        }
}

/* --- moments --- */

struct moment {
    double (*pdf)(double x, const double *arg);
    const double *arg;
    int power;
    double about;
};

static double moment_at(double x, void *data)
{
    const struct moment *m = data;

    return m->pdf(x, m->arg) * gsl_pow_int(x - m->about, m->power);
}

static double moment_of(const struct moment *m)
{
    struct moment turned = *m;
    const double middle = m->about;

    if (m->pdf != normal_pdf && m->pdf != student_t_pdf)
        return integral(moment_at, &turned, 0, INFINITY);
    /* symmetric about the middle: even central moments are twice one side's */
    return m->power % 2 == 1 ? 0 : 2 * integral(moment_at, &turned, middle, INFINITY);
}

static void moments_by_integral(void)
{
    static const struct {
        const char *key;
        double arg[PRIOR_ARGS];
        double (*pdf)(double x, const double *arg);
    } c[] = {
        {"normal", {2, 3}, normal_pdf},
        {"half_normal", {4}, half_normal_pdf},
        {"lognormal", {0.4, 0.7}, lognormal_pdf},
        {"lognormal", {0.4, 0.25}, lognormal_pdf},
        {"gamma", {2.5, 0.8}, gamma_pdf},
        {"inverse_gamma", {4.5, 3}, inverse_gamma_pdf},
        {"student_t", {7, -2, 1.5}, student_t_pdf},
    };

    for (size_t i = 0; i < COUNT_OF(c); i++) {
        const struct prior p = make(c[i].key, c[i].arg);
        const double mean = prior_mean(&p), sd = prior_sd(&p);
        struct moment m = {c[i].pdf, c[i].arg, 1, 0};

        if (c[i].pdf != normal_pdf && c[i].pdf != student_t_pdf)
            CU_ASSERT(near(mean, moment_of(&m), 1e-7));
        m.power = 2;
        m.about = mean;
        CU_ASSERT(near(sd, sqrt(moment_of(&m)), 1e-7));
    }
}

static void moments_known(void)
{
    const struct prior u = make("uniform", (const double[PRIOR_ARGS]){1, 7}),
                       t = make("student_t", (const double[PRIOR_ARGS]){7, -2, 1.5}),
                       narrow = prior_lognormal(0, 1e-6), f = prior_fixed(2.5);

    CU_ASSERT_EQUAL(prior_mean(&u), 4);
    CU_ASSERT_DOUBLE_EQUAL(prior_sd(&u), sqrt(3), 1e-15);
    CU_ASSERT_EQUAL(prior_mean(&t), -2);
    CU_ASSERT(near(prior_sd(&narrow), 1e-6 * (1 + 0.75e-12), 1e-14)); /* no cancellation */
    CU_ASSERT_EQUAL(prior_mean(&f), 2.5);
    CU_ASSERT_EQUAL(prior_sd(&f), 0);
}

static void moments_that_do_not_exist(void)
{
    struct prior p = prior_normal(0, 1);
    const struct prior t1 = make("student_t", (const double[PRIOR_ARGS]){1, 0, 1}),
                       t2 = make("student_t", (const double[PRIOR_ARGS]){2, 0, 1}),
                       g1 = make("inverse_gamma", (const double[PRIOR_ARGS]){1, 1}),
                       g2 = make("inverse_gamma", (const double[PRIOR_ARGS]){2, 1});

    CU_ASSERT(isnan(prior_mean(&t1)) && isnan(prior_sd(&t1)));
    CU_ASSERT(prior_mean(&t2) == 0 && isnan(prior_sd(&t2)));
    CU_ASSERT(isnan(prior_mean(&g1)) && isnan(prior_sd(&g1)));
    CU_ASSERT(prior_mean(&g2) == 1 && isnan(prior_sd(&g2)));
    p = g1;
    p.on_variance = true; /* the root's mean exists where the variance's half order does */
    CU_ASSERT(near(prior_mean(&p), sqrt(M_PI), 1e-8) && isnan(prior_sd(&p)));
    p = t1;
    p.above = -3; /* one heavy tail is enough */
    prior_settle(&p);
    CU_ASSERT(isnan(prior_mean(&p)));
    p.below = 3;
    prior_settle(&p);
    CU_ASSERT(fabs(prior_mean(&p)) < 1e-12 && isfinite(prior_sd(&p)));
}

/* --- the list --- */

static size_t argument_count(const struct prior_family *f)
{
    size_t n = 0;

    while (n < PRIOR_ARGS && f->args[n].key != NULL)
        n++;
    return n;
}

static void families_of_the_interface(void)
{
    static const struct {
        const char *key, *args[PRIOR_ARGS + 1];
        const char *positive; /* one letter an argument */
    } want[] = {
        {"normal", {"mean", "sd"}, "ny"},
        {"half_normal", {"sd"}, "y"},
        {"lognormal", {"meanlog", "sdlog"}, "ny"},
        {"gamma", {"shape", "rate"}, "yy"},
        {"inverse_gamma", {"shape", "scale"}, "yy"},
        {"uniform", {"min", "max"}, "nn"},
        {"student_t", {"df", "location", "scale"}, "yny"},
        {"fixed", {"value"}, "n"},
    };

    CU_ASSERT_PTR_NULL(prior_families[COUNT_OF(want)]);
    CU_ASSERT_PTR_NULL(prior_family_find("cauchy"));
    for (size_t i = 0; i < COUNT_OF(want); i++) {
        const struct prior_family *f = prior_family_find(want[i].key);
        const struct prior p = {.family = f, .above = -INFINITY, .below = INFINITY};

        CU_ASSERT_PTR_NOT_NULL_FATAL(f);
        CU_ASSERT_EQUAL(argument_count(f), strlen(want[i].positive));
        CU_ASSERT_EQUAL(prior_is_fixed(&p), strcmp(f->key, "fixed") == 0);
        CU_ASSERT(f->sentence != NULL && strlen(f->sentence) > 0);
        for (size_t j = 0; j < argument_count(f); j++) {
            CU_ASSERT_STRING_EQUAL(f->args[j].key, want[i].args[j]);
            CU_ASSERT_EQUAL(f->args[j].positive, want[i].positive[j] == 'y');
            CU_ASSERT(f->args[j].help != NULL && strlen(f->args[j].help) > 0);
        }
    }
}

static void fixed_numbers(void)
{
    struct prior p = prior_fixed(9);

    CU_ASSERT_EQUAL(prior_quantile(&p, 0.2), 9);
    p.on_variance = true;
    CU_ASSERT_EQUAL(prior_quantile(&p, 0.2), 3);
    CU_ASSERT_EQUAL(prior_mean(&p), 3);
}

static const struct unit_test tests[] = {
    {"density, cdf and quantile agree with GSL", agrees_with_gsl},
    {"tails are finite in the logarithm", tails_are_finite},
    {"no density outside the support", nothing_outside_the_support},
    {"mass between quantiles, on the number and on the variance", mass_between_quantiles},
    {"a lognormal variance is a lognormal sd", variance_in_closed_form},
    {"blocks of points do not show", blocks_do_not_show},
    {"moments by numerical integral", moments_by_integral},
    {"moments in closed form", moments_known},
    {"moments that do not exist", moments_that_do_not_exist},
    {"families and arguments of the interface", families_of_the_interface},
    {"fixed numbers", fixed_numbers},
    UNIT_END,
};

int main(void)
{
    return unit_main("prior", tests);
}
