/* SPDX-License-Identifier: GPL-3.0-or-later */
/* allocate.c: the shares with which the next subjects are randomized.
 *
 * Powers of posterior probabilities, n/2N among them: Thall & Wathen (2007), Practical Bayesian
 * adaptive randomisation in clinical trials, European Journal of Cancer 43:859. */
#include "analysis/allocate.h"

#include "analysis/share_bounds.h"
#include "base/vecmath.h"

static bool is_candidate(const struct share_inputs *in, size_t level)
{
    return in->open[level] && design_is_active(in->d, level);
}

static double largest(const struct share_inputs *in, const double *x)
{
    double most = 0;
    for (size_t k = 0; k < in->d->levels; k++)
        if (is_candidate(in, k) && x[k] > most)
            most = x[k];
    return most;
}

/* x^y for x >= 0, y >= 0, with 0^0 = 1; exact where y is 0 or 1. */
static double power(double x, double y)
{
    if (!(y > 0))
        return 1;
    if (!(x > 0))
        return 0;
    return y > 1 || y < 1 ? vm_pow(x, y) : x;
}

static double exponent(const struct share_inputs *in)
{
    const struct allocation *al = &in->d->allocation;
    return al->power_kind == POWER_N_OVER_2N ? in->n / (2 * in->d->subjects) : al->power;
}

/* (1) a = w / sum w, w_k = p_k^power (Var_k / (n_k + 1))^information. Both bases are divided by
 * their largest, which cancels in a and keeps powers in range. */
static void weigh(double *a, struct share_remarks *remarks, const struct share_inputs *in)
{
    const struct design *d = in->d;
    double p[LEVELS_MAX] = {0}, v[LEVELS_MAX] = {0}, count = 0, sum = 0;
    for (size_t k = 0; k < d->levels; k++)
        count += is_candidate(in, k);
    for (size_t k = 0; k < d->levels; k++) {
        p[k] = in->pr_target[k] + in->pr_none / count;
        v[k] = in->variance[k] / (in->randomized[k] + 1);
        a[k] = 0;
    }
    const double most_p = largest(in, p), most_v = largest(in, v);
    for (size_t k = 0; k < d->levels; k++) {
        if (!is_candidate(in, k))
            continue;
        a[k] = power(most_p > 0 ? p[k] / most_p : 0, exponent(in)) *
               power(most_v > 0 ? v[k] / most_v : 0, d->allocation.information);
        sum += a[k];
    }
    remarks->all_zero = !(sum > 0);
    for (size_t k = 0; k < d->levels; k++)
        if (is_candidate(in, k))
            a[k] = remarks->all_zero ? 1 / count : a[k] / sum;
}

/* The level named by the target's `of` or by levels.reference serves for comparison and stays. */
static bool is_protected(const struct design *d, size_t level)
{
    const struct target *t = &d->target[d->allocation.adapt_target];
    return t->of == (int)level || d->reference_level == (int)level;
}

/* (2) Shares below drop_below become 0, the largest stay; the rest is rescaled. */
static void drop(double *a, bool *kept, const struct share_inputs *in)
{
    const double most = largest(in, a);
    double sum = 0;
    bool dropped = false;
    for (size_t k = 0; k < in->d->levels; k++) {
        kept[k] = is_candidate(in, k) &&
                  (a[k] >= in->d->allocation.drop_below || a[k] >= most || is_protected(in->d, k));
        dropped = dropped || (a[k] > 0 && !kept[k]);
        a[k] = kept[k] ? a[k] : 0;
        sum += a[k];
    }
    for (size_t k = 0; dropped && k < in->d->levels; k++)
        a[k] /= sum;
}

/* (3) at_least and at_most, over the levels not dropped. */
static void bound(double *a, const bool *kept, struct share_remarks *remarks,
                  const struct design *d)
{
    double x[LEVELS_MAX], least[LEVELS_MAX], most[LEVELS_MAX];
    size_t n = 0;
    for (size_t k = 0; k < d->levels; k++) {
        if (!kept[k])
            continue;
        x[n] = a[k];
        least[n] = d->allocation.at_least[k];
        most[n++] = d->allocation.at_most[k];
    }
    const enum bounds_outcome outcome = share_bounds(n, x, least, most);
    remarks->no_bounds = outcome == BOUNDS_EQUAL;
    remarks->filled_up = outcome == BOUNDS_FILLED_UP;
    n = 0;
    for (size_t k = 0; k < d->levels; k++)
        a[k] = kept[k] ? x[n++] : 0;
}

/* (4) The control's share c, and (1 - c) a_k. */
static void add_control(double *a, const struct share_inputs *in)
{
    const struct design *d = in->d;
    const struct allocation *al = &d->allocation;
    double c = al->control_share;
    if (d->control < 0 || al->control_kind == CONTROL_SHARE_NONE)
        return;
    if (al->control_kind == CONTROL_SHARE_AS_LARGEST) {
        const double most = largest(in, a);
        c = most / (1 + most);
    }
    for (size_t k = 0; k < d->levels; k++)
        a[k] *= 1 - c;
    a[d->control] = c;
}

void allocate_adapted(double *share, struct share_remarks *remarks, const struct share_inputs *in)
{
    bool kept[LEVELS_MAX];
    *remarks = (struct share_remarks){false, false, false};
    weigh(share, remarks, in);
    drop(share, kept, in);
    bound(share, kept, remarks, in->d);
    add_control(share, in);
}

void allocate_fixed(double *share, const struct design *d, const bool *open)
{
    double sum = 0;
    for (size_t k = 0; k < d->levels; k++)
        sum += open[k] ? d->allocation.ratio[k] : 0;
    for (size_t k = 0; k < d->levels; k++)
        share[k] = open[k] ? d->allocation.ratio[k] / sum : 0;
}
