/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_page_details.c: the end of report.html: parameters, computation, where the report comes
 * from, how it may be used. */
#include "report/analysis_page.h"

#include "base/base.h"
#include "base/number.h"
#include "report/analysis_words.h"
#include "report/figures.h"
#include "report/fit_words.h"
#include "report/page.h"
#include "report/parameter_tables.h"

void page_add_parameters(struct text *out, const struct analysis_report *r)
{
    page_section_open(out, "parameters", "Parameters of the model");
    struct text t = TEXT_INIT;
    words_likelihood(&t, r->a);
    page_paragraph(out, NULL, text_s(&t));
    text_release(&t);
    page_table(out, table_parameters(r->a, PARAMETER_VALUES | PARAMETER_DRAWS),
               likelihood_is_shown(r->a)
                   ? "Likelihood estimate with its standard error (SE), posterior with its median "
                     "(50%) and 95% interval, prior, and the checks of the draws. ESS: effective "
                     "number of draws; MC error: Monte Carlo standard error of the mean. SD / "
                     "prior SD above 0.9 says that the parameter is set by its prior."
                   : "Posterior of every parameter with its median (50%) and 95% interval, prior, "
                     "and the checks of the draws. ESS: effective number of draws; MC error: "
                     "Monte Carlo standard error of the mean. SD / prior SD above 0.9 says that "
                     "the parameter is set by its prior.");
    page_section_close(out);
}

static void row(struct table *t, const char *name, const char *value)
{
    table_cell(t, name);
    table_cell(t, value);
}

void page_add_computation(struct text *out, const struct analysis_report *r)
{
    const struct analysis_diagnostics *g = &r->a->diagnostics;
    struct table *t = table_new();
    struct text s = TEXT_INIT;
    page_section_open(out, "computation", "Computation");
    words_computation(&s, r);
    page_paragraph(out, NULL, text_s(&s));
    table_column(t, "Check", false);
    table_column(t, "Value", true);
    table_cell(t, "Draws, in chains");
    text_addf(table_open(t), "%zu in %zu", g->draws, g->chains);
    table_next(t);
    table_cell(t, "Largest R-hat (at most 1.01 asked)");
    figure_number(table_open(t), g->max_rhat, (struct digits){4, 0});
    table_next(t);
    table_cell(t, "Smallest bulk effective number of draws (at least 400 asked)");
    figure_count(table_open(t), g->min_ess_bulk);
    table_next(t);
    table_cell(t, "Smallest tail effective number of draws (at least 400 asked)");
    figure_count(table_open(t), g->min_ess_tail);
    table_next(t);
    table_cell(t, "Effective share of the proposals (Kish)");
    figure_number(table_open(t), g->kish, (struct digits){3, 0});
    table_next(t);
    table_cell(t, "Largest difference from the second method");
    figure_error(table_open(t), g->second_difference);
    table_next(t);
    table_cell(t, "Fit of the level means (posterior predictive p)");
    figure_number(table_open(t), g->lack_of_fit_p, (struct digits){3, 0});
    table_next(t);
    row(t, "Trusted", g->trusted ? "yes" : "no");
    row(t, "As precise as asked", g->imprecise ? "no" : "yes");
    page_table(out, t, "Checks of the computation");
    page_section_close(out);
    text_release(&s);
}

static void origin(struct text *out, const struct analysis_report *r)
{
    char seed[NUMBER_CHARS];
    struct table *t = table_new();
    page_section_open(out, "origin", "Where this report comes from");
    table_column(t, "What", false);
    table_column(t, "Value", false);
    row(t, "Program", TERRACE_PROGRAM);
    row(t, "Seed", number_shortest(seed, (double)r->seed));
    row(t, "Design file, SHA-256", r->d->sha256);
    row(t, "Design resolved (defaults in, notes out), SHA-256", r->d->resolved_sha256);
    row(t, "Data file, SHA-256", r->data->sha256);
    page_table(out, t,
               "The same program, design, data and seed give this report again, byte for byte.");
    page_section_close(out);
}

static void cautions(struct text *out)
{
    page_section_open(out, "use", "How this report may be used");
    text_add(out, "<ul>\n");
    page_item(out, "It is decision support for qualified statisticians. It does not decide: the "
                   "protocol, the data monitoring committee, ethics committees, regulators and "
                   "local rules do.");
    page_item(out, "It shows unblinded interim results. Keep it from everybody who treats or "
                   "assesses subjects, and from the sponsor's team, unless the protocol says "
                   "otherwise.");
    page_item(out, "Posterior probabilities hold under the model and the priors of the design. "
                   "They are not error rates; those come from simulating the whole design.");
    page_item(out, "Levels between or beyond those studied are not covered.");
    text_add(out, "</ul>\n");
    page_section_close(out);
}

void page_add_details(struct text *out, const struct analysis_report *r)
{
    page_add_parameters(out, r);
    page_add_computation(out, r);
    origin(out, r);
    cautions(out);
}
