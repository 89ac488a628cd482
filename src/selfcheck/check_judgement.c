/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_judgement.c: diagnostics, targets and shares against values known by hand. */
#include <math.h>

#include "analysis/allocate.h"
#include "analysis/analysis.h"
#include "analysis/vocabulary_rows.h"
#include "base/base.h"
#include "base/mem.h"
#include "base/rng.h"
#include "base/text.h"
#include "posterior/diagnostics.h"
#include "selfcheck/check_list.h"

/* ---- effective sample size ---- */

static void run_ess(struct check_result *r, double nudge)
{
    enum { N = 240000, SIDE_BY_SIDE = 8 };
    static const double rho[] = {0, 0.5, 0.9};
    double *x = mem_new(N, sizeof *x);
    for (size_t i = 0; i < COUNT_OF(rho); i++) {
        const double c = rho[i] + nudge, fresh = sqrt(1 - c * c);
        struct rng_serial s;
        rng_serial_init(&s,
                        &(struct rng_key){.seed = 11, .purpose = RNG_PRIOR, .index = (uint32_t)i});
        for (size_t k = 0; k < N; k++) {
            const double z = rng_serial_normal(&s);
            x[k] = k < SIDE_BY_SIDE ? z : c * x[k - SIDE_BY_SIDE] + fresh * z;
        }
        const double share = (1 - rho[i]) / (1 + rho[i]);
        check_add(r, share, diag_ess(x, N, SIDE_BY_SIDE) / N, 0.1 * share,
                  "effective share of draws, correlation %g", rho[i]);
        check_add(r, 1, diag_rhat(x, N, SIDE_BY_SIDE), 0.01,
                  "R-hat of stationary chains, correlation %g", rho[i]);
    }
    for (size_t k = 0; k < N; k++) /* one chain stands apart */
        x[k] += k % SIDE_BY_SIDE == 0 ? 3 : 0;
    check_add(r, 1, diag_rhat(x, N, SIDE_BY_SIDE) > 1.05 ? 1 : 0, 0,
              "R-hat above 1.05 where one chain of eight stands apart");
    mem_free(x);
}

const struct check check_ess = {
    "effective_draws",
    "Judgement",
    "Autoregression of order 1: (1 - rho) / (1 + rho) effective draws a draw (Priestley 1981, "
    "Spectral Analysis and Time Series, section 5.3); definitions: Vehtari, Gelman, Simpson, "
    "Carpenter & Buerkner 2021, Bayesian Analysis 16:667",
    "240,000 draws in 8 chains; within 10%, the spread of such estimates.",
    run_ess,
    false};

/* ---- a design of four levels ---- */

static struct design *four_levels(void)
{
    static const char text[] =
        "{\"terrace\":1,\"title\":\"check\",\"levels\":{\"control\":\"P\",\"list\":["
        "{\"label\":\"P\",\"value\":0},{\"label\":\"A\",\"value\":1},{\"label\":\"B\",\"value\":2},"
        "{\"label\":\"C\",\"value\":4}]},"
        "\"endpoint\":{\"name\":\"y\",\"type\":\"continuous\",\"better\":\"lower\",\"range\":[-8,8]"
        "},"
        "\"model\":{\"curve\":\"independent\"},\"subjects\":100,"
        "\"targets\":{\"ED90\":{\"rule\":\"effective_dose\",\"fraction\":0.9},"
        "\"MED\":{\"rule\":\"minimum_effect\",\"effect\":2},\"best\":{\"rule\":\"optimal\"},"
        "\"near\":{\"rule\":\"within_margin\",\"margin\":1.5}},"
        "\"allocation\":{\"adapt\":{\"target\":\"ED90\",\"power\":1,\"drop_below\":0.15},"
        "\"control_share\":0.25}}";
    struct err e = ERR_INIT;
    struct design *d = NULL;
    if (design_parse(&d, text, sizeof text - 1, "check", &terrace_vocabulary, &e) != STATUS_OK)
        BUG("the design of a built-in check is not accepted");
    return d;
}

/* ---- shares ---- */

static void run_allocation(struct check_result *r, double nudge)
{
    struct design *d = four_levels();
    const bool open[4] = {true, true, true, true};
    const double pr[4] = {0, 0.1, 0.28 + nudge, 0.52}, variance[4] = {1, 1, 1, 1};
    const double randomized[4] = {25, 25, 25, 25};
    struct share_remarks remarks;
    double share[4];
    /* p = pr + 0.1 / 3; A falls below 0.15 and is dropped */
    const struct share_inputs in = {d, open, pr, 0.1, variance, randomized, 100};
    const double b = 0.28 + 0.1 / 3, c = 0.52 + 0.1 / 3;
    allocate_adapted(share, &remarks, &in);
    check_add(r, 0.25, share[0], 1e-12, "control");
    check_add(r, 0, share[1], 0, "dropped level");
    check_add(r, 0.75 * b / (b + c), share[2], 1e-12, "level B");
    check_add(r, 0.75 * c / (b + c), share[3], 1e-12, "level C");
    design_free(d);
}

const struct check check_allocation = {
    "next_shares",
    "Judgement",
    "Arithmetic by hand of the allocation rule (powers of probabilities: Thall & Wathen 2007, "
    "European "
    "Journal of Cancer 43:859)",
    "p = (0.10, 0.28, 0.52) with 0.10 for none, power 1, drop below 0.15, control 25%.",
    run_allocation,
    false};

/* ---- targets ---- */

static void run_targets(struct check_result *r, double nudge)
{
    /* lower is better: gains 1, 4.6, 5 */
    const double response[4] = {0, -1, -4.6 + 3 * (nudge != 0), -5};
    static const struct {
        const char *name;
        int level;
    } want[] = {{"ED90", 2}, {"MED", 2}, {"best", 3}, {"near", 2}};
    struct design *d = four_levels();
    for (size_t i = 0; i < COUNT_OF(want); i++)
        check_add(r, want[i].level, analysis_true_level(d, i, response), 0,
                  "%s, position in the list", want[i].name);
    design_free(d);
}

const struct check check_targets = {
    "targets",
    "Judgement",
    "The definitions of the targets, by hand",
    "Means 0, -1, -4.6, -5, lower is better: 90% of the largest gain is 4.5.",
    run_targets,
    false};
