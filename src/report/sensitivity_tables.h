/* SPDX-License-Identifier: GPL-3.0-or-later */
/* sensitivity_tables.h: the design's model and its sensitivity models side by side. A model is
 * named by its number in the design's list and its curve; number 0 is the design's own model.
 * Tables are owned by the caller.
 */
#ifndef TERRACE_SENSITIVITY_TABLES_H
#define TERRACE_SENSITIVITY_TABLES_H

#include "report/analysis_report.h"
#include "report/table.h"

/* The same report with model `i` in the place of the analysis. */
struct analysis_report report_of_model(const struct analysis_report *r, size_t i);
/* "design: emax", "2: ndlm, order 2", "(not to be used)" where distrusted. */
void add_model_name(struct text *out, const struct analysis_report *r, size_t i);

struct table *table_models(const struct analysis_report *r); /* fit and trust, a row a model */
struct table *table_models_by_level(const struct analysis_report *r);
struct table *table_models_by_target(const struct analysis_report *r);
/* Values of the decisions' measures; no verdicts. */
struct table *table_models_by_measure(const struct analysis_report *r);

/* What model i is, and what its fit found; whole sentences. */
void words_sensitivity(struct text *out, const struct analysis_report *r, size_t i);

#endif
