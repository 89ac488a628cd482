/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fit_page.c: report.html of a fit: data, fitted curve, likelihood and posterior side by side. */
#include "base/base.h"
#include "base/number.h"
#include "report/analysis_page.h"
#include "report/analysis_words.h"
#include "report/fit_report.h"
#include "report/fit_words.h"
#include "report/page.h"
#include "report/page_response.h"

static void masthead(struct text *out, const struct fit_report *f)
{
    struct text t = TEXT_INIT;
    text_add(out, "<header>\n<p class=\"house\">Terrace fit</p>\n<h1>");
    words_model_name(&t, &f->r.d->model);
    text_add_html(out, text_s(&t));
    text_add(out, "</h1>\n");
    text_clear(&t);
    words_fit_data(&t, f);
    page_paragraph(out, "occasion", text_s(&t));
    text_release(&t);
    text_add(out, "</header>\n");
}

static void what_was_fitted(struct text *out, const struct fit_report *f)
{
    struct text t = TEXT_INIT;
    page_section_open(out, "fitted", "What was fitted");
    text_addf(&t, "The %s at level d is modelled as %s. ",
              f->table->binary ? "logit of the rate" : "mean response",
              model_formula(&f->r.d->model));
    words_fit_priors(&t, f);
    page_paragraph(out, NULL, text_s(&t));
    text_clear(&t);
    words_lack_of_fit(&t, f->r.a);
    page_paragraph(out, NULL, text_s(&t));
    text_release(&t);
    page_section_close(out);
}

static void figure(struct text *out, const struct fit_report *f)
{
    static const char *const keys[] = {"observed", "raw", "raw_interval", "likelihood",
                                       "mean",     "sd",  "interval",     NULL};
    struct sheet s;
    page_section_open(out, "figures", "Data and fit");
    sheet_init(&s, &f->r);
    page_response(out, &s, keys);
    sheet_release(&s);
    page_section_close(out);
}

static void cautions(struct text *out, const struct fit_report *f)
{
    struct text list = TEXT_INIT;
    page_section_open(out, "distrust", "Cautions");
    text_add(out, "<ul>\n");
    (void)words_distrust(&list, &f->r, page_item);
    text_add(out, text_s(&list));
    page_item(out, "A fit is decision support for qualified statisticians; protocol, data "
                   "monitoring committee, ethics committees, regulators and local rules decide.");
    page_item(out, "Default priors made from the data look at them twice; an analysis that decides "
                   "needs priors written down beforehand.");
    page_item(out, "Levels between or beyond those studied are not covered.");
    text_add(out, "</ul>\n");
    page_section_close(out);
    text_release(&list);
}

static void row(struct table *t, const char *name, const char *value)
{
    table_cell(t, name);
    table_cell(t, value);
}

static void origin(struct text *out, const struct fit_report *f)
{
    char seed[NUMBER_CHARS];
    struct table *t = table_new();
    page_section_open(out, "origin", "Where this report comes from");
    table_column(t, "What", false);
    table_column(t, "Value", false);
    row(t, "Program", TERRACE_PROGRAM);
    row(t, "Seed", number_shortest(seed, (double)f->r.seed));
    row(t, "Table, SHA-256", f->table->data.sha256);
    page_table(out, t,
               "The same program, table, model and seed give this report again, byte for "
               "byte.");
    page_section_close(out);
}

void fit_page(struct text *out, const struct fit_report *f)
{
    struct text title = TEXT_INIT;
    words_model_name(&title, &f->r.d->model);
    text_add(&title, ": fit");
    page_open(out, text_s(&title), f->r.a->diagnostics.trusted ? NULL : NOT_TO_BE_USED);
    text_release(&title);
    masthead(out, f);
    text_add(out, "<main>\n");
    what_was_fitted(out, f);
    figure(out, f);
    page_add_parameters(out, &f->r);
    page_add_computation(out, &f->r);
    cautions(out, f);
    origin(out, f);
    text_add(out, "</main>\n");
    page_close(out);
}
