/* SPDX-License-Identifier: GPL-3.0-or-later */
/* judge.c: what a set of posterior draws says of every target. */
#include "analysis/judge.h"

#include <math.h>
#include <string.h>

#include "analysis/indicators.h"
#include "base/mem.h"
#include "posterior/diagnostics.h"

struct judgement *judgement_new(const struct design *d)
{
    struct judgement *j = mem_new(1, sizeof *j);
    const size_t cells = d->targets * d->levels;
    j->d = d;
    j->share = 1;
    j->threads = 1;
    j->open = mem_new(d->levels, sizeof *j->open);
    double **by_cell[] = {&j->pr_target, &j->pr_meets, &j->mcse_target, &j->mcse_meets,
                          &j->ess_target};
    for (size_t i = 0; i < sizeof by_cell / sizeof *by_cell; i++)
        *by_cell[i] = mem_new(cells, sizeof(double));
    double **by_target[] = {&j->pr_none, &j->mcse_none, &j->ess_none};
    for (size_t i = 0; i < sizeof by_target / sizeof *by_target; i++)
        *by_target[i] = mem_new(d->targets, sizeof(double));
    j->selected = mem_new(d->targets, sizeof *j->selected);
    j->close = mem_new(d->targets, sizeof *j->close);
    j->pr_positive = mem_new(d->levels, sizeof(double));
    double **by_level[] = {&j->mcse_positive, &j->middle, &j->pr_above, &j->mcse_above};
    for (size_t i = 0; i < sizeof by_level / sizeof *by_level; i++)
        *by_level[i] = mem_new(d->levels, sizeof(double));
    j->tally = tally_new(d);
    j->level = mem_new(1, sizeof *j->level);
    judgement_open(j, NULL);
    return j;
}

void judgement_free(struct judgement *j)
{
    if (!j)
        return;
    void *owned[] = {j->open,          j->pr_target,  j->pr_meets, j->mcse_target,
                     j->mcse_meets,    j->ess_target, j->pr_none,  j->mcse_none,
                     j->ess_none,      j->selected,   j->close,    j->pr_positive,
                     j->mcse_positive, j->work,       j->level,    j->bar,
                     j->found,         j->middle,     j->pr_above, j->mcse_above};
    for (size_t i = 0; i < sizeof owned / sizeof *owned; i++)
        mem_free(owned[i]);
    tally_free(j->tally);
    mem_free(j);
}

void judgement_open(struct judgement *j, const bool *closed)
{
    for (size_t k = 0; k < j->d->levels; k++)
        j->open[k] = !closed || !closed[k] || !design_is_active(j->d, k);
}

static void make_room(struct judgement *j, size_t n)
{
    if (n <= j->room)
        return;
    j->work = mem_grow(j->work, n, sizeof *j->work);
    j->bar = mem_grow(j->bar, n, sizeof *j->bar);
    j->found = mem_grow(j->found, n, sizeof *j->found);
    j->room = n;
}

/* ---- Monte Carlo standard errors ---- */

double judge_ess(const struct judgement *j, const double *x)
{
    if (!j->by_ess)
        return j->share * (double)j->draws.points; /* grouped: at least so many */
    return diag_ess(x, j->draws.n, j->draws.chains);
}

bool judge_is_grouped(const struct judgement *j)
{
    return j->draws.points < j->draws.n;
}

/* Grouped draws: the standard error from the averages of SLICES consecutive stretches of points,
 * which are independent. x: n values, a point's at i, i + points, ... */
static double error_by_slices(const struct judgement *j, const double *x, size_t n, double mean)
{
    enum { SLICES = 16 };
    const size_t points = j->draws.points > 0 ? j->draws.points : 1;
    double squares = 0;
    for (size_t s = 0; s < SLICES; s++) {
        const size_t first = s * points / SLICES, end = (s + 1) * points / SLICES;
        double sum = 0;
        for (size_t row = 0; row < n; row += points)
            for (size_t i = first; i < end; i++)
                sum += x[row + i];
        const size_t count = (end - first) * (n / points);
        const double off = count > 0 ? sum / (double)count - mean : 0;
        squares += off * off;
    }
    return sqrt(squares / (SLICES * (SLICES - 1)));
}

double judge_mcse_share(const struct judgement *j, const double *x, double p)
{
    if (!judge_is_grouped(j))
        return diag_mcse_probability(p, judge_ess(j, x));
    /* 0 and 1 are never exact */
    const double least = diag_mcse_probability(0, (double)j->draws.points);
    return fmax(least, error_by_slices(j, x, j->draws.n, p));
}

double judge_mcse_mean(const struct judgement *j, const double *x, size_t n, double mean)
{
    if (judge_is_grouped(j))
        return error_by_slices(j, x, n, mean);
    return diag_sd(x, n, mean) / sqrt(judge_ess(j, x));
}

static void errors_of_share(struct judgement *j)
{
    const size_t cells = j->d->targets * j->d->levels;
    const double ess = j->share * (double)j->draws.points;
    for (size_t i = 0; i < cells; i++) {
        j->ess_target[i] = ess;
        j->mcse_target[i] = diag_mcse_probability(j->pr_target[i], ess);
        j->mcse_meets[i] = diag_mcse_probability(j->pr_meets[i], ess);
    }
    for (size_t t = 0; t < j->d->targets; t++) {
        j->ess_none[t] = ess;
        j->mcse_none[t] = diag_mcse_probability(j->pr_none[t], ess);
    }
}

void judge_counts(struct judgement *j, const struct draws *draws)
{
    j->draws = *draws;
    make_room(j, draws->n);
    tally_count(j->tally, draws, j->open, j->pr_target, j->pr_meets, j->pr_none);
    if (j->by_ess)
        for (size_t t = 0; t < j->d->targets; t++)
            indicator_errors(j, t);
    else
        errors_of_share(j);
}

void judge_middles(struct judgement *j, const struct judgement *other)
{
    const size_t n = j->draws.n;
    for (size_t k = 0; k < j->d->levels; k++) {
        const double *m = judge_row(j, k, false);
        size_t count = 0;
        j->middle[k] = other ? other->middle[k] : diag_mean(m, n);
        for (size_t i = 0; i < n; i++) {
            j->work[i] = m[i] > j->middle[k] ? 1 : 0;
            count += m[i] > j->middle[k];
        }
        j->pr_above[k] = (double)count / (double)n;
        j->mcse_above[k] = judge_mcse_share(j, j->work, j->pr_above[k]);
    }
}

/* ---- selection (interface, section 5) ---- */

static bool is_candidate(const struct judgement *j, size_t level)
{
    return j->open[level] && design_is_active(j->d, level);
}

/* The open active level with the largest pr_target, the lowest of equals, `but` left out. */
static int most_probable(const struct judgement *j, size_t t, int but)
{
    const double *p = j->pr_target + t * j->d->levels;
    int best = LEVEL_NONE;
    for (size_t k = 0; k < j->d->levels; k++)
        if (is_candidate(j, k) && (int)k != but && (best < 0 || p[k] > p[best]))
            best = (int)k;
    return best;
}

/* Standard error of the difference of two shares of the same draws, which exclude each other:
 * sqrt((p1 + p2 - (p1 - p2)^2) / ESS). */
static double difference_error(double p1, double p2, double ess)
{
    const double lead = p1 - p2;
    return sqrt(fmax(0, p1 + p2 - lead * lead) / ess);
}

/* None is selected when Pr(none) > 0.5, so that 0.5 is what Pr(none) is compared with; a level is
 * compared with the runner-up as well. */
static void select_probable(struct judgement *j, size_t t)
{
    const size_t row = t * j->d->levels;
    const double none = j->pr_none[t];
    const int best = most_probable(j, t, LEVEL_NONE);
    j->close[t] = fabs(none - 0.5) < 3 * j->mcse_none[t];
    j->selected[t] = none > 0.5 ? LEVEL_NONE : best;
    const int next = most_probable(j, t, best);
    if (none > 0.5 || best < 0 || next < 0)
        return;
    const size_t a = row + (size_t)best, b = row + (size_t)next;
    const double ess = fmin(j->ess_target[a], j->ess_target[b]);
    const double error = difference_error(j->pr_target[a], j->pr_target[b], ess);
    if (j->pr_target[a] - j->pr_target[b] < 3 * error)
        j->close[t] = true;
}

/* The lowest that meets the target with the probability asked for; close when one of the levels up
 * to it could as well lie on the other side. */
static void select_meeting(struct judgement *j, size_t t)
{
    const double p = j->d->target[t].meets;
    j->selected[t] = LEVEL_NONE;
    j->close[t] = false;
    for (size_t k = 0; k < j->d->levels && j->selected[t] < 0; k++) {
        const size_t at = t * j->d->levels + k;
        if (!is_candidate(j, k))
            continue;
        if (fabs(j->pr_meets[at] - p) < 3 * j->mcse_meets[at])
            j->close[t] = true;
        if (j->pr_meets[at] >= p)
            j->selected[t] = (int)k;
    }
}

void judge_selection(struct judgement *j)
{
    for (size_t t = 0; t < j->d->targets; t++)
        if (j->d->target[t].by_meets)
            select_meeting(j, t);
        else
            select_probable(j, t);
}

const double *judge_row(const struct judgement *j, size_t level, bool link)
{
    return (link ? j->draws.link : j->draws.response) + level * j->draws.stride;
}
