/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rules_schedule.h: what scenarios share with the rules about accrual. */
#ifndef TERRACE_RULES_SCHEDULE_H
#define TERRACE_RULES_SCHEDULE_H

#include "design/rules.h"

/* Reads an accrual object at the pointer `where`; *a must be zero. */
void accrual_read(struct reader *r, cJSON *tree, const char *where, struct accrual *a);

/* Time from opening (in time_unit) at which `subjects` are expected to be randomized. */
double accrual_expected_end(const struct accrual *a, double subjects);

#endif
