/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_page.c: puts report.html together: masthead, words, figures, details. */
#include "report/analysis_page.h"

#include "report/analysis_words.h"
#include "report/page.h"

/* The program's sign: steps up a slope. */
static void sign(struct text *out)
{
    text_add(out, "<svg class=\"sign\" viewBox=\"0 0 44 24\" aria-hidden=\"true\">"
                  "<path d=\"M1 22h10v-5h9v-5h9v-5h9V2h5\"/></svg>");
}

static void masthead(struct text *out, const struct analysis_report *r)
{
    struct text line = TEXT_INIT;
    text_add(out, "<header>\n<p class=\"house\">");
    sign(out);
    text_add(out, "Terrace analysis report</p>\n<h1>");
    text_add_html(out, r->d->title);
    text_add(out, "</h1>\n");
    words_occasion(&line, r);
    if (r->data->cut_text) {
        text_add(&line, ", data cut at ");
        words_cut(&line, r);
    }
    page_paragraph(out, "occasion", text_s(&line));
    text_clear(&line);
    if (r->by) {
        text_addf(&line, "Prepared by %s", r->by);
        page_paragraph(out, "by", text_s(&line));
    }
    text_release(&line);
    page_paragraph(out, "confidential",
                   "Confidential: unblinded results by level. For the data monitoring committee "
                   "and its statistician only.");
    text_add(out, "</header>\n");
}

void analysis_page(struct text *out, const struct analysis_report *r)
{
    struct text title = TEXT_INIT;
    text_addf(&title, "%s: analysis report", r->d->title);
    page_open(out, text_s(&title), r->a->diagnostics.trusted ? NULL : NOT_TO_BE_USED);
    text_release(&title);
    masthead(out, r);
    text_add(out, "<main>\n");
    page_add_summary(out, r);
    page_add_figures(out, r);
    page_add_details(out, r);
    text_add(out, "</main>\n");
    page_close(out);
}
