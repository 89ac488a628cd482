/* SPDX-License-Identifier: GPL-3.0-or-later */
/* prior_families.h: the families that code names, not only designs. */
#ifndef TERRACE_PRIOR_FAMILIES_H
#define TERRACE_PRIOR_FAMILIES_H

#include "design/prior.h"

extern const struct prior_family prior_family_normal, prior_family_half_normal,
    prior_family_lognormal, prior_family_gamma, prior_family_inverse_gamma, prior_family_uniform,
    prior_family_student_t, prior_family_fixed;

#endif
