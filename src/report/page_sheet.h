/* SPDX-License-Identifier: GPL-3.0-or-later */
/* page_sheet.h: figures by level as arrays for charts, and the count of a page's figures. */
#ifndef TERRACE_PAGE_SHEET_H
#define TERRACE_PAGE_SHEET_H

#include "report/analysis_report.h"
#include "report/chart.h"

enum { SHEET_COLUMNS = 8 };

/* Each column has one entry a level, and one more for "no level". Life cycle: sheet_init,
 * sheet_release; `r` is borrowed. */
struct sheet {
    const struct analysis_report *r;
    size_t n;
    double *column[SHEET_COLUMNS];
    double *value;
    const char **label;
    struct text level_title;
    int figure; /* number of the next figure */
};

void sheet_init(struct sheet *s, const struct analysis_report *r);
void sheet_release(struct sheet *s);
/* The levels as charts want them; borrows from the sheet. */
struct chart_levels sheet_levels(const struct sheet *s, int marked, const char *extra);
/* A column from the table of figures (figures.h); `upper`: the upper end of an interval. */
void sheet_fill(struct sheet *s, size_t column, const char *key, bool upper);
/* page_figure_open with the next number. */
void sheet_figure_open(struct text *out, struct sheet *s, const char *title, bool aside,
                       size_t rows);

#endif
