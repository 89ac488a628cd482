/* SPDX-License-Identifier: GPL-3.0-or-later */
/* row_args.h: which optional keys a target rule or a measure takes, by its row (vocabulary.h). */
#ifndef TERRACE_ROW_ARGS_H
#define TERRACE_ROW_ARGS_H

#include "design/rules.h"

/* Faults for keys of `considered` that stand but are not allowed, or are required but missing.
 * `key` names the row. The place is that of `tree` and stays. */
void row_args_check(struct reader *r, const cJSON *tree, const char *key, unsigned allowed,
                    unsigned required, unsigned considered);

/* Whether gains exist, or may once a faulty control is mended. */
bool row_args_gain(const struct reader *r);
/* Whether there is a level to compare with (control or reference label), or may be. */
bool row_args_reference_level(const struct reader *r);

/* `scale` is link; on a continuous endpoint that is a fault. */
bool row_args_link(struct reader *r, const cJSON *tree);
/* On the response scale of a binary endpoint the number lies within low and high, both out. */
void row_args_rate(struct reader *r, const cJSON *tree, const char *key, bool link, double low,
                   double high);

#endif
