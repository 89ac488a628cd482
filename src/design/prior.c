/* SPDX-License-Identifier: GPL-3.0-or-later */
/* prior.c: the prior of one number: what it is, its quantiles, its density, its moments. */
#include "design/prior.h"

#include <math.h>

#include "base/base.h"
#include "design/prior_families.h"

#define LN_2 0.69314718055994530942

enum { BLOCK = 64 }; /* points squared at a time for a prior on a variance */

bool prior_is_fixed(const struct prior *p)
{
    return p->family == &prior_family_fixed;
}

bool prior_is_truncated(const struct prior *p)
{
    return p->above > -INFINITY || p->below < INFINITY;
}

bool prior_is_computable(const struct prior *p)
{
    if (p->family == NULL || prior_is_truncated(p))
        return false;
    return prior_is_fixed(p) || p->family->log_density != NULL;
}

static struct prior prior_make(const struct prior_family *family, double first, double second)
{
    return (struct prior){
        .family = family, .arg = {first, second}, .above = -INFINITY, .below = INFINITY};
}

struct prior prior_normal(double mean, double sd)
{
    return prior_make(&prior_family_normal, mean, sd);
}

struct prior prior_half_normal(double sd)
{
    return prior_make(&prior_family_half_normal, sd, 0);
}

struct prior prior_lognormal(double meanlog, double sdlog)
{
    return prior_make(&prior_family_lognormal, meanlog, sdlog);
}

struct prior prior_fixed(double value)
{
    return prior_make(&prior_family_fixed, value, 0);
}

static double fixed_value(const struct prior *p)
{
    return p->on_variance ? __builtin_sqrt(p->arg[0]) : p->arg[0];
}

double prior_quantile(const struct prior *p, double q)
{
    double x;

    if (prior_is_fixed(p))
        return fixed_value(p);
    if (!prior_is_computable(p))
        BUG("a quantile of a prior that cannot be computed");
    x = p->family->quantile(p->arg, q);
    return p->on_variance ? __builtin_sqrt(x) : x;
}

/* With v = x^2 the density of x is p(v) 2 x. */
static void variance_log_density(const struct prior *p, size_t n, const double *x,
                                 const double *log_x, double *out)
{
    double v[BLOCK] = {0}, log_v[BLOCK] = {0};

    for (size_t i = 0; i < n; i++) {
        v[i] = x[i] * x[i];
        log_v[i] = 2.0 * log_x[i];
    }
    p->family->log_density(p->arg, n, v, log_v, out);
    for (size_t i = 0; i < n; i++)
        out[i] += LN_2 + log_x[i];
}

void prior_log_density(const struct prior *p, size_t n, const double *x, const double *log_x,
                       double *out)
{
    if (prior_is_fixed(p) || !prior_is_computable(p))
        BUG("a density of a prior that has none here");
    if (!p->on_variance) {
        p->family->log_density(p->arg, n, x, log_x, out);
        return;
    }
    for (size_t i = 0; i < n; i += BLOCK)
        variance_log_density(p, n - i < BLOCK ? n - i : BLOCK, x + i, log_x + i, out + i);
}

/* Moments of a square root or of a cut prior have no closed form that serves every family. */
static bool has_closed_moments(const struct prior *p)
{
    return p->family != NULL && !p->on_variance && !prior_is_truncated(p);
}

double prior_mean(const struct prior *p)
{
    if (prior_is_fixed(p))
        return fixed_value(p);
    return has_closed_moments(p) ? p->family->mean(p->arg) : NAN;
}

double prior_sd(const struct prior *p)
{
    double sd;

    if (prior_is_fixed(p))
        return 0;
    sd = has_closed_moments(p) ? p->family->sd(p->arg) : NAN;
    return isfinite(sd) ? sd : NAN;
}

void prior_support(const struct prior *p, double *low, double *high)
{
    *low = p->family->support_low;
    *high = INFINITY;
    if (p->family == &prior_family_uniform) {
        *low = p->arg[0];
        *high = p->arg[1];
    }
    if (p->on_variance) {
        *low = __builtin_sqrt(*low > 0 ? *low : 0);
        *high = *high < INFINITY ? __builtin_sqrt(*high) : *high;
    }
}
