/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_allocate.c: shares: hand-computed examples, and bounds against a naive bisection. */
#include <math.h>

#include "analysis/allocate.h"
#include "analysis/share_bounds.h"
#include "analysis/targets.h"
#include "tiny_world.h"
#include "unit.h"

enum { WORLDS = 4000, BISECTIONS = 200 };

#define NEAR(a, b) CU_ASSERT_DOUBLE_EQUAL(a, b, 1e-12)

static const bool all_open[TINY_LEVELS] = {true, true, true, true, true, true, true, true};
static const double ones[TINY_LEVELS] = {1, 1, 1, 1, 1, 1, 1, 1};

static void shares(double *out, struct share_remarks *remarks, const struct tiny_world *w,
                   const double *p, double none, const double *variance, const double *n,
                   const bool *open)
{
    double total = 0;
    for (size_t k = 0; k < w->d.levels; k++)
        total += n[k];
    const struct share_inputs in = {&w->d, open, p, none, variance, n, total};
    allocate_adapted(out, remarks, &in);
}

static void world(struct tiny_world *w, int control)
{
    tiny_init(w, 4, control);
    tiny_target(w, &rule_optimal, 0, OF_BEST);
}

/* Placebo and three levels; none 0.3 adds 0.1 to each. */
static void first_step_by_hand(void)
{
    const double p[4] = {0, 0.1, 0.2, 0.4}, n[4] = {9, 9, 9, 9};
    double a[4];
    struct share_remarks r;
    struct tiny_world w;
    world(&w, 0);
    w.d.allocation.control_share = 0.25;
    shares(a, &r, &w, p, 0.3, ones, n, all_open);
    NEAR(a[0], 0.25);
    NEAR(a[1], 0.75 * 0.2);
    NEAR(a[2], 0.75 * 0.3);
    NEAR(a[3], 0.75 * 0.5);
    w.d.allocation.power = 2;
    shares(a, &r, &w, p, 0.3, ones, n, all_open);
    NEAR(a[1], 0.75 * 4 / 38);
    NEAR(a[3], 0.75 * 25 / 38);
    w.d.allocation.control_kind = CONTROL_SHARE_AS_LARGEST;
    shares(a, &r, &w, p, 0.3, ones, n, all_open);
    NEAR(a[0], a[3]);
    NEAR(a[0], 25.0 / 38 / (1 + 25.0 / 38));
}

/* (Var / (n + 1))^information; 0^0 = 1; without a control the shares are a. */
static void information_by_hand(void)
{
    const double p[4] = {0.25, 0.25, 0.5, 0}, n[4] = {3, 0, 7, 1}, v[4] = {4, 1, 2, 0};
    double a[4];
    struct share_remarks r;
    struct tiny_world w;
    world(&w, LEVEL_NONE);
    w.d.allocation.information = 1;
    shares(a, &r, &w, p, 0, v, n, all_open); /* 0.25, 0.25, 0.125, 0 */
    NEAR(a[0], 0.4);
    NEAR(a[1], 0.4);
    NEAR(a[2], 0.2);
    NEAR(a[3], 0);
    w.d.allocation.information = 0.5; /* 0.25, 0.25, 0.25, 0 */
    shares(a, &r, &w, p, 0, v, n, all_open);
    NEAR(a[0], 1.0 / 3);
    NEAR(a[2], 1.0 / 3);
    w.d.allocation.information = 0;
    w.d.allocation.power = 0;
    shares(a, &r, &w, p, 0, v, n, all_open);
    NEAR(a[3], 0.25);
}

static void power_n_over_2n(void)
{
    const double p[4] = {0.04, 0.16, 0.64, 0.16}, n[4] = {25, 25, 25, 25};
    double a[4];
    struct share_remarks r;
    struct tiny_world w;
    world(&w, LEVEL_NONE);
    w.d.allocation.power_kind = POWER_N_OVER_2N;
    w.d.subjects = 100; /* n = 100, power 1/2: 0.2, 0.4, 0.8, 0.4 */
    shares(a, &r, &w, p, 0, ones, n, all_open);
    NEAR(a[0], 0.2 / 1.8);
    NEAR(a[2], 0.8 / 1.8);
}

static void all_zero_weights_share_equally(void)
{
    const double p[4] = {0, 0.5, 0.5, 0}, n[4] = {0}, v[4] = {1, 0, 0, 1};
    const bool open[4] = {true, true, true, false};
    double a[4];
    struct share_remarks r;
    struct tiny_world w;
    world(&w, 0);
    w.d.allocation.information = 1;
    w.d.allocation.control_share = 0;
    w.d.allocation.drop_below = 0.6; /* both are the largest, and stay */
    shares(a, &r, &w, p, 0, v, n, open);
    CU_ASSERT_TRUE(r.all_zero);
    NEAR(a[0], 0);
    NEAR(a[1], 0.5);
    NEAR(a[2], 0.5);
    NEAR(a[3], 0);
}

static void dropping(void)
{
    const double p[4] = {0.04, 0.06, 0.3, 0.6}, n[4] = {0};
    double a[4];
    struct share_remarks r;
    struct tiny_world w;
    world(&w, LEVEL_NONE);
    w.d.allocation.drop_below = 0.05;
    shares(a, &r, &w, p, 0, ones, n, all_open);
    NEAR(a[0], 0);
    NEAR(a[1], 0.06 / 0.96);
    NEAR(a[3], 0.6 / 0.96);
    w.d.allocation.drop_below = 0.9; /* the largest stays */
    shares(a, &r, &w, p, 0, ones, n, all_open);
    NEAR(a[3], 1);
    w.target[0].of = 1; /* levels that serve for comparison are never dropped */
    w.d.reference_level = 0;
    shares(a, &r, &w, p, 0, ones, n, all_open);
    NEAR(a[0], 0.04 / 0.7);
    NEAR(a[1], 0.06 / 0.7);
    NEAR(a[2], 0);
}

/* A dropped level has no least share. */
static void bounds_after_dropping(void)
{
    const double p[4] = {0.01, 0.1, 0.2, 0.69}, n[4] = {0};
    double a[4];
    struct share_remarks r;
    struct tiny_world w;
    world(&w, LEVEL_NONE);
    w.d.allocation.drop_below = 0.05;
    for (size_t k = 0; k < 4; k++) {
        w.at_least[k] = 0.15;
        w.at_most[k] = 0.6;
    }
    shares(a, &r, &w, p, 0, ones, n, all_open);
    NEAR(a[0], 0);
    NEAR(a[1], 0.15);
    NEAR(a[2], 0.25);
    NEAR(a[3], 0.6);
    for (size_t k = 0; k < 4; k++)
        w.at_most[k] = 0.3; /* three levels cannot reach 1 */
    shares(a, &r, &w, p, 0, ones, n, all_open);
    CU_ASSERT_TRUE(r.no_bounds);
    NEAR(a[0], 0);
    NEAR(a[1], 1.0 / 3);
    NEAR(a[3], 1.0 / 3);
}

static void what_is_missing_is_shared(void)
{
    const double p[4] = {0, 0, 0, 1}, n[4] = {0};
    double a[4];
    struct share_remarks r;
    struct tiny_world w;
    world(&w, LEVEL_NONE);
    w.at_most[3] = 0.4;
    w.at_most[0] = 0.1;
    shares(a, &r, &w, p, 0, ones, n, all_open);
    CU_ASSERT_TRUE(r.filled_up);
    NEAR(a[0], 0.1);
    NEAR(a[1], 0.25);
    NEAR(a[2], 0.25);
    NEAR(a[3], 0.4);
}

static void closed_levels_get_nothing(void)
{
    const double p[4] = {0, 0.25, 0, 0.25}, n[4] = {0};
    const bool open[4] = {true, true, false, true};
    double a[4];
    struct share_remarks r;
    struct tiny_world w;
    world(&w, 0);
    w.d.allocation.control_share = 0.2;
    shares(a, &r, &w, p, 0.5, ones, n, open);
    NEAR(a[0], 0.2);
    NEAR(a[1], 0.4);
    CU_ASSERT_EQUAL(a[2], 0);
    w.ratio[3] = 2;
    allocate_fixed(a, &w.d, open);
    CU_ASSERT_EQUAL(a[0], 0.25);
    CU_ASSERT_EQUAL(a[2], 0);
    CU_ASSERT_EQUAL(a[3], 0.5);
}

/* ---- bounds against bisection ---- */

static double held(double x, double low, double high)
{
    return fmin(high, fmax(low, x));
}

static double total(size_t n, const double *a, const double *least, const double *most, double l)
{
    double sum = 0;
    for (size_t k = 0; k < n; k++)
        sum += held(l * a[k], least[k], most[k]);
    return sum;
}

static double bisect(size_t n, const double *a, const double *least, const double *most)
{
    double low = 0, high = 1e6;
    for (int i = 0; i < BISECTIONS; i++) {
        const double middle = (low + high) / 2;
        if (total(n, a, least, most, middle) < 1)
            low = middle;
        else
            high = middle;
    }
    return high;
}

/* Whole hundredths, so that bounds and shares often coincide. */
static size_t random_case(uint64_t *state, double *a, double *least, double *most)
{
    const size_t n = 1 + tiny_random(state, TINY_LEVELS);
    double sum = 0;
    for (size_t k = 0; k < n; k++) {
        a[k] = tiny_random(state, 3) == 0 ? 0 : (double)tiny_random(state, 50);
        least[k] = (double)tiny_random(state, 26) / 100;
        most[k] = fmin(1, least[k] + (double)tiny_random(state, 60) / 100);
        sum += a[k];
    }
    if (!(sum > 0))
        sum = a[0] = 1;
    for (size_t k = 0; k < n; k++)
        a[k] /= sum;
    return n;
}

static double sum_of(size_t n, const double *x)
{
    double sum = 0;
    for (size_t k = 0; k < n; k++)
        sum += x[k];
    return sum;
}

static void check_case(size_t n, const double *a, const double *least, const double *most,
                       int *seen)
{
    double x[TINY_LEVELS], lambda = bisect(n, a, least, most), reach = 0;
    for (size_t k = 0; k < n; k++) {
        x[k] = a[k];
        reach += a[k] > 0 ? most[k] : least[k];
    }
    const enum bounds_outcome got = share_bounds(n, x, least, most);
    const bool impossible = sum_of(n, most) < 1 - 1e-9 || sum_of(n, least) > 1 + 1e-9;
    seen[got]++;
    CU_ASSERT_DOUBLE_EQUAL(sum_of(n, x), 1, 1e-9);
    CU_ASSERT_EQUAL(got, impossible         ? BOUNDS_EQUAL
                         : reach < 1 - 1e-9 ? BOUNDS_FILLED_UP
                                            : BOUNDS_KEPT);
    for (size_t k = 0; k < n; k++) {
        if (got != BOUNDS_EQUAL)
            CU_ASSERT(x[k] >= least[k] - 1e-12 && x[k] <= most[k] + 1e-12);
        if (got == BOUNDS_EQUAL)
            NEAR(x[k], 1 / (double)n);
        if (got == BOUNDS_KEPT)
            CU_ASSERT_DOUBLE_EQUAL(x[k], held(lambda * a[k], least[k], most[k]), 1e-9);
        if (got == BOUNDS_FILLED_UP && a[k] > 0)
            CU_ASSERT_EQUAL(x[k], most[k]);
    }
    /* equal additions: whoever is below its most got no less than anybody else */
    for (size_t k = 0; got == BOUNDS_FILLED_UP && k < n; k++)
        for (size_t i = 0; i < n; i++)
            if (!(a[k] > 0) && !(a[i] > 0) && x[k] < most[k] - 1e-9)
                CU_ASSERT(x[k] - least[k] >= x[i] - least[i] - 1e-9);
}

static void bounds_against_bisection(void)
{
    uint64_t state = 20261201;
    int seen[3] = {0};
    for (int i = 0; i < WORLDS; i++) {
        double a[TINY_LEVELS], least[TINY_LEVELS], most[TINY_LEVELS];
        const size_t n = random_case(&state, a, least, most);
        check_case(n, a, least, most, seen);
    }
    for (int i = 0; i < 3; i++)
        CU_ASSERT(seen[i] > 50);
}

static void bounds_that_do_not_bind_change_nothing(void)
{
    const double least[3] = {0}, most[3] = {1, 1, 1}, a[3] = {0.1, 0.2, 0.7};
    double x[3] = {0.1, 0.2, 0.7};
    CU_ASSERT_EQUAL(share_bounds(3, x, least, most), BOUNDS_KEPT);
    for (size_t k = 0; k < 3; k++)
        CU_ASSERT_EQUAL(x[k], a[k]);
}

static const struct unit_test tests[] = {
    {"step 1 and the control's share by hand", first_step_by_hand},
    {"information by hand", information_by_hand},
    {"power n/2N", power_n_over_2n},
    {"all weights zero", all_zero_weights_share_equally},
    {"dropping", dropping},
    {"bounds after dropping", bounds_after_dropping},
    {"what is missing is shared", what_is_missing_is_shared},
    {"closed levels get nothing", closed_levels_get_nothing},
    {"bounds against bisection", bounds_against_bisection},
    {"bounds that do not bind", bounds_that_do_not_bind_change_nothing},
    UNIT_END};

int main(void)
{
    return unit_main("allocate", tests);
}
