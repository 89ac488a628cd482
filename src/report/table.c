/* SPDX-License-Identifier: GPL-3.0-or-later */
/* table.c: text cells in rows, aligned for a terminal or marked up for a page. */
#include "report/table.h"

#include "base/base.h"
#include "base/mem.h"

struct table {
    size_t columns, cells, capacity;
    char **heading;         /* owned, by column */
    bool *number;           /* owned, by column */
    char **cell;            /* owned, row-major */
    const char **row_class; /* one per cell slot; read at the first cell of a row */
    const char *mark;
    struct text open;
};

struct table *table_new(void)
{
    return mem_new(1, sizeof(struct table));
}

void table_free(struct table *t)
{
    if (!t)
        return;
    for (size_t i = 0; i < t->columns; i++)
        mem_free(t->heading[i]);
    for (size_t i = 0; i < t->cells; i++)
        mem_free(t->cell[i]);
    mem_free(t->heading);
    mem_free(t->number);
    mem_free(t->cell);
    mem_free(t->row_class);
    text_release(&t->open);
    mem_free(t);
}

void table_column(struct table *t, const char *heading, bool number)
{
    if (t->cells > 0)
        BUG("a column after a cell");
    t->heading = mem_grow(t->heading, t->columns + 1, sizeof *t->heading);
    t->number = mem_grow(t->number, t->columns + 1, sizeof *t->number);
    t->heading[t->columns] = mem_text(heading);
    t->number[t->columns++] = number;
}

struct text *table_open(struct table *t)
{
    return &t->open;
}

void table_next(struct table *t)
{
    if (t->cells == t->capacity) {
        t->capacity = t->capacity ? 2 * t->capacity : 64;
        t->cell = mem_grow(t->cell, t->capacity, sizeof *t->cell);
        t->row_class = mem_grow(t->row_class, t->capacity, sizeof *t->row_class);
    }
    t->row_class[t->cells] = t->mark;
    t->cell[t->cells++] = mem_text(text_s(&t->open));
    text_clear(&t->open);
    if (t->cells % t->columns == 0)
        t->mark = NULL;
}

void table_cell(struct table *t, const char *text)
{
    text_add(&t->open, text);
    table_next(t);
}

void table_mark(struct table *t, const char *row_class)
{
    t->mark = row_class;
}

size_t table_rows(const struct table *t)
{
    return t->columns ? t->cells / t->columns : 0;
}

/* ---- terminal ---- */

static size_t column_width(const struct table *t, size_t c)
{
    size_t width = text_columns(t->heading[c]);
    for (size_t i = c; i < t->cells; i += t->columns)
        if (text_columns(t->cell[i]) > width)
            width = text_columns(t->cell[i]);
    return width;
}

static void text_row(struct text *out, const struct table *t, char *const *cell,
                     const size_t *width)
{
    text_add(out, "  ");
    for (size_t c = 0; c < t->columns; c++) {
        const bool last = c + 1 == t->columns;
        if (t->number[c])
            text_pad_to(out, cell[c], -(int)width[c]);
        else if (last)
            text_add(out, cell[c]);
        else
            text_pad_to(out, cell[c], (int)width[c]);
        text_add(out, last ? "\n" : "  ");
    }
}

void table_text(struct text *out, const struct table *t)
{
    size_t *width = mem_new(t->columns, sizeof *width);
    for (size_t c = 0; c < t->columns; c++)
        width[c] = column_width(t, c);
    text_row(out, t, t->heading, width);
    for (size_t i = 0; i < t->cells; i += t->columns)
        text_row(out, t, t->cell + i, width);
    mem_free(width);
}

/* ---- page ---- */

static bool is_digit(char c)
{
    return c >= '0' && c <= '9';
}

/* A hyphen is a minus sign where a number begins with it. */
static bool is_minus(const char *s, size_t i)
{
    const bool starts = i == 0 || s[i - 1] == ' ' || s[i - 1] == '(' || s[i - 1] == '<';
    return s[i] == '-' && starts && is_digit(s[i + 1]);
}

void table_add_people(struct text *out, const char *s)
{
    struct text shown = TEXT_INIT;
    for (size_t i = 0; s[i]; i++) {
        if (is_minus(s, i))
            text_add(&shown, "\xE2\x88\x92");
        else
            text_add_n(&shown, s + i, 1);
    }
    text_add_html(out, text_s(&shown));
    text_release(&shown);
}

static void html_cell(struct text *out, const struct table *t, size_t c, const char *s)
{
    text_add(out, c == 0 ? "<th scope=\"row\">" : t->number[c] ? "<td class=\"n\">" : "<td>");
    if (c == 0)
        text_add_html(out, s); /* a label, not a number */
    else
        table_add_people(out, s);
    text_add(out, c == 0 ? "</th>" : "</td>");
}

static void html_head(struct text *out, const struct table *t)
{
    text_add(out, "<thead><tr>");
    for (size_t c = 0; c < t->columns; c++) {
        text_add(out, t->number[c] ? "<th scope=\"col\" class=\"n\">" : "<th scope=\"col\">");
        text_add_html(out, t->heading[c]);
        text_add(out, "</th>");
    }
    text_add(out, "</tr></thead>\n<tbody>\n");
}

void table_html(struct text *out, const struct table *t, const char *caption)
{
    text_add(out, "<table><caption>");
    text_add_html(out, caption);
    text_add(out, "</caption>\n");
    html_head(out, t);
    for (size_t i = 0; i < t->cells; i += t->columns) {
        if (t->row_class[i])
            text_addf(out, "<tr class=\"%s\">", t->row_class[i]);
        else
            text_add(out, "<tr>");
        for (size_t c = 0; c < t->columns; c++)
            html_cell(out, t, c, t->cell[i + c]);
        text_add(out, "</tr>\n");
    }
    text_add(out, "</tbody></table>\n");
}
