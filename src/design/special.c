/* SPDX-License-Identifier: GPL-3.0-or-later */
/* special.c: incomplete gamma and beta functions and their inverses. */
#include "design/special.h"

#include <math.h>

#include "base/vecmath.h"

#define HALF_LN_2_PI 0.91893853320467274178
#define LN_PI 1.14472988584940017414
#define EPSILON 1e-16
#define TINY 1e-300

enum { TERMS = 100000, STEPS = 200 };

/* Stirling's series without its leading terms: Abramowitz & Stegun 6.1.41. */
static double stirling_rest(double x)
{
    static const double c[] = {1.0 / 12,   -1.0 / 360,      1.0 / 1260, -1.0 / 1680,
                               1.0 / 1188, -691.0 / 360360, 1.0 / 156,  -3617.0 / 122400};
    const double y = 1.0 / (x * x);
    double sum = 0.0;
    for (int i = 7; i >= 0; i--)
        sum = c[i] + y * sum;
    return sum / x;
}

double special_log_gamma(double x)
{
    double product = 1.0;
    while (x < 12.0)
        product *= x++;
    return (x - 0.5) * vm_log(x) - x + HALF_LN_2_PI + stirling_rest(x) - vm_log(product);
}

double special_log1p_less(double x)
{
    if (x > 0.4 || x < -0.3)
        return vm_log(1.0 + x) - x;
    /* with r = x / (2 + x): log(1 + x) = 2 (r + r^3 / 3 + r^5 / 5 + ...), x = 2 r / (1 - r) */
    const double r = x / (2.0 + x), y = r * r;
    double sum = 0.0;
    for (int k = 17; k >= 1; k--)
        sum = y * (1.0 / (2 * k + 1) + sum);
    return r * (2.0 * sum - x);
}

static double log1p_of(double x)
{
    return x > 0.4 ? vm_log(1.0 + x) : x + special_log1p_less(x);
}

/* ---- gamma ---- */

/* ln of x^a e^-x / Gamma(a + 1) */
static double log_gamma_term(double a, double x)
{
    if (a < 20.0)
        return a * vm_log(x) - x - special_log_gamma(a + 1.0);
    const double off = (x - a) / a;
    const double deviance = off > -0.9 ? special_log1p_less(off) : vm_log(x / a) - off;
    return a * deviance - HALF_LN_2_PI - 0.5 * vm_log(a) - stirling_rest(a);
}

/* lower tail by its series (A&S 6.5.29), x < a + 1 */
static double gamma_series(double a, double x)
{
    double term = 1.0, sum = 1.0;
    for (int k = 1; k < TERMS && term > sum * EPSILON; k++) {
        term *= x / (a + k);
        sum += term;
    }
    return vm_exp(log_gamma_term(a, x) + vm_log(sum));
}

/* ln of the upper tail by its continued fraction (A&S 6.5.31, modified Lentz evaluation), x >= a +
 * 1
 */
static double log_gamma_fraction(double a, double x)
{
    double b = x + 1.0 - a, c = 1.0 / TINY, d = 1.0 / b, h = d;
    for (int k = 1; k < TERMS; k++) {
        const double an = -k * (k - a);
        b += 2.0;
        d = an * d + b;
        d = 1.0 / (fabs(d) < TINY ? TINY : d);
        c = b + an / c;
        c = fabs(c) < TINY ? TINY : c;
        const double factor = d * c;
        h *= factor;
        if (fabs(factor - 1.0) < EPSILON * 4.0)
            break;
    }
    return log_gamma_term(a, x) + vm_log(a * h);
}

double special_gamma_tail(double shape, double x, bool upper)
{
    if (!(x > 0.0))
        return upper ? 1.0 : 0.0;
    if (x == INFINITY)
        return upper ? 0.0 : 1.0;
    if (x < shape + 1.0) {
        const double low = gamma_series(shape, x);
        return upper ? 1.0 - low : low;
    }
    const double high = vm_exp(log_gamma_fraction(shape, x));
    return upper ? high : 1.0 - high;
}

/* ---- inverses, in the logarithm of the variable ---- */

struct tail {
    double parameter;
    bool falling; /* the tail falls in s */
    double (*log_tail)(double parameter, double s);
    double (*log_density)(double parameter, double s); /* of s itself */
};

/* s with log_tail(s) = target: Newton steps kept between bounds that close in */
static double invert(const struct tail *t, double target, double s)
{
    double low = -INFINITY, high = INFINITY;
    for (int k = 0; k < STEPS; k++) {
        const double value = t->log_tail(t->parameter, s), miss = value - target;
        const bool rightward = (miss > 0.0) == t->falling;
        if (rightward)
            low = s;
        else
            high = s;
        const double slope = vm_exp(t->log_density(t->parameter, s) - value);
        double step = rightward ? INFINITY : -INFINITY;
        if (slope > 0.0 && slope < INFINITY)
            step = -miss / (t->falling ? -slope : slope);
        const double reach = 1.0 + 0.5 * fabs(s);
        step = step > reach ? reach : step < -reach ? -reach : step;
        double next = s + step;
        if (!(next > low && next < high))
            next = low > -INFINITY && high < INFINITY ? 0.5 * (low + high) : s + step;
        const double change = fabs(next - s);
        s = next;
        if (change <= 1e-15 * (1.0 + fabs(s)))
            break;
    }
    return s;
}

static double safe_log(double x)
{
    return vm_log(x > TINY ? x : TINY);
}

static double log_gamma_lower(double shape, double s)
{
    const double x = vm_exp(s);
    if (s < -700.0 || x < 1e-290) /* x^a / Gamma(a + 1) */
        return shape * s - special_log_gamma(shape + 1.0);
    return safe_log(special_gamma_tail(shape, x, false));
}

static double log_gamma_upper(double shape, double s)
{
    const double x = vm_exp(s);
    if (x < shape + 1.0)
        return safe_log(special_gamma_tail(shape, x, true));
    return x < INFINITY ? log_gamma_fraction(shape, x) : -INFINITY;
}

static double log_gamma_density(double shape, double s)
{
    const double x = vm_exp(s);
    if (x < 1e-290)
        return shape * s - special_log_gamma(shape);
    return log_gamma_term(shape, x) + vm_log(shape);
}

double special_gamma_quantile(double shape, double p, bool upper)
{
    /* the smaller tail keeps its digits */
    const bool other = p > 0.5;
    const bool tail = other ? !upper : upper;
    const double share = other ? 1.0 - p : p;
    const double z = vm_normal_quantile(tail ? 1.0 - share : share);
    /* Wilson & Hilferty 1931, Proc. National Academy of Sciences 17:684; else the power law */
    const double w = 1.0 - 1.0 / (9.0 * shape) + (z < 30.0 ? z : 30.0) / (3.0 * sqrt(shape));
    double start = w > 0.1 ? vm_log(shape) + 3.0 * vm_log(w) : 0.0;
    if (!(w > 0.1))
        start = (vm_log(tail ? 1.0 - share : share) + special_log_gamma(shape + 1.0)) / shape;
    const struct tail t = {shape, tail, tail ? log_gamma_upper : log_gamma_lower,
                           log_gamma_density};
    return vm_exp(invert(&t, vm_log(share), start));
}

/* ---- Student t ---- */

/* ln Gamma(a + 1/2) - ln Gamma(a): large a by its series (from A&S 6.1.47) */
static double log_gamma_half_step(double a)
{
    if (a < 30.0)
        return special_log_gamma(a + 0.5) - special_log_gamma(a);
    const double y = 1.0 / (a * a);
    return 0.5 * vm_log(a) +
           (-1.0 / 8 + y * (1.0 / 192 + y * (-1.0 / 640 + y * (17.0 / 14336)))) / a;
}

double special_t_log_density_top(double df)
{
    return log_gamma_half_step(0.5 * df) - 0.5 * (vm_log(df) + LN_PI);
}

/* continued fraction of the incomplete beta function (A&S 26.5.8), x below its mean */
static double beta_fraction(double a, double b, double x)
{
    double c = 1.0, d = 1.0 - (a + b) * x / (a + 1.0);
    d = 1.0 / (fabs(d) < TINY ? TINY : d);
    double h = d;
    for (int m = 1; m < TERMS; m++) {
        const double m2 = 2.0 * m;
        const double even = m * (b - m) * x / ((a + m2 - 1.0) * (a + m2));
        const double odd = -(a + m) * (a + b + m) * x / ((a + m2) * (a + m2 + 1.0));
        const double part[2] = {even, odd};
        double factor = 1.0;
        for (int i = 0; i < 2; i++) {
            d = 1.0 + part[i] * d;
            d = 1.0 / (fabs(d) < TINY ? TINY : d);
            c = 1.0 + part[i] / c;
            c = fabs(c) < TINY ? TINY : c;
            factor = d * c;
            h *= factor;
        }
        if (fabs(factor - 1.0) < 4.0 * EPSILON)
            break;
    }
    return h;
}

/* ln of x^a (1 - x)^b / B(a, b) with {a, b} = {df / 2, 1 / 2}, x = df / (df + t^2) */
static double log_beta_term(double df, double t)
{
    const double square = t * t;
    double spread =
        square < df * 1e8 ? log1p_of(square / df) : 2.0 * vm_log(t) - vm_log(df) + df / square;
    if (!(square < INFINITY))
        spread = 2.0 * vm_log(t) - vm_log(df);
    return -0.5 * df * spread + (vm_log(t) - 0.5 * (vm_log(df) + spread)) +
           log_gamma_half_step(0.5 * df) - 0.5 * LN_PI;
}

/* ln Pr(T > t) and ln Pr(0 < T < t), s = ln t */
static double log_t_beyond(double df, double s)
{
    const double t = vm_exp(s), square = t * t;
    const double x = square < INFINITY ? df / (df + square) : 0.0;
    const double a = 0.5 * df, b = 0.5;
    if (x < (a + 1.0) / (a + b + 2.0))
        return vm_log(0.5 * beta_fraction(a, b, x) / a) + log_beta_term(df, t);
    const double inner = vm_exp(vm_log(0.5 * beta_fraction(b, a, square / (df + square)) / b) +
                                log_beta_term(df, t));
    return vm_log(0.5 - inner);
}

static double log_t_within(double df, double s)
{
    const double t = vm_exp(s), square = t * t, a = 0.5 * df, b = 0.5;
    const double x = square < INFINITY ? df / (df + square) : 0.0;
    if (!(x < (a + 1.0) / (a + b + 2.0)))
        return vm_log(0.5 * beta_fraction(b, a, square / (df + square)) / b) + log_beta_term(df, t);
    return vm_log(0.5 - vm_exp(log_t_beyond(df, s)));
}

/* of s = ln t */
static double log_t_density(double df, double s)
{
    const double t = vm_exp(s), square = t * t;
    const double spread =
        square < df * 1e8 ? log1p_of(square / df) : 2.0 * s - vm_log(df) + df / square;
    return special_t_log_density_top(df) - 0.5 * (df + 1.0) * spread + s;
}

double special_t_tail(double df, double t, bool upper)
{
    if (t == 0.0)
        return 0.5;
    const bool small = (t > 0.0) == upper; /* the tail asked for is the one beyond |t| */
    const double size = fabs(t);
    if (!(size < INFINITY))
        return small ? 0.0 : 1.0;
    if (size < 1e-150)
        return 0.5;
    const double beyond = vm_exp(log_t_beyond(df, vm_log(size)));
    return small ? beyond : 1.0 - beyond;
}

/* where the quantile lies beyond all numbers, the largest that can still be squared */
#define LARGEST_LOG 345.0

double special_t_quantile(double df, double p, bool upper)
{
    const bool outer = p < 0.5; /* the smaller tail lies on the side asked for */
    const double share = outer ? p : 1.0 - p;
    const double sign = outer == upper ? 1.0 : -1.0;
    if (share == 0.5)
        return 0.0;
    const struct tail beyond = {df, true, log_t_beyond, log_t_density};
    const struct tail within = {df, false, log_t_within, log_t_density};
    const double z = -vm_normal_quantile(share > TINY ? share : TINY);
    double s = share > 0.25 ? invert(&within, vm_log(0.5 - share), vm_log(z))
                            : invert(&beyond, vm_log(share), vm_log(z));
    s = s < LARGEST_LOG ? s : LARGEST_LOG;
    return sign * vm_exp(s);
}

/* ---- normal ---- */

double special_normal_within(double x)
{
    if (x > 1.0)
        return 1.0 - 2.0 * vm_normal_cdf(-x);
    /* sqrt(2 / pi) x sum (-x^2 / 2)^k / (k! (2 k + 1)): A&S 7.1.5 */
    const double y = -0.5 * x * x;
    double sum = 0.0, term = 1.0;
    for (int k = 0; k < 20; k++) {
        sum += term / (2 * k + 1);
        term *= y / (k + 1);
    }
    return 0.79788456080286535588 * x * sum;
}
