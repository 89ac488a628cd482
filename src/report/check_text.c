/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_text.c: the order of the words: question, levels, endpoint, model, what it implies,
 * targets, allocation, analyses, decisions, scenarios, what to mind. */
#include "report/check_text.h"

#include "report/check_words.h"
#include "report/wrap.h"

#define BOLD "\033[1m"
#define PLAIN "\033[0m"

struct writer {
    struct text *out;
    const struct check_report *r;
    bool colour;
};

static void heading(const struct writer *w, const char *s)
{
    text_addf(w->out, "\n%s%s%s\n", w->colour ? BOLD : "", s, w->colour ? PLAIN : "");
}

/* A sentence made by one of the functions of check_words.h. */
static void sentence(const struct writer *w, void (*words)(struct text *, const struct design *))
{
    struct text s = TEXT_INIT;
    words(&s, w->r->d);
    wrap_add(w->out, "  ", text_s(&s));
    text_release(&s);
}

/* "Which dose is ED90, MED? 6 levels, …" */
static void question_words(struct text *out, const struct design *d)
{
    size_t active = 0;
    for (size_t k = 0; k < d->levels; k++) {
        active += design_is_active(d, k);
    }
    text_addf(out, "Which of %zu %ss", active, d->quantity);
    if (d->targets == 0) {
        text_add(out, " to go on with (no target is named)");
    }
    for (size_t i = 0; i < d->targets; i++) {
        const char *joint = i == 0 ? " is " : i + 1 < d->targets ? ", " : " and which is ";
        text_addf(out, "%s%s", joint, d->target[i].name);
    }
    text_addf(out, ", judged by \"%s\" in up to ", d->endpoint_name);
    add_shortest_number(out, d->subjects);
    text_add(out, " subjects?");
}

static void levels_words(struct text *out, const struct design *d)
{
    text_addf(out, "%zu levels of %s:", d->levels, d->quantity);
    for (size_t k = 0; k < d->levels; k++) {
        text_addf(out, "%s %s (", k ? ";" : "", d->level[k].label);
        say_value(out, d->level[k].value, d->unit);
        text_addf(out, "%s)", (int)k == d->control ? ", control" : "");
    }
    text_add(out, ".");
}

static void add_question(const struct writer *w)
{
    text_addf(w->out, "%s%s%s\n", w->colour ? BOLD : "", w->r->d->title, w->colour ? PLAIN : "");
    heading(w, "Question");
    sentence(w, question_words);
    heading(w, "Levels");
    sentence(w, levels_words);
    sentence(w, say_reference);
    heading(w, "Endpoint");
    sentence(w, say_endpoint);
    sentence(w, say_dropout);
}

static void add_model(const struct writer *w)
{
    heading(w, "Model and priors in force");
    sentence(w, say_curve);
    text_add(w->out, "\n");
    check_table_priors(w->out, w->r);
    heading(w, "What the priors imply before any data");
    check_table_responses(w->out, w->r);
    if (w->r->d->targets > 0) {
        text_add(w->out, "\n");
        check_table_targets(w->out, w->r);
    }
}

static void add_targets(const struct writer *w)
{
    heading(w, "Targets");
    const struct design *d = w->r->d;
    if (d->targets == 0) {
        text_add(w->out, "  None.\n");
    }
    for (size_t i = 0; i < d->targets; i++) {
        struct text s = TEXT_INIT;
        text_addf(&s, "%s: ", d->target[i].name);
        say_target(&s, d, &d->target[i]);
        wrap_add(w->out, "  - ", text_s(&s));
        text_release(&s);
    }
}

static void add_conduct(const struct writer *w)
{
    heading(w, "Allocation");
    sentence(w, say_start);
    sentence(w, say_adapt);
    heading(w, "Analyses");
    sentence(w, say_analyses);
    sentence(w, say_accrual);
    text_add(w->out, "\n");
    check_table_expected(w->out, w->r);
}

static void add_decisions(const struct writer *w)
{
    heading(w, "Decisions, in this order; the first that is met acts");
    const struct design *d = w->r->d;
    if (d->decisions == 0) {
        text_add(w->out, "  None: the trial goes on to its last analysis.\n");
    }
    for (size_t i = 0; i < d->decisions; i++) {
        struct text s = TEXT_INIT, number = TEXT_INIT;
        text_addf(&number, "  %zu. ", i + 1);
        say_decision(&s, d, &d->decision[i]);
        wrap_add(w->out, text_s(&number), text_s(&s));
        text_release(&s);
        text_release(&number);
    }
    sentence(w, say_final);
}

static void computing_words(struct text *out, const struct design *d)
{
    text_add(out, "Each fit makes ");
    add_shortest_number(out, d->draws);
    text_add(out, " draws in a simulation, and live up to ");
    add_shortest_number(out, d->max_draws);
    text_add(out, ", until every probability has a Monte Carlo standard error of at most ");
    add_shortest_number(out, d->precision);
    text_addf(out, ". Seed %llu.", (unsigned long long)d->seed);
    if (d->sensitivities > 0) {
        text_addf(out, " %zu more model%s for sensitivity, deciding nothing.", d->sensitivities,
                  d->sensitivities == 1 ? " is fitted" : "s are fitted");
    }
}

static void add_scenarios(const struct writer *w)
{
    heading(w, "Scenarios");
    if (w->r->d->scenarios == 0) {
        text_add(w->out, "  None. Live analysis needs none; simulation does.\n");
    } else {
        text_add(w->out, "  ");
        add_shortest_number(w->out, w->r->d->trials);
        text_add(w->out, " simulated trials each.\n\n");
        check_table_scenarios(w->out, w->r);
    }
    heading(w, "Computing");
    sentence(w, computing_words);
}

static void add_list(const struct writer *w, const char *title, const struct sentences *s)
{
    if (s->count > 0) {
        heading(w, title);
    }
    for (size_t i = 0; i < s->count; i++) {
        wrap_add(w->out, "  - ", s->list[i]);
    }
}

void check_text(struct text *out, const struct check_report *r, bool colour)
{
    struct writer w = {out, r, colour};
    add_question(&w);
    add_model(&w);
    add_targets(&w);
    add_conduct(&w);
    add_decisions(&w);
    add_scenarios(&w);
    add_list(&w, "Warnings", &r->notes->warnings);
    add_list(&w, "Remarks", &r->notes->remarks);
    add_list(&w, "Reminders", &r->notes->reminders);
    text_addf(out, "\nDesign %s\n  sha256 of the file       %s\n  sha256 as it is resolved %s\n",
              r->d->file, r->d->sha256, r->d->resolved_sha256);
}
