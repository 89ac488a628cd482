/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_live_run.c: lengths, fallbacks, trust and what follows from them, on a scripted posterior.
 */
#include <math.h>
#include <string.h>

#include "analysis/analysis.h"
#include "analysis/live_run.h"
#include "analysis/measures.h"
#include "analysis/targets.h"
#include "scripted_posterior.h"
#include "tiny_world.h"
#include "unit.h"

/* ---- a world ---- */

static const struct curve curve = {.key = "scripted", .kind = CURVE_FREE};

struct world {
    struct tiny_world w;
    struct decision decision;
    struct condition condition;
    struct level_data data;
    struct analyst *analyst;
    struct analysis a;
    struct analysis_request r;
};

/* Pr(gain of C > 0) is 0.760 where the means are 0, 0, 1. */
static void start(struct world *x)
{
    script = (struct script){.mean = {0, 0, 1}, .converges_at = 0, .slice_converges_at = 0};
    tiny_init(&x->w, LEVELS, 0);
    tiny_target(&x->w, &rule_optimal, 0, OF_BEST);
    x->w.d.model.curve = &curve;
    x->condition = (struct condition){
        .measure = &measure_pr_gain, .target = -1, .level = 2, .above = true, .threshold = 0.5};
    x->decision = (struct decision){
        .action = ACTION_STOP_SUCCESS, .when = {JOIN_ONE, 1, &x->condition}, .binding = true};
    x->w.d.decision = &x->decision;
    x->w.d.decisions = 1;
    x->w.d.precision = 0.02;
    x->w.d.max_draws = 30000;
    level_data_init(&x->data, LEVELS);
    for (size_t k = 0; k < LEVELS; k++)
        x->data.n[k] = x->data.randomized[k] = 10;
    x->r = (struct analysis_request){
        .number = 1, .point = 30, .observed = 30, .randomized = 30, .live = true, .threads = 2};
}

static enum status run(struct world *x)
{
    struct err e = ERR_INIT;
    x->analyst = analyst_new(&x->w.d);
    analysis_init(&x->a, &x->w.d);
    const enum status status = analysis_run(&x->a, x->analyst, &x->data, &x->r, &e);
    err_release(&e);
    return status;
}

static void release(struct world *x)
{
    analyst_free(x->analyst);
    analysis_release(&x->a);
    level_data_release(&x->data);
}

static bool warned(const struct world *x, const char *part)
{
    for (size_t i = 0; i < x->a.diagnostics.warnings; i++)
        if (strstr(x->a.diagnostics.warning[i], part))
            return true;
    return false;
}

static void expect_lengths(const size_t *lengths, size_t n)
{
    CU_ASSERT_EQUAL(script.calls, n);
    for (size_t i = 0; i < n && i < script.calls; i++)
        CU_ASSERT_EQUAL(script.lengths[i], lengths[i]);
}

static void stops_when_settled(void)
{
    static const size_t one[] = {8000};
    struct world x;
    start(&x);
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    expect_lengths(one, 1);
    CU_ASSERT_TRUE(x.a.diagnostics.trusted);
    CU_ASSERT_FALSE(x.a.diagnostics.imprecise || x.a.diagnostics.slice);
    CU_ASSERT_EQUAL(x.a.diagnostics.draws, 8000);
    CU_ASSERT_EQUAL(x.a.diagnostics.max_rhat, 1.001);
    CU_ASSERT_EQUAL(x.a.diagnostics.warnings, 0);
    CU_ASSERT_EQUAL(x.a.recommendation, RECOMMEND_STOP_SUCCESS);
    CU_ASSERT_DOUBLE_EQUAL(x.a.decision[0].condition[0].value, 0.760250, 0.02);
    CU_ASSERT_STRING_EQUAL(x.a.diagnostics.second_name, "quadrature");
    CU_ASSERT(x.a.diagnostics.second_difference < 0.02);
    CU_ASSERT_EQUAL(x.a.level[0].gain.sd, 0);
    CU_ASSERT_DOUBLE_EQUAL(x.a.level[2].response.q975, 1 + 1.96, 0.1);
    CU_ASSERT_EQUAL(analyst_draws(x.analyst).n, 8000);
    release(&x);
}

static void waits_for_convergence(void)
{
    static const size_t two[] = {8000, 16000};
    struct world x;
    start(&x);
    script.converges_at = 10000;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    expect_lengths(two, 2);
    CU_ASSERT_FALSE(x.a.diagnostics.slice);
    release(&x);
}

static void precision_not_reached(void)
{
    static const size_t three[] = {8000, 16000, 30000};
    struct world x;
    start(&x);
    x.w.d.precision = 0.0001;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    expect_lengths(three, 3);
    CU_ASSERT_TRUE(x.a.diagnostics.trusted && x.a.diagnostics.imprecise);
    CU_ASSERT_TRUE(x.a.target[0].imprecise && x.a.decision[0].condition[0].imprecise);
    CU_ASSERT_TRUE(warned(&x, "precision asked for, 0.0001, was not reached in 30000 draws"));
    release(&x);
}

/* On which side of its threshold a measure lies does not matter for how long the run goes on. */
static void closeness_lengthens_the_run(void)
{
    static const size_t three[] = {8000, 16000, 30000};
    for (int above = 0; above < 2; above++) {
        struct world x;
        start(&x);
        x.condition.threshold = 0.760250;
        x.condition.above = above;
        CU_ASSERT_EQUAL(run(&x), STATUS_OK);
        expect_lengths(three, 3);
        CU_ASSERT_TRUE(x.a.decision[0].condition[0].close);
        CU_ASSERT_FALSE(x.a.diagnostics.imprecise);
        CU_ASSERT_TRUE(warned(&x, "within 3 Monte Carlo errors of its threshold 0.76025"));
        release(&x);
    }
}

static void doubt_leads_to_slices(void)
{
    static const size_t two[] = {8000, 8000};
    struct world x;
    start(&x);
    script.doubtful = true;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    expect_lengths(two, 2);
    CU_ASSERT_FALSE(script.by_slice[0]);
    CU_ASSERT_TRUE(script.by_slice[1] && x.a.diagnostics.slice);
    CU_ASSERT_EQUAL(x.a.diagnostics.kish, 0.9);
    CU_ASSERT_TRUE(warned(&x, "slice sampling"));
    release(&x);
}

static void missed_convergence_leads_to_slices(void)
{
    static const size_t four[] = {8000, 16000, 30000, 8000};
    struct world x;
    start(&x);
    script.converges_at = 40000;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    expect_lengths(four, 4);
    CU_ASSERT_TRUE(x.a.diagnostics.trusted && x.a.diagnostics.slice);
    release(&x);
}

static void expect_distrust(const struct world *x)
{
    CU_ASSERT_FALSE(x->a.diagnostics.trusted);
    CU_ASSERT_EQUAL(x->a.recommendation, RECOMMEND_UNDETERMINED);
    for (size_t k = 0; k < LEVELS; k++)
        CU_ASSERT_TRUE(isnan(x->a.level[k].next_share));
}

static void missed_again_is_distrusted(void)
{
    static const size_t six[] = {8000, 16000, 30000, 8000, 16000, 30000};
    struct world x;
    start(&x);
    script.converges_at = script.slice_converges_at = 40000;
    CU_ASSERT_EQUAL(run(&x), STATUS_DISTRUSTED);
    expect_lengths(six, 6);
    expect_distrust(&x);
    CU_ASSERT_TRUE(warned(&x, "did not converge in 30000 draws"));
    release(&x);
}

static void disagreement_is_tried_again_by_slices(void)
{
    static const size_t two[] = {8000, 8000};
    struct world x;
    start(&x);
    script.shift = 0.3;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    expect_lengths(two, 2);
    CU_ASSERT_TRUE(x.a.diagnostics.slice && x.a.diagnostics.trusted);
    release(&x);
}

static void lasting_disagreement_is_distrusted(void)
{
    struct world x;
    start(&x);
    script.shift = script.slice_shift = 0.3;
    CU_ASSERT_EQUAL(run(&x), STATUS_DISTRUSTED);
    expect_distrust(&x);
    CU_ASSERT_TRUE(warned(&x, "Two methods of computation do not agree"));
    CU_ASSERT(x.a.diagnostics.second_difference > 0.05);
    release(&x);
}

/* B and C are the target about equally often, but C meets it much more often. The second method
 * finds C ahead, and still has to be asked about the level that the first one selected. */
static void methods_are_compared_at_the_same_level(void)
{
    struct world x;
    start(&x);
    script.mean[2] = 1.32;
    script.shift = 0.05;
    x.w.d.targets = 0;
    tiny_target(&x.w, &rule_minimum_effect, 0.36, OF_BEST);
    x.condition.measure = &measure_pr_meets;
    x.condition.target = 0;
    x.condition.level = LEVEL_NONE;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    CU_ASSERT_TRUE(x.a.target[0].close);
    CU_ASSERT_EQUAL(x.a.target[0].selected, 1);
    CU_ASSERT_FALSE(x.a.diagnostics.slice);
    release(&x);
}

static void shares_before_and_after_the_start(void)
{
    struct world x;
    start(&x);
    x.w.ratio[1] = 2;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    CU_ASSERT_EQUAL(x.a.level[1].next_share, 0.5);
    release(&x);
    start(&x);
    x.w.d.allocation.control_share = 0.2;
    x.r.adapted = true;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    CU_ASSERT_DOUBLE_EQUAL(x.a.level[0].next_share, 0.2, 1e-15);
    CU_ASSERT_DOUBLE_EQUAL(x.a.level[2].next_share, 0.8 * x.a.level[2].pr_target[0], 1e-12);
    release(&x);
    start(&x);
    x.r.adapted = x.r.final = true;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    CU_ASSERT_EQUAL(x.a.recommendation, RECOMMEND_COMPLETE);
    CU_ASSERT_TRUE(isnan(x.a.level[2].next_share));
    release(&x);
}

static void closing_levels(void)
{
    const bool closed[LEVELS] = {true, false, true}, all[LEVELS] = {false, true, true};
    struct world x;
    start(&x);
    x.r.closed = closed; /* the control stays open whatever is asked */
    x.r.adapted = true;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    CU_ASSERT_TRUE(x.a.level[0].open && !x.a.level[2].open);
    CU_ASSERT_EQUAL(x.a.level[2].pr_target[0], 0);
    CU_ASSERT_EQUAL(x.a.level[2].pr_meets[0], 0);
    CU_ASSERT_EQUAL(x.a.level[1].pr_target[0], 1);
    CU_ASSERT_EQUAL(x.a.level[2].next_share, 0);
    CU_ASSERT_EQUAL(x.a.target[0].selected, 1);
    CU_ASSERT_DOUBLE_EQUAL(x.a.level[2].response.mean, 1, 0.05);
    release(&x);
    start(&x);
    x.r.closed = all;
    CU_ASSERT_EQUAL(run(&x), STATUS_INPUT);
    release(&x);
}

static void warnings_about_data(void)
{
    struct world x;
    start(&x);
    x.data.n[0] = x.data.n[2] = 0;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    CU_ASSERT_TRUE(warned(&x, "No outcomes yet at A, C:"));
    CU_ASSERT_TRUE(warned(&x, "Only B has outcomes"));
    release(&x);
    start(&x);
    x.data.n[0] = x.data.n[1] = x.data.n[2] = 0;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    CU_ASSERT_TRUE(warned(&x, "every figure comes from the priors alone"));
    CU_ASSERT_FALSE(warned(&x, "No outcomes yet at"));
    release(&x);
}

static void simulated_fits(void)
{
    struct world x;
    start(&x);
    x.r.live = false;
    x.r.adapted = true;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    CU_ASSERT_EQUAL(script.lengths[0], 1000);
    CU_ASSERT_EQUAL(script.calls, 1);
    CU_ASSERT_EQUAL(x.a.recommendation, RECOMMEND_STOP_SUCCESS);
    CU_ASSERT_DOUBLE_EQUAL(x.a.level[2].gain.mean, 1, 0.2);
    CU_ASSERT_PTR_NULL(x.a.diagnostics.second_name);
    CU_ASSERT(x.a.level[2].next_share > x.a.level[1].next_share);
    release(&x);
    start(&x);
    script.distrusted = true;
    x.r.live = false;
    CU_ASSERT_EQUAL(run(&x), STATUS_DISTRUSTED);
    expect_distrust(&x);
    release(&x);
}

static void priors(void)
{
    struct world x;
    struct err e = ERR_INIT;
    start(&x);
    x.analyst = analyst_new(&x.w.d);
    analysis_init(&x.a, &x.w.d);
    analysis_prior(&x.a, x.analyst, &x.w.d);
    CU_ASSERT_EQUAL(analyst_draws(x.analyst).n, 65536);
    CU_ASSERT_DOUBLE_EQUAL(x.a.level[2].pr_target[0], 0.760250, 0.01);
    CU_ASSERT_DOUBLE_EQUAL(x.a.level[2].pr_positive, 0.760250, 0.01);
    CU_ASSERT_EQUAL(x.a.target[0].pr_none, 0);
    release(&x);
    err_release(&e);
}

static const struct unit_test tests[] = {
    {"stops when everything is settled", stops_when_settled},
    {"waits for convergence", waits_for_convergence},
    {"precision not reached", precision_not_reached},
    {"closeness lengthens the run", closeness_lengthens_the_run},
    {"doubt leads to slice sampling", doubt_leads_to_slices},
    {"missed convergence leads to slice sampling", missed_convergence_leads_to_slices},
    {"missed again: distrusted", missed_again_is_distrusted},
    {"disagreement is tried again by slices", disagreement_is_tried_again_by_slices},
    {"lasting disagreement: distrusted", lasting_disagreement_is_distrusted},
    {"methods are compared at the same level", methods_are_compared_at_the_same_level},
    {"shares before and after the start", shares_before_and_after_the_start},
    {"closing levels", closing_levels},
    {"warnings about data", warnings_about_data},
    {"simulated fits", simulated_fits},
    {"priors", priors},
    UNIT_END};

int main(void)
{
    return unit_main("live_run", tests);
}
