/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_vecmath.c: our exp, log and normal distribution against libm, GSL and printed tables. */
#include <gsl/gsl_cdf.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/isa.h"
#include "base/vecmath.h"
#include "unit.h"

enum { POINTS = 200000 };

static double relative(double got, double want)
{
    return want == 0.0 ? fabs(got) : fabs(got / want - 1.0);
}

static void exp_and_log(void)
{
    double worst_exp = 0, worst_log = 0;
    for (int i = 0; i < POINTS; i++) {
        const double x = -707.9 + 1417.6 * i / POINTS, y = exp(0.98 * x);
        worst_exp = fmax(worst_exp, relative(vm_exp(x), exp(x)));
        worst_log = fmax(worst_log, fabs(vm_log(y) - log(y)) / fmax(fabs(log(y)), 1e-12));
    }
    CU_ASSERT(worst_exp < 4.5e-16); /* two units in the last place */
    CU_ASSERT(worst_log < 4.5e-16);
    CU_ASSERT_EQUAL(vm_exp(0.0), 1.0);
    CU_ASSERT_EQUAL(vm_log(1.0), 0.0);
    /* Abramowitz & Stegun 1964, table 4.4 and 4.2: e = 2.71828 18284 59045, ln 2 = 0.69314 71805
     * 59945 */
    CU_ASSERT_DOUBLE_EQUAL(vm_exp(1.0), 2.718281828459045, 5e-16);
    CU_ASSERT_DOUBLE_EQUAL(vm_log(2.0), 0.6931471805599453, 2e-16);
}

static void logistic_family(void)
{
    double worst = 0, worst_softplus = 0;
    for (int i = 0; i < POINTS; i++) {
        const double x = -60.0 + 120.0 * i / POINTS;
        worst = fmax(worst, relative(vm_logistic(x), 1.0 / (1.0 + exp(-x))));
        worst_softplus =
            fmax(worst_softplus, relative(vm_log1p_exp(x), x > 33 ? x + exp(-x) : log1p(exp(x))));
    }
    CU_ASSERT(worst < 1e-15);
    CU_ASSERT(worst_softplus < 1e-15);
    CU_ASSERT_DOUBLE_EQUAL(vm_logit(0.25), log(0.25 / 0.75), 1e-15);
    CU_ASSERT_DOUBLE_EQUAL(vm_pow(2.0, 0.5), sqrt(2.0), 1e-15);
}

static void normal(void)
{
    double worst = 0, worst_relative = 0, worst_quantile = 0;
    for (int i = 0; i < POINTS; i++) {
        const double x = -37.0 + 74.0 * i / POINTS, p = (i + 0.5) / POINTS;
        const double want = gsl_cdf_ugaussian_P(x);
        worst = fmax(worst, fabs(vm_normal_cdf(x) - want));
        worst_relative = fmax(worst_relative, relative(vm_normal_cdf(x), want));
        worst_quantile =
            fmax(worst_quantile, relative(vm_normal_quantile(p), gsl_cdf_ugaussian_Pinv(p)));
    }
    CU_ASSERT(worst < 1e-15);
    CU_ASSERT(worst_relative < 1e-8);
    CU_ASSERT(worst_quantile < 2e-15);
    /* Abramowitz & Stegun 1964, table 26.1: P(1) = 0.84134 47460 68543, P(2) = 0.97724 98680 51821
     */
    CU_ASSERT_DOUBLE_EQUAL(vm_normal_cdf(1.0), 0.841344746068543, 1e-15);
    CU_ASSERT_DOUBLE_EQUAL(vm_normal_cdf(2.0), 0.977249868051821, 1e-15);
    CU_ASSERT_DOUBLE_EQUAL(vm_normal_quantile(0.975), 1.959963984540054, 1e-14);
    CU_ASSERT(relative(vm_normal_quantile(1e-300), gsl_cdf_ugaussian_Pinv(1e-300)) < 1e-14);
}

static void circle(void)
{
    double worst = 0;
    for (int i = 0; i <= 10000; i++) {
        double s, c;
        vm_sin_cos_turns(i / 10000.0, &s, &c);
        worst = fmax(worst, fabs(s - sin(6.283185307179586 * i / 10000.0)));
        worst = fmax(worst, fabs(c - cos(6.283185307179586 * i / 10000.0)));
    }
    CU_ASSERT(worst < 3e-14);
}

static void edges(void)
{
    CU_ASSERT(isinf(vm_exp(710.0)) && vm_exp(710.0) > 0);
    CU_ASSERT(relative(vm_exp(709.7), exp(709.7)) < 5e-16);
    CU_ASSERT_EQUAL(vm_exp(-709.0), 0.0);
    CU_ASSERT_EQUAL(vm_exp(-INFINITY), 0.0);
    CU_ASSERT(isnan(vm_exp(NAN)));
    CU_ASSERT(isinf(vm_log(0.0)) && vm_log(0.0) < 0);
    CU_ASSERT(isnan(vm_log(-1.0)));
    CU_ASSERT(isinf(vm_log(INFINITY)));
    CU_ASSERT_DOUBLE_EQUAL(vm_log(5e-324), log(5e-324), 1e-12);
    CU_ASSERT_EQUAL(vm_normal_cdf(-INFINITY), 0.0);
    CU_ASSERT_EQUAL(vm_normal_cdf(INFINITY), 1.0);
    CU_ASSERT(isnan(vm_normal_cdf(NAN)));
    CU_ASSERT(isinf(vm_normal_quantile(0.0)) && isinf(vm_normal_quantile(1.0)));
    CU_ASSERT(isnan(vm_normal_quantile(1.5)));
}

/* one element of a block against the scalar: the same bits at every length and position */
static void same_bits(void (*block)(size_t, const double *, double *), double (*scalar)(double))
{
    double in[9], out[9];
    for (size_t n = 1; n <= 9; n++)
        for (int shift = 0; shift < 200; shift++) {
            for (size_t i = 0; i < n; i++)
                in[i] = i == 3 ? 1e9 * (shift - 100) : -9.0 + 0.37 * (double)i + 0.1 * shift;
            block(n, in, out);
            for (size_t i = 0; i < n; i++) {
                const double want = scalar(in[i]);
                CU_ASSERT(memcmp(&out[i], &want, sizeof want) == 0 ||
                          (isnan(out[i]) && isnan(want)));
            }
        }
}

static void blocks_of(const struct vecmath *v)
{
    same_bits(v->exp, vm_exp);
    same_bits(v->log, vm_log);
    same_bits(v->log1p_exp, vm_log1p_exp);
    same_bits(v->logistic, vm_logistic);
    same_bits(v->normal_cdf, vm_normal_cdf);
}

static void blocks_sse2(void)
{
    blocks_of(&vecmath_sse2);
}

static void blocks_avx2(void)
{
    __builtin_cpu_init();
    if (!__builtin_cpu_supports("avx2")) {
        unit_skip("this processor has no AVX2");
        return;
    }
    blocks_of(&vecmath_avx2);
}

static void forced_set(void)
{
    struct err e = ERR_INIT;
    setenv("TERRACE_ISA", "sse2", 1);
    CU_ASSERT_EQUAL(isa_in_force(), ISA_SSE2);
    CU_ASSERT_STRING_EQUAL(vecmath()->name, "sse2");
    CU_ASSERT_EQUAL(isa_check(&e), STATUS_OK);
    setenv("TERRACE_ISA", "abacus", 1);
    CU_ASSERT_EQUAL(isa_check(&e), STATUS_INPUT);
    unsetenv("TERRACE_ISA");
    err_release(&e);
}

static const struct unit_test tests[] = {
    {"exp and log", exp_and_log},
    {"logistic, logit, softplus, power", logistic_family},
    {"normal cdf and quantile", normal},
    {"sine and cosine", circle},
    {"edges of the domains", edges},
    {"blocks, SSE2", blocks_sse2},
    {"blocks, AVX2", blocks_avx2},
    {"TERRACE_ISA", forced_set},
    UNIT_END,
};

int main(void)
{
    return unit_main("vecmath", tests);
}
