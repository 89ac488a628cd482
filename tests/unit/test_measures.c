/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_measures.c: every measure on random draws against its definition, and selection. */
#include <math.h>

#include "analysis/measures.h"
#include "analysis/targets.h"
#include "base/mem.h"
#include "base/vecmath.h"
#include "tiny_world.h"
#include "unit.h"

enum { LEVELS = 4, DRAWS = 1000 };

static uint64_t state;

static double uniform(void)
{
    return ((double)tiny_random(&state, 1000000) + 0.5) / 1000000;
}

/* Quarters, so that ties happen. */
static double random_quarters(size_t i, size_t level)
{
    (void)i;
    return (double)tiny_random(&state, 9) / 4 - 1 + (double)level / 4;
}

struct world {
    struct tiny_world w;
    struct draws draws;
    double *response, *link, *sd, *exact[4];
    struct prior prior;
    struct parameter residual;
    struct judgement *j;
};

static double *random_rows(const struct world *x, double low, double high)
{
    double *out = mem_new(x->draws.stride * LEVELS, sizeof *out);
    for (size_t i = 0; i < x->draws.stride * LEVELS; i++)
        out[i] = low + (high - low) * uniform();
    return out;
}

static void start(struct world *x, int control)
{
    *x = (struct world){0};
    state = 7;
    tiny_init(&x->w, LEVELS, control);
    x->response = tiny_draws(&x->draws, &x->w, DRAWS, random_quarters);
    tiny_target(&x->w, &rule_optimal, 0, OF_BEST);
}

/* Exact moments unrelated to the draws, so that it shows which of the two was used. */
static void add_moments(struct world *x)
{
    for (size_t i = 0; i < 4; i++)
        x->exact[i] = random_rows(x, i % 2 ? 0 : -1, 1);
    for (size_t k = 0; k < LEVELS; k++)
        for (size_t i = 0; i < 20; i++) /* sd 0 */
            x->exact[1][k * x->draws.stride + i] = x->exact[3][k * x->draws.stride + i] = 0;
    x->draws.response_mean = x->exact[0];
    x->draws.response_sd = x->exact[1];
    x->draws.difference_mean = x->w.d.reference_level >= 0 ? x->exact[2] : NULL;
    x->draws.difference_sd = x->w.d.reference_level >= 0 ? x->exact[3] : NULL;
}

static void make_binary(struct world *x)
{
    x->w.d.type = ENDPOINT_BINARY;
    x->link = x->response;
    x->response = mem_new(x->draws.stride * LEVELS, sizeof(double));
    for (size_t i = 0; i < x->draws.stride * LEVELS; i++)
        x->response[i] = vm_logistic(x->link[i]);
    x->draws.link = x->link;
    x->draws.response = x->response;
}

static void judge(struct world *x)
{
    x->j = judgement_new(&x->w.d);
    judge_counts(x->j, &x->draws);
    judge_selection(x->j);
}

static void release(struct world *x)
{
    judgement_free(x->j);
    mem_free(x->response);
    mem_free(x->link);
    mem_free(x->sd);
    for (size_t i = 0; i < 4; i++)
        mem_free(x->exact[i]);
}

static double phi(double z)
{
    return 0.5 * erfc(-z / sqrt(2));
}

static struct condition condition_on(const struct measure *m, int target, int level)
{
    return (struct condition){.measure = m, .target = target, .level = level};
}

static double value_of(const struct condition *c, const struct world *x, int *level)
{
    double value, mcse;
    int at;
    measure_evaluate(c, x->j, &value, &mcse, level ? level : &at);
    CU_ASSERT(mcse >= 0 && mcse < 0.1);
    return value;
}

static double at(const struct world *x, const double *rows, size_t level, size_t i)
{
    return rows[level * x->draws.stride + i];
}

/* Average of the conditional normal probability that s N(mean, sd) > bar. */
static double exact_share(const struct world *x, const double *mean, const double *sd, size_t level,
                          double bar)
{
    const double s = design_sign(&x->w.d);
    double sum = 0;
    for (size_t i = 0; i < DRAWS; i++) {
        const double over = s * at(x, mean, level, i) - bar, v = at(x, sd, level, i);
        sum += v > 0 ? phi(over / v) : over > 0;
    }
    return sum / DRAWS;
}

static void gains_of_a_continuous_endpoint(void)
{
    for (int up = 0; up < 2; up++) {
        struct world x;
        start(&x, 1);
        x.w.d.higher_is_better = up;
        add_moments(&x);
        judge(&x);
        struct condition c = condition_on(&measure_pr_gain, -1, 2);
        c.gain = 0.3;
        CU_ASSERT_DOUBLE_EQUAL(value_of(&c, &x, NULL),
                               exact_share(&x, x.exact[2], x.exact[3], 2, 0.3), 1e-12);
        measure_gains(x.j);
        CU_ASSERT_EQUAL(x.j->pr_positive[1], 0);
        CU_ASSERT_DOUBLE_EQUAL(x.j->pr_positive[3], exact_share(&x, x.exact[2], x.exact[3], 3, 0),
                               1e-12);
        release(&x);
    }
}

static void gains_over_a_number(void)
{
    struct world x;
    start(&x, LEVEL_NONE);
    x.w.d.higher_is_better = false;
    x.w.d.has_reference_number = true;
    x.w.d.reference_number = 0.4;
    add_moments(&x);
    judge(&x);
    struct condition c = condition_on(&measure_pr_gain, -1, 0);
    c.gain = 0.25;
    CU_ASSERT_DOUBLE_EQUAL(value_of(&c, &x, NULL),
                           exact_share(&x, x.exact[0], x.exact[1], 0, -0.4 + 0.25), 1e-12);
    release(&x);
}

static void the_largest_of_any(void)
{
    struct world x;
    int level;
    double largest = 0;
    start(&x, 0);
    add_moments(&x);
    judge(&x);
    const struct condition c = condition_on(&measure_pr_gain, -1, LEVEL_ANY);
    for (size_t k = 1; k < LEVELS; k++)
        largest = fmax(largest, exact_share(&x, x.exact[2], x.exact[3], k, 0));
    const double value = value_of(&c, &x, &level);
    CU_ASSERT_DOUBLE_EQUAL(value, largest, 1e-12);
    CU_ASSERT_DOUBLE_EQUAL(exact_share(&x, x.exact[2], x.exact[3], (size_t)level, 0), largest,
                           1e-12);
    x.j->open[level] = false; /* a closed level does not count */
    CU_ASSERT(value_of(&c, &x, NULL) < value);
    release(&x);
}

/* Shares of draws; `above` is strict, and the draws have ties. */
static double counted(const struct world *x, size_t level, int reference, double bar)
{
    const double s = design_sign(&x->w.d);
    size_t n = 0;
    for (size_t i = 0; i < DRAWS; i++)
        n += s * (at(x, x->response, level, i) -
                  (reference >= 0 ? at(x, x->response, (size_t)reference, i) : 0)) >
             bar;
    return (double)n / DRAWS;
}

static void binary_gains_are_counted(void)
{
    for (int up = 0; up < 2; up++) {
        struct world x;
        size_t n = 0;
        start(&x, 0);
        x.w.d.higher_is_better = up;
        make_binary(&x);
        judge(&x);
        struct condition c = condition_on(&measure_pr_gain, -1, 3);
        CU_ASSERT_EQUAL(value_of(&c, &x, NULL), counted(&x, 3, 0, 0));
        c.gain = 0.1;
        CU_ASSERT_EQUAL(value_of(&c, &x, NULL), counted(&x, 3, 0, 0.1));
        c.link = true;
        c.gain = 0.5; /* exact in quarters */
        for (size_t i = 0; i < DRAWS; i++)
            n += (up ? 1 : -1) * (at(&x, x.link, 3, i) - at(&x, x.link, 0, i)) > 0.5;
        CU_ASSERT_EQUAL(value_of(&c, &x, NULL), (double)n / DRAWS);
        release(&x);
    }
}

static void any_gain_is_counted(void)
{
    for (int up = 0; up < 2; up++) {
        struct world x;
        size_t n = 0;
        start(&x, 0);
        x.w.d.higher_is_better = up;
        judge(&x);
        x.j->open[2] = false;
        struct condition c = condition_on(&measure_pr_any_gain, -1, LEVEL_NONE);
        c.gain = 0.5;
        for (size_t i = 0; i < DRAWS; i++) {
            const double s = up ? 1 : -1, m0 = at(&x, x.response, 0, i);
            n += s * (at(&x, x.response, 1, i) - m0) > 0.5 ||
                 s * (at(&x, x.response, 3, i) - m0) > 0.5;
        }
        CU_ASSERT(n > 0 && n < DRAWS);
        CU_ASSERT_EQUAL(value_of(&c, &x, NULL), (double)n / DRAWS);
        release(&x);
    }
}

static void any_gain_over_a_rate_on_the_logit(void)
{
    struct world x;
    size_t n = 0;
    start(&x, LEVEL_NONE);
    make_binary(&x);
    x.w.d.has_reference_number = true;
    x.w.d.reference_number = 0.6;
    judge(&x);
    struct condition c = condition_on(&measure_pr_any_gain, -1, LEVEL_NONE);
    c.link = true;
    c.gain = 0.75;
    for (size_t i = 0; i < DRAWS; i++) {
        double best = -INFINITY;
        for (size_t k = 0; k < LEVELS; k++)
            best = fmax(best, at(&x, x.link, k, i));
        n += best - log(0.6 / 0.4) > 0.75;
    }
    CU_ASSERT(n > 0 && n < DRAWS);
    CU_ASSERT_EQUAL(value_of(&c, &x, NULL), (double)n / DRAWS);
    release(&x);
}

static void responses_of_the_selected_level(void)
{
    struct world x;
    int level;
    start(&x, 0);
    x.w.d.higher_is_better = false;
    judge(&x);
    struct condition c = condition_on(&measure_pr_response, 0, LEVEL_NONE);
    c.value = 0.25;
    const double value = value_of(&c, &x, &level);
    CU_ASSERT_EQUAL(level, x.j->selected[0]);
    CU_ASSERT_EQUAL(value, counted(&x, (size_t)level, LEVEL_NONE, -0.25));
    release(&x);
    start(&x, 0);
    x.w.d.higher_is_better = false;
    add_moments(&x);
    judge(&x);
    CU_ASSERT_DOUBLE_EQUAL(value_of(&c, &x, &level),
                           exact_share(&x, x.exact[0], x.exact[1], (size_t)x.j->selected[0], -0.25),
                           1e-12);
    release(&x);
}

/* Without spread a probability is 0 or 1, and what equals the bar does not pass it. */
static void no_spread_and_strictly_above(void)
{
    struct world x;
    start(&x, 0);
    add_moments(&x);
    judge(&x);
    struct condition c = condition_on(&measure_pr_gain, -1, 2);
    c.gain = 0.5;
    for (size_t i = 0; i < x.draws.stride * LEVELS; i++) {
        x.exact[2][i] = i % 2 ? 0.5 : 0.75;
        x.exact[3][i] = 0;
    }
    CU_ASSERT_EQUAL(value_of(&c, &x, NULL), 0.5);
    release(&x);
}

static void levels_and_meeting(void)
{
    struct world x;
    int level;
    start(&x, 0);
    judge(&x);
    const struct condition is = condition_on(&measure_pr_level, 0, LEVEL_NONE);
    const struct condition meets = condition_on(&measure_pr_meets, 0, LEVEL_NONE);
    const double p = value_of(&is, &x, &level);
    CU_ASSERT_EQUAL(p, x.j->pr_target[x.j->selected[0]]);
    CU_ASSERT_EQUAL(level, x.j->selected[0]);
    CU_ASSERT_EQUAL(value_of(&meets, &x, NULL), x.j->pr_meets[x.j->selected[0]]);
    CU_ASSERT(p > 0.25);
    release(&x);
}

static void give_sd(struct world *x)
{
    x->sd = mem_new(x->draws.stride, sizeof(double));
    for (size_t i = 0; i < DRAWS; i++)
        x->sd[i] = 1 + uniform();
    x->residual.role = ROLE_RESIDUAL;
    x->w.d.model.parameters = 1;
    x->w.d.model.parameter[0] = &x->residual;
    x->draws.parameter = x->sd;
}

static void next_trial_continuous(void)
{
    struct world x;
    double sum = 0;
    start(&x, 0);
    x.w.d.higher_is_better = false;
    give_sd(&x);
    judge(&x);
    struct condition c = condition_on(&measure_predictive_next, 0, LEVEL_NONE);
    c.per_arm = 50;
    c.alpha = 0.025;
    const size_t k = (size_t)x.j->selected[0];
    for (size_t i = 0; i < DRAWS; i++) {
        const double gain = at(&x, x.response, 0, i) - at(&x, x.response, k, i);
        sum += phi(gain / (x.sd[i] * sqrt(2.0 / 50)) - 1.959963984540054);
    }
    CU_ASSERT_DOUBLE_EQUAL(value_of(&c, &x, NULL), sum / DRAWS, 1e-12);
    release(&x);
}

static void next_trial_binary(void)
{
    struct world x;
    double sum = 0;
    start(&x, 0);
    make_binary(&x);
    judge(&x);
    struct condition c = condition_on(&measure_predictive_next, 0, LEVEL_NONE);
    c.per_arm = 30;
    c.alpha = 0.05;
    const size_t k = (size_t)x.j->selected[0];
    for (size_t i = 0; i < DRAWS; i++) {
        const double p = at(&x, x.response, k, i), q = at(&x, x.response, 0, i);
        const double se = sqrt((p * (1 - p) + q * (1 - q)) / 30);
        sum += phi((p - q) / se - 1.6448536269514722);
    }
    CU_ASSERT_DOUBLE_EQUAL(value_of(&c, &x, NULL), sum / DRAWS, 1e-12);
    /* rates of exactly 0 and 1: certain to win, certain not to, and nothing to gain */
    for (size_t i = 0; i < DRAWS; i++) {
        x.response[k * x.draws.stride + i] = i % 2 ? 1 : 0;
        x.response[i] = i % 4 < 2 ? 0 : 1;
    }
    CU_ASSERT_DOUBLE_EQUAL(value_of(&c, &x, NULL), 0.25 * (1 + 0 + 2 * 0.05), 1e-12);
    release(&x);
}

static void without_a_selected_level_measures_are_0(void)
{
    static const struct measure *const of_selected[] = {&measure_pr_gain, &measure_pr_level,
                                                        &measure_pr_meets, &measure_pr_response,
                                                        &measure_predictive_next};
    struct world x;
    int level;
    start(&x, 0);
    tiny_target(&x.w, &rule_minimum_effect, 100, OF_BEST);
    give_sd(&x);
    judge(&x);
    CU_ASSERT_EQUAL(x.j->selected[1], LEVEL_NONE);
    CU_ASSERT_EQUAL(x.j->pr_none[1], 1);
    for (size_t i = 0; i < 5; i++) {
        struct condition c = condition_on(of_selected[i], 1, LEVEL_NONE);
        c.gain = c.value = -100;
        CU_ASSERT_EQUAL(value_of(&c, &x, &level), 0);
        CU_ASSERT_EQUAL(level, LEVEL_NONE);
    }
    release(&x);
}

/* ---- selection on shares set by hand ---- */

static void set_shares(struct world *x, const double *p, double none, double ess)
{
    for (size_t k = 0; k < LEVELS; k++) {
        x->j->pr_target[k] = x->j->pr_meets[k] = p[k];
        x->j->ess_target[k] = ess;
        x->j->mcse_meets[k] = sqrt(p[k] * (1 - p[k]) / ess);
    }
    x->j->pr_none[0] = none;
    x->j->mcse_none[0] = sqrt(none * (1 - none) / ess);
    judge_selection(x->j);
}

static void selection_and_closeness(void)
{
    const double clear[LEVELS] = {0, 0.1, 0.6, 0.2}, tie[LEVELS] = {0, 0.4, 0.1, 0.4},
                 none[LEVELS] = {0, 0.1, 0.2, 0.1}, edge[LEVELS] = {0, 0.05, 0.4, 0.05};
    struct world x;
    start(&x, 0);
    judge(&x);
    set_shares(&x, clear, 0.1, 1000);
    CU_ASSERT_EQUAL(x.j->selected[0], 2);
    CU_ASSERT_FALSE(x.j->close[0]);
    set_shares(&x, clear, 0.1, 30); /* lead 0.4, error sqrt(0.64 / 30) = 0.146 */
    CU_ASSERT_TRUE(x.j->close[0]);
    set_shares(&x, tie, 0.1, 1e6);
    CU_ASSERT_EQUAL(x.j->selected[0], 1);
    CU_ASSERT_TRUE(x.j->close[0]);
    set_shares(&x, none, 0.6, 1e6);
    CU_ASSERT_EQUAL(x.j->selected[0], LEVEL_NONE);
    CU_ASSERT_FALSE(x.j->close[0]);
    set_shares(&x, edge, 0.5, 1e6); /* not above 0.5 */
    CU_ASSERT_EQUAL(x.j->selected[0], 2);
    CU_ASSERT_TRUE(x.j->close[0]);
    release(&x);
}

static void selection_by_meeting(void)
{
    const double p[LEVELS] = {0, 0.5, 0.85, 0.95}, near[LEVELS] = {0, 0.79, 0.85, 0.95},
                 low[LEVELS] = {0, 0.1, 0.2, 0.3};
    struct world x;
    start(&x, 0);
    x.w.target[0].by_meets = true;
    x.w.target[0].meets = 0.8;
    judge(&x);
    set_shares(&x, p, 0, 10000);
    CU_ASSERT_EQUAL(x.j->selected[0], 2);
    CU_ASSERT_FALSE(x.j->close[0]);
    set_shares(&x, near, 0, 10000); /* 0.01 below, error 0.004 */
    CU_ASSERT_EQUAL(x.j->selected[0], 2);
    CU_ASSERT_TRUE(x.j->close[0]);
    set_shares(&x, low, 0, 10000);
    CU_ASSERT_EQUAL(x.j->selected[0], LEVEL_NONE);
    CU_ASSERT_FALSE(x.j->close[0]);
    x.j->open[2] = false;
    set_shares(&x, p, 0, 10000);
    CU_ASSERT_EQUAL(x.j->selected[0], 3);
    release(&x);
}

static const struct unit_test tests[] = {
    {"pr_gain, continuous: exact conditional probabilities", gains_of_a_continuous_endpoint},
    {"pr_gain over a number", gains_over_a_number},
    {"pr_gain of any level", the_largest_of_any},
    {"pr_gain, binary: shares of draws", binary_gains_are_counted},
    {"pr_any_gain", any_gain_is_counted},
    {"pr_any_gain over a rate, on the logit", any_gain_over_a_rate_on_the_logit},
    {"pr_response", responses_of_the_selected_level},
    {"no spread, and strictly above", no_spread_and_strictly_above},
    {"pr_level and pr_meets", levels_and_meeting},
    {"predictive_next, continuous", next_trial_continuous},
    {"predictive_next, binary", next_trial_binary},
    {"0 without a selected level", without_a_selected_level_measures_are_0},
    {"selection and closeness", selection_and_closeness},
    {"selection by meeting", selection_by_meeting},
    UNIT_END};

int main(void)
{
    return unit_main("measures", tests);
}
