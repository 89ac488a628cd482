/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_json.c: writes analysis.json. Every number that does not exist is null; when the
 * computation is not trusted, everything that would be acted upon is null too. */
#include "report/analysis_json.h"

#include <math.h>

#include "base/base.h"
#include "report/results_json.h"
#include "report/sensitivity_json.h"

/* A verdict that must not be acted upon when the computation is not trusted. */
static void key_verdict(struct json_writer *w, const struct analysis_report *r, const char *key,
                        bool verdict)
{
    if (r->a->diagnostics.trusted)
        json_key_bool(w, key, verdict);
    else
        json_key_null(w, key);
}

static void head(struct json_writer *w, const struct analysis_report *r)
{
    json_key_number(w, "terrace", 1);
    json_key_string(w, "program", TERRACE_PROGRAM);
    json_key_string(w, "kind", "analysis");
    json_key_number(w, "analysis", (double)r->a->number);
    json_key_bool(w, "final", r->a->final);
    if (r->data->dates && r->data->cut_text)
        json_key_string(w, "cut", r->data->cut_text);
    else
        json_key_maybe(w, "cut", r->data->cut);
    json_key_string(w, "by", r->by);
}

static void design_and_data(struct json_writer *w, const struct analysis_report *r)
{
    json_key_open(w, "design", '{');
    json_key_string(w, "title", r->d->title);
    json_key_string(w, "sha256", r->d->sha256);
    json_key_string(w, "resolved_sha256", r->d->resolved_sha256);
    json_close(w);
    json_key_open(w, "data", '{');
    json_key_string(w, "sha256", r->data->sha256);
    json_key_number(w, "subjects", (double)r->data->subjects);
    json_key_number(w, "observed", r->data->observed);
    json_key_number(w, "pending", r->data->pending);
    json_key_number(w, "dropped", r->data->dropped);
    json_key_maybe(w, "dropped_as_failure", r->data->dropped_as_failure);
    if (r->data->warnings > 0)
        json_key_strings(w, "warnings", r->data->warnings, r->data->warning);
    json_close(w);
    json_key_number(w, "seed", (double)r->seed);
}

static void level(struct json_writer *w, const struct analysis_report *r, size_t k)
{
    const struct level_result *l = &r->a->level[k];
    json_open(w, '{');
    json_key_string(w, "label", r->d->level[k].label);
    json_key_number(w, "value", r->d->level[k].value);
    json_key_bool(w, "control", (int)k == r->d->control);
    if (!l->open)
        json_key_bool(w, "closed", true);
    json_key_number(w, "randomized", r->data->by_level.randomized[k]);
    json_key_number(w, "observed", r->data->by_level.n[k]);
    json_raw(w, r, k);
    json_response(w, l);
    json_gain(w, r, l);
    json_by_target(w, r, "pr_target", l->pr_target);
    json_by_target(w, r, "pr_meets", l->pr_meets);
    json_key_maybe(w, "next_share", r->a->diagnostics.trusted ? l->next_share : NAN);
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
    json_key_bool(w, "close", x->close);
    json_key_bool(w, "imprecise", x->imprecise);
    json_close(w);
}

static void condition(struct json_writer *w, const struct analysis_report *r,
                      const struct condition *c, const struct condition_result *x)
{
    json_open_inline(w, '{');
    json_condition_arguments(w, r->d, c);
    json_key_maybe(w, "value", x->value);
    json_key_maybe(w, "mcse", x->mcse);
    json_key_number(w, "threshold", c->threshold);
    json_key_string(w, "side", c->above ? "above" : "below");
    key_verdict(w, r, "met", x->met);
    json_key_bool(w, "close", x->close);
    json_key_bool(w, "imprecise", x->imprecise);
    json_close(w);
}

/* `applies`, `met` and the conditions; `join` only where there is something to join. */
static void verdict(struct json_writer *w, const struct analysis_report *r,
                    const struct conditions *when, const struct decision_result *x)
{
    json_key_bool(w, "applies", x->applies);
    key_verdict(w, r, "met", x->met);
    if (when->join != JOIN_ONE)
        json_key_string(w, "join", when->join == JOIN_ALL ? "all" : "any");
    json_key_open(w, "conditions", '[');
    for (size_t i = 0; i < when->count; i++)
        condition(w, r, &when->list[i], &x->condition[i]);
    json_close(w);
}

static void decisions(struct json_writer *w, const struct analysis_report *r)
{
    json_key_open(w, "decisions", '[');
    for (size_t i = 0; i < r->a->decisions; i++) {
        json_open(w, '{');
        json_key_string(w, "action", action_key(r->d->decision[i].action));
        if (!r->d->decision[i].binding)
            json_key_bool(w, "binding", false);
        verdict(w, r, &r->d->decision[i].when, &r->a->decision[i]);
        json_close(w);
    }
    json_close(w);
    if (r->a->final_success.condition) {
        json_key_open(w, "final_success", '{');
        verdict(w, r, &r->d->final_success, &r->a->final_success);
        json_close(w);
    }
}

static void results(struct json_writer *w, const struct analysis_report *r)
{
    json_key_open(w, "levels", '[');
    for (size_t k = 0; k < r->a->levels; k++)
        level(w, r, k);
    json_close(w);
    json_key_open(w, "targets", '{');
    for (size_t t = 0; t < r->a->targets; t++)
        target(w, r, t);
    json_close(w);
    json_parameters(w, r->a);
}

void analysis_json(struct text *out, const struct analysis_report *r)
{
    const enum recommendation said =
        r->a->diagnostics.trusted ? r->a->recommendation : RECOMMEND_UNDETERMINED;
    struct json_writer w;
    json_writer_init(&w, out);
    json_open(&w, '{');
    head(&w, r);
    design_and_data(&w, r);
    results(&w, r);
    json_likelihood(&w, &r->a->likelihood);
    decisions(&w, r);
    json_key_string(&w, "recommendation", recommendation_key(said));
    json_diagnostics(&w, &r->a->diagnostics);
    if (r->a->notes > 0)
        json_key_strings(&w, "notes", r->a->notes, r->a->note);
    json_sensitivity(&w, r);
    json_close(&w);
    text_add(out, "\n");
}
