/* SPDX-License-Identifier: GPL-3.0-or-later */
/* slice.h: collapsed slice sampling, eight chains in step: the fallback and a second method.
 *
 * Each coordinate by stepping out and shrinkage (Neal 2003, Annals of Statistics 31:705, figures 3
 * and 5); for a binary endpoint the standard normals eps behind the level logits by elliptical
 * slice sampling (Murray, Adams & MacKay 2010, AISTATS 9:541), where theta = theta(phi, eps) is the
 * exact Gaussian of fixed pseudo-data, so that the rest of the likelihood is nearly flat.
 */
#ifndef TERRACE_SLICE_H
#define TERRACE_SLICE_H

#include "posterior/sampler.h"

struct slice;
struct slice *slice_new(const struct problem *p);
void slice_free(struct slice *s);
/* Starts from the proposal's nodes, then 200 sweeps are thrown away. `p` with data. */
void slice_start(struct slice *s, const struct problem *p, const struct proposal *q,
                 const struct rng_key *key);
/* Whether some chain stands where the posterior has no mass: its draws are worth nothing. */
bool slice_is_lost(const struct slice *s);
/* Eight draws (one a chain) into [at, at + 8). */
void slice_sweep(struct slice *s, const struct draw_rows *out, size_t at);

#endif
