/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_page_figures.c: the figures of report.html, each with its data table: response by level
 * (page_response.c), one figure a target, allocation, decisions. */
#include "report/analysis_page.h"

#include <math.h>

#include "base/mem.h"
#include "report/analysis_tables.h"
#include "report/analysis_words.h"
#include "report/chart.h"
#include "report/figures.h"
#include "report/page.h"
#include "report/page_response.h"
#include "report/page_sensitivity.h"

/* ---- targets ---- */

static void target_columns(struct sheet *s, size_t t)
{
    const struct analysis_report *r = s->r;
    for (size_t k = 0; k < s->n; k++) {
        const struct level_result *x = &r->a->level[k];
        const bool able = level_can_be_target(r, k);
        s->column[0][k] = able ? x->pr_target[t] : NAN;
        s->column[1][k] = able ? x->pr_meets[t] : NAN;
        s->column[2][k] = able && x->prior_pr_target ? x->prior_pr_target[t] : NAN;
    }
    s->column[0][s->n] = r->a->target[t].pr_none;
    s->column[1][s->n] = s->column[2][s->n] = NAN;
}

static void target_chart(struct text *out, struct sheet *s, size_t t)
{
    const bool prior = s->r->a->level[0].prior_pr_target != NULL;
    const struct chart_bars c = {
        .levels = sheet_levels(s, s->r->a->target[t].selected, "no level"),
        .title = "Probability",
        .label = "Chart of the probability that each level is the target, and that it meets it. "
                 "The numbers are in the table that follows.",
        .bar_name = {"is the target", NULL},
        .bar = {s->column[0], NULL},
        .mark_name = {"meets the condition", prior ? "is the target, before any data" : NULL},
        .mark = {s->column[1], s->column[2]},
    };
    target_columns(s, t);
    chart_bars(out, &c);
}

static void target_figure(struct text *out, struct sheet *s, size_t t)
{
    struct text words = TEXT_INIT;
    text_addf(&words, "%s: which level it is", s->r->d->target[t].name);
    sheet_figure_open(out, s, text_s(&words), false, s->n);
    target_chart(out, s, t);
    page_figure_beside(out);
    text_clear(&words);
    words_target(&words, s->r, t);
    page_paragraph(out, NULL, text_s(&words));
    text_clear(&words);
    text_addf(&words, "Probabilities for %s", s->r->d->target[t].name);
    page_table(out, table_target(s->r, t), text_s(&words));
    page_figure_close(out);
    text_release(&words);
}

/* ---- allocation ---- */

static void allocation_words(struct text *out, const struct analysis_report *r)
{
    if (has_next_shares(r))
        page_paragraph(out, NULL,
                       "Share of all subjects randomized to each level so far, and the share each "
                       "level has of the subjects to come. The next shares take effect only if "
                       "the trial continues.");
    else if (!r->a->diagnostics.trusted)
        page_paragraph(out, NULL,
                       "Share of all subjects randomized to each level so far. No next "
                       "shares are given, because the computation is not trusted.");
    else
        page_paragraph(out, NULL,
                       "Share of all subjects randomized to each level. There are no "
                       "next shares: this is the last analysis.");
}

static void allocation_figure(struct text *out, struct sheet *s)
{
    static const char *const with_next[] = {"randomized", "so_far", "next_share", NULL};
    static const char *const so_far[] = {"randomized", "so_far", NULL};
    const bool next = has_next_shares(s->r);
    sheet_fill(s, 0, "so_far", false);
    sheet_fill(s, 1, "next_share", false);
    const struct chart_bars c = {
        .levels = sheet_levels(s, -1, NULL),
        .title = "Share of subjects (%)",
        .label = "Chart of the share of subjects by level. The numbers are in the table that "
                 "follows.",
        .percent = true,
        .bar_name = {"randomized so far", next ? "next share" : NULL},
        .bar = {s->column[0], s->column[1]},
    };
    sheet_figure_open(out, s, "Allocation, current and next", false, s->n);
    chart_bars(out, &c);
    page_figure_beside(out);
    allocation_words(out, s->r);
    page_table(out, table_levels(s->r, next ? with_next : so_far), "Allocation by level");
    page_figure_close(out);
}

/* ---- decisions ---- */

static void raise_first(struct text *t)
{
    if (t->length > 0 && t->s[0] >= 'a' && t->s[0] <= 'z')
        t->s[0] = (char)(t->s[0] - 'a' + 'A');
}

struct gauges {
    size_t n, capacity;
    struct chart_gauge *row;
    struct text *text; /* three a row: name, detail, shown */
};

static void gauge_add(struct gauges *g, const struct analysis_report *r, const char *name,
                      const struct condition *c, const struct condition_result *x, bool applies)
{
    struct text *t = &g->text[3 * g->n];
    text_add(&t[0], name);
    add_condition(&t[1], r, c);
    raise_first(&t[1]);
    figure_probability(&t[2], x->value, digits_condition(c, x));
    g->row[g->n++] = (struct chart_gauge){
        .name = text_s(&t[0]),
        .detail = text_s(&t[1]),
        .shown = text_s(&t[2]),
        .value = x->value,
        .error = x->mcse,
        .threshold = c->threshold,
        .above = c->above,
        .verdict = verdict_words(r, applies, x->met),
        .met = r->a->diagnostics.trusted && applies && x->met,
        .faint = !applies,
    };
}

static void gauges_add(struct gauges *g, const struct analysis_report *r, const char *name,
                       const struct conditions *when, const struct decision_result *x)
{
    struct text first = TEXT_INIT;
    text_add(&first, name);
    if (when->join != JOIN_ONE)
        text_add(&first, when->join == JOIN_ALL ? ", all of" : ", any of");
    for (size_t i = 0; i < when->count; i++)
        gauge_add(g, r, text_s(&first), &when->list[i], &x->condition[i], x->applies);
    text_release(&first);
}

static size_t condition_count(const struct analysis_report *r)
{
    size_t n = r->a->final_success.condition ? r->d->final_success.count : 0;
    for (size_t i = 0; i < r->a->decisions; i++)
        n += r->d->decision[i].when.count;
    return n;
}

static void decisions_chart(struct text *out, const struct analysis_report *r)
{
    struct gauges g = {.capacity = condition_count(r)};
    struct text name = TEXT_INIT;
    g.row = mem_new(g.capacity, sizeof *g.row);
    g.text = mem_new(3 * g.capacity, sizeof *g.text);
    for (size_t i = 0; i < r->a->decisions; i++) {
        text_clear(&name);
        text_addf(&name, "%zu. %s", i + 1, action_words(r->d->decision[i].action));
        gauges_add(&g, r, text_s(&name), &r->d->decision[i].when, &r->a->decision[i]);
    }
    if (r->a->final_success.condition)
        gauges_add(&g, r, "Final success", &r->d->final_success, &r->a->final_success);
    chart_gauges(out, "Value of the measure, a probability",
                 "Chart of each decision's value against its threshold. The numbers are in the "
                 "table that follows.",
                 g.n, g.row);
    for (size_t i = 0; i < 3 * g.capacity; i++)
        text_release(&g.text[i]);
    mem_free(g.text);
    mem_free(g.row);
    text_release(&name);
}

static void decisions_words(struct text *out, const struct analysis_report *r)
{
    page_paragraph(out, NULL,
                   "Each diamond is the value of a measure, a probability. It has to pass the "
                   "upright bar into the dotted part of its track.");
    page_paragraph(out, NULL,
                   "The bar through the diamond is three Monte Carlo errors to either side: what "
                   "another run of the computation could give. Where it reaches the threshold the "
                   "table says \"close\".");
    page_paragraph(out, NULL,
                   r->a->final ? "At the last analysis only the final success condition is "
                                 "read; the others are shown for completeness."
                               : "What is not in force at this analysis is shown in grey and "
                                 "does not act, whatever its value.");
}

static void decisions_figure(struct text *out, struct sheet *s)
{
    sheet_figure_open(out, s, "Decisions", true, condition_count(s->r));
    decisions_chart(out, s->r);
    page_figure_beside(out);
    decisions_words(out, s->r);
    page_figure_below(out);
    page_table(out, table_decisions(s->r, false),
               "Decisions, condition by condition. They are read in order; the first that is in "
               "force and met acts. MC error: Monte Carlo standard error of the value.");
    page_figure_close(out);
}

void page_add_figures(struct text *out, const struct analysis_report *r)
{
    static const char *const keys[] = {
        "observed", "raw",        "raw_sd", "raw_interval",  "mean",          "sd",
        "interval", "likelihood", "gain",   "gain_interval", "gain_positive", NULL};
    struct sheet s;
    sheet_init(&s, r);
    page_section_open(out, "figures", "Figures and their data");
    page_response(out, &s, keys);
    for (size_t t = 0; t < r->a->targets; t++)
        target_figure(out, &s, t);
    allocation_figure(out, &s);
    if (condition_count(r) > 0)
        decisions_figure(out, &s);
    page_sensitivity(out, &s);
    page_section_close(out);
    sheet_release(&s);
}
