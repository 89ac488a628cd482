/* SPDX-License-Identifier: GPL-3.0-or-later */
/* figure_walk.c: every probability and measure of an analysis in one fixed order. */
#include "analysis/figure_walk.h"

static size_t count_conditions(const struct design *d)
{
    size_t count = d->has_final ? d->final_success.count : 0;
    for (size_t i = 0; i < d->decisions; i++)
        count += d->decision[i].when.count;
    return count;
}

static size_t count_asked(const struct design *d)
{
    const size_t positive = design_has_gain(d) ? d->levels : 0;
    return d->targets * (2 * d->levels + 1) + positive + count_conditions(d);
}

bool figures_are_middles(const struct design *d)
{
    return count_asked(d) == 0;
}

size_t figure_count_all(const struct design *d)
{
    return figures_are_middles(d) ? d->levels : count_asked(d);
}

/* 2 levels + 1 figures a target: is it, meets it, none. */
static struct walked_figure target_figure(const struct judgement *j, size_t i)
{
    const size_t levels = j->d->levels, t = i / (2 * levels + 1), rest = i % (2 * levels + 1);
    const size_t at = t * levels + rest % levels;
    if (rest == 2 * levels)
        return (struct walked_figure){
            .kind = FIGURE_NONE, .value = j->pr_none[t], .mcse = j->mcse_none[t], .target = t};
    if (rest < levels)
        return (struct walked_figure){.kind = FIGURE_TARGET,
                                      .value = j->pr_target[at],
                                      .mcse = j->mcse_target[at],
                                      .target = t,
                                      .level = rest};
    return (struct walked_figure){.kind = FIGURE_MEETS,
                                  .value = j->pr_meets[at],
                                  .mcse = j->mcse_meets[at],
                                  .target = t,
                                  .level = rest - levels};
}

static struct walked_figure measure_figure(const struct condition *c,
                                           const struct condition_result *x)
{
    return (struct walked_figure){.kind = FIGURE_MEASURE,
                                  .value = x->value,
                                  .mcse = x->mcse,
                                  .condition = c,
                                  .close = x->close};
}

static struct walked_figure condition_figure(const struct design *d, const struct analysis *a,
                                             size_t i)
{
    for (size_t n = 0; n < d->decisions; n++) {
        const size_t count = d->decision[n].when.count;
        if (i < count)
            return measure_figure(&d->decision[n].when.list[i], &a->decision[n].condition[i]);
        i -= count;
    }
    return measure_figure(&d->final_success.list[i], &a->final_success.condition[i]);
}

struct walked_figure figure_at(const struct judgement *j, const struct analysis *a, size_t i)
{
    const struct design *d = j->d;
    const size_t of_targets = d->targets * (2 * d->levels + 1);
    const size_t positive = design_has_gain(d) ? d->levels : 0;
    if (figures_are_middles(d))
        return (struct walked_figure){
            .kind = FIGURE_MIDDLE, .value = j->pr_above[i], .mcse = j->mcse_above[i], .level = i};
    if (i < of_targets)
        return target_figure(j, i);
    i -= of_targets;
    if (i < positive)
        return (struct walked_figure){.kind = FIGURE_POSITIVE,
                                      .value = j->pr_positive[i],
                                      .mcse = j->mcse_positive[i],
                                      .level = i};
    return condition_figure(d, a, i - positive);
}

void figure_name(struct text *out, const struct design *d, const struct walked_figure *f)
{
    const char *label = d->level[f->level].label;
    const char *target = d->targets > 0 ? d->target[f->target].name : "";
    switch (f->kind) {
    case FIGURE_TARGET:
        text_addf(out, "the probability that %s is %s", label, target);
        break;
    case FIGURE_MEETS:
        text_addf(out, "the probability that %s meets %s", label, target);
        break;
    case FIGURE_NONE:
        text_addf(out, "the probability that no level is %s", target);
        break;
    case FIGURE_POSITIVE:
        text_addf(out, "the probability that the gain of %s is above 0", label);
        break;
    case FIGURE_MIDDLE:
        text_addf(out, "the probability that the response at %s is above its posterior mean",
                  label);
        break;
    case FIGURE_MEASURE:
        f->condition->measure->sentence(f->condition, d, out);
        break;
    }
}
