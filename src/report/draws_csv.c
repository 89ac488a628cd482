/* SPDX-License-Identifier: GPL-3.0-or-later */
/* draws_csv.c: writes the posterior draws as RFC 4180 CSV, numbers in their shortest form. */
#include "report/draws_csv.h"

#include "base/number.h"

static void add_number(struct text *out, double x)
{
    char s[NUMBER_CHARS];
    text_add(out, ",");
    text_add(out, number_shortest(s, x));
}

static void add_header(struct text *out, const struct analysis_report *r)
{
    text_add(out, "chain,draw");
    for (size_t p = 0; p < r->draws.parameters; p++) {
        text_add(out, ",");
        text_add_csv(out, r->a->parameter[p].name);
    }
    struct text name = TEXT_INIT;
    for (size_t k = 0; k < r->draws.levels; k++) {
        text_clear(&name);
        text_addf(&name, "response_%s", r->d->level[k].label);
        text_add(out, ",");
        text_add_csv(out, text_s(&name));
    }
    text_release(&name);
    text_add(out, "\n");
}

static void add_draw(struct text *out, const struct draws *w, size_t i)
{
    text_addf(out, "%zu,%zu", i % w->chains + 1, i / w->chains + 1);
    for (size_t p = 0; p < w->parameters; p++)
        add_number(out, w->parameter[p * w->stride + i]);
    for (size_t k = 0; k < w->levels; k++)
        add_number(out, w->response[k * w->stride + i]);
    text_add(out, "\n");
}

void draws_csv(struct text *out, const struct analysis_report *r)
{
    const struct draws *w = &r->draws;
    add_header(out, r);
    for (size_t c = 0; c < w->chains; c++)
        for (size_t i = c; i < w->n; i += w->chains)
            add_draw(out, w, i);
}
