/* SPDX-License-Identifier: GPL-3.0-or-later */
/* tally.c: on which draws a level is, or meets, each target: counting, block by block. */
#include "analysis/tally.h"

#include <math.h>
#include <stdint.h>
#include <string.h>

#include "analysis/targets.h"
#include "base/mem.h"

/* Draws a tile. Loops over a tile have this fixed length so that compilers turn them into vector
 * code; the last tile is filled up with draws that meet nothing. */
enum { TILE = 128 };

struct tally {
    const struct design *d;
    /* of the tile at hand; s x response on the scale asked for */
    double *sm; /* [level][TILE] */
    double best_active[TILE], best_all[TILE], reference[TILE], bar[TILE];
    uint64_t found[TILE];         /* all bits where a lower level met the target */
    uint64_t *n_target, *n_meets; /* [target * levels + level] */
};

struct tally *tally_new(const struct design *d)
{
    struct tally *w = mem_new(1, sizeof *w);
    w->d = d;
    w->sm = mem_aligned(d->levels * TILE, sizeof *w->sm);
    w->n_target = mem_new(d->targets * d->levels, sizeof *w->n_target);
    w->n_meets = mem_new(d->targets * d->levels, sizeof *w->n_meets);
    return w;
}

void tally_free(struct tally *w)
{
    if (!w)
        return;
    mem_free(w->sm);
    mem_free(w->n_target);
    mem_free(w->n_meets);
    mem_free(w);
}

/* ---- one tile ---- */

static void turn(double *restrict sm, const double *restrict m, double s)
{
    for (size_t i = 0; i < TILE; i++)
        sm[i] = s * m[i];
}

static void raise_to(double *restrict best, const double *restrict sm)
{
    for (size_t i = 0; i < TILE; i++)
        best[i] = sm[i] > best[i] ? sm[i] : best[i];
}

static void fill(double *x, double value)
{
    for (size_t i = 0; i < TILE; i++)
        x[i] = value;
}

/* s m of every level for `count` draws from `first` on. */
static void load_levels(struct tally *w, const struct draws *draws, bool link, size_t first,
                        size_t count)
{
    const double s = design_sign(w->d);
    const double *m = (link ? draws->link : draws->response) + first;
    for (size_t k = 0; k < w->d->levels; k++, m += draws->stride) {
        double *sm = w->sm + k * TILE;
        if (count == TILE) {
            turn(sm, m, s);
            continue;
        }
        for (size_t i = 0; i < TILE; i++)
            sm[i] = i < count ? s * m[i] : 0;
    }
}

static void load_best(struct tally *w, const bool *open)
{
    const struct design *d = w->d;
    fill(w->best_active, -INFINITY);
    for (size_t k = 0; k < d->levels; k++)
        if (open[k] && design_is_active(d, k))
            raise_to(w->best_active, w->sm + k * TILE);
    memcpy(w->best_all, w->best_active, sizeof w->best_all);
    if (d->control >= 0)
        raise_to(w->best_all, w->sm + (size_t)d->control * TILE);
}

static void load_tile(struct tally *w, const struct draws *draws, const bool *open, bool link,
                      size_t first)
{
    const size_t left = draws->n - first, count = left < TILE ? left : TILE;
    load_levels(w, draws, link, first, count);
    load_best(w, open);
}

/* The bars of a target for the tile; infinite where the tile has no draw. */
static void load_bar(struct tally *w, const struct target *t, size_t count)
{
    const struct design *d = w->d;
    struct bar_inputs in = {w->best_active, w->best_all, NULL, w->best_all, 0};
    if (d->reference_level >= 0) {
        in.reference = w->sm + (size_t)d->reference_level * TILE;
    } else if (d->has_reference_number) {
        fill(w->reference, design_sign(d) * response_on_scale(d->reference_number, t->link));
        in.reference = w->reference;
    }
    if (t->of >= 0)
        in.of = w->sm + (size_t)t->of * TILE;
    t->rule->bar(t, &in, TILE, w->bar);
    for (size_t i = count; i < TILE; i++)
        w->bar[i] = INFINITY;
}

/* Masks are all bits or none, so that subtracting one counts one. */
static void count_level(const double *restrict sm, const double *restrict bar,
                        uint64_t *restrict found, uint64_t *n_meets, uint64_t *n_target)
{
    uint64_t all = 0, first = 0;
    for (size_t i = 0; i < TILE; i++) {
        const uint64_t meets = sm[i] >= bar[i] ? UINT64_MAX : 0;
        all -= meets;
        first -= meets & ~found[i];
        found[i] |= meets;
    }
    *n_meets += all;
    *n_target += first;
}

static void count_target(struct tally *w, const bool *open, size_t target)
{
    const struct design *d = w->d;
    memset(w->found, 0, sizeof w->found);
    for (size_t k = 0; k < d->levels; k++) {
        const size_t at = target * d->levels + k;
        if (open[k] && design_is_active(d, k))
            count_level(w->sm + k * TILE, w->bar, w->found, &w->n_meets[at], &w->n_target[at]);
    }
}

/* ---- all draws ---- */

static bool any_target_on(const struct design *d, bool link)
{
    for (size_t t = 0; t < d->targets; t++)
        if (d->target[t].link == link)
            return true;
    return false;
}

static void count_scale(struct tally *w, const struct draws *draws, const bool *open, bool link)
{
    const struct design *d = w->d;
    for (size_t first = 0; first < draws->n; first += TILE) {
        load_tile(w, draws, open, link, first);
        for (size_t t = 0; t < d->targets; t++) {
            if (d->target[t].link != link)
                continue;
            load_bar(w, &d->target[t], draws->n - first);
            count_target(w, open, t);
        }
    }
}

void tally_count(struct tally *w, const struct draws *draws, const bool *open, double *pr_target,
                 double *pr_meets, double *pr_none)
{
    const size_t levels = w->d->levels, targets = w->d->targets;
    const double n = (double)draws->n;
    memset(w->n_target, 0, targets * levels * sizeof *w->n_target);
    memset(w->n_meets, 0, targets * levels * sizeof *w->n_meets);
    for (int link = 0; link < 2; link++)
        if (any_target_on(w->d, link))
            count_scale(w, draws, open, link);
    for (size_t t = 0; t < targets; t++) {
        uint64_t none = draws->n;
        for (size_t at = t * levels; at < (t + 1) * levels; at++) {
            pr_target[at] = (double)w->n_target[at] / n;
            pr_meets[at] = (double)w->n_meets[at] / n;
            none -= w->n_target[at];
        }
        pr_none[t] = (double)none / n;
    }
}

static void trace_tile(const struct tally *w, const bool *open, size_t count, double *bar,
                       int *level)
{
    const struct design *d = w->d;
    memcpy(bar, w->bar, count * sizeof *bar);
    for (size_t i = 0; i < count; i++)
        level[i] = LEVEL_NONE;
    for (size_t k = d->levels; k-- > 0;) {
        if (!open[k] || !design_is_active(d, k))
            continue;
        for (size_t i = 0; i < count; i++)
            level[i] = w->sm[k * TILE + i] >= w->bar[i] ? (int)k : level[i];
    }
}

void tally_trace(struct tally *w, const struct draws *draws, const bool *open, size_t target,
                 double *bar, int *level)
{
    const struct target *t = &w->d->target[target];
    for (size_t first = 0; first < draws->n; first += TILE) {
        const size_t left = draws->n - first, count = left < TILE ? left : TILE;
        load_tile(w, draws, open, t->link, first);
        load_bar(w, t, count);
        trace_tile(w, open, count, bar + first, level + first);
    }
}

void tally_best(struct tally *w, const struct draws *draws, const bool *open, bool link,
                double *best)
{
    for (size_t first = 0; first < draws->n; first += TILE) {
        const size_t left = draws->n - first, count = left < TILE ? left : TILE;
        load_tile(w, draws, open, link, first);
        memcpy(best + first, w->best_active, count * sizeof *best);
    }
}
