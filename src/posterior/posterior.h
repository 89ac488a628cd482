/* SPDX-License-Identifier: GPL-3.0-or-later */
/* posterior.h: from a model and the sums by level to posterior draws: the floor's one door.
 *
 * Life cycle: plan_new once per design and model (const afterwards, shared by threads); one
 * `struct posterior` per thread; then per fit posterior_start and either posterior_simulated or the
 * live sequence posterior_extend (+ posterior_diagnose), posterior_use_slice where the sampler does
 * not do, and posterior_second for the second method. Results depend on (plan, data, key, lengths)
 * only.
 */
#ifndef TERRACE_POSTERIOR_H
#define TERRACE_POSTERIOR_H

#include <stdbool.h>
#include <stddef.h>

#include "base/rng.h"
#include "base/status.h"
#include "design/data.h"
#include "design/design.h"

enum { CHAINS = 8, SECOND_DRAWS = 131072 };

/* Posterior draws, all equally weighted. Draw i belongs to chain i % chains and is that chain's
 * (i / chains)-th; the second method by quadrature has chains = 1 (independent draws). Row r of an
 * array starts at r * stride. Levels are all levels of the design in list order. */
struct draws {
    size_t n, stride, chains, levels, parameters;
    /* Simulated fits may group draws: n / points of them share one (phi, sd), draw r * points + i
     * belongs to point i, and moments have a row entry a point. Sets of points are the unit of
     * Monte Carlo errors (grouped.h). Else points = n. */
    size_t points;
    const double *link;      /* [level] mean, or logit of the rate */
    const double *response;  /* [level] mean or rate (continuous: the same array as link) */
    const double *parameter; /* [parameter] in the order of the model's parameter list */
    /* Continuous endpoints only, and only where the design asks for a gain or a response against a
     * value; else NULL. Exact Gaussian moments given the draw's (phi, sd):
     * of theta_level, and of theta_level - theta_reference where the design's reference is a level
     * (else NULL; rows of the reference itself are 0). Not turned: a lower-is-better response
     * stays. */
    const double *response_mean, *response_sd;
    const double *difference_mean, *difference_sd;
};

/* Diagnostics of one quantity (Vehtari, Gelman, Simpson, Carpenter & Buerkner 2021, Bayesian
 * Analysis 16:667). NaN for a constant (fixed) quantity; R-hat 1e6 and ESS 0 where the spread
 * of the draws is no number. */
struct convergence {
    double rhat, ess_bulk, ess_tail, mcse_mean;
};

struct plan;
struct posterior;

/* A model made ready for fits. `d` and `m` must outlive the plan. */
struct plan *plan_new(const struct design *d, const struct model *m);
void plan_free(struct plan *p);

struct posterior *posterior_new(const struct plan *p);
void posterior_free(struct posterior *p);

/* Scans the posterior and builds the proposal; no draws yet. key.purpose is ignored. STATUS_INPUT
 * when the posterior may be improper (methods, section 1: identical replicates with a prior on sd
 * that does not vanish at 0). `data` must outlive the fit. */
enum status posterior_start(struct posterior *p, const struct level_data *data, struct rng_key key,
                            struct err *e);

/* Goes on to `total` draws (a multiple of 8, not less than before). */
void posterior_extend(struct posterior *p, size_t total);

/* Starts again with collapsed slice sampling; posterior_extend then extends that run. */
void posterior_use_slice(struct posterior *p);
bool posterior_is_slice(const struct posterior *p);
/* Slice sampling found no place with mass for some chain: its draws are not to be trusted. */
bool posterior_is_lost(const struct posterior *p);

/* The simulated fit (methods, section 2): `draws` draws; doubtful ones get up to 7 more batches,
 * then the slice sampler; *doubtful and *distrusted tell. */
void posterior_simulated(struct posterior *p, size_t draws, bool *doubtful, bool *distrusted);

/* The draws so far: valid until the next call on p. */
struct draws posterior_draws(const struct posterior *p);

/* Kish's effective share of the importance weights of the proposals so far (1 for slice). */
double posterior_kish(const struct posterior *p);
/* Kish < 0.4, one weight above 5% of the sum, or a chain that stayed put for a quarter of its
 * length. */
bool posterior_is_doubtful(const struct posterior *p);

/* One row per parameter, then one per level mean (link scale). out has parameters + levels rows. */
void posterior_diagnose(const struct draws *d, int threads, struct convergence *out);

/* The second method, from its own stream: quadrature where it reaches (every continuous endpoint,
 * binary with at most 3 unknowns), else a slice run of 8,000 draws. Its draws are valid until the
 * next call on p. *name is "quadrature" or "slice". Does not touch the first draws. */
struct draws posterior_second(struct posterior *p, const char **name);

/* `count` draws from the prior (parameters and level means), for `check`. *draws stay owned by p.
 */
struct draws posterior_prior(struct posterior *p, size_t count, struct rng_key key);

/* CURVE_BASIS only: theta on the link scale at level value x, for every draw of d: out[d->n].
 * False (nothing written) for curves without a formula between levels. */
bool posterior_curve_at(const struct plan *p, const struct draws *d, double x, double *out);

#endif
