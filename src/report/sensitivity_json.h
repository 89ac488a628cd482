/* SPDX-License-Identifier: GPL-3.0-or-later */
/* sensitivity_json.h: writes the key `sensitivity` of analysis.json. */
#ifndef TERRACE_SENSITIVITY_JSON_H
#define TERRACE_SENSITIVITY_JSON_H

#include "base/json_write.h"
#include "report/analysis_report.h"

/* A list, one object a sensitivity model: curve, figures by level and target, values of measures,
 * parameters, likelihood fit, diagnostics. They decide nothing: no verdict, no share. A model that
 * could not be fitted has `message` and nulls. */
void json_sensitivity(struct json_writer *w, const struct analysis_report *r);

#endif
