/* SPDX-License-Identifier: GPL-3.0-or-later */
/* table.h: a table of finished text cells, written for a terminal or for a page.
 *
 * Life cycle: table_new, columns, then cells row by row; table_text and table_html read it;
 * table_free. The first column names the row. Numbers line up on the right.
 */
#ifndef TERRACE_TABLE_H
#define TERRACE_TABLE_H

#include <stdbool.h>
#include <stddef.h>

#include "base/text.h"

struct table;

struct table *table_new(void);
void table_free(struct table *t);
void table_column(struct table *t, const char *heading, bool number); /* before any cell */
void table_cell(struct table *t, const char *text);
/* The cell being written next: append to it, then call table_next. */
struct text *table_open(struct table *t);
void table_next(struct table *t);
/* Class of the row being written (a const string of page.css); shown on pages only. */
void table_mark(struct table *t, const char *row_class);
size_t table_rows(const struct table *t);

/* Two blanks in front, two between the columns. */
void table_text(struct text *out, const struct table *t);
/* <table> with caption, scopes, escaped cells; a minus sign for a leading hyphen. */
void table_html(struct text *out, const struct table *t, const char *caption);
/* Text as a page shows it: escaped, hyphens before digits as minus signs. */
void table_add_people(struct text *out, const char *s);

#endif
