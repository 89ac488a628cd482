/* SPDX-License-Identifier: GPL-3.0-or-later */
/* results_json.h: the parts of a result file that analyses, their sensitivity models and fits have
 * in common. Each writes one key of the object that is open (json_spread: several). A number that
 * does not exist is null.
 */
#ifndef TERRACE_RESULTS_JSON_H
#define TERRACE_RESULTS_JSON_H

#include "base/json_write.h"
#include "report/analysis_report.h"

/* Opens the object or list of a key; _inline keeps it on one line. */
void json_key_open(struct json_writer *w, const char *key, char bracket);
void json_key_open_inline(struct json_writer *w, const char *key, char bracket);
void json_key_strings(struct json_writer *w, const char *key, size_t n, char *const *list);

void json_spread(struct json_writer *w, const struct spread *s); /* mean, sd, q025, q50, q975 */
/* raw, response, gain of a level */
void json_raw(struct json_writer *w, const struct analysis_report *r, size_t level);
void json_response(struct json_writer *w, const struct level_result *l);
void json_gain(struct json_writer *w, const struct analysis_report *r,
               const struct level_result *l);

/* p: one number a target */
void json_by_target(struct json_writer *w, const struct analysis_report *r, const char *key,
                    const double *p);
/* measure, target, level, ...: several keys */
void json_condition_arguments(struct json_writer *w, const struct design *d,
                              const struct condition *c);

void json_parameters(struct json_writer *w, const struct analysis *a);
/* null where the fit does not exist; numbers are null where it did not converge. */
void json_likelihood(struct json_writer *w, const struct likelihood_fit *f);
void json_diagnostics(struct json_writer *w, const struct analysis_diagnostics *g);

#endif
