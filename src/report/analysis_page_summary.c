/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_page_summary.c: the words at the top of report.html: what is recommended and why, what
 * was analysed, how sure it is, what to distrust. */
#include "report/analysis_page.h"

#include "report/analysis_words.h"
#include "report/figures.h"
#include "report/fit_words.h"
#include "report/page.h"

/* One paragraph from one or two sentences of the same analysis. */
typedef void words_fn(struct text *out, const struct analysis_report *r);

static void paragraph(struct text *out, const struct analysis_report *r, words_fn *a, words_fn *b)
{
    struct text t = TEXT_INIT;
    a(&t, r);
    if (b) {
        text_add(&t, " ");
        b(&t, r);
    }
    page_paragraph(out, NULL, text_s(&t));
    text_release(&t);
}

static void fact(struct text *out, const char *name, double n)
{
    text_add(out, "<div><dd>");
    figure_count(out, n);
    text_addf(out, "</dd><dt>%s</dt></div>\n", name);
}

/* The answer at a glance. */
static void answer(struct text *out, const struct analysis_report *r)
{
    text_add(out, r->a->diagnostics.trusted ? "<section class=\"answer\" id=\"answer\">\n"
                                            : "<section class=\"answer void\" id=\"answer\">\n");
    text_add(out, "<div>\n<h2>Recommendation</h2>\n<p class=\"verdict\">");
    text_add_html(out, words_recommendation(r));
    text_add(out, "</p>\n");
    paragraph(out, r, words_why, NULL);
    text_add(out, "</div>\n<dl>\n");
    fact(out, "randomized", (double)r->data->subjects);
    fact(out, "with an outcome", r->data->observed);
    fact(out, "pending", r->data->pending);
    fact(out, "dropped out", r->data->dropped);
    text_add(out, "</dl>\n</section>\n");
}

static void what_was_analysed(struct text *out, const struct analysis_report *r)
{
    page_section_open(out, "analysed", "What was analysed");
    paragraph(out, r, words_endpoint, words_model);
    paragraph(out, r, words_subjects, NULL);
    page_section_close(out);
}

/* Every decision of the design in words, so that nobody has to read the charts for them. */
static void why(struct text *out, const struct analysis_report *r)
{
    page_section_open(out, "why", "Why this is recommended");
    if (r->a->decisions == 0 && !r->a->final_success.condition)
        page_paragraph(out, NULL, "The design names no decisions.");
    else
        page_paragraph(out, NULL,
                       "Decisions are read in the order of the design; the first that "
                       "is in force and met acts.");
    if (r->a->decisions > 0 || r->a->final_success.condition)
        text_add(out, "<ul>\n");
    for (size_t i = 0; i <= r->a->decisions; i++) {
        struct text t = TEXT_INIT;
        if (i < r->a->decisions)
            words_decision(&t, r, i);
        else if (r->a->final_success.condition)
            words_final_success(&t, r);
        if (t.length > 0)
            page_item(out, text_s(&t));
        text_release(&t);
    }
    if (r->a->decisions > 0 || r->a->final_success.condition)
        text_add(out, "</ul>\n");
    page_section_close(out);
}

static void how_sure(struct text *out, const struct analysis_report *r)
{
    page_section_open(out, "sure", "How sure this is");
    if (r->a->targets > 0)
        text_add(out, "<ul>\n");
    for (size_t t = 0; t < r->a->targets; t++) {
        struct text s = TEXT_INIT;
        words_selection(&s, r, t);
        page_item(out, text_s(&s));
        text_release(&s);
    }
    if (r->a->targets > 0)
        text_add(out, "</ul>\n");
    paragraph(out, r, words_computation, NULL);
    struct text fit = TEXT_INIT;
    words_lack_of_fit(&fit, r->a);
    page_paragraph(out, NULL, text_s(&fit));
    text_release(&fit);
    page_section_close(out);
}

static void what_to_distrust(struct text *out, const struct analysis_report *r)
{
    struct text list = TEXT_INIT;
    page_section_open(out, "distrust", "What to distrust");
    if (words_distrust(&list, r, page_item) > 0) {
        text_add(out, "<ul>\n");
        text_add(out, text_s(&list));
        text_add(out, "</ul>\n");
    } else {
        page_paragraph(out, NULL, "The program's own checks found nothing.");
    }
    text_release(&list);
    page_paragraph(out, NULL,
                   "These checks look at the computation. Whether the data are right, "
                   "and whether the model suits them, is for people to judge: compare "
                   "the raw data with the fit in figure 1.");
    page_section_close(out);
}

void page_add_summary(struct text *out, const struct analysis_report *r)
{
    answer(out, r);
    text_add(out, "<div class=\"columns\">\n");
    what_was_analysed(out, r);
    why(out, r);
    how_sure(out, r);
    what_to_distrust(out, r);
    text_add(out, "</div>\n");
}
