/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_list.c: the one list of checks. */
#include "selfcheck/check_list.h"

const struct check *const checks[] = {&check_rat42,
                                      &check_five_doses,
                                      &check_ryegrass,
                                      &check_beetles,
                                      &check_nile,
                                      &check_philox,
                                      &check_sha256,
                                      &check_vecmath,
                                      &check_gamma,
                                      &check_student,
                                      &check_known_variance,
                                      &check_two_binomials,
                                      &check_two_methods,
                                      &check_ess,
                                      &check_allocation,
                                      &check_targets,
                                      NULL};
