/* SPDX-License-Identifier: GPL-3.0-or-later */
/* page.h: the frame of every HTML page: head with its content policy and style, banner, sections,
 * figures. A page is one file that needs no network, script or library. Functions append; whatever
 * comes from a user is escaped here.
 */
#ifndef TERRACE_PAGE_H
#define TERRACE_PAGE_H

#include <stdbool.h>
#include <stddef.h>

#include "base/text.h"
#include "report/table.h"

extern const char page_css[]; /* page.css, embedded by the build */

/* `banner`: words that stand on the whole page, on screen and on every printed sheet; NULL: none.
 */
void page_open(struct text *out, const char *title, const char *banner);
void page_close(struct text *out);

void page_section_open(struct text *out, const char *id, const char *heading);
void page_section_close(struct text *out);
void page_paragraph(struct text *out, const char *css_class, const char *sentence);
void page_item(struct text *out, const char *sentence); /* <li> */

/* A figure: caption, plot, then its data. `aside` figures have room for words beside the plot and
 * their table below it; else the table stands beside the plot. Call in this order. */
struct page_figure {
    int number;
    const char *title;
    bool aside;
    size_t rows; /* of its table: long ones scroll on screen and may be split on paper */
};
void page_figure_open(struct text *out, const struct page_figure *f);
void page_figure_beside(struct text *out); /* the plot ends; words or table follow */
void page_figure_below(struct text *out);  /* the words end; the table follows (aside figures) */
void page_figure_close(struct text *out);

/* The table in its own box, which scrolls when it is too wide; takes the table. */
void page_table(struct text *out, struct table *t, const char *caption);

#endif
