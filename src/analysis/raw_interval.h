/* SPDX-License-Identifier: GPL-3.0-or-later */
/* raw_interval.h: descriptive figures of the raw outcomes of one level: mean or rate with its
 * classical 95% interval, drawn beside the posterior so that a reader sees data and model apart.
 * They decide nothing. Response scale. Thread-safe.
 */
#ifndef TERRACE_RAW_INTERVAL_H
#define TERRACE_RAW_INTERVAL_H

#include <stddef.h>

#include "design/data.h"
#include "design/design.h"

/* NaN stands for "does not exist": everything at n = 0; sd, low, high of a mean at n = 1; sd of a
 * rate. */
struct raw_figures {
    double n, mean, sd, low, high;
};

struct raw_figures raw_interval(const struct level_data *data, enum endpoint_type type,
                                size_t level);

#endif
