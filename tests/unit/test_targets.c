/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_targets.c: every rule, on every draw of tiny worlds, against the definitions spelled out. */
#include <math.h>
#include <string.h>

#include "analysis/tally.h"
#include "analysis/targets.h"
#include "base/mem.h"
#include "tiny_world.h"
#include "unit.h"

/* Four levels with values -1, 0, 1 or 2 each: all draws there are, ties included. */
enum { LEVELS = 4, VALUES = 4, DRAWS = 256 };

static double enumerated(size_t i, size_t level)
{
    for (size_t k = 0; k < level; k++)
        i /= VALUES;
    return (double)(i % VALUES) - 1;
}

/* ---- the interface's definitions, one draw at a time ---- */

struct case_of {
    const struct design *d;
    const struct target *t;
    const bool *open;
    double s, m[LEVELS], reference;
};

static bool can_be(const struct case_of *c, size_t k)
{
    return (int)k != c->d->control && c->open[k];
}

static double gain(const struct case_of *c, size_t k)
{
    return c->s * (c->m[k] - c->reference);
}

static double largest_gain(const struct case_of *c)
{
    double most = -INFINITY;
    for (size_t k = 0; k < LEVELS; k++)
        if (can_be(c, k) && gain(c, k) > most)
            most = gain(c, k);
    return most;
}

static double best(const struct case_of *c, bool with_control)
{
    double most = -INFINITY;
    for (size_t k = 0; k < LEVELS; k++)
        if ((can_be(c, k) || (with_control && (int)k == c->d->control)) && c->s * c->m[k] > most)
            most = c->s * c->m[k];
    return most;
}

static bool meets(const struct case_of *c, size_t k)
{
    if (c->t->rule == &rule_optimal)
        return c->s * c->m[k] >= best(c, false);
    if (c->t->rule == &rule_effective_dose)
        return largest_gain(c) > 0 && gain(c, k) >= c->t->fraction * largest_gain(c);
    if (c->t->rule == &rule_minimum_effect)
        return gain(c, k) >= c->t->effect;
    const double of = c->t->of >= 0 ? c->s * c->m[c->t->of] : best(c, true);
    return of - c->s * c->m[k] <= c->t->margin;
}

static int target_level(const struct case_of *c)
{
    for (size_t k = 0; k < LEVELS; k++)
        if (can_be(c, k) && meets(c, k))
            return (int)k;
    return LEVEL_NONE;
}

static struct case_of case_at(const struct design *d, const struct target *t, const bool *open,
                              size_t i)
{
    struct case_of c = {.d = d, .t = t, .open = open, .s = d->higher_is_better ? 1 : -1};
    for (size_t k = 0; k < LEVELS; k++)
        c.m[k] = enumerated(i, k);
    c.reference = d->reference_level >= 0 ? c.m[d->reference_level] : d->reference_number;
    return c;
}

/* ---- worlds ---- */

static void add_targets(struct tiny_world *w)
{
    tiny_target(w, &rule_optimal, 0, OF_BEST);
    tiny_target(w, &rule_within_margin, 1, OF_BEST);
    tiny_target(w, &rule_within_margin, 0.5, 2);
    tiny_target(w, &rule_within_margin, 0.5, OF_BEST)->link = true;
    if (!design_has_gain(&w->d))
        return;
    tiny_target(w, &rule_effective_dose, 0.5, OF_BEST);
    tiny_target(w, &rule_effective_dose, 1, OF_BEST);
    tiny_target(w, &rule_minimum_effect, 1, OF_BEST);
    tiny_target(w, &rule_minimum_effect, 2, OF_BEST);
}

static int differences(struct tally *w, const struct design *d, const struct draws *draws,
                       const bool *open)
{
    double is[TINY_TARGETS * LEVELS], would[TINY_TARGETS * LEVELS], none[TINY_TARGETS];
    double bar[DRAWS];
    int level[DRAWS], wrong = 0;
    const double n = (double)draws->n;
    tally_count(w, draws, open, is, would, none);
    for (size_t t = 0; t < d->targets; t++) {
        size_t n_is[LEVELS] = {0}, n_meets[LEVELS] = {0}, n_none = 0;
        tally_trace(w, draws, open, t, bar, level);
        for (size_t i = 0; i < draws->n; i++) {
            const struct case_of c = case_at(d, &d->target[t], open, i);
            const int right = target_level(&c);
            wrong += level[i] != right;
            n_none += right < 0;
            for (size_t k = 0; k < LEVELS; k++) {
                n_is[k] += (int)k == right;
                n_meets[k] += can_be(&c, k) && meets(&c, k);
                wrong += can_be(&c, k) && meets(&c, k) != (c.s * c.m[k] >= bar[i]);
            }
        }
        for (size_t k = 0; k < LEVELS; k++) {
            wrong += is[t * LEVELS + k] != (double)n_is[k] / n;
            wrong += would[t * LEVELS + k] != (double)n_meets[k] / n;
        }
        wrong += none[t] != (double)n_none / n;
    }
    return wrong;
}

/* Every set of closed levels, at all draws and at a number of draws that fills no tile. */
static void try_world(struct tiny_world *w)
{
    struct draws draws;
    double *x = tiny_draws(&draws, w, DRAWS, enumerated);
    struct tally *tally = tally_new(&w->d);
    for (unsigned closed = 0; closed < 1u << LEVELS; closed++) {
        bool open[LEVELS], any = false;
        for (size_t k = 0; k < LEVELS; k++) {
            open[k] = (closed & (1u << k)) == 0 || (int)k == w->d.control;
            any = any || (open[k] && (int)k != w->d.control);
        }
        if (!any)
            continue;
        draws.n = DRAWS;
        CU_ASSERT_EQUAL(differences(tally, &w->d, &draws, open), 0);
        draws.n = DRAWS - 56;
        CU_ASSERT_EQUAL(differences(tally, &w->d, &draws, open), 0);
    }
    tally_free(tally);
    mem_free(x);
}

static void both_signs(struct tiny_world *w)
{
    add_targets(w);
    for (int up = 0; up < 2; up++) {
        w->d.higher_is_better = up;
        try_world(w);
    }
}

static void with_control(void)
{
    static const int place[] = {0, 1, LEVELS - 1};
    for (size_t i = 0; i < 3; i++) {
        struct tiny_world w;
        tiny_init(&w, LEVELS, place[i]);
        both_signs(&w);
    }
}

static void without_control(void)
{
    struct tiny_world w;
    tiny_init(&w, LEVELS, LEVEL_NONE);
    both_signs(&w);
}

static void with_reference_level(void)
{
    struct tiny_world w;
    tiny_init(&w, LEVELS, LEVEL_NONE);
    w.d.reference_level = 2;
    both_signs(&w);
}

static void with_reference_number(void)
{
    struct tiny_world w;
    tiny_init(&w, LEVELS, LEVEL_NONE);
    w.d.has_reference_number = true;
    w.d.reference_number = 0;
    both_signs(&w);
}

/* ---- true levels ---- */

static void true_levels_follow_the_rules(void)
{
    static const bool open[LEVELS] = {true, true, true, true};
    int wrong = 0;
    for (int control = LEVEL_NONE; control < 2; control++)
        for (int up = 0; up < 2; up++) {
            struct tiny_world w;
            tiny_init(&w, LEVELS, control);
            w.d.higher_is_better = up;
            add_targets(&w);
            for (size_t i = 0; i < DRAWS; i++)
                for (size_t t = 0; t < w.d.targets; t++) {
                    const struct case_of c = case_at(&w.d, &w.target[t], open, i);
                    if (!w.target[t].link)
                        wrong += target_true_level(&w.d, &w.target[t], c.m) != target_level(&c);
                }
        }
    CU_ASSERT_EQUAL(wrong, 0);
}

/* 0.1 + 0.2 is not 0.3 in binary, yet a statistician means it to be. */
static void true_levels_are_tolerant(void)
{
    const double m[3] = {0.1, 0.1 + 0.2 - 1e-15, 0.4}, flat[3] = {1, 1 + 1e-12, 1};
    struct tiny_world w;
    tiny_init(&w, 3, 0);
    const struct target *effect = tiny_target(&w, &rule_minimum_effect, 0.2, OF_BEST);
    const struct target *optimal = tiny_target(&w, &rule_optimal, 0, OF_BEST);
    const struct target *ed = tiny_target(&w, &rule_effective_dose, 0.9, OF_BEST);
    CU_ASSERT_EQUAL(target_true_level(&w.d, effect, m), 1);
    CU_ASSERT_EQUAL(target_true_level(&w.d, optimal, m), 2);
    CU_ASSERT_EQUAL(target_true_level(&w.d, optimal, flat), 1);
    CU_ASSERT_EQUAL(target_true_level(&w.d, ed, flat), LEVEL_NONE);
    CU_ASSERT_EQUAL(target_true_level(&w.d, ed, m), 2);
}

static void true_levels_on_the_logit(void)
{
    const double rate[3] = {0.5, 0.73, 0.74}, sure[3] = {0, 1, 1};
    struct tiny_world w;
    tiny_init(&w, 3, 0);
    w.d.type = ENDPOINT_BINARY;
    struct target *t = tiny_target(&w, &rule_minimum_effect, 1, OF_BEST);
    t->link = true; /* logit 0.73 = 0.9946, logit 0.74 = 1.0460 */
    CU_ASSERT_EQUAL(target_true_level(&w.d, t, rate), 2);
    CU_ASSERT_EQUAL(target_true_level(&w.d, t, sure), 1);
}

static void sentences_name_what_is_compared(void)
{
    struct tiny_world w;
    struct text s = TEXT_INIT;
    tiny_init(&w, 3, 0);
    const struct target *t = tiny_target(&w, &rule_minimum_effect, 0.25, OF_BEST);
    t->rule->sentence(t, &w.d, &s);
    CU_ASSERT_STRING_EQUAL(text_s(&s),
                           "the lowest active level whose gain over A is at least 0.25");
    text_clear(&s);
    t = tiny_target(&w, &rule_within_margin, 0.5, 2);
    t->rule->sentence(t, &w.d, &s);
    CU_ASSERT_STRING_EQUAL(
        text_s(&s), "the lowest active level whose response is at most 0.5 worse than that of C");
    text_release(&s);
}

static const struct unit_test tests[] = {
    {"all draws of a tiny world with a control", with_control},
    {"without a control or reference", without_control},
    {"with a reference level", with_reference_level},
    {"with a reference number", with_reference_number},
    {"true levels follow the rules", true_levels_follow_the_rules},
    {"true levels carry a tolerance", true_levels_are_tolerant},
    {"true levels on the logit", true_levels_on_the_logit},
    {"sentences name what is compared", sentences_name_what_is_compared},
    UNIT_END};

int main(void)
{
    return unit_main("targets", tests);
}
