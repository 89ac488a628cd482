/* SPDX-License-Identifier: GPL-3.0-or-later */
/* page_sheet.c: figures by level as arrays for charts. */
#include "report/page_sheet.h"

#include "base/mem.h"
#include "report/figures.h"
#include "report/page.h"

static void raise_first(struct text *t)
{
    if (t->length > 0 && t->s[0] >= 'a' && t->s[0] <= 'z')
        t->s[0] = (char)(t->s[0] - 'a' + 'A');
}

void sheet_init(struct sheet *s, const struct analysis_report *r)
{
    *s = (struct sheet){.r = r, .n = r->a->levels, .figure = 1, .level_title = TEXT_INIT};
    for (size_t c = 0; c < SHEET_COLUMNS; c++)
        s->column[c] = mem_new(s->n + 1, sizeof **s->column);
    s->value = mem_new(s->n, sizeof *s->value);
    s->label = mem_new(s->n, sizeof *s->label);
    for (size_t k = 0; k < s->n; k++) {
        s->value[k] = r->d->level[k].value;
        s->label[k] = r->d->level[k].label;
    }
    text_add(&s->level_title, r->d->quantity);
    raise_first(&s->level_title);
    if (r->d->unit && r->d->unit[0])
        text_addf(&s->level_title, " (%s)", r->d->unit);
}

void sheet_release(struct sheet *s)
{
    for (size_t c = 0; c < SHEET_COLUMNS; c++)
        mem_free(s->column[c]);
    mem_free(s->value);
    mem_free(s->label);
    text_release(&s->level_title);
}

struct chart_levels sheet_levels(const struct sheet *s, int marked, const char *extra)
{
    return (struct chart_levels){s->n, s->label, s->value, text_s(&s->level_title), marked, extra};
}

void sheet_fill(struct sheet *s, size_t column, const char *key, bool upper)
{
    const struct level_figure *f = level_figure_find(key);
    for (size_t k = 0; k < s->n; k++)
        s->column[column][k] = upper ? f->upper(s->r, k) : f->get(s->r, k);
}

void sheet_figure_open(struct text *out, struct sheet *s, const char *title, bool aside,
                       size_t rows)
{
    page_figure_open(out, &(struct page_figure){s->figure++, title, aside, rows});
}
