/* SPDX-License-Identifier: GPL-3.0-or-later */
/* vecmath_lanes.h: the one source of exp, log, logistic, normal cdf and sine/cosine, on lanes.
 *
 * Sources: argument reduction and series as in any numerical text; e^r by its Taylor series on
 * |r| <= ln(2)/2, log by the series of 2 artanh(s) (Abramowitz & Stegun 1964, 4.2.1, 4.1.28), the
 * normal cdf by the rational function 5666 of Hart et al. 1968, Computer Approximations, with the
 * continued fraction of Abramowitz & Stegun 26.2.14 in the tails (coefficients from memory, checked
 * against GSL by the tests).
 */
#ifndef TERRACE_VECMATH_LANES_H
#define TERRACE_VECMATH_LANES_H

#include "base/lanes.h"

#define MAGIC 6755399441055744.0 /* 1.5 x 2^52: adding it rounds to a whole number */

/* a0 + a1 x + a2 x^2 + a3 x^3 in pairs: the processor overlaps them where a Horner chain waits */
LANE_FN vd v_series_low(vd x, vd x2, const double *a)
{
    return (a[0] + a[1] * x) + (a[2] + a[3] * x) * x2;
}

/* e^x for -708 <= x <= 709; garbage (never a trap) outside. e^1 = 2.718281828459045 */
LANE_FN vd v_exp_core(vd x)
{
    static const double c[] = {0.5,           1.0 / 6,        1.0 / 24,        1.0 / 120,
                               1.0 / 720,     1.0 / 5040,     1.0 / 40320,     1.0 / 362880,
                               1.0 / 3628800, 1.0 / 39916800, 1.0 / 479001600, 1.0 / 6227020800};
    const vd shifted = x * 1.4426950408889634 + MAGIC;
    const vd k = shifted - MAGIC;
    vd r = x - k * 6.93147180369123816490e-01; /* ln 2 in two parts */
    r = r - k * 1.90821492927058770002e-10;
    const vd r2 = r * r, r4 = r2 * r2;
    const vd p = v_series_low(r, r2, c) +
                 r4 * (v_series_low(r, r2, c + 4) + r4 * v_series_low(r, r2, c + 8));
    const vu scale = ((vu)shifted + v_set_bits(1023)) << 52;
    return ((p * r2 + r) + 1.0) * (vd)scale;
}

LANE_FN vd v_exp(vd x)
{
    if (v_all((vi)(x >= -708.0) & (vi)(x <= 709.0)))
        return v_exp_core(x);
    /* above 709 the scale 2^k would overflow before e^x does: e^x = e^(x - 1) e */
    const vi high = x > 709.0;
    const vd inside = v_max(v_min(x, v_set(710.0)), v_set(-708.0));
    vd y = v_exp_core(inside - v_pick(high, v_set(1.0), v_set(0.0))) *
           v_pick(high, v_set(2.718281828459045), v_set(1.0));
    y = v_pick(x > 709.782712893384, v_set(__builtin_inf()), y);
    y = v_pick(x < -708.0, v_set(0.0), y);
    return v_pick(x == x, y, x);
}

/* ln x for normal positive x. ln 2 = 0.6931471805599453 */
LANE_FN vd v_log_core(vd x)
{
    static const double c[] = {2.0 / 3,  2.0 / 5,  2.0 / 7,  2.0 / 9,  2.0 / 11,
                               2.0 / 13, 2.0 / 15, 2.0 / 17, 2.0 / 19, 2.0 / 21};
    const vu bits = (vu)x;
    /* exponent such that the mantissa lies in [sqrt(1/2), sqrt(2)) */
    const vu e = (bits + v_set_bits(0x3ff0000000000000ULL - 0x3fe6a09e667f3bcdULL)) >> 52;
    const vd m = (vd)(bits - (e << 52) + v_set_bits(0x3ff0000000000000ULL));
    const vd k = (vd)(e | v_set_bits(0x4330000000000000ULL)) - (4503599627370496.0 + 1023.0);
    const vd f = m - 1.0;
    const vd s = f / (f + 2.0);
    const vd z = s * s;
    const vd z2 = z * z, z4 = z2 * z2;
    const vd r =
        z * (v_series_low(z, z2, c) + z4 * (v_series_low(z, z2, c + 4) + z4 * (c[8] + c[9] * z)));
    const vd h = 0.5 * f * f;
    return k * 6.93147180369123816490e-01 -
           ((h - (s * (h + r) + k * 1.90821492927058770002e-10)) - f);
}

LANE_FN vd v_log(vd x)
{
    if (v_all((vi)(x >= 2.2250738585072014e-308) & (vi)(x < __builtin_inf())))
        return v_log_core(x);
    const vi small = x < 2.2250738585072014e-308;
    vd y = v_log_core(v_pick(small, x * 18014398509481984.0, x)) -
           v_pick(small, v_set(37.42994775023704665), v_set(0.0)); /* 54 ln 2 */
    y = v_pick(x == 0.0, v_set(-__builtin_inf()), y);
    y = v_pick(x < 0.0, v_set(__builtin_nan("")), y);
    return v_pick(x < __builtin_inf(), y, v_pick(x < 0.0, y, x));
}

/* ln(1 + e^x) */
LANE_FN vd v_log1p_exp(vd x)
{
    const vd e = v_exp_core(v_max(-v_abs(x), v_set(-708.0)));
    const vd u = 1.0 + e;
    return v_max(x, v_set(0.0)) + (v_log_core(u) + (e - (u - 1.0)) / u);
}

/* 1 / (1 + e^-x) */
LANE_FN vd v_logistic(vd x)
{
    const vd e = v_exp_core(v_max(-v_abs(x), v_set(-708.0)));
    const vd inverse = 1.0 / (1.0 + e);
    return v_pick(x < 0.0, e * inverse, inverse);
}

/* ln(1 + e^x), and 1 / (1 + e^-x) into *p, from one exponential */
LANE_FN vd v_softplus(vd x, vd *p)
{
    const vd e = v_exp_core(v_max(-v_abs(x), v_set(-708.0)));
    const vd u = 1.0 + e;
    const vd inverse = 1.0 / u;
    *p = v_pick(x < 0.0, e * inverse, inverse);
    return v_max(x, v_set(0.0)) + v_log_core(u); /* within 2e-16 absolute */
}

LANE_FN vd v_normal_cdf(vd x)
{
    static const double a[] = {3.52624965998911e-02, 0.700383064443688, 6.37396220353165,
                               33.912866078383,      112.079291497871,  221.213596169931,
                               220.206867912376};
    static const double b[] = {8.83883476483184e-02, 1.75566716318264, 16.064177579207,
                               86.7807322029461,     296.564248779674, 637.333633378831,
                               793.826512519948,     440.413735824752};
    const vd z = v_min(v_abs(x), v_set(37.6));
    const vd e = v_exp_core(-0.5 * z * z);
    vd p = v_set(a[0]), q = v_set(b[0]);
    for (size_t i = 1; i < 7; i++)
        p = p * z + a[i];
    for (size_t i = 1; i < 8; i++)
        q = q * z + b[i];
    vd top = z + 0.65, bottom = v_set(1.0); /* the continued fraction from inside out */
    for (int i = 4; i >= 1; i--) {
        const vd next = z * top + (double)i * bottom;
        bottom = top;
        top = next;
    }
    const vi tail = z > 7.07106781186547;
    const vd lower = e * v_pick(tail, bottom, p) / v_pick(tail, top * 2.506628274631000502, q);
    const vd value = v_pick(x > 0.0, 1.0 - lower, lower);
    return v_pick(x == x, v_pick(x < -37.6, v_set(0.0), value), x);
}

/* sin and cos of an angle of f quarter turns, |f| <= 1/2; within 3e-14. */
LANE_FN void v_sin_cos_quarter(vd f, vd *sine, vd *cosine)
{
    static const double cs[] = {1.0,          -1.0 / 6,        1.0 / 120,        -1.0 / 5040,
                                1.0 / 362880, -1.0 / 39916800, 1.0 / 6227020800, 0.0};
    static const double cc[] = {1.0,         -0.5,           1.0 / 24,        -1.0 / 720,
                                1.0 / 40320, -1.0 / 3628800, 1.0 / 479001600, -1.0 / 87178291200};
    const vd a = f * 1.5707963267948966;
    const vd z = a * a, z2 = z * z, z4 = z2 * z2;
    const vd s = v_series_low(z, z2, cs) + z4 * v_series_low(z, z2, cs + 4);
    const vd c = v_series_low(z, z2, cc) + z4 * v_series_low(z, z2, cc + 4);
    *sine = s * a;
    *cosine = c;
}

#endif
