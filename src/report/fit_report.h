/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fit_report.h: what `fit` writes: fit.json, report.html and the tables on the terminal. They read
 * a finished analysis of the design behind the fit (fit_table.h) and compute nothing.
 *
 * fit.json has the shape of analysis.json without targets, decisions and shares:
 *   {"terrace": 1, "program", "kind": "fit", "design": null,
 *    "data": {"sha256", "table": "rows" | "groups", "levels", "subjects", "left_out"},
 *    "model": {"curve", ...}, "endpoint", "better", "seed",
 *    "default_prior_scales": {"A", "C"} or null (binary: 1.5 and 0 on the logit),
 *    "levels": [{"label", "value", "observed", "raw", "response", "gain": null}],
 *    "parameters", "likelihood_fit", "diagnostics"}
 */
#ifndef TERRACE_FIT_REPORT_H
#define TERRACE_FIT_REPORT_H

#include "base/text.h"
#include "design/fit_table.h"
#include "report/analysis_report.h"

struct fit_report {
    struct analysis_report r; /* design, data, analysis */
    const struct fit_table *table;
};

void fit_json(struct text *out, const struct fit_report *f);
void fit_text(struct text *out, const struct fit_report *f);
void fit_page(struct text *out, const struct fit_report *f);

/* "24 responses at 7 levels, from rows": no full stop. */
void words_fit_data(struct text *out, const struct fit_report *f);
/* Where the default priors come from; a whole sentence. */
void words_fit_priors(struct text *out, const struct fit_report *f);

#endif
