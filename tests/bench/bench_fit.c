/* SPDX-License-Identifier: GPL-3.0-or-later */
/* bench_fit.c: microseconds, effective draws a second and Kish's share of one fit of 1,000 draws,
 * for every curve x endpoint, over named data sets (informative, flat, sparse). */
#include <stdio.h>
#include <string.h>
#include <time.h>

#include "analysis/vocabulary_rows.h"
#include "base/base.h"
#include "base/mem.h"
#include "posterior/diagnostics.h"
#include "posterior/posterior.h"

enum { DRAWS = 1000, REPEATS = 400, ROUNDS = 5 };

struct bench_case {
    const char *curve;
    bool binary;
    size_t levels;
    double target; /* microseconds, 0: none named */
};

static const struct bench_case cases[] = {
    {"ndlm", false, 9, 105},      {"sigmoid_emax", false, 7, 100}, {"emax", true, 7, 140},
    {"ndlm", true, 9, 180},       {"emax", false, 7, 0},           {"sigmoid_emax", true, 7, 0},
    {"independent", false, 9, 0}, {"independent", true, 9, 0},
};

static const char *const data_names[] = {"informative", "flat", "sparse"};

static struct design *design_for(const struct bench_case *c)
{
    struct text t = TEXT_INIT;
    struct err e = ERR_INIT;
    struct design *d = NULL;
    text_addf(&t, "{\"terrace\":1,\"title\":\"bench\",\"levels\":{\"list\":[");
    for (size_t k = 0; k < c->levels; k++)
        text_addf(&t, "%s{\"label\":\"L%zu\",\"value\":%zu}", k ? "," : "", k, k * 10);
    text_addf(&t,
              "]},\"endpoint\":{\"name\":\"y\",\"type\":\"%s\",\"better\":\"higher\"%s},"
              "\"model\":{\"curve\":\"%s\"},\"subjects\":240}",
              c->binary ? "binary" : "continuous", c->binary ? "" : ",\"range\":[-10,10]",
              c->curve);
    if (design_parse(&d, text_s(&t), t.length, "bench", &terrace_vocabulary, &e) != STATUS_OK) {
        struct text m = TEXT_INIT;
        err_text(&e, &m);
        fputs(text_s(&m), stderr);
    }
    text_release(&t);
    return d;
}

/* a saturating response, its flat counterpart, and few subjects at half of the levels */
static void fill(struct level_data *x, const struct bench_case *c, size_t which)
{
    for (size_t k = 0; k < c->levels; k++) {
        const double dose = (double)k * 10.0, shape = dose / (15.0 + dose);
        const double wiggle = (double)(k * 7 % 5) / 5.0 - 0.4;
        x->n[k] = which == 2 ? (double)(k % 2 * 3) : 26.0;
        x->mean[k] = which == 1 ? 0.3 * wiggle : 4.0 * shape + 0.3 * wiggle;
        x->ss[k] = x->n[k] > 1 ? (x->n[k] - 1.0) * 6.0 : 0.0;
        const double rate = which == 1 ? 0.35 : 0.2 + 0.5 * shape;
        x->events[k] = (double)(long)(x->n[k] * rate + wiggle + 0.5);
        if (x->events[k] < 0)
            x->events[k] = 0;
    }
}

static double now(void)
{
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

static void run_case(const struct bench_case *c)
{
    struct design *d = design_for(c);
    struct err e = ERR_INIT;
    struct plan *plan;
    if (!d)
        return;
    plan = plan_new(d, &d->model);
    struct posterior *p = posterior_new(plan);
    struct level_data x;
    level_data_init(&x, c->levels);
    double time_of[3];
    for (size_t which = 0; which < 3; which++) {
        double best = 1e9, ess = 0, kish = 0;
        fill(&x, c, which);
        for (int round = 0; round < ROUNDS; round++) {
            const double start = now();
            for (uint32_t i = 0; i < REPEATS; i++) {
                posterior_start(p, &x, (struct rng_key){.seed = 1, .index = i}, &e);
                posterior_extend(p, DRAWS);
            }
            const double each = (now() - start) / REPEATS * 1e6;
            best = each < best ? each : best;
        }
        for (uint32_t i = 0; i < 20; i++) {
            posterior_start(p, &x, (struct rng_key){.seed = 2, .index = i}, &e);
            posterior_extend(p, DRAWS);
            const struct draws r = posterior_draws(p);
            double least = DRAWS;
            for (size_t k = 0; k < r.levels; k++) {
                const double one = diag_ess_bulk(r.link + k * r.stride, r.n, r.chains);
                least = one < least ? one : least;
            }
            ess += least / 20;
            kish += posterior_kish(p) / 20;
        }
        time_of[which] = best;
        printf("%-13s %-10s %zu levels  %-11s %7.1f us  ESS %5.0f  %8.0f draws/s  kish %.3f\n",
               c->curve, c->binary ? "binary" : "continuous", c->levels, data_names[which], best,
               ess, ess / best * 1e6, kish);
    }
    const double a = time_of[0], b = time_of[1], f = time_of[2];
    const double low = a < b ? a : b, high = a < b ? b : a;
    const double median = f < low ? low : f > high ? high : f;
    if (c->target > 0)
        printf("%-13s %-10s median %.1f us, aim %.0f us, ratio %.2f\n", c->curve,
               c->binary ? "binary" : "continuous", median, c->target, median / c->target);
    level_data_release(&x);
    posterior_free(p);
    plan_free(plan);
    design_free(d);
}

/* An argument names one curve; "binary" or "continuous" may follow it. */
int main(int count, char **words)
{
    base_init();
    for (size_t i = 0; i < COUNT_OF(cases); i++)
        if ((count < 2 || strcmp(words[1], cases[i].curve) == 0) &&
            (count < 3 || (strcmp(words[2], "binary") == 0) == cases[i].binary))
            run_case(&cases[i]);
    return 0;
}
