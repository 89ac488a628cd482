/* SPDX-License-Identifier: GPL-3.0-or-later */
/* sensitivity_json.c: writes the sensitivity models of an analysis. */
#include "report/sensitivity_json.h"

#include "report/fit_words.h"
#include "report/results_json.h"

static void model(struct json_writer *w, const struct model *m)
{
    json_key_string(w, "curve", m->curve->key);
    if (m->curve->kind == CURVE_WALK) {
        json_key_number(w, "order", m->order);
        json_key_string(w, "spacing", m->spacing_actual ? "actual" : "steps");
    }
    if (model_is_shifted(m))
        json_key_number(w, "shift", m->shift);
}

static void level(struct json_writer *w, const struct analysis_report *r, size_t k)
{
    const struct level_result *l = &r->a->level[k];
    json_open(w, '{');
    json_key_string(w, "label", r->d->level[k].label);
    json_response(w, l);
    json_gain(w, r, l);
    json_by_target(w, r, "pr_target", l->pr_target);
    json_by_target(w, r, "pr_meets", l->pr_meets);
    json_close(w);
}

static void target(struct json_writer *w, const struct analysis_report *r, size_t t)
{
    const struct target_result *x = &r->a->target[t];
    json_key_open_inline(w, r->d->target[t].name, '{');
    json_key_string(w, "selected", x->selected >= 0 ? r->d->level[x->selected].label : NULL);
    json_key_maybe(w, "pr_selected", x->pr_selected);
    json_key_maybe(w, "pr_none", x->pr_none);
    json_key_maybe(w, "mcse", x->mcse);
    json_close(w);
}

static void measures(struct json_writer *w, const struct analysis_report *r,
                     const struct conditions *when, const struct decision_result *x)
{
    json_key_open(w, "conditions", '[');
    for (size_t i = 0; i < when->count; i++) {
        json_open_inline(w, '{');
        json_condition_arguments(w, r->d, &when->list[i]);
        json_key_maybe(w, "value", x->condition[i].value);
        json_key_maybe(w, "mcse", x->condition[i].mcse);
        json_close(w);
    }
    json_close(w);
}

/* Values only: no threshold is passed here, and nothing is met. */
static void decisions(struct json_writer *w, const struct analysis_report *r)
{
    json_key_open(w, "decisions", '[');
    for (size_t i = 0; i < r->a->decisions; i++) {
        json_open(w, '{');
        json_key_string(w, "action", action_key(r->d->decision[i].action));
        measures(w, r, &r->d->decision[i].when, &r->a->decision[i]);
        json_close(w);
    }
    json_close(w);
    if (r->a->final_success.condition) {
        json_key_open(w, "final_success", '{');
        measures(w, r, &r->d->final_success, &r->a->final_success);
        json_close(w);
    }
}

static void one(struct json_writer *w, const struct analysis_report *r)
{
    json_open(w, '{');
    model(w, r->a->model);
    json_key_bool(w, "decides", false);
    json_key_bool(w, "trusted", r->a->diagnostics.trusted);
    json_key_string(w, "message", r->a->failure);
    json_key_open(w, "levels", '[');
    for (size_t k = 0; k < r->a->levels; k++)
        level(w, r, k);
    json_close(w);
    json_key_open(w, "targets", '{');
    for (size_t t = 0; t < r->a->targets; t++)
        target(w, r, t);
    json_close(w);
    decisions(w, r);
    json_parameters(w, r->a);
    json_likelihood(w, &r->a->likelihood);
    json_diagnostics(w, &r->a->diagnostics);
    json_close(w);
}

void json_sensitivity(struct json_writer *w, const struct analysis_report *r)
{
    struct analysis_report beside = *r;
    if (r->a->sensitivities == 0)
        json_key_open_inline(w, "sensitivity", '[');
    else
        json_key_open(w, "sensitivity", '[');
    for (size_t i = 0; i < r->a->sensitivities; i++) {
        beside.a = &r->a->sensitivity[i];
        one(w, &beside);
    }
    json_close(w);
}
