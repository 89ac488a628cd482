/* SPDX-License-Identifier: GPL-3.0-or-later */
/* tiny_world.c: small designs and draws made by hand. */
#include "tiny_world.h"

#include "base/mem.h"

void tiny_init(struct tiny_world *w, size_t levels, int control)
{
    static char names[TINY_LEVELS][2] = {"A", "B", "C", "D", "E", "F", "G", "H"};
    *w = (struct tiny_world){0};
    w->d = (struct design){.levels = levels,
                           .level = w->level,
                           .control = control,
                           .control_on_curve = true,
                           .reference_level = control,
                           .type = ENDPOINT_CONTINUOUS,
                           .higher_is_better = true,
                           .target = w->target,
                           .subjects = 100,
                           .precision = 0.005,
                           .draws = 1000,
                           .max_draws = 64000};
    w->d.allocation = (struct allocation){.ratio = w->ratio,
                                          .adapts = true,
                                          .power = 1,
                                          .at_least = w->at_least,
                                          .at_most = w->at_most,
                                          .control_kind = control >= 0 ? CONTROL_SHARE_NUMBER
                                                                       : CONTROL_SHARE_NONE,
                                          .control_share = 1 / (double)levels};
    for (size_t k = 0; k < levels; k++) {
        w->level[k] = (struct level){names[k], (double)(k + 1)};
        w->ratio[k] = w->at_most[k] = 1;
    }
}

struct target *tiny_target(struct tiny_world *w, const struct target_rule *rule, double number,
                           int of)
{
    static char names[TINY_TARGETS][3] = {"T1", "T2", "T3", "T4", "T5", "T6", "T7", "T8"};
    struct target *t = &w->target[w->d.targets];
    *t = (struct target){.name = names[w->d.targets],
                         .rule = rule,
                         .fraction = number,
                         .effect = number,
                         .margin = number,
                         .of = of};
    w->d.targets++;
    return t;
}

double *tiny_draws(struct draws *out, const struct tiny_world *w, size_t n,
                   double (*value)(size_t i, size_t level))
{
    const size_t stride = n + 3; /* rows need not be tight */
    double *x = mem_new(stride * w->d.levels, sizeof *x);
    for (size_t k = 0; k < w->d.levels; k++)
        for (size_t i = 0; i < n; i++)
            x[k * stride + i] = value(i, k);
    *out = (struct draws){.n = n,
                          .points = n,
                          .stride = stride,
                          .chains = 1,
                          .levels = w->d.levels,
                          .link = x,
                          .response = x};
    return x;
}

/* Linear congruential, high bits (Knuth's MMIX constants). */
uint64_t tiny_random(uint64_t *state, uint64_t below)
{
    *state = *state * 6364136223846793005u + 1442695040888963407u;
    return (*state >> 33) % below;
}
