/* SPDX-License-Identifier: GPL-3.0-or-later */
/* tally.c: on which draws a level is, or meets, each target: counting, block by block. */
#include "analysis/tally.h"

#include <emmintrin.h> /* SSE2: every x86-64 has it */
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
    double *sm;   /* [level][TILE] */
    double *tail; /* [level][TILE]: the last tile as it is, filled up */
    double best_active[TILE], best_all[TILE], reference[TILE], bar[TILE];
    uint64_t found[TILE];         /* all bits where a lower level met the target */
    uint64_t *n_target, *n_meets; /* [target * levels + level] */
};

struct tally *tally_new(const struct design *d)
{
    struct tally *w = mem_new(1, sizeof *w);
    w->d = d;
    w->sm = mem_aligned(d->levels * TILE, sizeof *w->sm);
    w->tail = mem_aligned(d->levels * TILE, sizeof *w->tail);
    w->n_target = mem_new(d->targets * d->levels, sizeof *w->n_target);
    w->n_meets = mem_new(d->targets * d->levels, sizeof *w->n_meets);
    return w;
}

void tally_free(struct tally *w)
{
    if (!w)
        return;
    mem_free(w->sm);
    mem_free(w->tail);
    mem_free(w->n_target);
    mem_free(w->n_meets);
    mem_free(w);
}

/* ---- one tile ---- */

static void fill(double *x, double value)
{
    for (size_t i = 0; i < TILE; i++)
        x[i] = value;
}

static void turn(double *restrict sm, const double *restrict m, double s)
{
    for (size_t i = 0; i < TILE; i++)
        sm[i] = s * m[i];
}

static void turn_and_raise(double *restrict sm, double *restrict best, const double *restrict m,
                           double s)
{
    for (size_t i = 0; i < TILE; i++) {
        const double x = s * m[i];
        sm[i] = x;
        best[i] = x > best[i] ? x : best[i];
    }
}

static void raise_to(double *restrict best, const double *restrict sm)
{
    for (size_t i = 0; i < TILE; i++)
        best[i] = sm[i] > best[i] ? sm[i] : best[i];
}

/* s m of every level, and the best of them. `m` is the tile's first draw of the first level. */
static void load_rows(struct tally *w, const bool *open, const double *m, size_t stride)
{
    const struct design *d = w->d;
    const double s = design_sign(d);
    fill(w->best_active, -INFINITY);
    for (size_t k = 0; k < d->levels; k++, m += stride)
        if (open[k] && design_is_active(d, k))
            turn_and_raise(w->sm + k * TILE, w->best_active, m, s);
        else
            turn(w->sm + k * TILE, m, s);
    memcpy(w->best_all, w->best_active, sizeof w->best_all);
    if (d->control >= 0)
        raise_to(w->best_all, w->sm + (size_t)d->control * TILE);
}

/* The tile of draws from `first` on. The last one is copied and filled up with zeros. */
static void load_tile(struct tally *w, const struct draws *draws, const bool *open, bool link,
                      size_t first)
{
    const size_t left = draws->n - first;
    const double *m = (link ? draws->link : draws->response) + first;
    if (left >= TILE) {
        load_rows(w, open, m, draws->stride);
        return;
    }
    for (size_t k = 0; k < w->d->levels; k++)
        for (size_t i = 0; i < TILE; i++)
            w->tail[k * TILE + i] = i < left ? m[k * draws->stride + i] : 0;
    load_rows(w, open, w->tail, TILE);
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

/* Where x >= bar, for 16 draws: a byte each, all bits or none. */
static __m128i meets_16(const double *x, const double *bar)
{
    __m128i pair[4];
    for (size_t i = 0; i < 4; i++) {
        const __m128d a = _mm_cmpge_pd(_mm_loadu_pd(x + 4 * i), _mm_loadu_pd(bar + 4 * i));
        const __m128d b = _mm_cmpge_pd(_mm_loadu_pd(x + 4 * i + 2), _mm_loadu_pd(bar + 4 * i + 2));
        pair[i] = _mm_castps_si128(
            _mm_shuffle_ps(_mm_castpd_ps(a), _mm_castpd_ps(b), _MM_SHUFFLE(2, 0, 2, 0)));
    }
    return _mm_packs_epi16(_mm_packs_epi32(pair[0], pair[1]), _mm_packs_epi32(pair[2], pair[3]));
}

/* Sum of 16 bytes. */
static uint64_t sum_bytes(__m128i x)
{
    uint64_t half[2];
    const __m128i sums = _mm_sad_epu8(x, _mm_setzero_si128());
    memcpy(half, &sums, sizeof half);
    return half[0] + half[1];
}

/* Subtracting a byte with all bits set counts one; a byte counts at most TILE / 16. */
static void count_level(const double *sm, const double *bar, __m128i *found, uint64_t *n_meets,
                        uint64_t *n_target)
{
    __m128i all = _mm_setzero_si128(), first = _mm_setzero_si128();
    for (size_t i = 0; i < TILE / 16; i++) {
        const __m128i meets = meets_16(sm + 16 * i, bar + 16 * i);
        all = _mm_sub_epi8(all, meets);
        first = _mm_sub_epi8(first, _mm_andnot_si128(found[i], meets));
        found[i] = _mm_or_si128(found[i], meets);
    }
    *n_meets += sum_bytes(all);
    *n_target += sum_bytes(first);
}

static void count_target(struct tally *w, const bool *open, size_t target)
{
    const struct design *d = w->d;
    __m128i found[TILE / 16]; /* where a lower level met the target */
    for (size_t i = 0; i < TILE / 16; i++)
        found[i] = _mm_setzero_si128();
    for (size_t k = 0; k < d->levels; k++) {
        const size_t at = target * d->levels + k;
        if (open[k] && design_is_active(d, k))
            count_level(w->sm + k * TILE, w->bar, found, &w->n_meets[at], &w->n_target[at]);
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
