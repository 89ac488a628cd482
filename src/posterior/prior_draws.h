/* SPDX-License-Identifier: GPL-3.0-or-later */
/* prior_draws.h: what a model implies before any data. */
#ifndef TERRACE_PRIOR_DRAWS_H
#define TERRACE_PRIOR_DRAWS_H

#include "posterior/plan.h"
#include "posterior/sampler.h"

/* count (a multiple of BLOCK) draws of parameters and level means. */
void prior_draws(const struct plan *plan, const struct rng_key *key, size_t count,
                 const struct draw_rows *out);

#endif
