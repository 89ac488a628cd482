/* SPDX-License-Identifier: GPL-3.0-or-later */
/* share_bounds.c: shares kept between a least and a largest share each.
 *
 * f(lambda) = sum_k min(most_k, max(least_k, lambda a_k)) never falls and is linear between its
 * break points least_k / a_k and most_k / a_k. So the two break points around f = 1 are found by
 * evaluating f at each of them, and lambda between them by one division: no iteration. Check value:
 * a = (0.7, 0.2, 0.1), least 0.15, most 0.6: lambda = 1.25, shares (0.6, 0.25, 0.15).
 */
#include "analysis/share_bounds.h"

#include <math.h>
#include <stdbool.h>

#include "design/design.h"

/* Ten shares of 0.1 sum to 1. */
static const double SUM_TOLERANCE = 1e-9;

struct shares {
    size_t n;
    double *a;
    const double *least, *most;
    double total; /* what they sum to */
};

static double sum_of(size_t n, const double *x)
{
    double sum = 0;
    for (size_t k = 0; k < n; k++)
        sum += x[k];
    return sum;
}

static double held(double x, double least, double most)
{
    const double raised = x > least ? x : least;
    return raised < most ? raised : most;
}

static double total_at(const struct shares *s, double lambda)
{
    double sum = 0;
    for (size_t k = 0; k < s->n; k++)
        sum += held(lambda * s->a[k], s->least[k], s->most[k]);
    return sum;
}

/* The neighbouring break points low < high with f(low) <= total <= f(high); low may be 0. */
struct bracket {
    double low, high;
};

static void narrow(struct bracket *b, const struct shares *s, double point)
{
    const double total = total_at(s, point);
    if (total <= s->total && point > b->low)
        b->low = point;
    if (total >= s->total && point < b->high)
        b->high = point;
}

static struct bracket find_bracket(const struct shares *s)
{
    struct bracket b = {0, INFINITY};
    for (size_t k = 0; k < s->n; k++)
        if (s->a[k] > 0) {
            narrow(&b, s, s->least[k] / s->a[k]);
            narrow(&b, s, s->most[k] / s->a[k]);
        }
    return b;
}

/* Between neighbouring break points a level is at its least, at its most, or moves with lambda. */
static double solve_between(const struct shares *s, struct bracket b)
{
    double moving = 0, standing = 0;
    for (size_t k = 0; k < s->n; k++) {
        const double a = s->a[k];
        if (a > 0 && s->least[k] / a <= b.low && s->most[k] / a >= b.high)
            moving += a;
        else if (a > 0 && s->most[k] / a <= b.low)
            standing += s->most[k];
        else
            standing += s->least[k];
    }
    return moving > 0 ? (s->total - standing) / moving : b.low;
}

static void solve(const struct shares *s)
{
    const struct bracket b = find_bracket(s);
    const double lambda = b.low < b.high ? solve_between(s, b) : b.low;
    for (size_t k = 0; k < s->n; k++)
        s->a[k] = held(lambda * s->a[k], s->least[k], s->most[k]);
}

/* Those with a > 0 get their most. What is missing is shared equally by the others: the same
 * addition to the least of each, up to its most, which is the problem above with equal weights. */
static void fill_up(const struct shares *s)
{
    double addition[LEVELS_MAX] = {0}, none[LEVELS_MAX] = {0}, room[LEVELS_MAX] = {0};
    struct shares others = {0, addition, none, room, s->total};
    for (size_t k = 0; k < s->n; k++) {
        others.total -= s->a[k] > 0 ? s->most[k] : s->least[k];
        if (s->a[k] > 0)
            continue;
        addition[others.n] = 1;
        room[others.n++] = s->most[k] - s->least[k];
    }
    solve(&others);
    for (size_t k = 0, i = 0; k < s->n; k++)
        s->a[k] = s->a[k] > 0 ? s->most[k] : s->least[k] + addition[i++];
}

static void share_equally(const struct shares *s)
{
    for (size_t k = 0; k < s->n; k++)
        s->a[k] = 1 / (double)s->n;
}

static bool within(const struct shares *s)
{
    for (size_t k = 0; k < s->n; k++)
        if (s->a[k] < s->least[k] || s->a[k] > s->most[k])
            return false;
    return true;
}

/* f at a lambda without bound. */
static double total_at_most(const struct shares *s)
{
    double sum = 0;
    for (size_t k = 0; k < s->n; k++)
        sum += s->a[k] > 0 ? s->most[k] : s->least[k];
    return sum;
}

enum bounds_outcome share_bounds(size_t n, double *a, const double *least, const double *most)
{
    const struct shares s = {n, a, least, most, 1};
    if (within(&s)) /* lambda = 1 */
        return BOUNDS_KEPT;
    if (sum_of(n, most) < 1 - SUM_TOLERANCE || sum_of(n, least) > 1 + SUM_TOLERANCE) {
        share_equally(&s);
        return BOUNDS_EQUAL;
    }
    if (total_at_most(&s) < 1 - SUM_TOLERANCE) {
        fill_up(&s);
        return BOUNDS_FILLED_UP;
    }
    solve(&s);
    return BOUNDS_KEPT;
}
