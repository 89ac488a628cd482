/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_expected.c: expected counts at planned analyses against hand-made values. */
#include <math.h>

#include "design/expected.h"
#include "unit.h"

#define NEAR(a, b) CU_ASSERT_DOUBLE_EQUAL(a, b, 1e-9)

/* A design as far as expected.c reads it: 2 levels, 240 subjects, rates 3 then 6 from week 8. */
struct small {
    struct rate_step rates[2];
    double dropout[2], ratio[2], at[3];
    struct design d;
};

static void small_init(struct small *s)
{
    static const struct small start = {.dropout = {0.1, 0.1}, .ratio = {1, 1}, .at = {60, 90, 120}};
    *s = start;
    s->rates[0] = (struct rate_step){0, 3};
    s->rates[1] = (struct rate_step){8, 6};
    s->d.levels = 2;
    s->d.subjects = 240;
    s->d.observed_after = 4;
    s->d.dropout = s->dropout;
    s->d.accrual = (struct accrual){2, s->rates};
    s->d.allocation.ratio = s->ratio;
    s->d.analyses.counted = COUNTED_RANDOMIZED;
    s->d.analyses.count = 3;
    s->d.analyses.at = s->at;
}

static void arrivals_and_their_times(void)
{
    struct small s;
    small_init(&s);
    NEAR(expected_arrivals(&s.d.accrual, 0), 0);
    NEAR(expected_arrivals(&s.d.accrual, 4), 12);
    NEAR(expected_arrivals(&s.d.accrual, 8), 24);
    NEAR(expected_arrivals(&s.d.accrual, 10), 36);
    NEAR(expected_arrival_time(&s.d.accrual, 12), 4);
    NEAR(expected_arrival_time(&s.d.accrual, 240), 44);
    s.rates[1].rate = 0;
    CU_ASSERT_TRUE(isinf(expected_arrival_time(&s.d.accrual, 25)));
}

/* The check value of the formula: rate 6, L = 4, f = 0.1 at time 10. */
static void check_value(void)
{
    struct small s;
    small_init(&s);
    s.rates[0].rate = 6;
    s.at[0] = 10;
    s.d.analyses.counted = COUNTED_TIME;
    s.d.analyses.count = 1;
    struct expected x;
    expected_init(&x, &s.d);
    NEAR(x.cut[0].time, 10);
    NEAR(x.cut[0].randomized, 60);
    NEAR(x.cut[0].observed, 32.4);
    NEAR(x.cut[0].dropped, 4.8);
    NEAR(x.cut[0].pending, 22.8);
    CU_ASSERT_TRUE(x.cut[0].held);
    expected_release(&x);
}

/* Across the change of rate: R(14) = 60, R(10) = 36, area from 10 to 14 = 192. */
static void counted_by_randomized(void)
{
    struct small s;
    small_init(&s);
    struct expected x;
    expected_init(&x, &s.d);
    NEAR(x.cut[0].time, 14);
    NEAR(x.cut[0].randomized, 60);
    NEAR(x.cut[0].observed, 0.9 * 36);
    NEAR(x.cut[0].dropped, 0.1 * 192 / 4);
    NEAR(x.cut[2].time, 24);
    NEAR(x.last.time, 48);
    NEAR(x.last.observed, 216);
    NEAR(x.last.dropped, 24);
    NEAR(x.last.pending, 0);
    CU_ASSERT_TRUE(isnan(x.last.point));
    expected_release(&x);
}

static void counted_by_observed(void)
{
    struct small s;
    small_init(&s);
    s.d.analyses.counted = COUNTED_OBSERVED;
    struct expected x;
    expected_init(&x, &s.d);
    /* 0.9 R(t - 4) = 60: R = 66.67 at 8 + 42.67/6, and 4 more */
    NEAR(x.cut[0].time, 8 + (60 / 0.9 - 24) / 6 + 4);
    NEAR(x.cut[0].observed, 60);
    expected_release(&x);
}

static void failure_counts_dropouts(void)
{
    struct small s;
    small_init(&s);
    s.d.dropped = DROPPED_FAILURE;
    struct expected x;
    expected_init(&x, &s.d);
    NEAR(x.cut[0].observed, 0.9 * 36 + 0.1 * 192 / 4);
    NEAR(x.cut[0].dropped, 0);
    NEAR(x.cut[0].observed + x.cut[0].pending, 60);
    NEAR(x.last.observed, 240);
    expected_release(&x);
}

static void observed_at_once(void)
{
    struct small s;
    small_init(&s);
    s.d.observed_after = 0;
    struct expected x;
    expected_init(&x, &s.d);
    NEAR(x.cut[0].observed, 54);
    NEAR(x.cut[0].dropped, 6);
    NEAR(x.cut[0].pending, 0);
    expected_release(&x);
}

static void not_held_after_enrolment(void)
{
    struct small s;
    small_init(&s);
    s.at[1] = 200;
    s.at[2] = 230;
    s.d.analyses.counted = COUNTED_OBSERVED;
    struct expected x;
    expected_init(&x, &s.d);
    CU_ASSERT_TRUE(x.cut[0].held);
    CU_ASSERT_FALSE(x.cut[1].held); /* reached while the last subjects are followed up */
    CU_ASSERT_FALSE(x.cut[2].held); /* more than will ever be observed */
    CU_ASSERT_TRUE(isnan(x.cut[2].observed));
    expected_release(&x);
}

static void cuts_wait_for_the_lag(void)
{
    struct small s;
    small_init(&s);
    s.d.analyses.lag = 6;
    struct expected x;
    expected_init(&x, &s.d);
    CU_ASSERT_FALSE(x.cut[0].delayed);
    CU_ASSERT_TRUE(x.cut[1].delayed); /* due at 19, the first decision is in force at 20 */
    NEAR(x.cut[1].time, 20);
    NEAR(x.cut[1].randomized, 96);
    expected_release(&x);
}

static void adapted_shares_wait_for_the_start(void)
{
    struct small s;
    small_init(&s);
    s.d.allocation.adapts = true;
    s.d.allocation.start_per_level = 40; /* 80 subjects: not before the second analysis */
    s.d.analyses.lag = 1;
    struct expected x;
    expected_init(&x, &s.d);
    NEAR(x.adapts_from, 20);
    expected_release(&x);
}

static void dropout_is_weighted_by_the_ratio(void)
{
    struct small s;
    small_init(&s);
    s.ratio[1] = 3;
    s.dropout[0] = 0.4;
    s.dropout[1] = 0;
    struct expected x;
    expected_init(&x, &s.d);
    NEAR(x.last.dropped, 24);
    expected_release(&x);
}

static void without_rates_only_what_is_planned(void)
{
    struct small s;
    small_init(&s);
    s.d.accrual.count = 0;
    struct expected x;
    expected_init(&x, &s.d);
    CU_ASSERT_FALSE(x.timed);
    NEAR(x.cut[0].randomized, 60);
    CU_ASSERT_TRUE(isnan(x.cut[0].observed));
    CU_ASSERT_TRUE(isnan(x.cut[0].time));
    CU_ASSERT_TRUE(isnan(x.last.time));
    NEAR(x.last.observed, 216);
    expected_release(&x);
}

static void gains_are_signed(void)
{
    struct small s;
    small_init(&s);
    const double response[] = {1, 3};
    s.d.reference_level = 0;
    s.d.control = 0;
    s.d.higher_is_better = false;
    NEAR(expected_gain(&s.d, response, 1), -2);
    s.d.control = s.d.reference_level = LEVEL_NONE;
    CU_ASSERT_TRUE(isnan(expected_gain(&s.d, response, 1)));
    s.d.has_reference_number = true;
    s.d.reference_number = 4;
    NEAR(expected_gain(&s.d, response, 1), 1);
}

static const struct unit_test tests[] = {
    {"arrivals and their times", arrivals_and_their_times},
    {"check value", check_value},
    {"counted by randomized", counted_by_randomized},
    {"counted by observed", counted_by_observed},
    {"failure counts dropouts", failure_counts_dropouts},
    {"observed at once", observed_at_once},
    {"not held after enrolment", not_held_after_enrolment},
    {"cuts wait for the lag", cuts_wait_for_the_lag},
    {"adapted shares wait for the start", adapted_shares_wait_for_the_start},
    {"dropout is weighted by the ratio", dropout_is_weighted_by_the_ratio},
    {"without rates only what is planned", without_rates_only_what_is_planned},
    {"gains are signed", gains_are_signed},
    UNIT_END};

int main(void)
{
    return unit_main("expected", tests);
}
