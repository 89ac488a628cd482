/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_diagnostics.c: effective sample sizes of chains whose autocorrelation is known, R-hat,
 * quantiles. */
#include <math.h>

#include "base/mem.h"
#include "base/rng.h"
#include "posterior/diagnostics.h"
#include "unit.h"

enum { CHAINS = 8, STEPS = 8000, N = CHAINS * STEPS };

/* stationary AR(1) with standard normal margins, chain of x[i] is i % CHAINS */
static double *autoregression(double r, double shift_of_first)
{
    double *x = mem_new(N, sizeof *x);
    struct rng_serial g;
    rng_serial_init(&g, &(struct rng_key){.seed = 6, .purpose = RNG_OUTCOME});
    for (size_t i = 0; i < N; i++) {
        const double e = rng_serial_normal(&g);
        x[i] = i < CHAINS ? e : r * x[i - CHAINS] + sqrt(1.0 - r * r) * e;
    }
    for (size_t i = 0; i < N; i += CHAINS)
        x[i] += shift_of_first;
    return x;
}

/* ESS of the mean is n (1 - r)/(1 + r), as in any text on time series */
static void known_ess(void)
{
    static const double rs[] = {-0.4, 0.0, 0.5, 0.9};
    for (size_t i = 0; i < sizeof rs / sizeof *rs; i++) {
        double *x = autoregression(rs[i], 0.0);
        const double want = N * (1.0 - rs[i]) / (1.0 + rs[i]);
        CU_ASSERT_DOUBLE_EQUAL(diag_ess(x, N, CHAINS) / want, 1.0, 0.1);
        CU_ASSERT_DOUBLE_EQUAL(diag_ess_bulk(x, N, CHAINS) / want, 1.0, 0.1);
        CU_ASSERT_DOUBLE_EQUAL(diag_mcse_mean(x, N, CHAINS) * sqrt(want), 1.0, 0.07);
        CU_ASSERT(diag_rhat(x, N, CHAINS) < 1.01);
        mem_free(x);
    }
}

static void shifted_chain(void)
{
    double *x = autoregression(0.0, 2.0);
    CU_ASSERT(diag_rhat(x, N, CHAINS) > 1.05);
    CU_ASSERT(diag_ess_bulk(x, N, CHAINS) < 1000.0);
    mem_free(x);
}

/* a chain with another spread but the same mean: only the folded R-hat sees it */
static void wide_chain(void)
{
    double *x = autoregression(0.0, 0.0);
    for (size_t i = 0; i < N; i += CHAINS)
        x[i] *= 5.0;
    CU_ASSERT(diag_rhat(x, N, CHAINS) > 1.05);
    mem_free(x);
}

static void ranks(void)
{
    double *x = autoregression(0.3, 0.0);
    const double ess = diag_ess_bulk(x, N, CHAINS), rhat = diag_rhat(x, N, CHAINS);
    for (size_t i = 0; i < N; i++)
        x[i] = exp(3.0 * x[i]); /* monotone */
    CU_ASSERT_EQUAL(diag_ess_bulk(x, N, CHAINS), ess);
    CU_ASSERT_DOUBLE_EQUAL(diag_rhat(x, N, CHAINS), rhat, 1e-2);
    CU_ASSERT(diag_ess_tail(x, N, CHAINS) > 0.2 * N);
    for (size_t i = 0; i < N; i++)
        x[i] = x[i] > 1.0 ? 1.0 : 0.0; /* ties everywhere */
    CU_ASSERT(isfinite(diag_ess_bulk(x, N, CHAINS)));
    CU_ASSERT(isfinite(diag_ess(x, N, CHAINS)));
    CU_ASSERT_EQUAL(diag_ess(x, N, 1), N);
    CU_ASSERT(isnan(diag_rhat(x, N, 1)));
    mem_free(x);
}

/* Sums of 0.1 and 1.3 round, those of 7 do not; 1001 steps have no equal halves. */
static void constants(void)
{
    static const double values[] = {7.0, 0.1, 1.3, -1e6 / 3.0};
    enum { ODD = CHAINS * 1001 };
    double *x = mem_new(ODD, sizeof *x);
    for (size_t v = 0; v < sizeof values / sizeof *values; v++) {
        for (size_t i = 0; i < ODD; i++)
            x[i] = values[v];
        CU_ASSERT_EQUAL(diag_mean(x, ODD), values[v]);
        CU_ASSERT_EQUAL(diag_sd(x, ODD, diag_mean(x, ODD)), 0.0);
        CU_ASSERT_EQUAL(diag_ess(x, ODD, CHAINS), ODD);
        CU_ASSERT_EQUAL(diag_ess_bulk(x, ODD, CHAINS), ODD);
        CU_ASSERT_EQUAL(diag_ess_tail(x, ODD, CHAINS), ODD);
        CU_ASSERT_EQUAL(diag_mcse_mean(x, ODD, CHAINS), 0.0);
        CU_ASSERT(isnan(diag_rhat(x, ODD, CHAINS)));
    }
    mem_free(x);
}

/* Chains that never move are the worst of all, not constants. */
static void stuck_chains(void)
{
    enum { SHORT = CHAINS * 1000 };
    double *x = mem_new(SHORT, sizeof *x);
    for (size_t i = 0; i < SHORT; i++)
        x[i] = 0.1 * (double)(i % CHAINS);
    const double rhat = diag_rhat(x, SHORT, CHAINS);
    CU_ASSERT(rhat > 1e6);
    CU_ASSERT(isfinite(rhat));
    CU_ASSERT(diag_ess(x, SHORT, CHAINS) < 10.0);
    CU_ASSERT(diag_ess_bulk(x, SHORT, CHAINS) < 10.0);
    mem_free(x);
}

/* Few, tied, skewed, slowly moving values in integer arithmetic; the expected figures come from the
 * definitions written down directly in Python (exact sums, library quantiles). */
static void worked_example(void)
{
    enum { FEW = 4, LENGTH = FEW * 201 };
    double x[LENGTH], mirrored[LENGTH];
    unsigned long state = 12345, level[FEW] = {0};
    for (size_t i = 0; i < LENGTH; i++) {
        state = (state * 1103515245UL + 12345UL) % 2147483648UL;
        const unsigned long u = state / 65536 % 64;
        level[i % FEW] = i < FEW ? u : (3 * level[i % FEW] + u * u / 16) / 4;
        x[i] = (double)level[i % FEW];
        mirrored[i] = -x[i];
    }
    CU_ASSERT_DOUBLE_EQUAL(diag_ess(x, LENGTH, FEW), 141.7895606123, 1e-7);
    CU_ASSERT_DOUBLE_EQUAL(diag_ess_bulk(x, LENGTH, FEW), 131.1833759397, 1e-7);
    CU_ASSERT_DOUBLE_EQUAL(diag_ess_tail(x, LENGTH, FEW), 199.7024811117, 1e-7);        /* 5% */
    CU_ASSERT_DOUBLE_EQUAL(diag_ess_tail(mirrored, LENGTH, FEW), 239.9515212346, 1e-7); /* 95% */
    CU_ASSERT_DOUBLE_EQUAL(diag_rhat(x, LENGTH, FEW), 1.036387044235, 1e-10);
}

/* Hyndman & Fan 1996, type 7: at position (n - 1) q */
static void quantiles(void)
{
    static const double x[] = {5, 1, 4, 2, -3}, q[] = {0, 0.25, 0.5, 0.6, 1};
    double out[5];
    diag_quantiles(x, 5, 5, q, out);
    CU_ASSERT_EQUAL(out[0], -3);
    CU_ASSERT_EQUAL(out[1], 1);
    CU_ASSERT_EQUAL(out[2], 2);
    CU_ASSERT_DOUBLE_EQUAL(out[3], 2.8, 1e-12);
    CU_ASSERT_EQUAL(out[4], 5);
}

static void errors_of_probabilities(void)
{
    CU_ASSERT_DOUBLE_EQUAL(diag_mcse_probability(0.5, 98.0), sqrt(0.25 / 100.0), 1e-15);
    CU_ASSERT_DOUBLE_EQUAL(diag_mcse_probability(0.0, 98.0), sqrt(0.01 * 0.99 / 100.0), 1e-15);
    CU_ASSERT(diag_mcse_probability(1.0, 1e6) > 0.0);
}

static void mean_and_sd(void)
{
    static const double x[] = {1, 2, 3, 4};
    CU_ASSERT_EQUAL(diag_mean(x, 4), 2.5);
    CU_ASSERT_DOUBLE_EQUAL(diag_sd(x, 4, 2.5), sqrt(5.0 / 3.0), 1e-15);
}

static const struct unit_test tests[] = {
    {"effective sample size of autoregressions", known_ess},
    {"a shifted chain", shifted_chain},
    {"a chain of another spread", wide_chain},
    {"ranks and ties", ranks},
    {"constants", constants},
    {"chains that stay put", stuck_chains},
    {"a worked example", worked_example},
    {"quantiles", quantiles},
    {"Monte Carlo errors of probabilities", errors_of_probabilities},
    {"mean and sd", mean_and_sd},
    UNIT_END,
};

int main(void)
{
    return unit_main("diagnostics", tests);
}
