/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_calibration.c: simulation-based calibration of every curve x endpoint.
 *
 * Talts, Betancourt, Simpson, Vehtari & Gelman (2018), Validating Bayesian inference algorithms
 * with simulation-based calibration, arXiv:1804.06788: with truths from the prior, the rank of the
 * truth among posterior draws is uniform, for every parameter and level mean.
 */
#include <math.h>

#include "base/mem.h"
#include "posterior/posterior.h"
#include "small_design.h"
#include "unit.h"

enum { KEPT = 63, BINS = 16, FIRST_STEP = 10, STEP = 2, LEVELS = 5 };
enum { DRAWS = (FIRST_STEP + STEP * KEPT + 8) / 8 * 8 * CHAINS };

/* chi-square with 15 degrees of freedom: upper 1e-5 point (R's qchisq(1e-5, 15, lower = FALSE)),
 * and 5 binomial standard errors for the two extreme bins */
static const double chi_square_most = 50.49;
static const double extreme_most = 5.0;

struct world {
    const char *curve, *model;
    bool binary;
    double n; /* subjects a level; the last level has none */
};

static void continuous_data(struct level_data *x, size_t k, double mean, double sd,
                            struct rng_serial *rng)
{
    double sum = 0.0, squares = 0.0;
    for (double i = 0; i < x->n[k]; i++) {
        const double y = mean + sd * rng_serial_normal(rng);
        sum += y;
        squares += y * y;
    }
    x->mean[k] = sum / x->n[k];
    x->ss[k] = squares - sum * x->mean[k];
    x->ss[k] = x->ss[k] > 0.0 ? x->ss[k] : 0.0;
}

static void simulate(struct level_data *x, const struct world *w, const double *truth,
                     size_t parameters, uint32_t replicate)
{
    struct rng_serial rng;
    rng_serial_init(&rng,
                    &(struct rng_key){.seed = 77, .purpose = RNG_OUTCOME, .trial = replicate});
    for (size_t k = 0; k < LEVELS; k++) {
        const double theta = truth[parameters + k];
        x->n[k] = k == 3 ? 0.0 : w->n;
        x->events[k] = 0.0;
        if (w->binary)
            for (double i = 0; i < x->n[k]; i++)
                x->events[k] += rng_serial_uniform(&rng) < 1.0 / (1.0 + exp(-theta)) ? 1.0 : 0.0;
        else if (x->n[k] > 0.0)
            continuous_data(x, k, theta, truth[parameters - 1], &rng);
    }
}

static size_t rank_of(const double *row, double truth)
{
    size_t rank = 0;
    for (size_t t = 0; t < KEPT; t++)
        rank += row[(FIRST_STEP + STEP * t) * CHAINS + t % CHAINS] < truth - 1e-12 ? 1 : 0;
    return rank;
}

/* counts[quantity][bin] over the replicates */
static void run(const struct world *w, const struct design *d, size_t replicates, double *counts)
{
    struct err e = ERR_INIT;
    struct plan *plan = NULL;
    plan = plan_new(d, &d->model);
    struct posterior *prior = posterior_new(plan), *p = posterior_new(plan);
    const struct draws truths = posterior_prior(prior, replicates, (struct rng_key){.seed = 5});
    struct level_data x;
    level_data_init(&x, LEVELS);
    const size_t quantities = truths.parameters + LEVELS;
    double truth[MODEL_PARAMETERS_MAX + LEVELS];
    for (size_t r = 0; r < replicates; r++) {
        bool doubtful, distrusted;
        for (size_t q = 0; q < quantities; q++)
            truth[q] = q < truths.parameters
                           ? truths.parameter[q * truths.stride + r]
                           : truths.link[(q - truths.parameters) * truths.stride + r];
        simulate(&x, w, truth, truths.parameters, (uint32_t)r + 1);
        CU_ASSERT_EQUAL_FATAL(
            posterior_start(p, &x, (struct rng_key){.seed = 9, .trial = (uint32_t)r}, &e),
            STATUS_OK);
        posterior_simulated(p, DRAWS, &doubtful, &distrusted);
        const struct draws draws = posterior_draws(p);
        for (size_t q = 0; q < quantities; q++) {
            const double *row = q < draws.parameters
                                    ? draws.parameter + q * draws.stride
                                    : draws.link + (q - draws.parameters) * draws.stride;
            counts[q * BINS + rank_of(row, truth[q]) * BINS / (KEPT + 1)] += 1.0;
        }
    }
    level_data_release(&x);
    posterior_free(p);
    posterior_free(prior);
    plan_free(plan);
}

static void calibrated(const struct world *w)
{
    const size_t replicates = unit_fast() ? 320 : 3200;
    struct design *d = small_design(w->curve, w->binary, LEVELS, w->model, "");
    double counts[(MODEL_PARAMETERS_MAX + LEVELS) * BINS] = {0};
    run(w, d, replicates, counts);
    const double expected = (double)replicates / BINS;
    const double sd = sqrt(expected * (1.0 - 1.0 / BINS));
    for (size_t q = 0; q < d->model.parameters + LEVELS; q++) {
        double statistic = 0.0;
        if (counts[q * BINS] == (double)replicates)
            continue; /* fixed by the design: every draw equals the truth */
        for (size_t b = 0; b < BINS; b++) {
            const double off = counts[q * BINS + b] - expected;
            statistic += off * off / expected;
        }
        const double low = fabs(counts[q * BINS] - expected) / sd;
        const double high = fabs(counts[q * BINS + BINS - 1] - expected) / sd;
        if (statistic > chi_square_most || low > extreme_most || high > extreme_most)
            fprintf(stderr, "%s %s quantity %zu: chi-square %.1f, extremes %.1f %.1f\n", w->curve,
                    w->binary ? "binary" : "continuous", q, statistic, low, high);
        CU_ASSERT(statistic <= chi_square_most);
        CU_ASSERT(low <= extreme_most && high <= extreme_most);
    }
    design_free(d);
}

#define WORLD(name, curve, model, binary, n)                  \
    static void name(void)                                    \
    {                                                         \
        calibrated(&(struct world){curve, model, binary, n}); \
    }

WORLD(emax_continuous, "emax", "", false, 6)
WORLD(emax_binary, "emax", "", true, 10)
WORLD(sigmoid_continuous, "sigmoid_emax", "", false, 6)
WORLD(sigmoid_binary, "sigmoid_emax", "", true, 10)
WORLD(ndlm_continuous, "ndlm", "", false, 6)
WORLD(ndlm_binary, "ndlm", "", true, 10)
WORLD(ndlm_actual_continuous, "ndlm", ",\"spacing\":\"actual\"", false, 6)
WORLD(ndlm_actual_binary, "ndlm", ",\"spacing\":\"actual\"", true, 10)
WORLD(independent_continuous, "independent", "", false, 6)
WORLD(independent_binary, "independent", "", true, 10)
WORLD(few_continuous, "ndlm", ",\"priors\":{\"sd\":{\"lognormal\":{\"meanlog\":0,\"sdlog\":0.5}}}",
      false, 1)
WORLD(few_binary, "emax", "", true, 2)
WORLD(fixed_parts, "emax",
      ",\"priors\":{\"E0\":{\"fixed\":{\"value\":1}},\"sd\":{\"fixed\":{\"value\":2}}}", false, 6)

WORLD(drift_away_from_zero, "ndlm",
      ",\"priors\":{\"drift_sd\":{\"lognormal\":{\"meanlog\":-0.5,\"sdlog\":1}},"
      "\"sd\":{\"lognormal\":{\"meanlog\":0.3,\"sdlog\":0.7}}}",
      false, 6)
WORLD(drift_away_from_zero_binary, "ndlm",
      ",\"spacing\":\"actual\",\"priors\":{\"drift_sd\":{\"lognormal\":{\"meanlog\":-1,\"sdlog\":1}"
      "}}",
      true, 10)
WORLD(half_normal_ed50, "emax",
      ",\"priors\":{\"ED50\":{\"half_normal\":{\"sd\":30}},"
      "\"variance\":{\"lognormal\":{\"meanlog\":1,\"sdlog\":1}}}",
      false, 6)
WORLD(fixed_shapes, "sigmoid_emax",
      ",\"priors\":{\"h\":{\"fixed\":{\"value\":2}},\"Emax\":{\"fixed\":{\"value\":3}}}", true, 10)

static const struct unit_test tests[] = {
    {"emax, continuous", emax_continuous},
    {"emax, binary", emax_binary},
    {"sigmoid_emax, continuous", sigmoid_continuous},
    {"sigmoid_emax, binary", sigmoid_binary},
    {"ndlm, continuous", ndlm_continuous},
    {"ndlm, binary", ndlm_binary},
    {"ndlm with actual spacing, continuous", ndlm_actual_continuous},
    {"ndlm with actual spacing, binary", ndlm_actual_binary},
    {"independent, continuous", independent_continuous},
    {"independent, binary", independent_binary},
    {"one subject a level, ndlm continuous", few_continuous},
    {"two subjects a level, emax binary", few_binary},
    {"fixed intercept and sd", fixed_parts},
    {"ndlm with lognormal drift and sd", drift_away_from_zero},
    {"ndlm with lognormal drift, binary", drift_away_from_zero_binary},
    {"emax with half-normal ED50, lognormal variance", half_normal_ed50},
    {"sigmoid_emax with fixed shape and height", fixed_shapes},
    UNIT_END,
};

int main(void)
{
    return unit_main("calibration", tests);
}
