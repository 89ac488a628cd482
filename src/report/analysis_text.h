/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_text.h: one analysis as aligned tables for standard output. */
#ifndef TERRACE_ANALYSIS_TEXT_H
#define TERRACE_ANALYSIS_TEXT_H

#include "base/text.h"
#include "report/analysis_report.h"

/* Appends words (wrapped) and tables (as wide as they need); no colour. */
void analysis_text(struct text *out, const struct analysis_report *r);

#endif
