/* SPDX-License-Identifier: GPL-3.0-or-later */
/* design.h: the decision problem and the trial, as written down in one JSON file, resolved.
 *
 * Filled by design_read, then passed const. Every default is in place; indices replace labels.
 * Optional numbers that may be absent have a has_ flag. Units: level values in levels.unit; means,
 * gains, effects, margins on the response scale unless a target or condition says link; times in
 * time_unit.
 */
#ifndef TERRACE_DESIGN_H
#define TERRACE_DESIGN_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "base/sha256.h"
#include "base/status.h"
#include "base/text.h"
#include "design/curve.h"
#include "design/prior.h"
#include "design/vocabulary.h"

enum { LEVELS_MIN = 2, LEVELS_MAX = 128, LEVEL_NONE = -1, LEVEL_ANY = -2, OF_BEST = -3 };

enum endpoint_type { ENDPOINT_CONTINUOUS, ENDPOINT_BINARY };
enum dropped_rule { DROPPED_EXCLUDED, DROPPED_FAILURE };

struct level {
    char *label;
    double value;
};

/* A model: curve, priors in force, and what follows from the levels it runs over. */
struct model {
    const struct curve *curve;
    int order;           /* ndlm: 1 or 2 */
    bool spacing_actual; /* ndlm: actual gaps instead of equal steps */
    double shift;        /* log_linear */
    size_t parameters;   /* the curve's (in its order, those of this order), `control`, `sd` */
    const struct parameter *parameter[MODEL_PARAMETERS_MAX];
    struct prior prior[MODEL_PARAMETERS_MAX];
};

struct target {
    char *name;
    const struct target_rule *rule;
    double fraction, effect, margin;
    int of;        /* level index or OF_BEST */
    bool by_meets; /* "select": {"meets": p} */
    double meets;
    bool link; /* "scale": "link" */
};

struct condition {
    const struct measure *measure;
    int target;  /* index or -1 */
    int level;   /* index, LEVEL_ANY or LEVEL_NONE */
    double gain; /* default 0 */
    double value;
    double per_arm, alpha;
    bool link;
    bool above; /* true: value > threshold, false: value < threshold */
    double threshold;
};

enum join { JOIN_ONE, JOIN_ALL, JOIN_ANY };
struct conditions {
    enum join join;
    size_t count;
    struct condition *list;
};

enum action { ACTION_STOP_SUCCESS, ACTION_STOP_FUTILITY };
const char *action_key(enum action a);

struct decision {
    enum action action;
    struct conditions when;
    double from;         /* a planned point, in its unit; 0: from the first analysis */
    double min_observed; /* outcomes in hand; 0: no demand */
    bool binding;
};

enum counted { COUNTED_RANDOMIZED, COUNTED_OBSERVED, COUNTED_TIME };

struct analyses {
    enum counted counted;
    size_t count; /* planned interim analyses that will be held by count; 0: none planned.
                     first_at/every over time end only with enrolment: count is then the number of
                     points before the expected end of enrolment and open_ended is true */
    double *at;   /* planned points, increasing */
    bool open_ended;
    double first_at, every; /* 0 when a list was given */
    double lag;
};

enum power_kind { POWER_NUMBER, POWER_N_OVER_2N };
enum control_share_kind { CONTROL_SHARE_NUMBER, CONTROL_SHARE_AS_LARGEST, CONTROL_SHARE_NONE };

struct allocation {
    double *ratio; /* one per level */
    double block;  /* 1: independent draws */
    double start_per_level;
    bool adapts;
    int adapt_target; /* index into targets */
    enum power_kind power_kind;
    double power, information, drop_below;
    double *at_least, *at_most; /* one per level; 0 and 1 when absent (control's entry unused) */
    enum control_share_kind control_kind;
    double control_share;
    bool urn;
    double urn_mass;
};

struct rate_step {
    double from, rate;
};
struct accrual {
    size_t count; /* 0: not given */
    struct rate_step *steps;
};

enum truth_kind { TRUTH_MEANS, TRUTH_CURVE, TRUTH_PRIOR };
struct scenario {
    char *name;
    enum truth_kind kind;
    double *response; /* TRUTH_MEANS and TRUTH_CURVE: true mean or rate by level, all levels */
    const struct curve *curve;
    double *sd; /* one per level, continuous; NULL for TRUTH_PRIOR */
    double trend;
    bool is_null; /* as given, else largest true gain <= 0 (false when there are no gains) */
    bool null_given;
    struct accrual accrual; /* count 0: the design's */
    double *dropout;        /* one per level, or NULL: the design's */
};

struct column_names {
    char *subject, *level, *response, *enrolled, *status;
};
struct level_alias {
    char *text;
    size_t level;
};

/* Scale and centre of default priors, response scale. */
struct prior_scales {
    double A, C;
};

struct design {
    char *file; /* as the user named it */
    char sha256[SHA256_HEX], resolved_sha256[SHA256_HEX];
    struct text resolved; /* RFC 8785 form with defaults in and notes out */

    char *title;
    char *quantity, *unit; /* "dose" or "duration"; unit may be "" */
    size_t levels;
    struct level *level;
    int control; /* index or LEVEL_NONE */
    bool control_on_curve;
    int reference_level; /* what gains are taken against: the control, or the `reference` label;
                            LEVEL_NONE: see has_reference_number */
    bool has_reference_number;
    double reference_number;
    char *time_unit;

    char *endpoint_name;
    enum endpoint_type type;
    bool higher_is_better;
    double observed_after;
    bool has_range;
    double range[2];
    bool has_scales; /* `fit` only: default priors from the data, not from the range */
    struct prior_scales scales;
    enum dropped_rule dropped;

    struct model model;
    size_t sensitivities;
    struct model *sensitivity;

    size_t targets;
    struct target *target;
    struct allocation allocation;
    double subjects;
    struct analyses analyses;
    size_t decisions;
    struct decision *decision;
    bool has_final;
    struct conditions final_success;
    struct accrual accrual;
    double *dropout; /* one per level */
    size_t scenarios;
    struct scenario *scenario;
    double trials;
    double draws, max_draws, precision;
    uint64_t seed;

    struct column_names columns;
    size_t aliases;
    struct level_alias *alias;
};

/* Reads, checks and resolves `path`. All faults are added, each with its JSON pointer (or line for
 * syntax). On STATUS_OK *out is owned by the caller. */
enum status design_read(struct design **out, const char *path, const struct vocabulary *v,
                        struct err *e);
enum status design_parse(struct design **out, const char *bytes, size_t length, const char *file,
                         const struct vocabulary *v, struct err *e);
/* The same with scales of default priors that stand in for those of the range. */
enum status design_parse_scaled(struct design **out, const char *bytes, size_t length,
                                const char *file, const struct vocabulary *v,
                                const struct prior_scales *scales, struct err *e);
void design_free(struct design *d);

/* The JSON Schema (2020-12), made from the same field table as the parser. */
void design_schema(struct text *out, const struct vocabulary *v);

bool design_has_gain(const struct design *d);                /* a control or a reference is there */
bool design_is_active(const struct design *d, size_t level); /* not the control */
double design_sign(const struct design *d);                  /* +1 higher is better, -1 lower */
/* Levels on the curve: all, or all but a control off the curve. `value` needs room for
 * LEVELS_MAX. */
struct curve_levels design_curve_levels(const struct design *d, const struct model *m,
                                        double value[LEVELS_MAX]);
/* The curve's formula for people, as this model's order has it. */
const char *model_formula(const struct model *m);
int design_target_find(const struct design *d, const char *name); /* index or -1 */
int design_level_find(const struct design *d, const char *label); /* index or -1 */

#endif
