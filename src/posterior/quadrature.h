/* SPDX-License-Identifier: GPL-3.0-or-later */
/* quadrature.h: the second method: the whole posterior on a fine grid, up to three dimensions.
 *
 * Continuous: shapes and ln sd, the linear part exact. Binary: shapes and the standard normals
 * behind the level logits. Draws are spread over the cells by weight (systematically), moved evenly
 * within their cell, and the linear part is drawn exactly there.
 */
#ifndef TERRACE_QUADRATURE_H
#define TERRACE_QUADRATURE_H

#include <stdbool.h>

#include "posterior/sampler.h"

bool quadrature_reaches(const struct problem *p);

/* count (a multiple of BLOCK) draws into out rows [0, count). */
void quadrature_run(const struct problem *p, const struct proposal *q,
                    const struct coordinate_range *r, const struct rng_key *key, size_t count,
                    const struct draw_rows *out);

#endif
