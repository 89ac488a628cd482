/* SPDX-License-Identifier: GPL-3.0-or-later */
/* targets.c: target rules, a row each, and the true target level of a scenario. */
#include "analysis/targets.h"

#include <math.h>

#include "analysis/row_words.h"
#include "base/vecmath.h"

/* Beyond this no rate can be told from 0 or 1. */
static const double LOGIT_LIMIT = 700;

/* ---- optimal: the largest s m. The bar is that maximum itself, so the level that has it meets it
 * exactly, and ties go to the lowest. ---- */

static void optimal_bar(const struct target *t, const struct bar_inputs *in, size_t n, double *bar)
{
    (void)t;
    for (size_t i = 0; i < n; i++)
        bar[i] = in->best_active[i];
}

static void optimal_sentence(const struct target *t, const struct design *d, struct text *out)
{
    (void)t;
    text_addf(out, "the %slevel with the best response", active_word(d));
}

const struct target_rule rule_optimal = {
    .key = "optimal", .sentence = optimal_sentence, .bar = optimal_bar};

/* ---- effective_dose: gain >= fraction x largest gain, where that gain is above 0. Rounding must
 * not lift the bar over the best level itself (fraction 1). ---- */

static void effective_dose_bar(const struct target *t, const struct bar_inputs *in, size_t n,
                               double *bar)
{
    const double fraction = t->fraction, least = in->tolerance;
    for (size_t i = 0; i < n; i++) {
        const double best = in->best_active[i], gain = best - in->reference[i];
        const double x = in->reference[i] + fraction * gain;
        const double within = x < best ? x : best;
        bar[i] = gain > least ? within : INFINITY;
    }
}

static void effective_dose_sentence(const struct target *t, const struct design *d,
                                    struct text *out)
{
    text_addf(out, "the lowest %slevel whose gain", active_word(d));
    add_over_reference(out, d);
    text_add(out, " is at least ");
    add_shortest_number(out, t->fraction);
    text_add(out, " of the largest gain among the levels studied");
    add_scale_words(out, t->link);
    text_add(out, ", if that is above 0");
}

const struct target_rule rule_effective_dose = {.key = "effective_dose",
                                                .allowed = ARG_FRACTION,
                                                .required = ARG_FRACTION,
                                                .needs_gain = true,
                                                .sentence = effective_dose_sentence,
                                                .bar = effective_dose_bar};

/* ---- minimum_effect: gain >= effect ---- */

static void minimum_effect_bar(const struct target *t, const struct bar_inputs *in, size_t n,
                               double *bar)
{
    const double effect = t->effect;
    for (size_t i = 0; i < n; i++)
        bar[i] = in->reference[i] + effect;
}

static void minimum_effect_sentence(const struct target *t, const struct design *d,
                                    struct text *out)
{
    text_addf(out, "the lowest %slevel whose gain", active_word(d));
    add_over_reference(out, d);
    text_add(out, " is at least ");
    add_shortest_number(out, t->effect);
    add_scale_words(out, t->link);
}

const struct target_rule rule_minimum_effect = {.key = "minimum_effect",
                                                .allowed = ARG_EFFECT,
                                                .required = ARG_EFFECT,
                                                .needs_gain = true,
                                                .sentence = minimum_effect_sentence,
                                                .bar = minimum_effect_bar};

/* ---- within_margin: s (m_of - m_k) <= margin ---- */

static void within_margin_bar(const struct target *t, const struct bar_inputs *in, size_t n,
                              double *bar)
{
    const double margin = t->margin;
    for (size_t i = 0; i < n; i++)
        bar[i] = in->of[i] - margin;
}

static void within_margin_sentence(const struct target *t, const struct design *d, struct text *out)
{
    text_addf(out, "the lowest %slevel whose response is at most ", active_word(d));
    add_shortest_number(out, t->margin);
    add_scale_words(out, t->link);
    text_add(out, " worse than that of ");
    if (t->of != OF_BEST)
        text_add(out, d->level[t->of].label);
    else
        text_add(out, d->control >= 0 ? "the best level, the control included" : "the best level");
}

const struct target_rule rule_within_margin = {.key = "within_margin",
                                               .allowed = ARG_OF | ARG_MARGIN,
                                               .required = ARG_MARGIN,
                                               .sentence = within_margin_sentence,
                                               .bar = within_margin_bar};

/* ---- true target level ---- */

double response_on_scale(double response, bool link)
{
    if (!link)
        return response;
    const double x = vm_logit(response);
    return x < -LOGIT_LIMIT ? -LOGIT_LIMIT : x > LOGIT_LIMIT ? LOGIT_LIMIT : x;
}

/* s m on the target's scale: of each level, of the reference, and the best. */
struct truth {
    double sm[LEVELS_MAX];
    double best_active, best_all, reference, of;
};

static void truth_fill(struct truth *x, const struct design *d, const struct target *t,
                       const double *response)
{
    const double s = design_sign(d);
    x->best_active = -INFINITY;
    for (size_t k = 0; k < d->levels; k++) {
        x->sm[k] = s * response_on_scale(response[k], t->link);
        if (design_is_active(d, k) && x->sm[k] > x->best_active)
            x->best_active = x->sm[k];
    }
    x->best_all = x->best_active;
    if (d->control >= 0 && x->sm[d->control] > x->best_all)
        x->best_all = x->sm[d->control];
    x->of = t->of >= 0 ? x->sm[t->of] : x->best_all;
    x->reference = d->reference_level >= 0 ? x->sm[d->reference_level]
                                           : s * response_on_scale(d->reference_number, t->link);
}

/* 1e-9 x max(1, |effect|, largest |gain|); a margin counts as an effect. */
static double truth_tolerance(const struct truth *x, const struct design *d, const struct target *t)
{
    double size = 1;
    if (t->rule->allowed & ARG_EFFECT)
        size = fmax(size, fabs(t->effect));
    if (t->rule->allowed & ARG_MARGIN)
        size = fmax(size, fabs(t->margin));
    for (size_t k = 0; design_has_gain(d) && k < d->levels; k++)
        if (design_is_active(d, k))
            size = fmax(size, fabs(x->sm[k] - x->reference));
    return 1e-9 * size;
}

int target_true_level(const struct design *d, const struct target *t, const double *response)
{
    struct truth x;
    double bar;
    truth_fill(&x, d, t, response);
    const double tolerance = truth_tolerance(&x, d, t);
    const struct bar_inputs in = {&x.best_active, &x.best_all,
                                  design_has_gain(d) ? &x.reference : NULL, &x.of, tolerance};
    t->rule->bar(t, &in, 1, &bar);
    for (size_t k = 0; k < d->levels; k++)
        if (design_is_active(d, k) && x.sm[k] >= bar - tolerance)
            return (int)k;
    return LEVEL_NONE;
}
