/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fit_table.h: the table that `fit` reads: rows (level, response) or groups (level, n, mean, sd or
 * level, n, events), no design; and the design that stands behind a fit of it. */
#ifndef TERRACE_FIT_TABLE_H
#define TERRACE_FIT_TABLE_H

#include "design/data.h"
#include "design/design.h"

struct fit_table {
    bool binary, groups;
    size_t levels;
    double value[LEVELS_MAX]; /* increasing */
    struct data data;         /* sums by level; no subjects of its own when `groups` */
    double left_out;          /* rows without a response */
};

/* Reads and checks all of the file; every fault with its line. endpoint: "continuous", "binary", or
 * NULL (binary where there is a column `events`). Owned by the caller on STATUS_OK. */
enum status fit_table_read(struct fit_table **out, const char *path, const char *endpoint,
                           struct err *e);
/* The same of bytes in hand; `file` is for messages. */
enum status fit_table_parse(struct fit_table **out, const char *bytes, size_t length,
                            const char *file, const char *endpoint, struct err *e);
void fit_table_free(struct fit_table *t);

/* The scales of default priors, from the data (continuous): C the mean of the level means, A the
 * larger of half their range and the pooled sd, 1 if both are 0 or absent. */
struct prior_scales fit_table_scales(const struct fit_table *t);

/* What is asked of a fit. `model`: the bytes of a JSON `model` object from `model_file`, or NULL
 * with `curve`; fix: NAME=VALUE words. */
struct fit_request {
    const char *curve, *model_file;
    const struct text *model;
    size_t fixes;
    const char *const *fix;
    bool higher_is_better;
    double seed;
};

/* The design behind a fit: the table's levels, the model, default priors from the data. Faults name
 * the table, the model's file or the option they come from. */
enum status fit_design(struct design **out, const struct fit_table *t, const struct fit_request *q,
                       const struct vocabulary *v, struct err *e);

#endif
