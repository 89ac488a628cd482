/* SPDX-License-Identifier: GPL-3.0-or-later */
/* draws_csv.h: draws.csv, the posterior draws for outside software. */
#ifndef TERRACE_DRAWS_CSV_H
#define TERRACE_DRAWS_CSV_H

#include "base/text.h"
#include "report/analysis_report.h"

/* Appends the file: `chain` and `draw` (both from 1), one column a parameter under its name, one
 * column `response_LABEL` a level (response scale: mean or rate). Rows run chain by chain, each
 * chain in the order of its draws. */
void draws_csv(struct text *out, const struct analysis_report *r);

#endif
