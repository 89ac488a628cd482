/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_json.h: analysis.json, the machine-readable result of one analysis. */
#ifndef TERRACE_ANALYSIS_JSON_H
#define TERRACE_ANALYSIS_JSON_H

#include "base/text.h"
#include "report/analysis_report.h"

/* Appends the whole document, a newline at its end. Key names and their order are the program's
 * contract with scripts. */
void analysis_json(struct text *out, const struct analysis_report *r);

#endif
