/* SPDX-License-Identifier: GPL-3.0-or-later */
/* expected.c: expected counts at planned analyses.
 *
 * With R(t) the expected number randomized by time t (piecewise linear, ended at N = `subjects`),
 * L = observed_after and f = the dropout fraction (mean over levels, weighted by the ratio), a
 * subject drops out with probability f, uniformly in time over (0, L). Then at a cut at time t
 *
 *   completed(t) = (1 - f) R(t - L)
 *   left(t)      = f (1/L) int_{t-L}^{t} R(u) du        (L = 0: f R(t))
 *   observed     = completed           dropped = left   (dropped: excluded)
 *   observed     = completed + left    dropped = 0      (dropped: failure)
 *   pending(t)   = R(t) - completed - left
 *
 * left follows from int R'(a) min(1, (t - a)/L) da by parts. Check value: rate 6, L = 4, f = 0.1,
 * t = 10, N large: R = 60, completed = 0.9 x 36 = 32.4, left = 0.1 x 48 = 4.8, pending = 22.8.
 */
#include "design/expected.h"

#include <math.h>

#include "base/mem.h"

enum { BISECTIONS = 200 };

/* The pieces from which a cut is computed. */
struct flow {
    const struct design *d;
    double end;  /* end of enrolment */
    double drop; /* f */
};

double expected_arrivals(const struct accrual *a, double t)
{
    double n = 0;
    for (size_t i = 0; i < a->count && t > a->steps[i].from; i++) {
        double to = i + 1 < a->count && a->steps[i + 1].from < t ? a->steps[i + 1].from : t;
        n += a->steps[i].rate * (to - a->steps[i].from);
    }
    return n;
}

double expected_arrival_time(const struct accrual *a, double n)
{
    double before = 0;
    for (size_t i = 0; i < a->count; i++) {
        double from = a->steps[i].from, rate = a->steps[i].rate;
        double to = i + 1 < a->count ? a->steps[i + 1].from : INFINITY;
        if (rate > 0 && before + rate * (to - from) >= n) {
            return from + (n - before) / rate;
        }
        before += rate > 0 ? rate * (to - from) : 0;
    }
    return INFINITY;
}

static double randomized_by(const struct flow *f, double t)
{
    if (t <= 0) {
        return 0;
    }
    return t >= f->end ? f->d->subjects : expected_arrivals(&f->d->accrual, t);
}

/* int_0^t R(u) du, exact: R is linear between its corners. */
static double randomized_area(const struct flow *f, double t)
{
    const struct accrual *a = &f->d->accrual;
    double area = 0;
    for (size_t i = 0; i < a->count && a->steps[i].from < t && a->steps[i].from < f->end; i++) {
        double from = a->steps[i].from;
        double to = i + 1 < a->count ? a->steps[i + 1].from : INFINITY;
        to = fmin(to, fmin(t, f->end));
        area += (to - from) * (randomized_by(f, from) + expected_arrivals(a, to)) / 2;
    }
    return t > f->end ? area + (t - f->end) * f->d->subjects : area;
}

static void count_at(const struct flow *f, double t, struct expected_cut *out)
{
    double wait = f->d->observed_after;
    double completed = (1 - f->drop) * randomized_by(f, t - wait);
    double left = f->drop * randomized_by(f, t);
    if (wait > 0) {
        left = f->drop * (randomized_area(f, t) - randomized_area(f, t - wait)) / wait;
    }
    bool failure = f->d->dropped == DROPPED_FAILURE;
    out->time = t;
    out->randomized = randomized_by(f, t);
    out->observed = completed + (failure ? left : 0);
    out->dropped = failure ? 0 : left;
    out->pending = fmax(0, out->randomized - completed - left);
}

/* Time at which the expected observed count reaches n: it grows with t, so bisection finds it. */
static double observed_time(const struct flow *f, double n)
{
    double low = 0, high = f->end + f->d->observed_after;
    struct expected_cut cut;
    count_at(f, high, &cut);
    if (cut.observed < n) {
        return INFINITY;
    }
    for (int i = 0; i < BISECTIONS && low < high; i++) {
        double middle = low + (high - low) / 2;
        count_at(f, middle, &cut);
        if (cut.observed >= n) {
            high = middle;
        } else {
            low = middle;
        }
    }
    return high;
}

static double planned_time(const struct flow *f, double point)
{
    switch (f->d->analyses.counted) {
    case COUNTED_TIME:
        return point;
    case COUNTED_RANDOMIZED:
        return expected_arrival_time(&f->d->accrual, point);
    default:
        return observed_time(f, point);
    }
}

/* A cut waits until the previous decision is in force: `lag` after the previous cut. */
static void time_cuts(struct expected *x, const struct flow *f)
{
    const struct allocation *al = &f->d->allocation;
    double free_from = 0, start = al->start_per_level * (double)f->d->levels;
    for (size_t i = 0; i < x->count; i++) {
        struct expected_cut *cut = &x->cut[i];
        double t = planned_time(f, cut->point);
        cut->delayed = isfinite(t) && t < free_from;
        t = cut->delayed ? free_from : t;
        cut->time = t;
        cut->held = t < f->end;
        if (!cut->held) {
            continue;
        }
        count_at(f, t, cut);
        free_from = t + f->d->analyses.lag;
        if (al->adapts && isnan(x->adapts_from) && cut->randomized >= start) {
            x->adapts_from = free_from;
        }
    }
}

/* What can be said of a cut without accrual rates. */
static void count_untimed(const struct design *d, struct expected_cut *cut)
{
    cut->held = true;
    if (d->analyses.counted == COUNTED_RANDOMIZED) {
        cut->randomized = cut->point;
        cut->held = cut->point < d->subjects;
    } else if (d->analyses.counted == COUNTED_OBSERVED) {
        cut->observed = cut->point;
    }
}

static double mean_dropout(const struct design *d)
{
    double sum = 0, weight = 0;
    for (size_t k = 0; k < d->levels; k++) {
        sum += d->allocation.ratio[k] * d->dropout[k];
        weight += d->allocation.ratio[k];
    }
    return weight > 0 ? sum / weight : 0;
}

static void count_last(struct expected *x, const struct design *d, double drop)
{
    bool failure = d->dropped == DROPPED_FAILURE;
    x->last = (struct expected_cut){NAN, NAN, d->subjects, d->subjects, 0, 0, true, false};
    x->last.time = x->enrolment_end + d->observed_after;
    x->last.dropped = failure ? 0 : drop * d->subjects;
    x->last.observed = d->subjects - x->last.dropped;
}

void expected_init(struct expected *out, const struct design *d)
{
    *out = (struct expected){0};
    out->timed = d->accrual.count > 0;
    out->count = d->analyses.count;
    out->cut = mem_new(out->count, sizeof *out->cut);
    out->adapts_from = NAN;
    out->enrolment_end = out->timed ? expected_arrival_time(&d->accrual, d->subjects) : NAN;
    struct flow f = {d, out->enrolment_end, mean_dropout(d)};
    for (size_t i = 0; i < out->count; i++) {
        out->cut[i] =
            (struct expected_cut){d->analyses.at[i], NAN, NAN, NAN, NAN, NAN, false, false};
        if (!out->timed) {
            count_untimed(d, &out->cut[i]);
        }
    }
    if (out->timed) {
        time_cuts(out, &f);
    }
    count_last(out, d, f.drop);
}

double expected_gain(const struct design *d, const double *response, size_t level)
{
    if (!design_has_gain(d)) {
        return NAN;
    }
    double reference = d->reference_level >= 0 ? response[d->reference_level] : d->reference_number;
    return design_sign(d) * (response[level] - reference);
}

void expected_release(struct expected *x)
{
    mem_free(x->cut);
    *x = (struct expected){0};
}
