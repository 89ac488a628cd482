/* SPDX-License-Identifier: GPL-3.0-or-later */
/* prior_bands.h: the 5%, 50% and 95% points of what priors imply at each level. */
#ifndef TERRACE_PRIOR_BANDS_H
#define TERRACE_PRIOR_BANDS_H

#include <stddef.h>

#include "design/design.h"
#include "posterior/posterior.h"

struct band {
    double q05, q50, q95; /* response scale; NaN where it does not exist */
};

struct prior_bands {
    size_t levels;
    struct band *response; /* owned, one per level */
    struct band *gain;     /* owned; larger is better; NaN in a design without gains */
};

/* From draws of the prior (the levels of `d`). */
void prior_bands_init(struct prior_bands *out, const struct design *d, const struct draws *draws);
void prior_bands_release(struct prior_bands *b);

#endif
