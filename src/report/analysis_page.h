/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_page.h: report.html, one analysis for a data monitoring committee. */
#ifndef TERRACE_ANALYSIS_PAGE_H
#define TERRACE_ANALYSIS_PAGE_H

#include "base/text.h"
#include "report/analysis_report.h"

void analysis_page(struct text *out, const struct analysis_report *r);

/* ---- its parts, one file each ---- */

void page_add_summary(struct text *out, const struct analysis_report *r); /* text first */
void page_add_figures(struct text *out, const struct analysis_report *r);
void page_add_details(struct text *out, const struct analysis_report *r); /* parameters, origin */
void page_add_parameters(struct text *out, const struct analysis_report *r);
void page_add_computation(struct text *out, const struct analysis_report *r);

#endif
