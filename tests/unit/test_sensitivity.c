/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_sensitivity.c: sensitivity models beside an analysis: the same code on the same data, and no
 * influence on what is decided.
 */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "analysis/analysis.h"
#include "analysis/vocabulary_rows.h"
#include "unit.h"

#define BEFORE                                                                                \
    "{\"terrace\": 1, \"title\": \"t\", \"levels\": {\"control\": \"A\", \"list\": ["         \
    "{\"label\": \"A\", \"value\": 0}, {\"label\": \"B\", \"value\": 1}, {\"label\": \"C\", " \
    "\"value\": 2}, {\"label\": \"D\", \"value\": 4}]}, \"endpoint\": {\"name\": \"x\", "     \
    "\"type\": \"continuous\", \"better\": \"higher\", \"range\": [-20, 20]}, "               \
    "\"targets\": {\"ED90\": {\"rule\": \"effective_dose\", \"fraction\": 0.9}}, "            \
    "\"allocation\": {\"adapt\": {\"target\": \"ED90\"}}, \"decisions\": [{\"action\": "      \
    "\"stop_success\", \"if\": {\"measure\": \"pr_gain\", \"target\": \"ED90\", "             \
    "\"above\": 0.9}}], \"final\": {\"success\": {\"measure\": \"pr_gain\", \"target\": "     \
    "\"ED90\", \"above\": 0.9}}, \"subjects\": 200, \"mcmc\": {\"max_draws\": 8000}, "
#define VANISHES "\"priors\": {\"variance\": {\"inverse_gamma\": {\"shape\": 2, \"scale\": 2}}}"

static const char alone[] = BEFORE "\"model\": {\"curve\": \"emax\"}}";
static const char beside[] = BEFORE "\"model\": {\"curve\": \"emax\"}, \"sensitivity\": ["
                                    "{\"curve\": \"ndlm\", \"order\": 2}, {\"curve\": \"emax\"}]}";
static const char fragile[] =
    BEFORE "\"model\": {\"curve\": \"linear\", " VANISHES "}, \"sensitivity\": ["
           "{\"curve\": \"emax\"}, {\"curve\": \"quadratic\", " VANISHES "}]}";

struct world {
    struct design *d;
    struct level_data data;
    struct analyst *analyst;
    struct analysis a;
    struct err e;
};

static void start(struct world *x, const char *json)
{
    static const double n[4] = {10, 20, 5, 15}, mean[4] = {0.2, 1.1, 1.9, 2.3};
    *x = (struct world){.e = ERR_INIT};
    design_parse(&x->d, json, strlen(json), "test", &terrace_vocabulary, &x->e);
    for (size_t i = 0; i < x->e.count; i++)
        printf("# %s: %s\n", x->e.faults[i].pointer, x->e.faults[i].message);
    CU_ASSERT_PTR_NOT_NULL_FATAL(x->d);
    level_data_init(&x->data, 4);
    for (size_t k = 0; k < 4; k++) {
        x->data.n[k] = x->data.randomized[k] = n[k];
        x->data.mean[k] = mean[k];
        x->data.ss[k] = 4 * (n[k] - 1);
    }
    x->analyst = analyst_new(x->d);
    analysis_init(&x->a, x->d);
}

static enum status run(struct world *x, bool live)
{
    const struct analysis_request r = {.number = 1,
                                       .point = 50,
                                       .adapted = true,
                                       .randomized = 50,
                                       .observed = 50,
                                       .seed = 11,
                                       .live = live,
                                       .threads = 2};
    return analysis_run(&x->a, x->analyst, &x->data, &r, &x->e);
}

static void release(struct world *x)
{
    analysis_release(&x->a);
    analyst_free(x->analyst);
    level_data_release(&x->data);
    design_free(x->d);
    err_release(&x->e);
}

static void expect_same(const struct analysis *a, const struct analysis *b)
{
    for (size_t k = 0; k < 4; k++) {
        CU_ASSERT_EQUAL(a->level[k].response.mean, b->level[k].response.mean);
        CU_ASSERT_EQUAL(a->level[k].gain.q975, b->level[k].gain.q975);
        CU_ASSERT_EQUAL(a->level[k].pr_target[0], b->level[k].pr_target[0]);
    }
    CU_ASSERT_EQUAL(a->parameter[2].value.q50, b->parameter[2].value.q50);
    CU_ASSERT_EQUAL(a->decision[0].condition[0].value, b->decision[0].condition[0].value);
    CU_ASSERT_EQUAL(a->diagnostics.lack_of_fit_p, b->diagnostics.lack_of_fit_p);
    CU_ASSERT_EQUAL(a->diagnostics.draws, b->diagnostics.draws);
}

static void they_change_nothing(void)
{
    struct world x, y;
    start(&x, alone);
    start(&y, beside);
    CU_ASSERT_EQUAL(run(&x, true), STATUS_OK);
    CU_ASSERT_EQUAL(run(&y, true), STATUS_OK);
    CU_ASSERT_EQUAL(x.a.sensitivities, 0);
    CU_ASSERT_EQUAL(y.a.sensitivities, 2);
    expect_same(&x.a, &y.a);
    CU_ASSERT_EQUAL(x.a.recommendation, y.a.recommendation);
    for (size_t k = 0; k < 4; k++)
        CU_ASSERT_EQUAL(x.a.level[k].next_share, y.a.level[k].next_share);
    release(&x);
    release(&y);
}

/* The second sensitivity model is the design's own: the same stream gives the same figures. */
static void the_same_code_and_stream(void)
{
    struct world x;
    start(&x, beside);
    CU_ASSERT_EQUAL(run(&x, true), STATUS_OK);
    CU_ASSERT_EQUAL(run(&x, true), STATUS_OK); /* and again into the same analysis */
    CU_ASSERT_EQUAL_FATAL(x.a.sensitivities, 2);
    expect_same(&x.a, &x.a.sensitivity[1]);
    const struct analysis *walk = &x.a.sensitivity[0];
    CU_ASSERT_PTR_EQUAL(walk->model, &x.d->sensitivity[0]);
    CU_ASSERT_EQUAL(walk->parameters, 4); /* theta, slope, drift_sd, sd */
    CU_ASSERT_STRING_EQUAL(walk->parameter[1].name, "slope");
    CU_ASSERT_NOT_EQUAL(walk->level[1].response.mean, x.a.level[1].response.mean);
    CU_ASSERT_TRUE(walk->diagnostics.trusted);
    CU_ASSERT_EQUAL(walk->sensitivities, 0);
    release(&x);
}

static void simulated_analyses_have_none(void)
{
    struct world x;
    start(&x, beside);
    CU_ASSERT_EQUAL(run(&x, false), STATUS_OK);
    CU_ASSERT_EQUAL(x.a.sensitivities, 0);
    CU_ASSERT_TRUE(isnan(x.a.diagnostics.lack_of_fit_p));
    release(&x);
}

/* Identical replicates: the posterior of the first sensitivity model may be improper. */
static void one_that_fails_is_a_note(void)
{
    struct world x;
    start(&x, fragile);
    for (size_t k = 0; k < 4; k++)
        x.data.ss[k] = 0;
    CU_ASSERT_EQUAL(run(&x, true), STATUS_OK);
    CU_ASSERT_EQUAL(x.e.count, 0);
    CU_ASSERT_EQUAL_FATAL(x.a.sensitivities, 2);
    const struct analysis *failed = &x.a.sensitivity[0], *other = &x.a.sensitivity[1];
    CU_ASSERT_PTR_NOT_NULL_FATAL(failed->failure);
    CU_ASSERT_PTR_NOT_NULL(strstr(failed->failure, "sd"));
    CU_ASSERT_FALSE(failed->diagnostics.trusted);
    CU_ASSERT_TRUE(isnan(failed->level[1].response.mean) && isnan(failed->level[1].pr_target[0]));
    CU_ASSERT_TRUE(isnan(failed->decision[0].condition[0].value));
    CU_ASSERT_EQUAL(failed->target[0].selected, LEVEL_NONE);
    CU_ASSERT_TRUE(isnan(failed->parameter[0].value.mean) && isnan(failed->diagnostics.max_rhat));
    CU_ASSERT_PTR_NULL(other->failure);
    CU_ASSERT_FALSE(isnan(other->level[1].response.mean));
    CU_ASSERT_TRUE(x.a.diagnostics.trusted);
    release(&x);
}

static const struct unit_test tests[] = {
    {"they change nothing", they_change_nothing},
    {"the same code and stream", the_same_code_and_stream},
    {"simulated analyses have none", simulated_analyses_have_none},
    {"one that fails is a note", one_that_fails_is_a_note},
    UNIT_END};

int main(void)
{
    return unit_main("sensitivity", tests);
}
