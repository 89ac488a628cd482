/* SPDX-License-Identifier: GPL-3.0-or-later */
/* grouped.h: the fast simulated fit of a continuous endpoint: importance sampling on a lattice, and
 * several exact draws of the linear part at each point.
 *
 * Points (phi, sd) come from the sampler's proposal in at least SETS_LEAST sets: one rank-1 lattice
 * a set, shifted at random, sets independent (Cranley & Patterson 1976, SIAM Journal on Numerical
 * Analysis 13:904). They are resampled systematically by weight; the draws at a point are
 * antithetic pairs (Hammersley & Morton 1956, Proc. Cambridge Phil. Society 52:449). Stretches of
 * points are the unit of Monte Carlo errors, never single draws.
 */
#ifndef TERRACE_GROUPED_H
#define TERRACE_GROUPED_H

#include "posterior/sampler.h"

enum { SETS_LEAST = 16 };

struct grouped;

/* Points of a grouped fit of this many draws; 0 where it cannot be grouped: level means not
 * integrated out, or too few sets. Four draws a point; two where two shapes carry more of the
 * uncertainty. */
size_t grouped_points(const struct problem *p, size_t draws);

struct grouped *grouped_new(const struct problem *p);
void grouped_free(struct grouped *g);

/* Draw r of point i at r * points + i of the rows, moments at i. The sampler is started; its sums
 * of weights tell how well the proposal fits. */
void grouped_run(struct grouped *g, struct sampler *s, size_t draws, const struct draw_rows *out);

#endif
