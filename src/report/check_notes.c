/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_notes.c: warnings, remarks and reminders, one function each. */
#include "report/check_notes.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"

/* Common practice of the trade; no source is claimed. */
enum { SCENARIOS_FEWEST = 4, TRIALS_REPORTED = 5000 };

static void add(struct sentences *s, const char *format, ...) __attribute__((format(printf, 2, 3)));

static void add(struct sentences *s, const char *format, ...)
{
    char line[1024];
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(line, sizeof line, format, arguments);
    va_end(arguments);
    s->list = mem_grow(s->list, s->count + 1, sizeof *s->list);
    s->list[s->count++] = mem_text(line);
}

static void release(struct sentences *s)
{
    for (size_t i = 0; i < s->count; i++) {
        mem_free(s->list[i]);
    }
    mem_free(s->list);
    *s = (struct sentences){0, NULL};
}

static size_t curve_level_count(const struct design *d)
{
    double value[LEVELS_MAX];
    return design_curve_levels(d, &d->model, value).count;
}

/* Free numbers that the level means of a basis curve are made of. */
static void warn_parameters(struct check_notes *n, const struct design *d)
{
    size_t free_count = 0, levels = curve_level_count(d);
    for (size_t i = 0; i < d->model.parameters; i++) {
        enum parameter_role role = d->model.parameter[i]->role;
        if ((role == ROLE_LINEAR || role == ROLE_SHAPE) && !prior_is_fixed(&d->model.prior[i])) {
            free_count++;
        }
    }
    if (d->model.curve->kind == CURVE_BASIS && free_count > levels) {
        add(&n->warnings,
            "The curve has %zu free mean parameters and only %zu levels lie on it: the priors, not "
            "the data, will settle some of them.",
            free_count, levels);
    }
    if (levels < d->model.curve->levels_wanted) {
        add(&n->warnings,
            "The curve %s wants at least %zu levels to show its shape; this design has %zu on it.",
            d->model.curve->key, d->model.curve->levels_wanted, levels);
    }
}

static void note_targets(struct check_notes *n, const struct design *d)
{
    for (size_t i = 0; i < d->targets; i++) {
        const struct target *t = &d->target[i];
        if (strcmp(t->rule->key, "optimal") == 0 && d->model.curve->monotone) {
            add(&n->warnings,
                "Target %s asks for the optimal level of a monotone curve (%s): in every draw that "
                "is the first or the last active level.",
                t->name, d->model.curve->key);
        }
        if (strcmp(t->rule->key, "effective_dose") == 0) {
            add(&n->remarks,
                "Target %s is relative to the largest gain among the levels studied, not to the "
                "gain at an infinite %s.",
                t->name, d->quantity);
        }
    }
}

/* The largest `from` a decision may have and still be read. */
static void warn_decisions(struct check_notes *n, const struct design *d)
{
    size_t count = d->analyses.count;
    if (d->decisions > 0 && count == 0) {
        add(&n->warnings, "Decisions are given, but no interim analysis is planned: at the last "
                          "analysis only `final` is read.");
    }
    for (size_t i = 0; i < d->decisions && count > 0; i++) {
        if (d->decision[i].from > d->analyses.at[count - 1]) {
            add(&n->warnings,
                "Decision %zu (%s) acts only after the last planned interim analysis: never.",
                i + 1, action_key(d->decision[i].action));
        }
    }
    if (!d->has_final) {
        add(&n->warnings, "Without `final` the last analysis gives no verdict on success.");
    }
    if (d->allocation.adapts && count == 0) {
        add(&n->warnings, "Allocation adapts, but no interim analysis is planned: the fixed ratio "
                          "holds to the end.");
    }
}

static void warn_expected(struct check_notes *n, const struct expected *x)
{
    size_t missed = 0;
    for (size_t i = 0; i < x->count; i++) {
        missed += !x->cut[i].held;
    }
    if (missed > 0) {
        add(&n->warnings,
            "%zu of %zu planned interim analyses %s expected only at or after the end of enrolment "
            "and would not be held.",
            missed, x->count, missed == 1 ? "is" : "are");
    }
}

static void warn_range(struct check_notes *n, const struct design *d, const struct prior_bands *b)
{
    if (!b || !d->has_range) {
        return;
    }
    for (size_t k = 0; k < d->levels; k++) {
        if (b->response[k].q05 < d->range[0] || b->response[k].q95 > d->range[1]) {
            char low[NUMBER_CHARS], high[NUMBER_CHARS];
            add(&n->warnings,
                "Before any data, more than 5%% of the prior for the mean at %s lies beyond one "
                "end "
                "of the endpoint's range (%s to %s).",
                d->level[k].label, number_shortest(low, d->range[0]),
                number_shortest(high, d->range[1]));
        }
    }
}

static void remind_scenarios(struct check_notes *n, const struct design *d)
{
    if (d->scenarios < SCENARIOS_FEWEST) {
        add(&n->reminders,
            "The design has %zu scenario%s; common practice is 4 to 8 while a design is being "
            "shaped and 10 to 20 in its report.",
            d->scenarios, d->scenarios == 1 ? "" : "s");
    }
    bool any_null = false;
    for (size_t i = 0; i < d->scenarios; i++) {
        any_null = any_null || d->scenario[i].is_null;
    }
    if (d->scenarios > 0 && !any_null) {
        add(&n->reminders, "No scenario is null, so no error rate can be shown.");
    }
    if (d->scenarios > 0 && d->trials < TRIALS_REPORTED) {
        add(&n->reminders,
            "%.0f trials a scenario are planned; common practice is about 5,000 for figures that "
            "are reported.",
            d->trials);
    }
    if (d->scenarios > 0) {
        add(&n->reminders, "Common practice is to show a team two or three single trials, analysis "
                           "by analysis, before any operating characteristics.");
    }
    if (d->scenarios > 0 && d->accrual.count == 0) {
        add(&n->reminders, "Simulation needs accrual rates, which this design does not give.");
    }
}

void check_notes_init(struct check_notes *out, const struct design *d, const struct expected *x,
                      const struct prior_bands *bands)
{
    *out = (struct check_notes){{0, NULL}, {0, NULL}, {0, NULL}};
    warn_parameters(out, d);
    note_targets(out, d);
    warn_decisions(out, d);
    warn_expected(out, x);
    warn_range(out, d, bands);
    remind_scenarios(out, d);
}

void check_notes_release(struct check_notes *n)
{
    release(&n->warnings);
    release(&n->remarks);
    release(&n->reminders);
}
