/* SPDX-License-Identifier: GPL-3.0-or-later */
/* scalar_math.c: the scalar functions of vecmath.h, from the same source as the lanes. */
#include "base/vecmath.h"
#include "base/vecmath_lanes.h"

double vm_exp(double x)
{
    return v_exp(v_set(x))[0];
}

double vm_log(double x)
{
    return v_log(v_set(x))[0];
}

double vm_log1p_exp(double x)
{
    return v_log1p_exp(v_set(x))[0];
}

double vm_logistic(double x)
{
    return v_logistic(v_set(x))[0];
}

double vm_normal_cdf(double x)
{
    return v_normal_cdf(v_set(x))[0];
}

double vm_logit(double p)
{
    return vm_log(p / (1.0 - p));
}

double vm_pow(double x, double y)
{
    return vm_exp(y * vm_log(x));
}

void vm_sin_cos_turns(double turns, double *sine, double *cosine)
{
    const double quarters = 4.0 * turns;
    const int whole = (int)(quarters + 0.5);
    vd s, c;
    v_sin_cos_quarter(v_set(quarters - whole), &s, &c);
    const double a = s[0], b = c[0];
    *sine = whole % 4 == 0 ? a : whole % 4 == 1 ? b : whole % 4 == 2 ? -a : -b;
    *cosine = whole % 4 == 0 ? b : whole % 4 == 1 ? -a : whole % 4 == 2 ? -b : a;
}

/* coefficients highest power first */
static double polynomial(const double *c, size_t n, double x)
{
    double value = c[0];
    for (size_t i = 1; i < n; i++)
        value = value * x + c[i];
    return value;
}

/* Wichura (1988), Algorithm AS 241: the percentage points of the normal distribution, Applied
 * Statistics 37:477, routine PPND16 (coefficients from memory, checked against GSL by the tests).
 * 0 -> -inf, 1 -> inf. Check value: p = 0.975 gives 1.959963984540054. */
double vm_normal_quantile(double p)
{
    static const double a[] = {2.5090809287301226727e3, 3.3430575583588128105e4,
                               6.7265770927008700853e4, 4.5921953931549871457e4,
                               1.3731693765509461125e4, 1.9715909503065514427e3,
                               1.3314166789178437745e2, 3.3871328727963666080e0};
    static const double b[] = {5.2264952788528545610e3, 2.8729085735721942674e4,
                               3.9307895800092710610e4, 2.1213794301586595867e4,
                               5.3941960214247511077e3, 6.8718700749205790830e2,
                               4.2313330701600911252e1, 1.0};
    static const double c[] = {7.74545014278341407640e-4, 2.27238449892691845833e-2,
                               2.41780725177450611770e-1, 1.27045825245236838258e0,
                               3.64784832476320460504e0,  5.76949722146069140550e0,
                               4.63033784615654529590e0,  1.42343711074968357734e0};
    static const double d[] = {1.05075007164441684324e-9, 5.47593808499534494600e-4,
                               1.51986665636164571966e-2, 1.48103976427480074590e-1,
                               6.89767334985100004550e-1, 1.67638483018380384940e0,
                               2.05319162663775882187e0,  1.0};
    static const double e[] = {2.01033439929228813265e-7, 2.71155556874348757815e-5,
                               1.24266094738807843860e-3, 2.65321895265761230930e-2,
                               2.96560571828504891230e-1, 1.78482653991729133580e0,
                               5.46378491116411436990e0,  6.65790464350110377720e0};
    static const double f[] = {2.04426310338993978564e-15, 1.42151175831644588870e-7,
                               1.84631831751005468180e-5,  7.86869131145613259100e-4,
                               1.48753612908506148525e-2,  1.36929880922735805310e-1,
                               5.99832206555887937690e-1,  1.0};
    const double q = p - 0.5;
    if (q >= -0.425 && q <= 0.425) {
        const double r = 0.180625 - q * q;
        return q * polynomial(a, 8, r) / polynomial(b, 8, r);
    }
    if (!(p > 0.0))
        return p < 0.0 || p != p ? __builtin_nan("") : -__builtin_inf();
    if (!(p < 1.0))
        return p > 1.0 ? __builtin_nan("") : __builtin_inf();
    const double r = __builtin_sqrt(-vm_log(q < 0 ? p : 1.0 - p));
    const double x = r <= 5.0 ? polynomial(c, 8, r - 1.6) / polynomial(d, 8, r - 1.6)
                              : polynomial(e, 8, r - 5.0) / polynomial(f, 8, r - 5.0);
    return q < 0 ? -x : x;
}
