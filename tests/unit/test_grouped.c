/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_grouped.c: grouped simulated fits: the lattice's points follow the proposal's density, the
 * figures are those of long runs of the chains, and the errors told are those made. */
#include <math.h>

#include "analysis/analysis.h"
#include "analysis/decide.h"
#include "posterior/grid_inverse.h"
#include "posterior/grouped.h"
#include "posterior/posterior.h"
#include "small_design.h"
#include "unit.h"

enum { K = 5 };

/* ---- points by inversion ---- */

/* a grid with uneven weights; folds as told */
static void make_grid(struct proposal *q, size_t dims, bool low, bool high)
{
    *q = (struct proposal){.dims = dims, .nodes = {dims == 2 ? NODES_FIRST : NODES_ONE, 1}};
    if (dims == 2)
        q->nodes[1] = NODES_SECOND;
    for (size_t d = 0; d < dims; d++) {
        q->low[d] = 2.0 - 3.0 * (double)d;
        q->step[d] = 0.25 + 0.5 * (double)d;
        q->inverse_step[d] = 1.0 / q->step[d];
        q->high[d] = q->low[d] + q->step[d] * (double)(q->nodes[d] - 1);
        q->folds_low[d] = low;
        q->folds_high[d] = high;
    }
    for (size_t r = 1; r <= q->nodes[0]; r++)
        for (size_t c = 1; c <= q->nodes[1]; c++)
            q->cell[r * (q->nodes[1] + 2) + c].weight =
                0.1 + (double)((r * 7 + c * 5) % 11) + (r == 3 ? 6.0 : 0.0);
}

/* weight at a point by bilinear interpolation, written from the definition */
static double density_of(const struct proposal *q, const double *x)
{
    double sum = 0;
    for (size_t r = 1; r <= q->nodes[0]; r++)
        for (size_t c = 1; c <= q->nodes[1]; c++) {
            double tent =
                fmax(0, 1 - fabs(x[0] - (q->low[0] + q->step[0] * ((double)r - 1))) / q->step[0]);
            if (q->dims == 2)
                tent *= fmax(0, 1 - fabs(x[1] - (q->low[1] + q->step[1] * ((double)c - 1))) /
                                        q->step[1]);
            sum += tent * q->cell[r * (q->nodes[1] + 2) + c].weight;
        }
    return sum;
}

/* E cos(a x + b y) by inversion on a fine grid of uniforms, and by integration of the density */
static void check_grid(size_t dims, bool low, bool high)
{
    enum { FINE = 400 };
    struct proposal q;
    struct grid_inverse g;
    double sum = 0, mass = 0, integral = 0;
    make_grid(&q, dims, low, high);
    grid_inverse_fill(&g, &q);
    const size_t second = dims == 2 ? FINE : 1;
    for (size_t i = 0; i < FINE; i++)
        for (size_t j = 0; j < second; j++) {
            double u0 = ((double)i + 0.5) / FINE, u1 = ((double)j + 0.5) / FINE, x[2] = {0, 0};
            double *const u[SHAPES_MAX] = {&u0, &u1};
            double *const coord[SHAPES_MAX] = {&x[0], &x[1]};
            grid_inverse_place(&g, &q, 1, u, coord);
            sum += cos(1.3 * x[0] + 0.4 * x[1]) / (double)(FINE * second);
            CU_ASSERT(!low || x[0] >= q.low[0] - 1e-12);
            CU_ASSERT(!high || x[0] <= q.high[0] + 1e-12);
            double at[2] = {0, 0};
            for (size_t d = 0; d < dims; d++) {
                const double from = q.low[d] - (low ? 0 : q.step[d]);
                const double to = q.high[d] + (high ? 0 : q.step[d]);
                at[d] = from + (to - from) * (d == 0 ? u0 : u1);
            }
            const double w = density_of(&q, at);
            mass += w;
            integral += w * cos(1.3 * at[0] + 0.4 * at[1]);
        }
    CU_ASSERT_DOUBLE_EQUAL(sum, integral / mass, 2e-4);
}

static void points_follow_the_density(void)
{
    for (size_t dims = 1; dims <= 2; dims++)
        for (int folds = 0; folds < 4; folds++)
            check_grid(dims, folds & 1, folds & 2);
}

/* ---- whole fits ---- */

static const struct {
    const char *curve, *more;
} fits[] = {{"ndlm", ""},       {"emax", ""},   {"sigmoid_emax", ""},
            {"logistic", ""},   {"linear", ""}, {"ndlm", ",\"order\":2"},
            {"independent", ""}};

static double n[K] = {10, 9, 11, 8, 12}, mean[K] = {0.1, 0.9, 1.3, 1.2, 1.9},
              ss[K] = {30, 22, 41, 27, 36}, events[K];

static const char decisions[] =
    ",\"targets\":{\"T\":{\"rule\":\"effective_dose\",\"fraction\":0.9}},"
    "\"analyses\":{\"at\":[50]},\"decisions\":["
    "{\"action\":\"stop_success\",\"if\":{\"measure\":\"pr_gain\",\"level\":\"L3\",\"gain\":1,"
    "\"above\":0.9}},"
    "{\"action\":\"stop_success\",\"if\":{\"measure\":\"pr_any_gain\",\"gain\":1.5,\"above\":0.9}},"
    "{\"action\":\"stop_success\",\"if\":{\"measure\":\"pr_level\",\"target\":\"T\",\"above\":0.9}}"
    "]";

enum { FIGURES = 5 };

/* Pr(gain of L3 > 1), Pr(any gain > 1.5), Pr(the selected level is the target), Pr(L3 is the
 * target), mean of L3; and the errors told */
static void figures_of(const struct analysis *a, double *value, double *told)
{
    for (size_t i = 0; i < 3; i++) {
        value[i] = a->decision[i].condition[0].value;
        told[i] = a->decision[i].condition[0].mcse;
    }
    value[3] = a->level[3].pr_target[0];
    told[3] = a->level[3].mcse_target[0];
    value[4] = a->level[3].response.mean;
    told[4] = NAN;
}

static struct analysis_request request(uint32_t trial, bool live)
{
    return (struct analysis_request){.number = 1,
                                     .point = 50,
                                     .randomized = 50,
                                     .observed = 50,
                                     .seed = 5,
                                     .scenario = live ? 0 : 1,
                                     .trial = trial,
                                     .live = live,
                                     .threads = 1};
}

static void check_fit(const char *curve, const char *more)
{
    const uint32_t repeats = unit_fast() ? 100 : 400;
    struct design *d = small_design(curve, false, K, more, decisions);
    struct err e = ERR_INIT;
    struct analyst *w;
    struct analysis a;
    struct level_data x = {K, n, n, mean, ss, events};
    double sum[FIGURES] = {0}, squares[FIGURES] = {0}, errors[FIGURES] = {0};
    double truth[FIGURES], value[FIGURES], told[FIGURES];
    d->max_draws = 128000;
    d->precision = 0.0015;
    w = analyst_new(d);
    analysis_init(&a, d);
    struct analysis_request r = request(0, true);
    CU_ASSERT_EQUAL(analysis_run(&a, w, &x, &r, &e), STATUS_OK);
    figures_of(&a, truth, told);
    for (uint32_t i = 0; i < repeats; i++) {
        r = request(i + 1, false);
        CU_ASSERT_EQUAL(analysis_run(&a, w, &x, &r, &e), STATUS_OK);
        CU_ASSERT(analyst_draws(w).points < analyst_draws(w).n);
        figures_of(&a, value, told);
        for (size_t f = 0; f < FIGURES; f++) {
            sum[f] += value[f] / repeats;
            squares[f] += value[f] * value[f] / repeats;
            errors[f] += told[f] * told[f] / repeats;
        }
    }
    for (size_t f = 0; f < FIGURES; f++) {
        const double made = sqrt(fmax(0, squares[f] - sum[f] * sum[f]));
        /* the long run's own error, 0.0015 for a probability, and self-normalising weights */
        CU_ASSERT_DOUBLE_EQUAL(sum[f], truth[f], 4.5 * made / sqrt(repeats) + 0.005);
        if (f < 3) { /* from averages over stretches: right on average */
            CU_ASSERT(made < 1.3 * sqrt(errors[f]));
            CU_ASSERT(made > 0.4 * sqrt(errors[f]) || made < 1e-3);
        }
        if (f == 3) /* counted by points alone: never too small */
            CU_ASSERT(made < 1.15 * sqrt(errors[f]));
    }
    analysis_release(&a);
    analyst_free(w);
    design_free(d);
}

static void figures_and_errors(void)
{
    for (size_t i = 0; i < sizeof fits / sizeof *fits; i++)
        check_fit(fits[i].curve, fits[i].more);
}

/* ---- when ---- */

static void when_fits_are_grouped(void)
{
    struct design *d = small_design("ndlm", false, K, "", "");
    struct design *b = small_design("ndlm", true, K, "", "");
    struct err e = ERR_INIT;
    struct analyst *w;
    struct analysis a;
    struct level_data x = {K, n, n, mean, ss, events};
    const struct analysis_request r = request(1, false);
    d->draws = 200; /* too few sets for honest errors */
    w = analyst_new(d);
    analysis_init(&a, d);
    CU_ASSERT_EQUAL(analysis_run(&a, w, &x, &r, &e), STATUS_OK);
    CU_ASSERT_EQUAL(analyst_draws(w).points, 200);
    analysis_release(&a);
    analyst_free(w);
    w = analyst_new(b);
    analysis_init(&a, b);
    CU_ASSERT_EQUAL(analysis_run(&a, w, &x, &r, &e), STATUS_OK);
    CU_ASSERT_EQUAL(analyst_draws(w).points, analyst_draws(w).n);
    analysis_release(&a);
    analyst_free(w);
    design_free(d);
    design_free(b);
}

static const struct unit_test tests[] = {
    {"points by inversion follow the grid's density", points_follow_the_density},
    {"figures of long runs, and honest errors", figures_and_errors},
    {"when fits are grouped", when_fits_are_grouped},
    UNIT_END,
};

int main(void)
{
    return unit_main("grouped", tests);
}
