/* SPDX-License-Identifier: GPL-3.0-or-later */
/* marginal_lanes.h: what the collapsed likelihoods share, on lanes; included only by sources that
 * are compiled once per instruction set. */
#ifndef TERRACE_MARGINAL_LANES_H
#define TERRACE_MARGINAL_LANES_H

#include "base/isa_name.h"
#include "base/vecmath_lanes.h"
#include "posterior/marginal.h"

#define EACH_POINT(n) for (size_t i = 0; i < (n); i += VL)

LANE_FN vd weight_at(const struct problem *p, const struct observations *o, size_t n, size_t k,
                     size_t i)
{
    return o->precision ? p->n[k] * v_load(o->precision + i) : v_load(o->w + k * n + i);
}

LANE_FN vd value_at(const struct problem *p, const struct observations *o, size_t n, size_t k,
                    size_t i)
{
    return o->precision ? v_set(p->y[k]) : v_load(o->y + k * n + i);
}

/* where a chain starts anew: the mean, and the variance */
static inline double start_mean(const struct problem *p, size_t level)
{
    return (int)level == p->control ? p->control_mean : p->mean[0];
}

static inline double start_scale(const struct problem *p, size_t level)
{
    const double scale = (int)level == p->control ? p->control_scale : p->scale[0];
    return scale * scale;
}

static inline size_t position_of(const struct problem *p, int level)
{
    size_t at = 0;
    while (at + 1 < p->levels && (int)p->order[at] != level)
        at++;
    return at;
}

#endif
