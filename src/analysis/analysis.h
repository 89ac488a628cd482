/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis.h: one analysis of the data at a cut: the single door for live data and simulated
 * trials.
 *
 * analysis_run fits, judges every target and decision, and computes the next shares. What it
 * returns is plain numbers: reports compute nothing. NaN stands for "does not exist" and is written
 * as null.
 */
#ifndef TERRACE_ANALYSIS_H
#define TERRACE_ANALYSIS_H

#include <stdbool.h>
#include <stddef.h>

#include "base/rng.h"
#include "base/status.h"
#include "design/data.h"
#include "design/design.h"
#include "posterior/likelihood_fit.h"
#include "posterior/posterior.h"

struct spread {
    double mean, sd, q025, q50, q975;
};

struct level_result {
    struct spread response; /* response scale */
    struct spread gain;     /* response scale, signed so that larger is better; NaN without gains */
    double pr_positive;     /* Pr(gain > 0); 0 at the reference itself */
    double *pr_target, *pr_meets; /* owned, one per target; 0 for the control and closed levels */
    double *mcse_target, *mcse_meets;
    double *prior_pr_target; /* owned or NULL */
    double next_share;       /* NaN: none (last analysis, distrusted) */
    bool open;               /* active levels: not closed by --close; the control is always open */
};

struct target_result {
    int selected;         /* level index or LEVEL_NONE */
    double pr_selected;   /* pr_target of the selected level; 0 when none */
    double pr_none, mcse; /* mcse of pr_selected (of pr_none when none is selected) */
    bool close;           /* lead over the runner-up under 3 Monte Carlo standard errors */
    bool imprecise;       /* some figure of this target has mcse > precision */
};

struct parameter_result {
    const char *name; /* borrowed from the design */
    struct spread value;
    struct convergence diag; /* NaN for fixed */
    double sd_over_prior_sd; /* NaN for fixed, or where the prior sd does not exist */
};

struct condition_result {
    double value, mcse;
    int level; /* the level it looked at, or LEVEL_NONE */
    bool met, close, imprecise;
};
struct decision_result {
    bool applies, met;                  /* met: whether the conditions hold, applies or not */
    struct condition_result *condition; /* owned; as many as the decision has */
};

/* Posterior sd / prior sd above 0.9: what is said of the parameter comes from its prior. */
bool parameter_set_by_prior(const struct parameter_result *x);

enum recommendation {
    RECOMMEND_CONTINUE,
    RECOMMEND_STOP_SUCCESS,
    RECOMMEND_STOP_FUTILITY,
    RECOMMEND_SUCCESS,
    RECOMMEND_NO_SUCCESS,
    RECOMMEND_COMPLETE,
    RECOMMEND_UNDETERMINED
};
const char *recommendation_key(enum recommendation r);      /* the interface's word */
const char *recommendation_sentence(enum recommendation r); /* for people */

/* The mean curve between the levels, for the figure; points = 0 for curves without a formula. */
struct curve_result {
    size_t points;
    double *value, *mean, *q025, *q975; /* owned; response scale */
    double *likelihood; /* owned; the likelihood fit at the same values; NaN where there is none */
};

struct analysis_diagnostics {
    size_t chains, draws;
    double max_rhat, min_ess_bulk, min_ess_tail, kish;
    bool slice;               /* the slice sampler made the draws */
    double lack_of_fit_p;     /* posterior predictive p of the between-level discrepancy; NaN */
    const char *second_name;  /* "quadrature", "slice"; NULL when none was run (simulation) */
    double second_difference; /* largest absolute difference of a probability or measure; NaN */
    bool trusted, imprecise;
    size_t warnings;
    char **warning; /* owned sentences */
};

struct analysis {
    long number;
    bool final;
    size_t levels, targets, parameters, decisions;
    struct level_result *level;
    struct target_result *target;
    struct parameter_result *parameter;
    struct decision_result *decision;     /* the design's decisions, in order */
    struct decision_result final_success; /* condition NULL without `final` */
    enum recommendation recommendation;
    struct curve_result curve;
    struct analysis_diagnostics diagnostics;
    /* sentences about shares ("all weights were zero: shared equally", ...) */
    size_t notes;
    char **note;
    struct likelihood_fit likelihood; /* live analyses; exists false otherwise */
    /* live analyses: the design's sensitivity models, fitted to the same data; they decide nothing.
     * Owned; each with the levels and targets of the design and the parameters of its own model,
     * sensitivity[i].model. */
    size_t sensitivities;
    struct analysis *sensitivity;
    const struct model *model; /* the model of these figures; borrowed from the design */
    char *failure; /* owned; why a sensitivity model could not be fitted, its numbers being NaN */
};

struct analysis_request {
    long number; /* analysis number K, or K + 1 for the last */
    bool final;
    double point;       /* planned point in its unit; INFINITY for the last */
    const bool *closed; /* one per level, or NULL */
    bool adapted;       /* adapted shares may be used: the `start` subjects were all randomized */
    double randomized;  /* n for power "n/2N" */
    double observed;    /* outcomes in hand, for min_observed */
    uint64_t seed;
    uint16_t scenario; /* 0 live */
    uint32_t trial;    /* 0 live */
    bool live;         /* adaptive length and second method; else the simulated fit */
    int threads;       /* for diagnostics; results never depend on it */
};

/* Workspace for repeated analyses of one design (one per thread). */
struct analyst;
struct analyst *analyst_new(const struct design *d);
void analyst_free(struct analyst *w);
/* The draws behind the last analysis_run (for draws.csv); valid until the next run. */
struct draws analyst_draws(const struct analyst *w);

/* Runs one analysis into *out (analysis_init first; reuse is fine). STATUS_OK, STATUS_DISTRUSTED
 * (everything is filled in, recommendation undetermined, shares NaN), or STATUS_INPUT for a
 * posterior that may be improper. */
enum status analysis_run(struct analysis *out, struct analyst *w, const struct level_data *data,
                         const struct analysis_request *r, struct err *e);
void analysis_init(struct analysis *a, const struct design *d);
void analysis_release(struct analysis *a);

/* What the priors imply before any data, for `check`: level responses, gains, pr_target, pr_meets,
 * Pr(none). Fills level[], target[] of *out only. */
void analysis_prior(struct analysis *out, struct analyst *w, const struct design *d);

/* The true target level of a scenario: index or LEVEL_NONE; comparisons carry the tolerance 1e-9 x
 * max(1, |effect|, largest |gain|). Response scale in, `response` has one entry per level. */
int analysis_true_level(const struct design *d, size_t target, const double *response);

#endif
