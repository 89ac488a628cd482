/* SPDX-License-Identifier: GPL-3.0-or-later */
/* selfcheck_report.c: writes what the built-in checks found. */
#include "report/selfcheck_report.h"

#include <math.h>
#include <string.h>

#include "base/base.h"
#include "base/build.h"
#include "base/json_write.h"
#include "base/number.h"
#include "base/vecmath.h"
#include "report/page.h"
#include "report/table.h"
#include "report/wrap.h"

enum { NINE = 9, FULL = 15 };

/* Results of optimisers carry nine digits; all else stands in full. */
static double ours(const struct check_result *r, const struct check_figure *f)
{
    return isfinite(f->ours) && r->check->nine_digits ? number_nine(f->ours) : f->ours;
}

static double difference(const struct check_result *r, const struct check_figure *f)
{
    return f->published_text ? f->ours : fabs(ours(r, f) - f->published);
}

static void cell(struct table *t, double x, int digits)
{
    char s[NUMBER_CHARS];
    text_add(table_open(t), number_significant(s, x, digits));
    table_next(t);
}

static struct table *table_of(const struct check_result *r)
{
    static const char *const headings[] = {"Value",      "Published", "Ours",
                                           "Difference", "Allowed",   "Verdict"};
    struct table *t = table_new();
    for (size_t i = 0; i < COUNT_OF(headings); i++)
        table_column(t, headings[i], i > 0 && i < 5 && !r->figure[0].published_text);
    for (size_t i = 0; i < r->count; i++) {
        const struct check_figure *f = &r->figure[i];
        table_cell(t, f->what);
        if (f->published_text) {
            table_cell(t, f->published_text);
            table_cell(t, f->ours_text);
        } else {
            cell(t, f->published, r->check->nine_digits ? NINE : FULL);
            cell(t, ours(r, f), r->check->nine_digits ? NINE : FULL);
        }
        cell(t, difference(r, f), 2);
        cell(t, f->allowed, 2);
        table_cell(t, f->passed ? "passed" : "FAILED");
    }
    return t;
}

static void verdict(struct text *out, const struct selfcheck *s)
{
    text_addf(out, "%zu checks passed, %zu failed", s->passed, s->failed);
}

/* ---- terminal ---- */

static void evidence_line(struct text *out, const char *name, const char *value)
{
    text_add(out, "  ");
    text_pad_to(out, name, 18);
    text_addf(out, "%s\n", value);
}

void selfcheck_text(struct text *out, const struct selfcheck *s)
{
    text_add(out, "Built-in checks\n");
    evidence_line(out, "program", TERRACE_PROGRAM);
    evidence_line(out, "build", build_words());
    evidence_line(out, "instruction set", vecmath()->name);
    evidence_line(out, "sources, SHA-256", source_sha256());
    evidence_line(out, "seed", "fixed for each check");
    for (size_t i = 0; i < s->count; i++) {
        const struct check_result *r = &s->result[i];
        struct table *t = table_of(r);
        text_addf(out, "\n%s: %s\n", r->check->key, r->passed ? "passed" : "FAILED");
        wrap_add(out, "  ", r->check->source);
        wrap_add(out, "  ", r->check->what);
        table_text(out, t);
        table_free(t);
    }
    text_add(out, "\n");
    verdict(out, s);
    text_add(out, "\n");
}

/* ---- JSON ---- */

static void figure_json(struct json_writer *w, const struct check_result *r,
                        const struct check_figure *f)
{
    json_open_inline(w, '{');
    json_key_string(w, "value", f->what);
    if (f->published_text) {
        json_key_string(w, "published", f->published_text);
        json_key_string(w, "ours", f->ours_text);
    } else {
        json_key_number(w, "published", f->published);
        json_key_maybe(w, "ours", isfinite(f->ours) ? ours(r, f) : NAN);
    }
    const double off = difference(r, f);
    json_key_maybe(w, "difference", isfinite(off) ? number_nine(off) : NAN);
    json_key_number(w, "allowed", number_nine(f->allowed));
    json_key_bool(w, "passed", f->passed);
    json_close(w);
}

static void check_json(struct json_writer *w, const struct check_result *r)
{
    json_open(w, '{');
    json_key_string(w, "check", r->check->key);
    json_key_string(w, "group", r->check->group);
    json_key_string(w, "source", r->check->source);
    json_key_string(w, "what", r->check->what);
    json_key_bool(w, "passed", r->passed);
    json_key(w, "figures");
    json_open(w, '[');
    for (size_t i = 0; i < r->count; i++)
        figure_json(w, r, &r->figure[i]);
    json_close(w);
    json_close(w);
}

void selfcheck_json(struct text *out, const struct selfcheck *s)
{
    struct json_writer w;
    json_writer_init(&w, out);
    json_open(&w, '{');
    json_key_number(&w, "terrace", 1);
    json_key_string(&w, "program", TERRACE_PROGRAM);
    json_key_string(&w, "kind", "selfcheck");
    json_key_string(&w, "build", build_words());
    json_key_string(&w, "instruction_set", vecmath()->name);
    json_key_string(&w, "source_sha256", source_sha256());
    json_key_number(&w, "passed", (double)s->passed);
    json_key_number(&w, "failed", (double)s->failed);
    json_key(&w, "checks");
    json_open(&w, '[');
    for (size_t i = 0; i < s->count; i++)
        check_json(&w, &s->result[i]);
    json_close(&w);
    json_close(&w);
    text_add(out, "\n");
}

/* ---- page ---- */

static void row(struct table *t, const char *name, const char *value)
{
    table_cell(t, name);
    table_cell(t, value);
}

static void masthead(struct text *out, const struct selfcheck *s)
{
    struct table *t = table_new();
    struct text line = TEXT_INIT;
    verdict(&line, s);
    text_add(out, "<header>\n<p class=\"house\">Terrace built-in checks</p>\n<h1>");
    text_add_html(out, text_s(&line));
    text_add(out, "</h1>\n</header>\n<main>\n");
    page_section_open(out, "evidence", "What was checked");
    table_column(t, "What", false);
    table_column(t, "Value", false);
    row(t, "Program", TERRACE_PROGRAM);
    row(t, "Build", build_words());
    row(t, "Instruction set in force", vecmath()->name);
    row(t, "Sources, SHA-256", source_sha256());
    row(t, "Seed", "fixed for each check");
    page_table(out, t, "The same sources give the same digest, whoever builds them.");
    page_paragraph(out, NULL,
                   "Each check computes values with this program and holds them against published "
                   "ones, closed forms or a second method. It passes when every value differs by "
                   "no more than is allowed. Passing is evidence about this build on this "
                   "processor family; it does not replace validation for the intended use.");
    page_section_close(out);
    text_release(&line);
}

void selfcheck_page(struct text *out, const struct selfcheck *s)
{
    const char *group = "";
    page_open(out, "Terrace built-in checks", s->failed ? "Checks failed" : NULL);
    masthead(out, s);
    for (size_t i = 0; i < s->count; i++) {
        const struct check_result *r = &s->result[i];
        if (strcmp(group, r->check->group) != 0) {
            if (*group)
                page_section_close(out);
            group = r->check->group;
            page_section_open(out, r->check->key, group);
        }
        text_add(out, "<h3>");
        text_add_html(out, r->check->key);
        text_addf(out, ": %s</h3>\n", r->passed ? "passed" : "FAILED");
        page_paragraph(out, NULL, r->check->what);
        page_table(out, table_of(r), r->check->source);
    }
    page_section_close(out);
    text_add(out, "</main>\n");
    page_close(out);
}
