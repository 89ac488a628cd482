/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_json.c: check.json, a design and what it implies, for scripts. */
#include "report/check_json.h"

#include <cjson/cJSON.h>
#include <math.h>

#include "base/base.h"
#include "base/json_read.h"
#include "base/json_write.h"
#include "report/check_words.h"

static void write_tree(struct json_writer *w, const cJSON *tree)
{
    if (cJSON_IsObject(tree) || cJSON_IsArray(tree)) {
        json_open(w, cJSON_IsObject(tree) ? '{' : '[');
        for (const cJSON *member = tree->child; member; member = member->next) {
            if (cJSON_IsObject(tree)) {
                json_key(w, member->string);
            }
            write_tree(w, member);
        }
        json_close(w);
    } else if (cJSON_IsString(tree)) {
        json_string(w, tree->valuestring);
    } else if (cJSON_IsNumber(tree)) {
        json_number(w, tree->valuedouble);
    } else if (cJSON_IsBool(tree)) {
        json_bool(w, cJSON_IsTrue(tree));
    } else {
        json_null(w);
    }
}

static void write_design(struct json_writer *w, const struct design *d)
{
    json_key(w, "design");
    json_open(w, '{');
    json_key_string(w, "title", d->title);
    json_key_string(w, "sha256", d->sha256);
    json_key_string(w, "resolved_sha256", d->resolved_sha256);
    json_key(w, "resolved");
    cJSON *tree = NULL;
    struct err e = ERR_INIT;
    if (json_parse(text_s(&d->resolved), d->resolved.length, d->file, &tree, &e) != STATUS_OK) {
        BUG("the resolved design is no JSON");
    }
    write_tree(w, tree);
    cJSON_Delete(tree);
    err_release(&e);
    json_close(w);
    json_key_number(w, "seed", (double)d->seed);
}

static void write_band(struct json_writer *w, const char *key, const struct band *b)
{
    json_key(w, key);
    if (isnan(b->q50)) {
        json_null(w);
        return;
    }
    json_open_inline(w, '{');
    json_key_maybe(w, "q05", b->q05);
    json_key_maybe(w, "q50", b->q50);
    json_key_maybe(w, "q95", b->q95);
    json_close(w);
}

static void write_by_target(struct json_writer *w, const char *key, const struct design *d,
                            const double *p)
{
    json_key(w, key);
    json_open_inline(w, '{');
    for (size_t t = 0; t < d->targets; t++) {
        json_key_maybe(w, d->target[t].name, p[t]);
    }
    json_close(w);
}

static void write_level_prior(struct json_writer *w, const struct check_report *r, size_t k)
{
    json_key(w, "prior");
    if (!r->prior) {
        json_null(w);
        return;
    }
    const struct level_result *x = &r->prior->level[k];
    json_open(w, '{');
    write_band(w, "response", &r->bands->response[k]);
    write_band(w, "gain", &r->bands->gain[k]);
    json_key_maybe(w, "pr_positive", design_has_gain(r->d) ? x->pr_positive : NAN);
    write_by_target(w, "pr_target", r->d, x->pr_target);
    write_by_target(w, "pr_meets", r->d, x->pr_meets);
    json_close(w);
}

static void write_levels(struct json_writer *w, const struct check_report *r)
{
    const struct design *d = r->d;
    json_key(w, "levels");
    json_open(w, '[');
    for (size_t k = 0; k < d->levels; k++) {
        json_open(w, '{');
        json_key_string(w, "label", d->level[k].label);
        json_key_number(w, "value", d->level[k].value);
        json_key_bool(w, "control", (int)k == d->control);
        write_level_prior(w, r, k);
        json_close(w);
    }
    json_close(w);
}

static void write_targets(struct json_writer *w, const struct check_report *r)
{
    const struct design *d = r->d;
    json_key(w, "targets");
    json_open(w, '{');
    for (size_t t = 0; t < d->targets; t++) {
        struct text s = TEXT_INIT;
        say_target(&s, d, &d->target[t]);
        json_key(w, d->target[t].name);
        json_open(w, '{');
        json_key_string(w, "sentence", text_s(&s));
        json_key_maybe(w, "prior_pr_none", r->prior->target[t].pr_none);
        json_close(w);
        text_release(&s);
    }
    json_close(w);
}

/* null where there is none, or beyond all numbers */
static void write_quantile(struct json_writer *w, const char *key, const struct prior *p, double q)
{
    const double x = prior_is_fixed(p) ? NAN : prior_quantile(p, q);
    json_key_maybe(w, key, isfinite(x) ? x : NAN);
}

static void write_priors(struct json_writer *w, const struct check_report *r)
{
    const struct model *m = &r->d->model;
    json_key(w, "priors");
    json_open(w, '[');
    for (size_t i = 0; i < m->parameters; i++) {
        const struct prior *p = &m->prior[i];
        struct text s = TEXT_INIT;
        say_prior(&s, p);
        json_open(w, '{');
        json_key_string(w, "name", m->parameter[i]->name);
        json_key_string(w, "sentence", text_s(&s));
        write_quantile(w, "q05", p, 0.05);
        write_quantile(w, "q50", p, 0.5);
        write_quantile(w, "q95", p, 0.95);
        json_close(w);
        text_release(&s);
    }
    json_close(w);
}

static void write_cut(struct json_writer *w, size_t number, bool last,
                      const struct expected_cut *cut)
{
    json_open(w, '{');
    json_key_number(w, "analysis", (double)number);
    json_key_bool(w, "last", last);
    json_key_maybe(w, "point", cut->point);
    json_key_bool(w, "held", cut->held);
    json_key_maybe(w, "time", cut->held ? cut->time : NAN);
    json_key_maybe(w, "randomized", cut->randomized);
    json_key_maybe(w, "observed", cut->observed);
    json_key_maybe(w, "pending", cut->pending);
    json_key_maybe(w, "dropped", cut->dropped);
    json_close(w);
}

static void write_analyses(struct json_writer *w, const struct check_report *r)
{
    static const char *const counted[] = {"randomized", "observed", "time"};
    const struct expected *x = r->expected;
    json_key(w, "analyses");
    json_open(w, '{');
    json_key_string(w, "counted", counted[r->d->analyses.counted]);
    json_key_maybe(w, "enrolment_end", x->enrolment_end);
    json_key_maybe(w, "adapts_from", x->adapts_from);
    json_key(w, "expected");
    json_open(w, '[');
    for (size_t i = 0; i < x->count; i++) {
        write_cut(w, i + 1, false, &x->cut[i]);
    }
    write_cut(w, x->count + 1, true, &x->last);
    json_close(w);
    json_close(w);
}

static void write_decisions(struct json_writer *w, const struct design *d)
{
    struct text s = TEXT_INIT;
    json_key(w, "decisions");
    json_open(w, '[');
    for (size_t i = 0; i < d->decisions; i++) {
        text_clear(&s);
        say_decision(&s, d, &d->decision[i]);
        json_open(w, '{');
        json_key_string(w, "action", action_key(d->decision[i].action));
        json_key_string(w, "sentence", text_s(&s));
        json_close(w);
    }
    json_close(w);
    text_clear(&s);
    say_final(&s, d);
    json_key_string(w, "final", d->has_final ? text_s(&s) : NULL);
    text_release(&s);
}

static void write_truth(struct json_writer *w, const char *key, const struct design *d,
                        const double *response, bool gain)
{
    json_key(w, key);
    if (!response || (gain && !design_has_gain(d))) {
        json_null(w);
        return;
    }
    json_open_inline(w, '[');
    for (size_t k = 0; k < d->levels; k++) {
        json_number(w, gain ? expected_gain(d, response, k) : response[k]);
    }
    json_close(w);
}

static void write_true_levels(struct json_writer *w, const struct design *d, const double *response)
{
    json_key(w, "true_level");
    if (!response) {
        json_null(w);
        return;
    }
    json_open_inline(w, '{');
    for (size_t t = 0; t < d->targets; t++) {
        int level = analysis_true_level(d, t, response);
        json_key_string(w, d->target[t].name, level < 0 ? NULL : d->level[level].label);
    }
    json_close(w);
}

static void write_scenarios(struct json_writer *w, const struct design *d)
{
    json_key(w, "scenarios");
    json_open(w, '[');
    for (size_t i = 0; i < d->scenarios; i++) {
        const struct scenario *s = &d->scenario[i];
        json_open(w, '{');
        json_key_string(w, "name", s->name);
        json_key_bool(w, "null", s->is_null);
        write_truth(w, "response", d, s->response, false);
        write_truth(w, "gain", d, s->response, true);
        write_truth(w, "sd", d, s->sd, false);
        json_key_number(w, "trend", s->trend);
        write_true_levels(w, d, s->response);
        json_close(w);
    }
    json_close(w);
}

static void write_sentences(struct json_writer *w, const char *key, const struct sentences *s)
{
    json_key(w, key);
    json_open(w, '[');
    for (size_t i = 0; i < s->count; i++) {
        json_string(w, s->list[i]);
    }
    json_close(w);
}

void check_json(struct text *out, const struct check_report *r)
{
    struct json_writer w;
    json_writer_init(&w, out);
    json_open(&w, '{');
    json_key_number(&w, "terrace", 1);
    json_key_string(&w, "program", TERRACE_PROGRAM);
    json_key_string(&w, "kind", "check");
    write_design(&w, r->d);
    write_levels(&w, r);
    write_targets(&w, r);
    write_priors(&w, r);
    write_analyses(&w, r);
    write_decisions(&w, r->d);
    write_scenarios(&w, r->d);
    write_sentences(&w, "warnings", &r->notes->warnings);
    write_sentences(&w, "remarks", &r->notes->remarks);
    write_sentences(&w, "reminders", &r->notes->reminders);
    json_close(&w);
    text_add(out, "\n");
}
