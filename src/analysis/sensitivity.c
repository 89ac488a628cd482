/* SPDX-License-Identifier: GPL-3.0-or-later */
/* sensitivity.c: fits the design's sensitivity models to the same data. */
#include "analysis/sensitivity.h"

#include <math.h>

#include "base/mem.h"

static const struct spread no_spread = {NAN, NAN, NAN, NAN, NAN};

static void blank_level(struct level_result *x, size_t targets)
{
    x->response = x->gain = no_spread;
    x->pr_positive = x->next_share = NAN;
    for (size_t t = 0; t < targets; t++)
        x->pr_target[t] = x->pr_meets[t] = x->mcse_target[t] = x->mcse_meets[t] = NAN;
}

static void blank_decision(struct decision_result *x, size_t conditions)
{
    for (size_t i = 0; i < conditions; i++)
        x->condition[i] = (struct condition_result){.value = NAN, .mcse = NAN, .level = LEVEL_NONE};
}

/* No number stands in an analysis that was not made. */
static void blank(struct analysis *a, const struct design *d, const bool *closed)
{
    for (size_t k = 0; k < a->levels; k++) {
        blank_level(&a->level[k], a->targets);
        a->level[k].open = !closed || !closed[k] || !design_is_active(d, k);
    }
    for (size_t t = 0; t < a->targets; t++)
        a->target[t] = (struct target_result){
            .selected = LEVEL_NONE, .pr_selected = NAN, .pr_none = NAN, .mcse = NAN};
    for (size_t i = 0; i < a->parameters; i++)
        a->parameter[i] = (struct parameter_result){
            d->model.parameter[i]->name, no_spread, {NAN, NAN, NAN, NAN}, NAN};
    for (size_t i = 0; i < a->decisions; i++)
        blank_decision(&a->decision[i], d->decision[i].when.count);
    if (d->has_final)
        blank_decision(&a->final_success, d->final_success.count);
    a->recommendation = RECOMMEND_UNDETERMINED;
    a->diagnostics = (struct analysis_diagnostics){.max_rhat = NAN,
                                                   .min_ess_bulk = NAN,
                                                   .min_ess_tail = NAN,
                                                   .kish = NAN,
                                                   .lack_of_fit_p = NAN,
                                                   .second_difference = NAN};
}

static void fit(struct analysis *out, const struct design *d, const struct level_data *data,
                const struct analysis_request *r)
{
    struct analyst *w = analyst_new(d);
    struct err e = ERR_INIT;
    analysis_init(out, d);
    const enum status status = analysis_run(out, w, data, r, &e);
    if (status != STATUS_OK && status != STATUS_DISTRUSTED) {
        blank(out, d, r->closed);
        out->failure = mem_text(e.count > 0 ? e.faults[0].message : "it could not be fitted");
    }
    analyst_free(w);
    err_release(&e);
}

void sensitivity_run(struct analysis *out, const struct design *d, const struct level_data *data,
                     const struct analysis_request *r)
{
    sensitivity_release(out);
    out->sensitivity = mem_new(d->sensitivities, sizeof *out->sensitivity);
    for (size_t i = 0; i < d->sensitivities; i++) {
        /* the design with this model in the place of its own, and no sensitivity models */
        struct design variant = *d;
        variant.model = d->sensitivity[i];
        variant.sensitivities = 0;
        fit(&out->sensitivity[i], &variant, data, r);
        out->sensitivity[i].model = &d->sensitivity[i];
        out->sensitivities = i + 1;
    }
}

void sensitivity_release(struct analysis *a)
{
    for (size_t i = 0; i < a->sensitivities; i++)
        analysis_release(&a->sensitivity[i]);
    mem_free(a->sensitivity);
    a->sensitivity = NULL;
    a->sensitivities = 0;
}
