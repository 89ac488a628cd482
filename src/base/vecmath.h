/* SPDX-License-Identifier: GPL-3.0-or-later */
/* vecmath.h: our own exp, log, normal distribution: the same bits on every CPU and compiler.
 *
 * Only + - * / sqrt on IEEE doubles and bit operations, so the result of an argument never depends
 * on instruction set, compiler or position in an array. Block functions are compiled once per
 * instruction set from one source (vecmath.c over vecmath_lanes.h); the scalar functions run the
 * same source. in and out may be the same array; no alignment is asked for.
 *
 * Domains are total: exp overflows to +inf and underflows to 0, log(0) = -inf, log of a negative
 * number is NaN, NaN in gives NaN out; exp is 0 below -708 (no subnormal results). Accuracy
 * (measured by the tests against GSL and libm): exp, log within 2 ulp; normal cdf within 2e-15
 * absolute and 1e-8 relative down to x = -37; normal quantile within 1e-15 relative (Wichura 1988,
 * Applied Statistics 37:477, AS 241).
 */
#ifndef TERRACE_VECMATH_H
#define TERRACE_VECMATH_H

#include <stddef.h>

double vm_exp(double x);
double vm_log(double x);
double vm_log1p_exp(double x); /* log(1 + e^x), no overflow */
double vm_logistic(double x);  /* 1 / (1 + e^-x) */
double vm_logit(double p);     /* ln(p / (1 - p)) */
double vm_normal_cdf(double x);
double vm_normal_quantile(double p);
/* sine and cosine of `turns` full turns, 0 <= turns <= 1; within 3e-14 */
void vm_sin_cos_turns(double turns, double *sine, double *cosine);
double vm_pow(double x, double y); /* exp(y log x), x > 0 */

/* One table of block functions per instruction set. */
struct vecmath {
    const char *name; /* "sse2", "avx2" */
    void (*exp)(size_t n, const double *in, double *out);
    void (*log)(size_t n, const double *in, double *out);
    void (*log1p_exp)(size_t n, const double *in, double *out);
    void (*logistic)(size_t n, const double *in, double *out);
    void (*normal_cdf)(size_t n, const double *in, double *out);
};

extern const struct vecmath vecmath_sse2, vecmath_avx2;

/* The table in force: the widest this CPU has, or the one TERRACE_ISA names (see isa.h). */
const struct vecmath *vecmath(void);

#endif
