/* SPDX-License-Identifier: GPL-3.0-or-later */
/* vocabulary_rows.c: the one list of target rules and of decision measures. */
#include "analysis/vocabulary_rows.h"

#include <stddef.h>

#include "analysis/measures.h"
#include "analysis/targets.h"

static const struct target_rule *const rules[] = {&rule_optimal, &rule_effective_dose,
                                                  &rule_minimum_effect, &rule_within_margin, NULL};

static const struct measure *const measures[] = {&measure_pr_gain,
                                                 &measure_pr_any_gain,
                                                 &measure_pr_level,
                                                 &measure_pr_meets,
                                                 &measure_pr_response,
                                                 &measure_predictive_next,
                                                 NULL};

const struct vocabulary terrace_vocabulary = {rules, measures};
