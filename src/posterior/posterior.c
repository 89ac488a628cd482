/* SPDX-License-Identifier: GPL-3.0-or-later */
/* posterior.c: the floor's door: fits by the sampler, the slice fallback and the second method. */
#include "posterior/posterior.h"

#include <math.h>
#include <string.h>

#include "base/mem.h"
#include "base/vecmath.h"
#include "posterior/diagnostics.h"
#include "posterior/grouped.h"
#include "posterior/plan.h"
#include "posterior/prior_draws.h"
#include "posterior/quadrature.h"
#include "posterior/sampler.h"
#include "posterior/slice.h"

/* Rules for a doubtful fit, and lengths (methods, section 2). */
#define KISH_LEAST 0.4
#define WEIGHT_MOST 0.05
enum { SLICE_SECOND = 8000, BATCHES_MORE = 7, ESS_LEAST = 100 };

/* Draws in rows that grow. */
struct store {
    size_t made, total; /* made: a multiple of the block, total: those handed out */
    size_t capacity;
    double *link, *response, *parameter, *mean, *sd, *difference_mean, *difference_sd;
};

struct posterior {
    const struct plan *plan;
    struct problem problem;
    double y[LEVELS_MAX];
    struct rng_key key;
    struct proposal proposal;
    struct proposal_work *work;
    struct sampler sampler;
    struct slice *slice;
    bool use_slice;
    struct grouped *grouped;
    size_t points; /* of the grouped draws at hand; 0: none */
    struct store first, second;
};

struct posterior *posterior_new(const struct plan *plan)
{
    struct posterior *p = mem_new(1, sizeof *p);
    p->plan = plan;
    p->problem = plan->problem;
    p->work = proposal_work_new(&p->problem);
    proposal_init(&p->proposal, &p->problem);
    sampler_init(&p->sampler, &p->problem, &p->proposal);
    return p;
}

static void store_release(struct store *s)
{
    double *const all[] = {s->link, s->response,        s->parameter,    s->mean,
                           s->sd,   s->difference_mean, s->difference_sd};
    for (size_t i = 0; i < sizeof all / sizeof *all; i++)
        mem_free(all[i]);
    *s = (struct store){0};
}

void posterior_free(struct posterior *p)
{
    if (!p)
        return;
    store_release(&p->first);
    store_release(&p->second);
    slice_free(p->slice);
    grouped_free(p->grouped);
    sampler_release(&p->sampler);
    proposal_release(&p->proposal);
    proposal_work_free(p->work);
    mem_free(p);
}

static void grow_rows(double **rows, size_t count, const struct store *s, size_t capacity)
{
    double *wider = mem_aligned(count * capacity, sizeof *wider);
    for (size_t r = 0; r < count && *rows; r++)
        memcpy(wider + r * capacity, *rows + r * s->capacity, s->made * sizeof *wider);
    mem_free(*rows);
    *rows = wider;
}

static void store_reserve(struct store *s, const struct posterior *p, size_t total)
{
    const size_t capacity = (total + BLOCK - 1) / BLOCK * BLOCK;
    const size_t K = p->problem.levels;
    if (capacity <= s->capacity)
        return;
    grow_rows(&s->link, K, s, capacity);
    grow_rows(&s->parameter, p->plan->m->parameters, s, capacity);
    if (p->problem.binary)
        grow_rows(&s->response, K, s, capacity);
    if (p->plan->moments) {
        grow_rows(&s->mean, K, s, capacity);
        grow_rows(&s->sd, K, s, capacity);
        if (p->problem.reference >= 0) {
            grow_rows(&s->difference_mean, K, s, capacity);
            grow_rows(&s->difference_sd, K, s, capacity);
        }
    }
    s->capacity = capacity;
}

static struct draw_rows store_rows(const struct store *s)
{
    return (struct draw_rows){s->capacity, s->link, s->response,        s->parameter,
                              s->mean,     s->sd,   s->difference_mean, s->difference_sd};
}

static struct draws store_draws(const struct store *s, const struct posterior *p, size_t chains)
{
    return (struct draws){.n = s->total,
                          .points = s->total,
                          .stride = s->capacity,
                          .chains = chains,
                          .levels = p->problem.levels,
                          .parameters = p->plan->m->parameters,
                          .link = s->link,
                          .response = p->problem.binary ? s->response : s->link,
                          .parameter = s->parameter,
                          .response_mean = s->mean,
                          .response_sd = s->sd,
                          .difference_mean = s->difference_mean,
                          .difference_sd = s->difference_sd};
}

/* A perfect fit with an sd prior that does not vanish at 0 has a posterior without a finite mass.
 */
static bool may_be_improper(const struct posterior *p, const struct level_data *data)
{
    if (!p->problem.sd_free || p->plan->sd_vanishes || p->problem.ss_within > 0.0)
        return false;
    bool all_equal = p->problem.n_total >= 3.0;
    double first = NAN;
    for (size_t k = 0; k < data->levels; k++) {
        if (data->n[k] >= 2.0)
            return true;
        if (data->n[k] == 0.0)
            continue;
        if (first != first)
            first = data->mean[k];
        all_equal = all_equal && data->mean[k] == first;
    }
    return all_equal;
}

enum status posterior_start(struct posterior *p, const struct level_data *data, struct rng_key key,
                            struct err *e)
{
    plan_problem(&p->problem, p->plan, data, p->y);
    if (may_be_improper(p, data))
        return err_add(e, STATUS_INPUT, p->plan->d->file, 0, "/model/priors/sd",
                       "the responses within levels are identical, so that the posterior may be "
                       "improper: give sd a prior that vanishes at 0 or a lower bound");
    p->key = key;
    p->use_slice = false;
    p->points = 0;
    p->first.made = p->first.total = 0;
    proposal_build(&p->proposal, &p->problem, &p->plan->range, p->work);
    p->key.purpose = RNG_SAMPLER;
    sampler_start(&p->sampler, &p->key);
    return STATUS_OK;
}

void posterior_extend(struct posterior *p, size_t total)
{
    struct store *s = &p->first;
    store_reserve(s, p, total);
    const struct draw_rows rows = store_rows(s);
    while (s->made < total) {
        if (p->use_slice) {
            slice_sweep(p->slice, &rows, s->made);
            s->made += RNG_LANES;
        } else {
            sampler_block(&p->sampler, &rows, s->made);
            s->made += BLOCK;
        }
    }
    s->total = total;
}

static void slice_begin(struct posterior *p, uint64_t seed_turn)
{
    struct rng_key key = p->key;
    key.purpose = RNG_SLICE;
    key.seed ^= seed_turn << 63;
    if (!p->slice)
        p->slice = slice_new(&p->problem);
    slice_start(p->slice, &p->problem, &p->proposal, &key);
}

void posterior_use_slice(struct posterior *p)
{
    p->use_slice = true;
    p->first.made = p->first.total = 0;
    slice_begin(p, 0);
}

bool posterior_is_lost(const struct posterior *p)
{
    return p->use_slice && slice_is_lost(p->slice);
}

bool posterior_is_slice(const struct posterior *p)
{
    return p->use_slice;
}

struct draws posterior_draws(const struct posterior *p)
{
    struct draws d = store_draws(&p->first, p, CHAINS);
    if (p->points > 0)
        d.points = p->points;
    return d;
}

static double sampler_kish(const struct sampler *s)
{
    return s->sum_squares > 0.0 ? s->sum * s->sum / (s->sum_squares * s->count) : 0.0;
}

double posterior_kish(const struct posterior *p)
{
    return p->use_slice ? 1.0 : sampler_kish(&p->sampler);
}

bool posterior_is_doubtful(const struct posterior *p)
{
    const struct sampler *s = &p->sampler;
    return !p->use_slice && (!(sampler_kish(s) >= KISH_LEAST) || !(1.0 <= WEIGHT_MOST * s->sum) ||
                             4 * s->longest_stay > s->steps);
}

static double least_ess(const struct posterior *p)
{
    const struct draws d = posterior_draws(p);
    double least = (double)d.n;
    for (size_t k = 0; k < d.levels; k++) {
        const double ess = diag_ess_bulk(d.link + k * d.stride, d.n, d.chains);
        least = ess < least ? ess : least;
    }
    return least;
}

/* false: the proposal does not fit well enough; the chains start afresh */
static bool run_grouped(struct posterior *p, size_t draws)
{
    struct store *s = &p->first;
    store_reserve(s, p, draws + BLOCK);
    const struct draw_rows rows = store_rows(s);
    if (!p->grouped)
        p->grouped = grouped_new(&p->problem);
    p->points = grouped_points(&p->problem, draws);
    grouped_run(p->grouped, &p->sampler, draws, &rows);
    s->made = s->total = draws;
    if (!posterior_is_doubtful(p))
        return true;
    p->points = s->made = s->total = 0;
    sampler_start(&p->sampler, &p->key);
    return false;
}

void posterior_simulated(struct posterior *p, size_t draws, bool *doubtful, bool *distrusted)
{
    *doubtful = *distrusted = false;
    if (grouped_points(&p->problem, draws) > 0) {
        if (run_grouped(p, draws))
            return;
        *doubtful = true;
    }
    posterior_extend(p, draws);
    *doubtful = *doubtful || posterior_is_doubtful(p);
    for (size_t more = 1; more <= BATCHES_MORE && posterior_is_doubtful(p); more++)
        posterior_extend(p, draws * (1 + more));
    if (!posterior_is_doubtful(p))
        return;
    posterior_use_slice(p);
    posterior_extend(p, draws);
    *distrusted = posterior_is_lost(p) || least_ess(p) < ESS_LEAST;
}

void posterior_diagnose(const struct draws *d, int threads, struct convergence *out)
{
    const long rows = (long)(d->parameters + d->levels);
#pragma omp parallel for schedule(dynamic) num_threads(threads > 0 ? threads : 1)
    for (long r = 0; r < rows; r++) {
        const size_t i = (size_t)r;
        const double *x = i < d->parameters ? d->parameter + i * d->stride
                                            : d->link + (i - d->parameters) * d->stride;
        const double sd = diag_sd(x, d->n, diag_mean(x, d->n));
        out[i] = (struct convergence){NAN, NAN, NAN, NAN};
        if (!isfinite(sd)) /* draws that are no numbers never converge */
            out[i] = (struct convergence){.rhat = 1e6, .mcse_mean = NAN};
        else if (sd > 0.0)
            out[i] = (struct convergence){.rhat = diag_rhat(x, d->n, d->chains),
                                          .ess_bulk = diag_ess_bulk(x, d->n, d->chains),
                                          .ess_tail = diag_ess_tail(x, d->n, d->chains),
                                          .mcse_mean = diag_mcse_mean(x, d->n, d->chains)};
    }
}

struct draws posterior_second(struct posterior *p, const char **name)
{
    struct store *s = &p->second;
    const bool grid = quadrature_reaches(&p->problem);
    s->made = s->total = 0;
    store_reserve(s, p, grid ? SECOND_DRAWS : SLICE_SECOND);
    const struct draw_rows rows = store_rows(s);
    *name = grid ? "quadrature" : "slice";
    if (grid) {
        struct rng_key key = p->key;
        key.purpose = RNG_QUADRATURE;
        quadrature_run(&p->problem, &p->proposal, &p->plan->range, &key, SECOND_DRAWS, &rows);
        s->total = SECOND_DRAWS;
    } else {
        slice_begin(p, 1); /* its own stream, also after a slice fallback */
        for (; s->made < SLICE_SECOND; s->made += RNG_LANES)
            slice_sweep(p->slice, &rows, s->made);
        s->total = SLICE_SECOND;
    }
    return store_draws(s, p, grid ? 1 : CHAINS);
}

struct draws posterior_prior(struct posterior *p, size_t count, struct rng_key key)
{
    struct store *s = &p->second;
    s->made = s->total = 0;
    store_reserve(s, p, count);
    struct draw_rows rows = store_rows(s);
    key.purpose = RNG_PRIOR;
    prior_draws(p->plan, &key, (count + BLOCK - 1) / BLOCK * BLOCK, &rows);
    s->total = count;
    struct draws d = store_draws(s, p, 1);
    d.response_mean = d.response_sd = d.difference_mean = d.difference_sd = NULL;
    return d;
}

/* The parameter rows of a basis curve, by role. */
struct curve_rows {
    const double *shape[SHAPES_MAX], *beta[COLUMNS_MAX];
    size_t shapes, columns;
};

static struct curve_rows curve_rows(const struct curve *c, const struct draws *d)
{
    struct curve_rows r = {{NULL}, {NULL}, 0, 0};
    const double *row = d->parameter;
    for (const struct parameter *a = c->parameters; a->name; a++, row += d->stride)
        if (a->role == ROLE_SHAPE)
            r.shape[r.shapes++] = row;
        else
            r.beta[r.columns++] = row;
    return r;
}

bool posterior_curve_at(const struct plan *plan, const struct draws *d, double x, double *out)
{
    const struct problem *p = &plan->problem;
    if (p->chain)
        return false;
    /* a curve may ask for the largest level of the design: it stands second */
    const double pair[2] = {x, p->at.value[p->at.count - 1]};
    const struct curve_levels at = {.count = 2, .value = pair, .shift = p->at.shift};
    const struct curve_rows r = curve_rows(p->curve, d);
    double *log_shape[SHAPES_MAX], *basis = mem_new(2 * COLUMNS_MAX * d->n, sizeof *basis);
    for (size_t j = 0; j < SHAPES_MAX; j++) {
        log_shape[j] = mem_new(d->n, sizeof *basis);
        if (j < r.shapes)
            p->math->log(d->n, r.shape[j], log_shape[j]);
    }
    const double *const logs[SHAPES_MAX] = {log_shape[0], log_shape[1]};
    p->curve->basis(&at, d->n, r.shape, logs, basis);
    memcpy(out, d->parameter, d->n * sizeof *out); /* the intercept is the first parameter */
    for (size_t c = 1; c < r.columns; c++)
        for (size_t i = 0; i < d->n; i++)
            out[i] += r.beta[c][i] * basis[2 * (c - 1) * d->n + i];
    for (size_t j = 0; j < SHAPES_MAX; j++)
        mem_free(log_shape[j]);
    mem_free(basis);
    return true;
}
