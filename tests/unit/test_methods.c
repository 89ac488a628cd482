/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_methods.c: each curve and variant x endpoint: the sampler against quadrature where it
 * reaches, else against a long slice run: Pr(gain > c) of every level, and Pr(level is best),
 * within 0.002 and the combined Monte Carlo error. */
#include <math.h>
#include <string.h>

#include "base/mem.h"
#include "posterior/diagnostics.h"
#include "posterior/posterior.h"
#include "small_design.h"
#include "unit.h"

enum { K = 5 };

static double n[K] = {12, 11, 0, 12, 13}, mean[K] = {0.2, 0.9, 0, 1.6, 1.9},
              ss[K] = {30, 27, 0, 33, 38}, events[K] = {3, 4, 0, 6, 8};
static const struct level_data data = {K, n, n, mean, ss, events};

static const struct {
    const char *curve, *more;
} extra[] = {{"ndlm", ",\"spacing\":\"actual\""}, {"ndlm", ",\"order\":2"}};

static double share(const struct draws *r, size_t level, bool best, double *mark, double *error)
{
    double sum = 0;
    for (size_t i = 0; i < r->n; i++) {
        const double *x = r->link + i;
        bool hit = x[level * r->stride] > x[0] + 0.4;
        for (size_t k = 1; best && k < K; k++)
            hit = (k == 1 || hit) && x[level * r->stride] >= x[k * r->stride];
        mark[i] = hit ? 1 : 0;
        sum += mark[i];
    }
    const double p = sum / (double)r->n;
    *error = diag_mcse_probability(p, diag_ess(mark, r->n, r->chains));
    return p;
}

static void compare(const char *curve, const char *more, bool binary, double *worst)
{
    const size_t length = unit_fast() ? 64000 : 400000, slices = unit_fast() ? 8000 : 120000;
    struct design *d = small_design(curve, binary, K, more, "");
    struct plan *plan = plan_new(d, &d->model);
    struct posterior *p = posterior_new(plan), *q = posterior_new(plan);
    struct err e = ERR_INIT;
    const char *name;
    double *mark = mem_new(length > SECOND_DRAWS ? length : SECOND_DRAWS, sizeof *mark);
    CU_ASSERT_EQUAL_FATAL(posterior_start(p, &data, (struct rng_key){.seed = 3}, &e), STATUS_OK);
    CU_ASSERT_EQUAL_FATAL(posterior_start(q, &data, (struct rng_key){.seed = 4}, &e), STATUS_OK);
    posterior_extend(p, length);
    CU_ASSERT(!posterior_is_doubtful(p));
    const struct draws a = posterior_draws(p);
    struct draws b = posterior_second(q, &name);
    if (strcmp(name, "quadrature") != 0) {
        posterior_use_slice(q);
        posterior_extend(q, slices);
        b = posterior_draws(q);
    }
    for (size_t k = 1; k < K; k++)
        for (int best = 0; best < 2; best++) {
            double first_error, second_error;
            const double x = share(&a, k, best, mark, &first_error);
            const double y = share(&b, k, best, mark, &second_error);
            const double error = sqrt(first_error * first_error + second_error * second_error);
            CU_ASSERT_DOUBLE_EQUAL(x, y, 0.002 + 3.5 * error);
            if (fabs(x - y) > 0.002 + 3.5 * error)
                fprintf(stderr, "# %s%s %s, level %zu%s: %.4f and %.4f by %s\n", curve, more,
                        binary ? "binary" : "continuous", k, best ? " best" : "", x, y, name);
            *worst = fmax(*worst, fabs(x - y));
        }
    mem_free(mark);
    posterior_free(p);
    posterior_free(q);
    plan_free(plan);
    design_free(d);
}

static void two_methods(void)
{
    double worst = 0;
    for (int binary = 0; binary < 2; binary++) {
        for (size_t i = 0; curves[i]; i++)
            compare(curves[i]->key, "", binary, &worst);
        for (size_t i = 0; i < sizeof extra / sizeof *extra; i++)
            compare(extra[i].curve, extra[i].more, binary, &worst);
    }
    fprintf(stderr, "# largest difference %.4f\n", worst);
}

static const struct unit_test tests[] = {
    {"sampler against quadrature or slices, every curve and endpoint", two_methods},
    UNIT_END,
};

int main(void)
{
    return unit_main("methods", tests);
}
