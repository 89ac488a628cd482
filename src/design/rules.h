/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rules.h: the rules across fields, one named function each, and the state they work on.
 *
 * They run in the order of design_rules on the clean tree that fields_check leaves: a JSON null is
 * a value already reported, about which rules keep silent. A rule checks, fills its part of the
 * struct design and writes the defaults it works out back into the tree (which becomes the resolved
 * design).
 */
#ifndef TERRACE_RULES_H
#define TERRACE_RULES_H

#include <cjson/cJSON.h>
#include <stdbool.h>

#include "base/status.h"
#include "base/text.h"
#include "design/design.h"

struct reader {
    const struct vocabulary *v;
    const char *file;
    struct err *e;
    cJSON *tree;
    struct design *d;
    struct text place;   /* JSON pointer of the next fault */
    bool labels_known;   /* every label was read: an unknown one is a fault of its own */
    bool levels_known;   /* values increase and the control is known: curves can be tried */
    bool endpoint_known; /* type and direction were read */
    bool scale_known;    /* false: the range was faulty, so default priors cannot be worked out */
    bool targets_known;  /* `targets` was read: an unknown name is a fault of its own */
};

struct rule {
    const char *name; /* as in the schema's $comment */
    const char *says;
    void (*apply)(struct reader *r);
};

extern const struct rule design_rules[]; /* ended by name NULL */

/* --- the tree --- */
cJSON *tree_at(cJSON *object, const char *key);                      /* NULL: absent */
bool tree_given(const cJSON *object, const char *key);               /* also when faulty */
bool tree_number(const cJSON *object, const char *key, double *out); /* false: *out is unchanged */
const char *tree_text(const cJSON *object, const char *key);         /* NULL: absent or faulty */
bool tree_flag(const cJSON *object, const char *key, bool otherwise);
bool tree_is(const cJSON *object, const char *key, const char *word);
size_t tree_count(const cJSON *list); /* 0 for anything but a list or object */
void tree_put(cJSON *object, const char *key, cJSON *item); /* BUG when the key is there */
void tree_put_number(cJSON *object, const char *key, double x);
void tree_put_text(cJSON *object, const char *key, const char *s);
cJSON *tree_numbers(const double *x, size_t count);
/* A number, or a list of one per level, spread over all levels. The place must be that of the
 * value. NULL when it is absent, faulty or (said) of the wrong length. */
double *tree_per_level(struct reader *r, const cJSON *item);

/* --- faults --- */
void reader_at(struct reader *r, const char *format, ...) __attribute__((format(printf, 2, 3)));
void reader_under(struct reader *r, const char *key); /* one token more, escaped */
void reader_fault(struct reader *r, const char *format, ...) __attribute__((format(printf, 2, 3)));
/* Index of a label or target name; LEVEL_NONE, -1: unknown, said at the place. */
int reader_level(struct reader *r, const char *label);
int reader_active(struct reader *r, const char *label); /* the same; the control is refused */
int reader_target(struct reader *r, const char *name);

/* What needs no rule: texts, numbers, allocation of arrays. */
void reader_fill(struct reader *r);

/* --- models (rules_model.c, rules_prior.c) --- */
void each_model(struct reader *r,
                void (*f)(struct reader *r, cJSON *tree, struct model *m, const char *where));
/* The parameter of a model with this name, or the name of its variance. -1: none. */
int model_parameter(const struct model *m, const char *name);
/* Comma-separated names of the parameters of a curve, those of this order. */
void curve_parameter_names(const struct curve *c, int order, struct text *out);

/* --- the rules, in files by what they are about --- */
void rule_levels_increase(struct reader *r);
void rule_labels_unique(struct reader *r);
void rule_control_exists(struct reader *r);
void rule_reference_alone(struct reader *r);
void rule_range_ordered(struct reader *r);
void rule_failure_binary(struct reader *r);
void rule_reference_possible(struct reader *r);
void rule_columns_distinct(struct reader *r);
void rule_aliases_exist(struct reader *r);

void rule_curve_keys(struct reader *r);
void rule_order_fits(struct reader *r);
void rule_prior_names(struct reader *r);
void rule_prior_cuts(struct reader *r);
void rule_prior_support(struct reader *r);
void rule_curve_levels(struct reader *r);
void rule_priors_complete(struct reader *r);

void rule_target_arguments(struct reader *r);
void rule_target_gains(struct reader *r);
void rule_target_of(struct reader *r);
void rule_target_scale(struct reader *r);
void rule_condition_arguments(struct reader *r);
void rule_condition_gains(struct reader *r);
void rule_condition_names(struct reader *r);
void rule_condition_scale(struct reader *r);
void rule_success_binds(struct reader *r);

void rule_ratio_per_level(struct reader *r);
void rule_block_multiple(struct reader *r);
void rule_start_fits(struct reader *r);
void rule_adapt_target(struct reader *r);
void rule_share_bounds(struct reader *r);
void rule_control_share(struct reader *r);

void rule_accrual_ordered(struct reader *r);
void rule_dropout_per_level(struct reader *r);
void rule_points(struct reader *r);
void rule_points_ordered(struct reader *r);
void rule_points_whole(struct reader *r);

void rule_scenario_names(struct reader *r);
void rule_truth_endpoint(struct reader *r);
void rule_truth_per_level(struct reader *r);
void rule_truth_keys(struct reader *r);
void rule_truth_parameters(struct reader *r);
void rule_truth_curve(struct reader *r);
void rule_truth_possible(struct reader *r);
void rule_truth_sd(struct reader *r);
void rule_truth_overrides(struct reader *r);
void rule_truth_null(struct reader *r);

#endif
