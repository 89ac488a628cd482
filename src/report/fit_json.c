/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fit_json.c: writes fit.json. */
#include "base/base.h"
#include "report/fit_report.h"
#include "report/fit_words.h"
#include "report/results_json.h"

static void origin(struct json_writer *w, const struct fit_report *f)
{
    const struct fit_table *t = f->table;
    json_key_number(w, "terrace", 1);
    json_key_string(w, "program", TERRACE_PROGRAM);
    json_key_string(w, "kind", "fit");
    json_key_null(w, "design");
    json_key_open(w, "data", '{');
    json_key_string(w, "sha256", t->data.sha256);
    json_key_string(w, "table", t->groups ? "groups" : "rows");
    json_key_number(w, "levels", (double)t->levels);
    json_key_number(w, "subjects", (double)t->data.subjects);
    json_key_number(w, "left_out", t->left_out);
    json_close(w);
}

static void model(struct json_writer *w, const struct fit_report *f)
{
    const struct design *d = f->r.d;
    const struct model *m = &d->model;
    json_key_open(w, "model", '{');
    json_key_string(w, "curve", m->curve->key);
    if (m->curve->kind == CURVE_WALK) {
        json_key_number(w, "order", m->order);
        json_key_string(w, "spacing", m->spacing_actual ? "actual" : "steps");
    }
    if (model_is_shifted(m))
        json_key_number(w, "shift", m->shift);
    json_close(w);
    json_key_string(w, "endpoint", f->table->binary ? "binary" : "continuous");
    json_key_string(w, "better", d->higher_is_better ? "higher" : "lower");
    json_key_number(w, "seed", (double)f->r.seed);
    if (!d->has_scales) {
        json_key_null(w, "default_prior_scales");
        return;
    }
    json_key_open_inline(w, "default_prior_scales", '{');
    json_key_number(w, "A", d->scales.A);
    json_key_number(w, "C", d->scales.C);
    json_close(w);
}

static void levels(struct json_writer *w, const struct fit_report *f)
{
    json_key_open(w, "levels", '[');
    for (size_t k = 0; k < f->table->levels; k++) {
        json_open(w, '{');
        json_key_string(w, "label", f->r.d->level[k].label);
        json_key_number(w, "value", f->r.d->level[k].value);
        json_key_number(w, "observed", f->table->data.by_level.n[k]);
        json_raw(w, &f->r, k);
        json_response(w, &f->r.a->level[k]);
        json_gain(w, &f->r, &f->r.a->level[k]);
        json_close(w);
    }
    json_close(w);
}

void fit_json(struct text *out, const struct fit_report *f)
{
    struct json_writer w;
    json_writer_init(&w, out);
    json_open(&w, '{');
    origin(&w, f);
    model(&w, f);
    levels(&w, f);
    json_parameters(&w, f->r.a);
    json_likelihood(&w, &f->r.a->likelihood);
    json_diagnostics(&w, &f->r.a->diagnostics);
    json_close(&w);
    text_add(out, "\n");
}
