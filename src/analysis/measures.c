/* SPDX-License-Identifier: GPL-3.0-or-later */
/* measures.c: decision measures: probabilities of gains and responses, and of targets. */
#include "analysis/measures.h"

#include <math.h>

#include "analysis/indicators.h"
#include "analysis/row_words.h"
#include "analysis/targets.h"
#include "base/vecmath.h"
#include "posterior/diagnostics.h"

void measure_evaluate(const struct condition *c, const struct judgement *j, double *value,
                      double *mcse, int *level)
{
    *j->level = c->target >= 0 ? j->selected[c->target] : c->level;
    c->measure->evaluate(c, j, value, mcse);
    *level = *j->level;
}

/* ---- Pr(x > bar), x one number a draw ---- */

/* Average over draws of Phi((s mean - bar) / sd), the exact probability that s x > bar given the
 * draw's (phi, sd); 0 or 1 where sd = 0. */
static void exact_share(const struct judgement *j, const double *mean, const double *sd, double bar,
                        double *value, double *mcse)
{
    const double s = design_sign(j->d);
    const size_t n = j->draws.points;
    double *x = j->work;
    for (size_t i = 0; i < n; i++) {
        const double over = s * mean[i] - bar;
        const double sure = over > 0 ? INFINITY : -INFINITY;
        x[i] = sd[i] > 0 ? over / sd[i] : sure;
    }
    vecmath()->normal_cdf(n, x, x);
    *value = diag_mean(x, n);
    *mcse = judge_mcse_mean(j, x, n, *value);
}

/* Share of the draws on which s (m - reference) > bar; reference NULL: `number`. */
static void counted_share(const struct judgement *j, const double *m, const double *reference,
                          double number, double bar, double *value, double *mcse)
{
    const double s = design_sign(j->d);
    const size_t n = j->draws.n;
    double *x = j->work;
    size_t count = 0;
    for (size_t i = 0; i < n; i++) {
        const double over = s * (m[i] - (reference ? reference[i] : number));
        x[i] = over > bar ? 1 : 0;
        count += over > bar;
    }
    *value = (double)count / (double)n;
    *mcse = judge_mcse_share(j, x, *value);
}

static void gain_over_level(const struct judgement *j, size_t level, double gain, bool link,
                            double *value, double *mcse)
{
    const struct draws *x = &j->draws;
    const size_t reference = (size_t)j->d->reference_level;
    if (x->difference_mean)
        exact_share(j, x->difference_mean + level * x->stride, x->difference_sd + level * x->stride,
                    gain, value, mcse);
    else
        counted_share(j, judge_row(j, level, link), judge_row(j, reference, link), 0, gain, value,
                      mcse);
}

static void gain_over_number(const struct judgement *j, size_t level, double gain, bool link,
                             double *value, double *mcse)
{
    const struct draws *x = &j->draws;
    const double reference = response_on_scale(j->d->reference_number, link);
    if (x->response_mean)
        exact_share(j, x->response_mean + level * x->stride, x->response_sd + level * x->stride,
                    design_sign(j->d) * reference + gain, value, mcse);
    else
        counted_share(j, judge_row(j, level, link), NULL, reference, gain, value, mcse);
}

void measure_gain(const struct judgement *j, size_t level, double gain, bool link, double *value,
                  double *mcse)
{
    if ((int)level == j->d->reference_level) { /* compared with itself: 0 on every draw */
        *value = gain < 0 ? 1 : 0;
        *mcse = 0;
    } else if (j->d->reference_level >= 0) {
        gain_over_level(j, level, gain, link, value, mcse);
    } else {
        gain_over_number(j, level, gain, link, value, mcse);
    }
}

void measure_gains(struct judgement *j)
{
    for (size_t k = 0; k < j->d->levels; k++) {
        j->pr_positive[k] = j->mcse_positive[k] = NAN;
        if (design_has_gain(j->d))
            measure_gain(j, k, 0, false, &j->pr_positive[k], &j->mcse_positive[k]);
    }
}

void measure_response(const struct judgement *j, size_t level, double value, bool link,
                      double *probability, double *mcse)
{
    const struct draws *x = &j->draws;
    if (x->response_mean)
        exact_share(j, x->response_mean + level * x->stride, x->response_sd + level * x->stride,
                    design_sign(j->d) * value, probability, mcse);
    else
        counted_share(j, judge_row(j, level, link), NULL, value, 0, probability, mcse);
}

/* ---- the level a measure looks at ---- */

/* The selected level; when none is, the measure is 0 by definition. */
static bool has_level(const struct judgement *j, double *value, double *mcse)
{
    if (*j->level >= 0)
        return true;
    *value = *mcse = 0;
    return false;
}

static void add_probability_that(struct text *out)
{
    text_add(out, "the probability that ");
}

static void add_above_gain(const struct condition *c, const struct design *d, struct text *out)
{
    add_over_reference(out, d);
    text_add(out, " is above ");
    add_shortest_number(out, c->gain);
    add_scale_words(out, c->link);
}

/* ---- pr_gain ---- */

static void any_gain_evaluate(const struct condition *c, const struct judgement *j, double *value,
                              double *mcse)
{
    *value = -1;
    *mcse = 0;
    for (size_t k = 0; k < j->d->levels; k++) {
        double p, error;
        if (!j->open[k] || !design_is_active(j->d, k))
            continue;
        measure_gain(j, k, c->gain, c->link, &p, &error);
        if (p > *value) {
            *value = p;
            *mcse = error;
            *j->level = (int)k;
        }
    }
}

static void pr_gain_evaluate(const struct condition *c, const struct judgement *j, double *value,
                             double *mcse)
{
    if (c->level == LEVEL_ANY)
        any_gain_evaluate(c, j, value, mcse);
    else if (has_level(j, value, mcse))
        measure_gain(j, (size_t)*j->level, c->gain, c->link, value, mcse);
}

static void pr_gain_sentence(const struct condition *c, const struct design *d, struct text *out)
{
    text_add(out, c->level == LEVEL_ANY ? "the largest, over the levels, of the probabilities that "
                                        : "the probability that ");
    text_add(out, c->level == LEVEL_ANY ? "a level's gain" : "the gain of ");
    if (c->target >= 0)
        add_selected(out, d, c->target);
    else if (c->level >= 0)
        text_add(out, d->level[c->level].label);
    add_above_gain(c, d, out);
}

const struct measure measure_pr_gain = {.key = "pr_gain",
                                        .allowed = ARG_TARGET | ARG_LEVEL | ARG_GAIN | ARG_SCALE,
                                        .required = ARG_TARGET | ARG_LEVEL,
                                        .needs_gain = true,
                                        .sentence = pr_gain_sentence,
                                        .evaluate = pr_gain_evaluate};

/* ---- pr_any_gain: the largest gain over the open active levels ---- */

static void pr_any_gain_evaluate(const struct condition *c, const struct judgement *j,
                                 double *value, double *mcse)
{
    const double s = design_sign(j->d);
    const int reference = j->d->reference_level;
    const double *row = reference >= 0 ? judge_row(j, (size_t)reference, c->link) : NULL;
    const double number = s * response_on_scale(j->d->reference_number, c->link);
    double *x = j->work;
    size_t count = 0;
    tally_best(j->tally, &j->draws, j->open, c->link, x);
    for (size_t i = 0; i < j->draws.n; i++) {
        const double gain = x[i] - (row ? s * row[i] : number);
        x[i] = gain > c->gain ? 1 : 0;
        count += gain > c->gain;
    }
    *value = (double)count / (double)j->draws.n;
    *mcse = judge_mcse_share(j, x, *value);
}

static void pr_any_gain_sentence(const struct condition *c, const struct design *d,
                                 struct text *out)
{
    add_probability_that(out);
    text_add(out, "the largest gain");
    add_above_gain(c, d, out);
}

const struct measure measure_pr_any_gain = {.key = "pr_any_gain",
                                            .allowed = ARG_GAIN | ARG_SCALE,
                                            .needs_gain = true,
                                            .sentence = pr_any_gain_sentence,
                                            .evaluate = pr_any_gain_evaluate};

/* ---- pr_level, pr_meets: of the selected level ---- */

static void pr_level_evaluate(const struct condition *c, const struct judgement *j, double *value,
                              double *mcse)
{
    if (!has_level(j, value, mcse))
        return;
    const size_t at = (size_t)c->target * j->d->levels + (size_t)*j->level;
    *value = j->pr_target[at];
    *mcse = indicator_target_error(j, (size_t)c->target, (size_t)*j->level);
}

static void pr_level_sentence(const struct condition *c, const struct design *d, struct text *out)
{
    add_probability_that(out);
    add_selected(out, d, c->target);
    text_add(out, " is that target");
}

const struct measure measure_pr_level = {.key = "pr_level",
                                         .allowed = ARG_TARGET,
                                         .required = ARG_TARGET,
                                         .sentence = pr_level_sentence,
                                         .evaluate = pr_level_evaluate};

static void pr_meets_evaluate(const struct condition *c, const struct judgement *j, double *value,
                              double *mcse)
{
    if (!has_level(j, value, mcse))
        return;
    const size_t at = (size_t)c->target * j->d->levels + (size_t)*j->level;
    *value = j->pr_meets[at];
    *mcse = indicator_meets_error(j, (size_t)c->target, (size_t)*j->level);
}

static void pr_meets_sentence(const struct condition *c, const struct design *d, struct text *out)
{
    add_probability_that(out);
    add_selected(out, d, c->target);
    text_add(out, " meets it, whether or not a lower one does");
}

const struct measure measure_pr_meets = {.key = "pr_meets",
                                         .allowed = ARG_TARGET,
                                         .required = ARG_TARGET,
                                         .sentence = pr_meets_sentence,
                                         .evaluate = pr_meets_evaluate};

/* ---- pr_response: of the selected level ---- */

static void pr_response_evaluate(const struct condition *c, const struct judgement *j,
                                 double *value, double *mcse)
{
    if (has_level(j, value, mcse))
        measure_response(j, (size_t)*j->level, c->value, c->link, value, mcse);
}

static void pr_response_sentence(const struct condition *c, const struct design *d,
                                 struct text *out)
{
    add_probability_that(out);
    text_add(out, "the response of ");
    add_selected(out, d, c->target);
    text_add(out, " is better than ");
    add_shortest_number(out, c->value);
    add_scale_words(out, c->link);
}

const struct measure measure_pr_response = {.key = "pr_response",
                                            .allowed = ARG_TARGET | ARG_VALUE | ARG_SCALE,
                                            .required = ARG_TARGET | ARG_VALUE,
                                            .sentence = pr_response_sentence,
                                            .evaluate = pr_response_evaluate};
