/* SPDX-License-Identifier: GPL-3.0-or-later */
/* binomial.h: binomial draws in our own arithmetic, in bounded time whatever n. */
#ifndef TERRACE_BINOMIAL_H
#define TERRACE_BINOMIAL_H

#include "base/rng.h"

/* One draw of Binomial(n, p): n a whole number >= 0 held as a double, 0 <= p <= 1. Takes as many
 * uniforms from r as it needs. */
double binomial_draw(struct rng_serial *r, double n, double p);

#endif
