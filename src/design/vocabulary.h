/* SPDX-License-Identifier: GPL-3.0-or-later */
/* vocabulary.h: the rows that a design may name but that higher floors own: target rules and
 * decision measures. The design reader is handed both lists, so that a rule or a measure stays one
 * row in one file.
 */
#ifndef TERRACE_VOCABULARY_H
#define TERRACE_VOCABULARY_H

#include <stdbool.h>
#include <stddef.h>

struct target;
struct condition;
struct bar_inputs; /* analysis/targets.h */
struct judgement;  /* analysis/measures.h */
struct text;
struct design;

/* Which optional keys a row takes. ARG_x: may stand; a row's `required` says which must. */
enum row_args {
    ARG_FRACTION = 1 << 0,
    ARG_EFFECT = 1 << 1,
    ARG_OF = 1 << 2,
    ARG_MARGIN = 1 << 3,
    ARG_TARGET = 1 << 4,
    ARG_LEVEL = 1 << 5,
    ARG_GAIN = 1 << 6,
    ARG_VALUE = 1 << 7,
    ARG_PER_ARM = 1 << 8,
    ARG_ALPHA = 1 << 9,
    ARG_SCALE = 1 << 10
};

/* A target rule: a level meets it when s x response >= bar(draw); the target is the lowest active
 * level that meets it (interface, section 5). */
struct target_rule {
    const char *key;
    unsigned allowed, required; /* of ARG_FRACTION, _EFFECT, _OF, _MARGIN */
    bool needs_gain;            /* needs a control or a reference */
    /* one sentence for people, ended without a full stop */
    void (*sentence)(const struct target *t, const struct design *d, struct text *out);
    void (*bar)(const struct target *t, const struct bar_inputs *in, size_t n, double *bar);
};

/* A decision measure. Exactly one of target and level for pr_gain; other rows take what they say.
 */
struct measure {
    const char *key;
    unsigned allowed, required; /* of ARG_TARGET ... ARG_SCALE; pr_gain: target or level */
    bool needs_gain;            /* needs a control or a reference */
    bool needs_reference_level; /* needs the control or a `reference` label (predictive_next) */
    void (*sentence)(const struct condition *c, const struct design *d, struct text *out);
    /* value and Monte Carlo standard error of the measure (analysis/measures.c) */
    void (*evaluate)(const struct condition *c, const struct judgement *j, double *value,
                     double *mcse);
};

struct vocabulary {
    const struct target_rule *const *rules; /* NULL-terminated */
    const struct measure *const *measures;  /* NULL-terminated */
};

#endif
