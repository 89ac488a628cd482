/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_words.c: what an analysis says, in sentences. */
#include "report/analysis_words.h"

#include <math.h>
#include <string.h>

#include "base/number.h"
#include "report/analysis_tables.h"
#include "report/figures.h"

static void add_shortest(struct text *out, double x)
{
    char s[NUMBER_CHARS];
    text_add(out, number_shortest(s, x));
}

static void add_people(struct text *out, double n, const char *one, const char *many)
{
    figure_count(out, n);
    text_addf(out, " %s", n == 1 ? one : many);
}

/* In running text "less than 0.001", not "<0.001". */
static void add_probability(struct text *out, double p, struct digits g)
{
    struct text shown = TEXT_INIT;
    figure_probability(&shown, p, g);
    const char *s = text_s(&shown);
    if (s[0] == '<' || s[0] == '>')
        text_addf(out, "%s %s", s[0] == '<' ? "less than" : "more than", s + 1);
    else
        text_add(out, s);
    text_release(&shown);
}

/* A sentence of a table row begins in lower case where it follows others; at the start of a
 * sentence its first letter is raised (ASCII only: the rows are ours). */
static void raise_from(struct text *t, size_t start)
{
    if (start < t->length && t->s[start] >= 'a' && t->s[start] <= 'z')
        t->s[start] = (char)(t->s[start] - 'a' + 'A');
}

/* ---- what was analysed ---- */

void words_occasion(struct text *out, const struct analysis_report *r)
{
    const struct analyses *plan = &r->d->analyses;
    if (r->a->final) {
        text_add(out,
                 r->data->pending > 0 ? "Final analysis, with outcomes pending" : "Final analysis");
        return;
    }
    text_addf(out, "Interim analysis %ld", r->a->number);
    if (plan->count > 0 && !plan->open_ended)
        text_addf(out, " of %zu planned", plan->count);
}

void words_cut(struct text *out, const struct analysis_report *r)
{
    if (!r->data->cut_text)
        return;
    if (!r->data->dates)
        text_addf(out, "%s ", r->d->time_unit);
    text_add(out, r->data->cut_text);
}

void words_subjects(struct text *out, const struct analysis_report *r)
{
    add_people(out, (double)r->data->subjects, "subject", "subjects");
    text_add(out, " randomized: ");
    figure_count(out, r->data->observed);
    text_add(out, " with an outcome, ");
    figure_count(out, r->data->pending);
    text_add(out, " pending, ");
    figure_count(out, r->data->dropped);
    text_add(out, " dropped out");
    if (r->data->dropped_as_failure > 0) {
        text_add(out, " (and ");
        figure_count(out, r->data->dropped_as_failure);
        text_add(out, " who dropped out count as failures, as the design says)");
    }
    text_add(out, ".");
}

void words_endpoint(struct text *out, const struct analysis_report *r)
{
    text_addf(out, "%s (%s; %s is better", r->d->endpoint_name,
              r->d->type == ENDPOINT_BINARY ? "yes or no" : "continuous",
              r->d->higher_is_better ? "higher" : "lower");
    if (r->d->observed_after > 0) {
        text_add(out, "; known ");
        add_shortest(out, r->d->observed_after);
        text_addf(out, " %s%s after enrolment", r->d->time_unit,
                  r->d->observed_after == 1 ? "" : "s");
    }
    text_add(out, ").");
}

void words_model(struct text *out, const struct analysis_report *r)
{
    const struct curve *c = r->d->model.curve;
    text_addf(out, "The %s is modelled by the curve \"%s\", %s, over %zu levels of %s",
              r->d->type == ENDPOINT_BINARY ? "log-odds of the rate" : "mean", c->key,
              model_formula(&r->d->model), r->d->levels, r->d->quantity);
    if (r->d->control >= 0 && !r->d->control_on_curve)
        text_add(out, ", the control apart from it");
    text_add(out, ".");
}

/* ---- what is recommended, and why ---- */

static enum recommendation recommended(const struct analysis_report *r)
{
    return r->a->diagnostics.trusted ? r->a->recommendation : RECOMMEND_UNDETERMINED;
}

const char *words_recommendation(const struct analysis_report *r)
{
    static const char *const words[] = {
        [RECOMMEND_CONTINUE] = "Continue",
        [RECOMMEND_STOP_SUCCESS] = "Stop for success",
        [RECOMMEND_STOP_FUTILITY] = "Stop for futility",
        [RECOMMEND_SUCCESS] = "Success",
        [RECOMMEND_NO_SUCCESS] = "No success",
        [RECOMMEND_COMPLETE] = "Complete",
        [RECOMMEND_UNDETERMINED] = "Undetermined",
    };
    return words[recommended(r)];
}

/* "the probability ... is 0.930 (at 40 mg), and has to be above 0.99" */
static void add_outcome(struct text *out, const struct analysis_report *r,
                        const struct condition *c, const struct condition_result *x)
{
    c->measure->sentence(c, r->d, out);
    text_add(out, " is ");
    add_probability(out, x->value, digits_condition(c, x));
    if (x->level >= 0 && c->level != x->level)
        text_addf(out, " (at %s)", r->d->level[x->level].label);
    text_add(out, c->above ? "; it has to be above " : "; it has to be below ");
    add_shortest(out, c->threshold);
}

static void add_outcomes(struct text *out, const struct analysis_report *r,
                         const struct conditions *when, const struct decision_result *x)
{
    if (when->join == JOIN_ALL)
        text_add(out, "all of these have to hold: ");
    if (when->join == JOIN_ANY)
        text_add(out, "one of these has to hold: ");
    for (size_t i = 0; i < when->count; i++) {
        if (when->join != JOIN_ONE)
            text_addf(out, "%s(%c) ", i ? "; " : "", (char)('a' + (int)(i % 26)));
        add_outcome(out, r, &when->list[i], &x->condition[i]);
    }
    text_add(out, ".");
}

static const char *verdict_phrase(const struct analysis_report *r, const struct decision_result *x)
{
    if (!r->a->diagnostics.trusted)
        return "is undetermined";
    if (!x->applies)
        return x->met ? "would hold, but is not in force at this analysis"
                      : "is not in force at this analysis";
    return x->met ? "is met" : "is not met";
}

void words_decision(struct text *out, const struct analysis_report *r, size_t decision)
{
    const struct decision *d = &r->d->decision[decision];
    const struct decision_result *x = &r->a->decision[decision];
    text_addf(out, "Decision %zu, %s, %s: ", decision + 1,
              d->action == ACTION_STOP_SUCCESS ? "stop for success" : "stop for futility",
              verdict_phrase(r, x));
    add_outcomes(out, r, &d->when, x);
    if (!d->binding)
        text_add(out, " It is not binding: error rates are computed as if it were not there.");
}

void words_final_success(struct text *out, const struct analysis_report *r)
{
    text_addf(out, "Final success %s: ", verdict_phrase(r, &r->a->final_success));
    add_outcomes(out, r, &r->d->final_success, &r->a->final_success);
}

static void why_interim(struct text *out, const struct analysis_report *r)
{
    for (size_t i = 0; i < r->a->decisions; i++)
        if (r->a->decision[i].applies && r->a->decision[i].met) {
            words_decision(out, r, i);
            return;
        }
    text_add(out, r->a->decisions == 0 ? "The design names no interim decisions."
                                       : "No decision in force at this analysis is met.");
}

void words_why(struct text *out, const struct analysis_report *r)
{
    const enum recommendation said = recommended(r);
    if (said == RECOMMEND_UNDETERMINED)
        text_add(out, "The computation did not pass its own checks. No decision, no next share "
                      "and no recommendation follows from it; the figures below are shown for "
                      "finding the cause only.");
    else if (said == RECOMMEND_COMPLETE)
        text_add(out, "This is the last analysis, and the design names no condition for final "
                      "success.");
    else if (said == RECOMMEND_SUCCESS || said == RECOMMEND_NO_SUCCESS)
        words_final_success(out, r);
    else
        why_interim(out, r);
}

/* ---- how sure ---- */

void words_target(struct text *out, const struct analysis_report *r, size_t target)
{
    const struct target *t = &r->d->target[target];
    const size_t start = out->length;
    t->rule->sentence(t, r->d, out);
    raise_from(out, start);
    text_add(out, ".");
    if (t->rule->required & ARG_FRACTION)
        text_add(out, " This is relative to the levels studied, not to an infinite dose.");
}

/* The level with the largest pr_target among those that are not selected; LEVEL_NONE without. */
static int runner_up(const struct analysis_report *r, size_t target)
{
    int best = LEVEL_NONE;
    for (size_t k = 0; k < r->a->levels; k++) {
        if ((int)k == r->a->target[target].selected || !level_can_be_target(r, k))
            continue;
        if (best < 0 || r->a->level[k].pr_target[target] > r->a->level[best].pr_target[target])
            best = (int)k;
    }
    return best;
}

static void add_runner_up(struct text *out, const struct analysis_report *r, size_t target)
{
    const int next = runner_up(r, target);
    if (next < 0)
        return;
    text_addf(out, " Next comes %s with ", r->d->level[next].label);
    add_probability(out, r->a->level[next].pr_target[target], digits_target(r));
    text_add(out, r->a->target[target].close
                      ? "; the two cannot be told apart within Monte Carlo error."
                      : ".");
}

void words_selection(struct text *out, const struct analysis_report *r, size_t target)
{
    const struct target_result *x = &r->a->target[target];
    const char *name = r->d->target[target].name;
    if (x->selected < 0) {
        text_addf(out, "%s: no level is selected; the probability that none qualifies is ", name);
        add_probability(out, x->pr_none, digits_target(r));
        text_add(out, ".");
        return;
    }
    text_addf(out, "%s: %s is selected, and is the target with probability ", name,
              r->d->level[x->selected].label);
    add_probability(out, x->pr_selected, digits_target(r));
    text_add(out, " (Monte Carlo error ");
    figure_error(out, x->mcse);
    text_add(out, "); that no level qualifies has probability ");
    add_probability(out, x->pr_none, digits_target(r));
    text_add(out, ".");
    add_runner_up(out, r, target);
}

void words_computation(struct text *out, const struct analysis_report *r)
{
    const struct analysis_diagnostics *g = &r->a->diagnostics;
    text_addf(out, "%zu posterior draws in %zu chains%s; largest R-hat ", g->draws, g->chains,
              g->slice ? " by slice sampling" : "");
    figure_number(out, g->max_rhat, (struct digits){3, 0});
    text_add(out, ", smallest effective number of draws ");
    figure_count(out, g->min_ess_bulk);
    text_add(out, ".");
    if (!g->second_name)
        return;
    text_addf(out, " A second, independent method (%s) differs by at most ", g->second_name);
    figure_error(out, g->second_difference);
    text_add(out, r->d->targets == 0 && r->d->decisions == 0 && !design_has_gain(r->d)
                      ? " in the probability that the response at a level lies above its posterior "
                        "mean."
                      : " in any probability or measure.");
}

/* ---- what to distrust ---- */

struct reasons {
    struct text *out;
    void (*each)(struct text *out, const char *sentence);
    size_t count;
};

static void reason(struct reasons *w, const char *sentence)
{
    w->each(w->out, sentence);
    w->count++;
}

static void reason_take(struct reasons *w, struct text *sentence)
{
    reason(w, text_s(sentence));
    text_release(sentence);
}

static void computation_reasons(struct reasons *w, const struct analysis_report *r)
{
    const struct analysis_diagnostics *g = &r->a->diagnostics;
    if (!g->trusted)
        reason(w, "The computation did not pass its own checks: nothing here is to be used.");
    for (size_t i = 0; i < g->warnings; i++)
        reason(w, g->warning[i]);
    for (size_t i = 0; i < r->a->notes; i++)
        reason(w, r->a->note[i]);
    for (size_t i = 0; i < r->data->warnings; i++)
        reason(w, r->data->warning[i]);
}

static void sensitivity_reasons(struct reasons *w, const struct analysis_report *r)
{
    for (size_t i = 0; i < r->a->sensitivities; i++) {
        const struct analysis *a = &r->a->sensitivity[i];
        struct text t = TEXT_INIT;
        if (a->failure)
            text_addf(&t, "Sensitivity model %zu could not be fitted: %s. ", i + 1, a->failure);
        else if (!a->diagnostics.trusted)
            text_addf(&t, "The computation of sensitivity model %zu cannot be trusted. ", i + 1);
        text_add(&t, "That changes nothing of the analysis itself.");
        if (a->failure || !a->diagnostics.trusted)
            reason(w, text_s(&t));
        text_release(&t);
    }
}

static void pending_reasons(struct reasons *w, const struct analysis_report *r)
{
    struct text t = TEXT_INIT;
    if (r->data->pending <= 0)
        return;
    add_people(&t, r->data->pending, "subject has", "subjects have");
    text_add(&t, r->a->final
                     ? " no outcome yet although this is the final analysis. It was asked for with "
                       "outcomes pending, and the answer may change when they are in."
                     : " no outcome yet. They are left out until it is known.");
    reason_take(w, &t);
}

static void dropout_reasons(struct reasons *w, const struct analysis_report *r)
{
    struct text t = TEXT_INIT;
    if (r->data->dropped <= 0)
        return;
    add_people(&t, r->data->dropped, "subject", "subjects");
    text_add(&t, " dropped out and are left out. That is fair only if dropping out has nothing to "
                 "do with the response.");
    reason_take(w, &t);
}

size_t words_distrust(struct text *out, const struct analysis_report *r,
                      void (*each)(struct text *out, const char *sentence))
{
    struct reasons w = {out, each, 0};
    computation_reasons(&w, r);
    sensitivity_reasons(&w, r);
    pending_reasons(&w, r);
    dropout_reasons(&w, r);
    return w.count;
}
