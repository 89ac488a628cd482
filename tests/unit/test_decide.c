/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_decide.c: decisions in order, in force or not, joins, thresholds and the last analysis. */
#include <math.h>

#include "analysis/decide.h"
#include "analysis/measures.h"
#include "base/mem.h"
#include "tiny_world.h"
#include "unit.h"

/* A measure whose value is the condition's `value`, its error `per_arm`. */
static void given(const struct condition *c, const struct judgement *j, double *value, double *mcse)
{
    (void)j;
    *value = c->value;
    *mcse = c->per_arm;
}

static const struct measure measure_given = {.key = "given", .evaluate = given};

/* One decision per value, all "above 0.5" with error 0.001. */
struct world {
    struct tiny_world w;
    struct decision decision[3];
    struct condition condition[3][3], final[1];
    struct judgement *j;
    struct analysis a;
    struct analysis_request r;
};

static struct condition above(double value, double threshold)
{
    return (struct condition){.measure = &measure_given,
                              .target = -1,
                              .level = LEVEL_NONE,
                              .value = value,
                              .per_arm = 0.001,
                              .above = true,
                              .threshold = threshold};
}

static void start(struct world *x, size_t decisions)
{
    tiny_init(&x->w, 3, 0);
    for (size_t i = 0; i < decisions; i++) {
        x->condition[i][0] = above(0.1, 0.5);
        x->decision[i] = (struct decision){.action = ACTION_STOP_FUTILITY,
                                           .when = {JOIN_ONE, 1, x->condition[i]},
                                           .binding = true};
    }
    x->w.d.decisions = decisions;
    x->w.d.decision = x->decision;
    x->r = (struct analysis_request){.number = 1, .point = 60, .observed = 50};
}

static void finish(struct world *x)
{
    x->j = judgement_new(&x->w.d);
    analysis_init(&x->a, &x->w.d);
    decide(&x->a, x->j, &x->r);
}

static void release(struct world *x)
{
    judgement_free(x->j);
    analysis_release(&x->a);
}

static void first_met_acts(void)
{
    struct world x;
    start(&x, 3);
    x.condition[1][0].value = 0.9;
    x.condition[2][0].value = 0.9;
    x.decision[2].action = ACTION_STOP_SUCCESS;
    finish(&x);
    CU_ASSERT_EQUAL(x.a.recommendation, RECOMMEND_STOP_FUTILITY);
    CU_ASSERT_FALSE(x.a.decision[0].met);
    CU_ASSERT_TRUE(x.a.decision[2].met && x.a.decision[2].applies);
    release(&x);
    x.condition[1][0].value = 0.1;
    finish(&x);
    CU_ASSERT_EQUAL(x.a.recommendation, RECOMMEND_STOP_SUCCESS);
    release(&x);
    x.condition[2][0].value = 0.1;
    finish(&x);
    CU_ASSERT_EQUAL(x.a.recommendation, RECOMMEND_CONTINUE);
    release(&x);
}

static void from_and_min_observed(void)
{
    struct world x;
    start(&x, 2);
    x.condition[0][0].value = x.condition[1][0].value = 0.9;
    x.decision[0].from = 60.5;
    x.decision[1].min_observed = 51;
    finish(&x);
    CU_ASSERT_EQUAL(x.a.recommendation, RECOMMEND_CONTINUE);
    CU_ASSERT_TRUE(x.a.decision[0].met && x.a.decision[1].met);
    CU_ASSERT_FALSE(x.a.decision[0].applies || x.a.decision[1].applies);
    release(&x);
    x.decision[0].from = 60;
    finish(&x);
    CU_ASSERT_TRUE(x.a.decision[0].applies);
    CU_ASSERT_EQUAL(x.a.recommendation, RECOMMEND_STOP_FUTILITY);
    release(&x);
    x.decision[0].from = 61;
    x.decision[1].min_observed = 50;
    finish(&x);
    CU_ASSERT_TRUE(x.a.decision[1].applies);
    release(&x);
}

/* Every truth table of three conditions. */
static void joins(void)
{
    for (unsigned truth = 0; truth < 8; truth++)
        for (int join = JOIN_ALL; join <= JOIN_ANY; join++) {
            struct world x;
            start(&x, 1);
            x.decision[0].when = (struct conditions){(enum join)join, 3, x.condition[0]};
            for (unsigned c = 0; c < 3; c++)
                x.condition[0][c] = above(truth & (1u << c) ? 0.9 : 0.1, 0.5);
            finish(&x);
            CU_ASSERT_EQUAL(x.a.decision[0].met, join == JOIN_ALL ? truth == 7 : truth != 0);
            release(&x);
        }
}

static void thresholds_are_strict(void)
{
    struct world x;
    start(&x, 3);
    x.condition[0][0] = above(0.5, 0.5);
    x.condition[1][0] = above(0.5, 0.5);
    x.condition[1][0].above = false;
    x.condition[2][0] = above(0.499, 0.5);
    x.condition[2][0].above = false;
    finish(&x);
    CU_ASSERT_FALSE(x.a.decision[0].met || x.a.decision[1].met);
    CU_ASSERT_TRUE(x.a.decision[2].met);
    release(&x);
}

static void closeness_and_precision(void)
{
    struct world x;
    start(&x, 3);
    x.condition[0][0] = above(0.5029, 0.5);
    x.condition[1][0] = above(0.5031, 0.5);
    x.condition[2][0].per_arm = 0.0051;
    finish(&x);
    CU_ASSERT_TRUE(x.a.decision[0].condition[0].close);
    CU_ASSERT_FALSE(x.a.decision[1].condition[0].close);
    CU_ASSERT_FALSE(x.a.decision[0].condition[0].imprecise);
    CU_ASSERT_TRUE(x.a.decision[2].condition[0].imprecise);
    release(&x);
}

static void last_analysis_reads_final_only(void)
{
    struct world x;
    start(&x, 1);
    x.condition[0][0].value = 0.9;
    x.r.final = true;
    x.r.point = INFINITY;
    finish(&x);
    CU_ASSERT_EQUAL(x.a.recommendation, RECOMMEND_COMPLETE);
    CU_ASSERT_TRUE(x.a.decision[0].met);
    CU_ASSERT_FALSE(x.a.decision[0].applies);
    CU_ASSERT_PTR_NULL(x.a.final_success.condition);
    release(&x);
    x.final[0] = above(0.9, 0.5);
    x.w.d.has_final = true;
    x.w.d.final_success = (struct conditions){JOIN_ONE, 1, x.final};
    finish(&x);
    CU_ASSERT_EQUAL(x.a.recommendation, RECOMMEND_SUCCESS);
    CU_ASSERT_TRUE(x.a.final_success.applies);
    release(&x);
    x.final[0].value = 0.2;
    finish(&x);
    CU_ASSERT_EQUAL(x.a.recommendation, RECOMMEND_NO_SUCCESS);
    release(&x);
    x.r.final = false;
    x.final[0].value = 0.9;
    x.condition[0][0].value = 0.1;
    finish(&x);
    CU_ASSERT_EQUAL(x.a.recommendation, RECOMMEND_CONTINUE);
    CU_ASSERT_TRUE(x.a.final_success.met);
    CU_ASSERT_FALSE(x.a.final_success.applies);
    release(&x);
}

static void the_interface_s_words(void)
{
    static const char *const words[] = {"continue",   "stop_success", "stop_futility", "success",
                                        "no_success", "complete",     "undetermined"};
    for (int i = RECOMMEND_CONTINUE; i <= RECOMMEND_UNDETERMINED; i++)
        CU_ASSERT_STRING_EQUAL(recommendation_key((enum recommendation)i), words[i]);
}

static const struct unit_test tests[] = {
    {"the first that is met acts", first_met_acts},
    {"from and min_observed", from_and_min_observed},
    {"all and any", joins},
    {"thresholds are strict", thresholds_are_strict},
    {"closeness and precision", closeness_and_precision},
    {"the last analysis reads final only", last_analysis_reads_final_only},
    {"the interface's words", the_interface_s_words},
    UNIT_END};

int main(void)
{
    return unit_main("decide", tests);
}
