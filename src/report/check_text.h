/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_text.h: a design in words, as a statistician reads it to a team. */
#ifndef TERRACE_CHECK_TEXT_H
#define TERRACE_CHECK_TEXT_H

#include <stdbool.h>

#include "base/text.h"
#include "report/check_report.h"

/* Appends the whole text; `colour`: headings are set off for a terminal. */
void check_text(struct text *out, const struct check_report *r, bool colour);

/* Parts with tables (check_tables.c). */
void check_table_priors(struct text *out, const struct check_report *r);
void check_table_responses(struct text *out, const struct check_report *r);
void check_table_targets(struct text *out, const struct check_report *r);
void check_table_expected(struct text *out, const struct check_report *r);
void check_table_scenarios(struct text *out, const struct check_report *r);

#endif
