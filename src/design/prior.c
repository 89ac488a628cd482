/* SPDX-License-Identifier: GPL-3.0-or-later */
/* prior.c: the prior of one number: what it is, its quantiles, its density, its moments. */
#include "design/prior.h"

#include <math.h>

#include "base/base.h"
#include "base/vecmath.h"
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

/* --- mass and quantiles --- */

/* Pr(X < a), Pr(X > b) of the uncut family, and what lies between; each by the tail that keeps its
 * digits. */
struct cut {
    double below, above, mass;
    bool upper; /* everything lies in the upper half */
};

static struct cut cut_of(const struct prior *p)
{
    const struct prior_family *f = p->family;
    const bool low = p->above > -INFINITY, high = p->below < INFINITY;
    struct cut c = {low ? f->cdf(p->arg, p->above) : 0.0, high ? f->upper(p->arg, p->below) : 0.0,
                    0, false};
    const double beyond_low = low ? f->upper(p->arg, p->above) : 1.0;
    const double under_high = high ? f->cdf(p->arg, p->below) : 1.0;

    c.upper = beyond_low < 0.5;
    if (c.upper)
        c.mass = beyond_low - c.above;
    else if (under_high < 0.5)
        c.mass = under_high - c.below;
    else
        c.mass = 1.0 - c.below - c.above;
    return c;
}

double prior_mass(const struct prior *p)
{
    if (prior_is_fixed(p) || !prior_is_truncated(p))
        return 1;
    return cut_of(p).mass;
}

void prior_settle(struct prior *p)
{
    p->log_mass = prior_is_truncated(p) ? vm_log(prior_mass(p)) : 0;
}

/* the quantile of the cut family at u, rest = 1 - u */
static double cut_quantile(const struct prior *p, double u, double rest)
{
    const struct prior_family *f = p->family;
    const struct cut c = cut_of(p);
    const double under = c.below + u * c.mass, over = c.above + rest * c.mass;
    const double x =
        c.upper || over < 0.5 ? f->quantile_upper(p->arg, over) : f->quantile(p->arg, under);

    return x < p->above ? p->above : x > p->below ? p->below : x;
}

/* at u, or at 1 - rest where that keeps more digits */
static double quantile_at(const struct prior *p, double u, double rest)
{
    double x;

    if (prior_is_fixed(p))
        return fixed_value(p);
    if (prior_is_truncated(p))
        x = cut_quantile(p, u, rest);
    else
        x = u < 0.5 ? p->family->quantile(p->arg, u) : p->family->quantile_upper(p->arg, rest);
    return p->on_variance ? __builtin_sqrt(x) : x;
}

double prior_quantile(const struct prior *p, double q)
{
    if (prior_is_fixed(p) || prior_is_truncated(p))
        return quantile_at(p, q, 1.0 - q);
    return p->on_variance ? __builtin_sqrt(p->family->quantile(p->arg, q))
                          : p->family->quantile(p->arg, q);
}

/* --- density --- */

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

static void uncut_log_density(const struct prior *p, size_t n, const double *x, const double *log_x,
                              double *out)
{
    if (!p->on_variance) {
        p->family->log_density(p->arg, n, x, log_x, out);
        return;
    }
    for (size_t i = 0; i < n; i += BLOCK)
        variance_log_density(p, n - i < BLOCK ? n - i : BLOCK, x + i, log_x + i, out + i);
}

void prior_log_density(const struct prior *p, size_t n, const double *x, const double *log_x,
                       double *out)
{
    double low, high;

    if (prior_is_fixed(p))
        BUG("a density of a prior that has none");
    uncut_log_density(p, n, x, log_x, out);
    if (!prior_is_truncated(p))
        return;
    prior_support(p, &low, &high);
    for (size_t i = 0; i < n; i++)
        out[i] = x[i] < low || x[i] > high ? -INFINITY : out[i] - p->log_mass;
}

static double root(double x)
{
    return x > 0 ? __builtin_sqrt(x) : 0;
}

void prior_support(const struct prior *p, double *low, double *high)
{
    const bool uniform = p->family == &prior_family_uniform;

    *low = uniform ? p->arg[0] : p->family->support_low;
    *high = uniform ? p->arg[1] : INFINITY;
    *low = p->above > *low ? p->above : *low;
    *high = p->below < *high ? p->below : *high;
    if (p->on_variance) {
        *low = root(*low);
        *high = *high < INFINITY ? root(*high) : *high;
    }
}

/* --- moments --- */

/* Whether the moment of an order exists. */
static bool has_moment(const struct prior *p, double order)
{
    const struct prior_family *f = p->family;
    const bool upper = !(p->below < INFINITY), lower = f->two_sided && !(p->above > -INFINITY);

    if (f->moments_below == NULL || (!upper && !lower))
        return true;
    return f->moments_below(p->arg) > (p->on_variance ? order / 2 : order);
}

static double to_order(double x, int order)
{
    return order == 2 ? x * x : x;
}

/* At r from an end where the density falls by a power the quantile function is c r^-a (1 + o(1)).
 * Where a moment only just exists no quadrature reaches far enough: this part is integrated in
 * closed form, c^order / (1 - a order). c is 0 where there is no such end. */
struct power_tail {
    double a, c;
};

#define TAIL_AT 1e-60       /* where c is read: the power law holds there to all digits */
#define SLOW 0.5            /* a order from which quadrature alone loses digits */
#define NEAREST 1e-290      /* probabilities nearest to an end: of the uncut family, and */
#define NEAREST_POWER 1e-70 /* with a power tail taken out, within what can be squared */

static struct power_tail power_tail(const struct prior *p, int order, bool upper)
{
    const struct prior_family *f = p->family;
    const bool cut = upper ? p->below < INFINITY : p->above > -INFINITY || !f->two_sided;
    struct power_tail t = {0, 0};

    if (cut || f->moments_below == NULL)
        return t;
    t.a = (p->on_variance ? 0.5 : 1.0) / f->moments_below(p->arg);
    if (t.a * order < SLOW)
        return (struct power_tail){0, 0};
    t.c = (upper ? quantile_at(p, 1.0, TAIL_AT) : quantile_at(p, TAIL_AT, 1.0)) *
          vm_exp(t.a * vm_log(TAIL_AT));
    return t;
}

/* E (X - centre)^order, order 1 or 2, without the power tails: integral of the quantile function
 * over (0, 1) with u = 1 / (1 + exp(-pi sinh t)); `least` is the nearest to an end. */
static double smooth_moment(const struct prior *p, double centre, int order,
                            const struct power_tail tail[2], double least)
{
    const double step = 1.0 / 32, pi = 3.14159265358979323846;
    double sum = 0, weights = 0;

    for (int k = -190; k <= 190; k++) {
        const double e = vm_exp(step * k), sinh = 0.5 * (e - 1 / e), cosh = 0.5 * (e + 1 / e);
        const double u = vm_logistic(pi * sinh), rest = vm_logistic(-pi * sinh);
        const double weight = u * rest * cosh;

        if (!(u > least && rest > least))
            continue;
        const double low = tail[0].c * vm_exp(-tail[0].a * vm_log(u));
        const double high = tail[1].c * vm_exp(-tail[1].a * vm_log(rest));
        sum += weight * (to_order(quantile_at(p, u, rest) - centre, order) - to_order(low, order) -
                         to_order(high, order));
        weights += weight;
    }
    return sum / weights;
}

static double moment_about(const struct prior *p, double centre, int order)
{
    const struct power_tail tail[2] = {power_tail(p, order, false), power_tail(p, order, true)};
    const bool power = tail[0].c != 0 || tail[1].c != 0;
    double sum =
        smooth_moment(p, centre, order, tail, power ? NEAREST_POWER : NEAREST / prior_mass(p));

    for (int i = 0; i < 2 && power; i++)
        sum += to_order(tail[i].c, order) / (1.0 - tail[i].a * order);
    return sum;
}

static bool has_closed_moments(const struct prior *p)
{
    return !p->on_variance && !prior_is_truncated(p);
}

double prior_mean(const struct prior *p)
{
    double mean, centre;

    if (prior_is_fixed(p))
        return fixed_value(p);
    if (!has_moment(p, 1))
        return NAN;
    if (has_closed_moments(p))
        return p->family->mean(p->arg);
    centre = prior_quantile(p, 0.5);
    mean = centre + moment_about(p, centre, 1);
    return isfinite(mean) ? mean : NAN;
}

double prior_sd(const struct prior *p)
{
    double sd, centre, off;

    if (prior_is_fixed(p))
        return 0;
    if (!has_moment(p, 2))
        return NAN;
    if (has_closed_moments(p)) {
        sd = p->family->sd(p->arg);
    } else {
        centre = prior_quantile(p, 0.5);
        off = moment_about(p, centre, 1);
        sd = root(moment_about(p, centre, 2) - off * off);
    }
    return isfinite(sd) ? sd : NAN;
}
