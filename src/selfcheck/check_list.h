/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_list.h: the checks by name; the list is in check_list.c. */
#ifndef TERRACE_CHECK_LIST_H
#define TERRACE_CHECK_LIST_H

#include "selfcheck/selfcheck.h"

extern const struct check check_philox, check_sha256, check_vecmath, check_gamma, check_student;
extern const struct check check_rat42, check_five_doses, check_ryegrass, check_beetles, check_nile;
extern const struct check check_known_variance, check_two_binomials, check_two_methods;
extern const struct check check_ess, check_allocation, check_targets;

#endif
