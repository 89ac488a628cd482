/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fit_words.c: what there is to say of one fitted model. */
#include "report/fit_words.h"

#include <math.h>
#include <string.h>

#include "base/number.h"
#include "report/check_words.h"
#include "report/figures.h"

bool model_is_shifted(const struct model *m)
{
    return strcmp(m->curve->key, "log_linear") == 0;
}

void words_model_name(struct text *out, const struct model *m)
{
    text_add(out, m->curve->key);
    if (m->curve->kind == CURVE_WALK && m->order == 2)
        text_add(out, ", order 2");
    if (m->curve->kind == CURVE_WALK && m->spacing_actual)
        text_add(out, ", actual gaps");
    if (model_is_shifted(m)) {
        text_add(out, ", shift ");
        add_shortest_number(out, m->shift);
    }
}

/* Five significant digits: default priors come from square roots and logarithms. */
static void add_argument(struct text *out, double x)
{
    char s[NUMBER_CHARS];
    double rounded;
    if (number_parse(number_significant(s, x, 5), &rounded))
        add_shortest_number(out, rounded);
}

static void add_end(struct text *out, const char *word, double x)
{
    if (!isfinite(x))
        return;
    text_addf(out, ", %s ", word);
    add_argument(out, x);
}

void words_prior(struct text *out, const struct prior *p)
{
    if (prior_is_fixed(p)) {
        text_add(out, "fixed at ");
        add_argument(out, p->arg[0]);
        return;
    }
    text_add(out, p->family->sentence);
    for (size_t i = 0; i < PRIOR_ARGS && p->family->args[i].key; i++) {
        text_addf(out, ", %s ", p->family->args[i].key);
        add_argument(out, p->arg[i]);
    }
    add_end(out, "above", p->above);
    add_end(out, "below", p->below);
    text_add(out, p->on_variance ? ", on the variance" : "");
}

void words_model_priors(struct text *out, const struct model *m)
{
    for (size_t i = 0; i < m->parameters; i++) {
        text_addf(out, "%s%s ", i ? "; " : "", m->parameter[i]->name);
        words_prior(out, &m->prior[i]);
    }
}

static void add_digits(struct text *out, double x, int digits)
{
    char s[NUMBER_CHARS];
    text_add(out, number_significant(s, x, digits));
}

void words_likelihood(struct text *out, const struct analysis *a)
{
    const struct likelihood_fit *f = &a->likelihood;
    if (!f->exists) {
        text_add(out, "There is no likelihood fit of this curve to this kind of endpoint.");
        return;
    }
    if (!f->converged) {
        text_addf(out, "There are no likelihood estimates. %s", f->message ? f->message : "");
        return;
    }
    text_add(out, "The likelihood fit (maximum likelihood; it looks at no prior but the fixed "
                  "ones) has log-likelihood ");
    add_digits(out, f->log_likelihood, 6);
    text_add(out, " and AIC ");
    add_digits(out, f->aic, 6);
    text_add(out, ". It feeds no probability and no decision.");
    if (a->model && a->model->curve->kind == CURVE_WALK)
        text_add(out, " The likelihood of a walk is marginal, with a flat first level: it does not "
                      "compare with that of other curves.");
}

void words_lack_of_fit(struct text *out, const struct analysis *a)
{
    const double p = a->diagnostics.lack_of_fit_p;
    struct text shown = TEXT_INIT;
    if (isnan(p)) {
        text_add(out, "How well the curve suits the level means cannot be said: fewer than two "
                      "levels have outcomes.");
        return;
    }
    figure_probability(&shown, p, (struct digits){3, 0});
    const char *s = text_s(&shown);
    const bool less = s[0] == '<', more = s[0] == '>';
    text_addf(out,
              "The level means lie at least as far from the curve in %s%s of repetitions of the "
              "trial under the fitted model (posterior predictive p); small values say that the "
              "curve does not fit the level means.",
              less   ? "less than "
              : more ? "more than "
                     : "",
              less || more ? s + 1 : s);
    text_release(&shown);
}
