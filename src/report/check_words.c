/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_words.c: question, endpoint, model, targets and decisions as sentences. */
#include "report/check_words.h"

#include <math.h>
#include <string.h>

void say_value(struct text *out, double x, const char *unit)
{
    add_shortest_number(out, x);
    if (unit && *unit) {
        text_addf(out, " %s", unit);
    }
}

void say_time(struct text *out, const struct design *d, double x)
{
    say_value(out, x, d->time_unit);
    text_add(out, x < 1 || x > 1 ? "s" : "");
}

static void add_end(struct text *out, const char *word, double x)
{
    if (isfinite(x)) {
        text_addf(out, ", %s ", word);
        add_shortest_number(out, x);
    }
}

/* "lognormal, meanlog 2.996, sdlog 1" */
void say_prior(struct text *out, const struct prior *p)
{
    if (prior_is_fixed(p)) {
        text_add(out, "fixed at ");
        add_shortest_number(out, p->arg[0]);
        return;
    }
    text_add(out, p->family->sentence);
    for (size_t i = 0; i < PRIOR_ARGS && p->family->args[i].key; i++) {
        text_addf(out, ", %s ", p->family->args[i].key);
        add_shortest_number(out, p->arg[i]);
    }
    add_end(out, "above", p->above);
    add_end(out, "below", p->below);
    if (p->on_variance) {
        text_add(out, ", on the variance");
    }
}

void say_endpoint(struct text *out, const struct design *d)
{
    text_addf(out, "%s: %s, %s is better", d->endpoint_name,
              d->type == ENDPOINT_BINARY ? "binary" : "continuous",
              d->higher_is_better ? "higher" : "lower");
    if (d->has_range) {
        text_add(out, ", from ");
        add_shortest_number(out, d->range[0]);
        text_add(out, " to ");
        add_shortest_number(out, d->range[1]);
    }
    if (d->observed_after > 0) {
        text_add(out, "; observed ");
        say_time(out, d, d->observed_after);
        text_add(out, " after enrolment");
    } else {
        text_add(out, "; observed at once");
    }
    if (d->dropped == DROPPED_FAILURE) {
        text_addf(out, "; a subject that drops out counts as %s event",
                  d->higher_is_better ? "no" : "an");
    } else {
        text_add(out, "; subjects that drop out are left out");
    }
    text_add(out, ".");
}

void say_reference(struct text *out, const struct design *d)
{
    if (!design_has_gain(d)) {
        text_add(out, "There is no control and no reference, so there are no gains.");
        return;
    }
    text_add(out, "Gain: how much better a level's response is than ");
    if (d->reference_level >= 0) {
        text_addf(out, "that of %s%s", d->level[d->reference_level].label,
                  d->reference_level == d->control ? ", the control" : ", the reference");
    } else {
        text_add(out, "the performance goal ");
        add_shortest_number(out, d->reference_number);
    }
    text_add(out, ".");
}

void say_curve(struct text *out, const struct design *d)
{
    const struct model *m = &d->model;
    text_addf(out, "%s: %s = %s", m->curve->key,
              d->type == ENDPOINT_BINARY ? "logit of the rate" : "mean", model_formula(m));
    bool walk = m->curve->kind == CURVE_WALK;
    if (walk) {
        text_addf(out, "; order %d, %s", m->order,
                  m->spacing_actual ? "steps by the actual gaps between levels"
                                    : "every step alike");
    }
    bool shifted = strcmp(m->curve->key, "log_linear") == 0;
    if (shifted) {
        text_add(out, "; shift ");
        say_value(out, m->shift, d->unit);
    }
    if (d->control >= 0 && !d->control_on_curve) {
        text_addf(out, "; %s lies off the curve and has its own prior", d->level[d->control].label);
    }
    text_add(out, ".");
}

void say_target(struct text *out, const struct design *d, const struct target *t)
{
    t->rule->sentence(t, d, out);
    if (t->by_meets) {
        text_add(out, "; selected: the lowest active level that meets it with probability at "
                      "least ");
        add_shortest_number(out, t->meets);
    } else {
        text_add(out, "; selected: the level that is most probably it, none if none is more "
                      "probable than not");
    }
    text_add(out, ".");
}

void say_conditions(struct text *out, const struct design *d, const struct conditions *c)
{
    for (size_t i = 0; i < c->count; i++) {
        if (i > 0) {
            text_add(out, c->join == JOIN_ANY ? ", or " : ", and ");
        }
        c->list[i].measure->sentence(&c->list[i], d, out);
        text_add(out, c->list[i].above ? " exceeds " : " falls below ");
        add_shortest_number(out, c->list[i].threshold);
    }
}

void say_decision(struct text *out, const struct design *d, const struct decision *x)
{
    text_add(out,
             x->action == ACTION_STOP_SUCCESS ? "Stop for success if " : "Stop for futility if ");
    say_conditions(out, d, &x->when);
    if (x->from > 0) {
        text_add(out, "; from the analysis planned at ");
        say_point(out, d, x->from);
    }
    if (x->min_observed > 0) {
        text_add(out, "; needs ");
        add_shortest_number(out, x->min_observed);
        text_add(out, " outcomes in hand");
    }
    if (x->action == ACTION_STOP_FUTILITY && !x->binding) {
        text_add(out, "; not binding: ignored for error rates");
    }
    text_add(out, ".");
}

void say_final(struct text *out, const struct design *d)
{
    if (!d->has_final) {
        text_add(out, "No rule is given: the last analysis reports without a verdict.");
        return;
    }
    text_add(out, "Success at the last analysis if ");
    say_conditions(out, d, &d->final_success);
    text_add(out, ".");
}
