/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_text.c: writes an analysis for a terminal: what is recommended first, tables after it.
 */
#include "report/analysis_text.h"

#include "report/analysis_tables.h"
#include "report/analysis_words.h"
#include "report/figures.h"

static void heading(struct text *out, const char *s)
{
    text_addf(out, "\n%s\n", s);
}

static void end_line(struct text *out)
{
    text_add(out, "\n");
}

static void add_table(struct text *out, struct table *t)
{
    table_text(out, t);
    table_free(t);
}

static void indented(struct text *out, const char *sentence)
{
    text_addf(out, "  - %s\n", sentence);
}

static void head(struct text *out, const struct analysis_report *r)
{
    struct text cut = TEXT_INIT;
    text_addf(out, "%s\n", r->d->title);
    words_occasion(out, r);
    words_cut(&cut, r);
    if (cut.length > 0)
        text_addf(out, ", data cut at %s", text_s(&cut));
    text_release(&cut);
    text_add(out, ". ");
    words_subjects(out, r);
    end_line(out);
}

static void recommendation(struct text *out, const struct analysis_report *r)
{
    if (!r->a->diagnostics.trusted)
        text_add(out, "\n*** " NOT_TO_BE_USED " ***\n");
    text_addf(out, "\nRecommendation: %s. ", words_recommendation(r));
    words_why(out, r);
    end_line(out);
}

static void levels(struct text *out, const struct analysis_report *r)
{
    static const char *const keys[] = {"randomized",    "observed",   "raw",      "raw_sd",
                                       "mean",          "sd",         "interval", "gain",
                                       "gain_positive", "next_share", NULL};
    heading(out, "Levels");
    add_table(out, table_levels(r, keys));
}

static void targets(struct text *out, const struct analysis_report *r)
{
    if (r->a->targets == 0)
        return;
    heading(out, "Probability that a level is the target");
    add_table(out, table_targets(r));
    for (size_t t = 0; t < r->a->targets; t++) {
        text_add(out, "  ");
        words_selection(out, r, t);
        end_line(out);
    }
}

static void decisions(struct text *out, const struct analysis_report *r)
{
    if (r->a->decisions == 0 && !r->a->final_success.condition)
        return;
    heading(out, "Decisions");
    add_table(out, table_decisions(r));
}

static void computation(struct text *out, const struct analysis_report *r)
{
    heading(out, "Parameters");
    add_table(out, table_parameters(r));
    heading(out, "Computation");
    text_add(out, "  ");
    words_computation(out, r);
    end_line(out);
}

static void cautions(struct text *out, const struct analysis_report *r)
{
    struct text list = TEXT_INIT;
    if (words_distrust(&list, r, indented) > 0) {
        heading(out, "Cautions");
        text_add(out, text_s(&list));
    }
    text_release(&list);
}

void analysis_text(struct text *out, const struct analysis_report *r)
{
    head(out, r);
    recommendation(out, r);
    levels(out, r);
    targets(out, r);
    decisions(out, r);
    computation(out, r);
    cautions(out, r);
}
