/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_awkward.c: every curve x endpoint on data that break weaker engines: flat, empty level, one
 * subject a level, no events, only events, complete separation, identical replicates, a million
 * subjects, responses of size 1e6 and 1e-6, 2 and 128 levels.
 *
 * A live analysis must end trusted (its second method, quadrature or slices, agrees), or say that
 * it does not trust itself, or refuse with a sentence; and never show a number that is not finite.
 */
#include <math.h>

#include "analysis/analysis.h"
#include "base/mem.h"
#include "small_design.h"
#include "unit.h"

static const char targets[] =
    ",\"targets\":{\"ED90\":{\"rule\":\"effective_dose\",\"fraction\":0.9},"
    "\"near\":{\"rule\":\"within_margin\",\"margin\":0.1},\"best\":{\"rule\":\"optimal\"}},"
    "\"allocation\":{\"adapt\":{\"target\":\"ED90\",\"information\":0.5}},"
    "\"decisions\":[{\"action\":\"stop_success\",\"if\":{\"measure\":\"pr_gain\",\"target\":"
    "\"ED90\",\"above\":0.99}}]";

/* rate or standardised mean at level k of K, and its number of subjects */
typedef double (*shape_fn)(size_t k, size_t K);
struct world {
    const char *name;
    double (*n)(size_t k, size_t K);
    shape_fn rate, mean;
    bool continuous, binary;
};

static double twelve(size_t k, size_t K)
{
    return (void)k, (void)K, 12.0;
}
static double one(size_t k, size_t K)
{
    return (void)k, (void)K, 1.0;
}
static double hole(size_t k, size_t K)
{
    return (void)K, k == 1 ? 0.0 : 12.0;
}
static double million(size_t k, size_t K)
{
    return (void)k, 1e6 / (double)K;
}
static double level_rate(size_t k, size_t K)
{
    return (void)k, (void)K, 0.3;
}
static double no_rate(size_t k, size_t K)
{
    return (void)k, (void)K, 0.0;
}
static double full_rate(size_t k, size_t K)
{
    return (void)k, (void)K, 1.0;
}
static double jump(size_t k, size_t K)
{
    return 2 * k < K ? 0.0 : 1.0;
}
static double rising(size_t k, size_t K)
{
    return 0.2 + 0.6 * (double)k / ((double)k + 0.2 * (double)K);
}
static double nothing(size_t k, size_t K)
{
    return (void)k, (void)K, 0.0;
}

static const struct world worlds[] = {
    {"flat", twelve, level_rate, nothing, true, true},
    {"an empty level", hole, rising, rising, true, true},
    {"one a level", one, rising, rising, true, true},
    {"no events", twelve, no_rate, NULL, false, true},
    {"only events", twelve, full_rate, NULL, false, true},
    {"separation", twelve, jump, NULL, false, true},
    {"a million", million, rising, rising, true, true},
};

static void fill(struct level_data *x, const struct world *w, bool binary, double scale)
{
    const size_t K = x->levels;
    for (size_t k = 0; k < K; k++) {
        x->n[k] = x->randomized[k] = floor(w->n(k, K));
        if (binary) {
            x->events[k] = floor(x->n[k] * w->rate(k, K) + 0.5);
        } else {
            x->mean[k] = x->n[k] > 0 ? scale * (w->mean(k, K) + 0.1 * sin(7.0 * (double)k)) : 0.0;
            x->ss[k] = x->n[k] > 1 ? (x->n[k] - 1.0) * scale * scale : 0.0;
        }
    }
}

static bool spread_is_finite(const struct spread *s)
{
    return isfinite(s->mean) && isfinite(s->sd) && isfinite(s->q025) && isfinite(s->q50) &&
           isfinite(s->q975);
}

/* sums to 1, nothing infinite, quantiles in order */
static void check_numbers(const struct analysis *a, const struct design *d, enum status status)
{
    for (size_t k = 0; k < a->levels; k++) {
        CU_ASSERT(spread_is_finite(&a->level[k].response));
        CU_ASSERT(spread_is_finite(&a->level[k].gain));
        CU_ASSERT(a->level[k].response.q025 <= a->level[k].response.q975);
    }
    for (size_t t = 0; t < a->targets; t++) {
        double sum = a->target[t].pr_none;
        for (size_t k = 0; k < a->levels; k++)
            sum += a->level[k].pr_target[t];
        CU_ASSERT_DOUBLE_EQUAL(sum, 1.0, 1e-9);
    }
    double shares = 0.0;
    for (size_t k = 0; status == STATUS_OK && k < d->levels; k++)
        shares += a->level[k].next_share;
    CU_ASSERT(status != STATUS_OK || fabs(shares - 1.0) < 1e-9);
    CU_ASSERT_EQUAL(status == STATUS_OK, a->diagnostics.trusted);
    CU_ASSERT_EQUAL(!a->diagnostics.trusted, a->recommendation == RECOMMEND_UNDETERMINED);
}

static void run(const char *curve, bool binary, size_t levels, const struct world *w, double scale,
                const char *model, bool must_be_trusted)
{
    struct text more = TEXT_INIT;
    struct err e = ERR_INIT;
    struct analyst *analyst;
    struct analysis a;
    struct level_data x;
    text_addf(&more, "%s,\"analyses\":{\"at\":[10]},\"mcmc\":{\"max_draws\":%d}", targets,
              unit_fast() ? 16000 : 64000);
    struct design *d = small_design(curve, binary, levels, model, text_s(&more));
    analyst = analyst_new(d);
    analysis_init(&a, d);
    level_data_init(&x, levels);
    fill(&x, w, binary, scale);
    const struct analysis_request r = {.number = 1,
                                       .point = 10,
                                       .adapted = true,
                                       .randomized = 100,
                                       .observed = 100,
                                       .seed = 8,
                                       .live = true,
                                       .threads = 2};
    const enum status status = analysis_run(&a, analyst, &x, &r, &e);
    CU_ASSERT_FATAL(status == STATUS_OK || status == STATUS_DISTRUSTED);
    if (must_be_trusted && status != STATUS_OK)
        fprintf(stderr, "%s%s %s %s: distrusted, kish %g, difference %g\n", curve, model,
                binary ? "binary" : "continuous", w->name, a.diagnostics.kish,
                a.diagnostics.second_difference);
    CU_ASSERT(!must_be_trusted || unit_fast() || status == STATUS_OK); /* FAST: short runs */
    check_numbers(&a, d, status);
    level_data_release(&x);
    analysis_release(&a);
    analyst_free(analyst);
    design_free(d);
    err_release(&e);
    text_release(&more);
}

static void every_world(bool binary)
{
    for (size_t i = 0; i < sizeof worlds / sizeof *worlds; i++) {
        if (!(binary ? worlds[i].binary : worlds[i].continuous))
            continue;
        for (size_t c = 0; curves[c]; c++)
            run(curves[c]->key, binary, 6, &worlds[i], 1.0, "",
                curves[c] != curve_find("logistic"));
        run("ndlm", binary, 6, &worlds[i], 1.0, ",\"spacing\":\"actual\"", true);
        /* and logistic: quadrature over a very narrow ridge may miss, and the run says so */
        run("ndlm", binary, 6, &worlds[i], 1.0, ",\"order\":2", false);
    }
}

static void continuous(void)
{
    every_world(false);
}

static void binary(void)
{
    every_world(true);
}

static void sizes(void)
{
    for (size_t c = 0; curves[c]; c++) {
        run(curves[c]->key, false, 2, &worlds[0], 1.0, "", true);
        run(curves[c]->key, true, 2, &worlds[0], 1.0, "", true);
        run(curves[c]->key, false, 128, &worlds[0], 1.0, "", false);
        run(curves[c]->key, true, 128, &worlds[0], 1.0, "", false);
    }
}

/* Priors that quarrel with the data, or hardly are priors: right or plainly distrusted. */
static void extreme_priors(void)
{
    static const char *const models[][2] = {
        {"emax", ",\"priors\":{\"Emax\":{\"student_t\":{\"df\":1,\"location\":0,\"scale\":1}}}"},
        {"emax", ",\"priors\":{\"ED50\":{\"student_t\":{\"df\":1,\"location\":5,\"scale\":10,"
                 "\"above\":0}}}"},
        {"emax", ",\"priors\":{\"E0\":{\"normal\":{\"mean\":0,\"sd\":1,\"above\":6}}}"},
        {"emax", ",\"priors\":{\"ED50\":{\"uniform\":{\"min\":400,\"max\":500}}}"},
        {"logistic", ",\"priors\":{\"ED50\":{\"normal\":{\"mean\":0,\"sd\":1,\"above\":8}}}"},
        {"ndlm", ",\"priors\":{\"drift_variance\":{\"inverse_gamma\":{\"shape\":0.001,"
                 "\"scale\":0.001}}}"},
        {"ndlm", ",\"priors\":{\"drift_sd\":{\"gamma\":{\"shape\":0.1,\"rate\":1}}}"},
        {"ndlm", ",\"order\":2,\"priors\":{\"slope\":{\"uniform\":{\"min\":2,\"max\":3}}}"},
        {"independent", ",\"priors\":{\"theta\":{\"student_t\":{\"df\":2,\"location\":0,"
                        "\"scale\":1}}}"},
    };
    for (size_t m = 0; m < sizeof models / sizeof *models; m++)
        for (int binary = 0; binary < 2; binary++)
            run(models[m][0], binary, 6, &worlds[1], 1.0, models[m][1], false);
}

/* priors of the responses' size, but the design's range of 16 says nothing of 1e6: give them */
static void scales(void)
{
    static const char *const models[][2] = {
        {"emax", ",\"priors\":{\"E0\":{\"normal\":{\"mean\":0,\"sd\":%g}},\"Emax\":{\"normal\":{"
                 "\"mean\":0,\"sd\":%g}},\"sd\":{\"half_normal\":{\"sd\":%g}}}"},
        {"sigmoid_emax",
         ",\"priors\":{\"E0\":{\"normal\":{\"mean\":0,\"sd\":%g}},\"Emax\":{\"normal\":{\"mean\":0,"
         "\"sd\":%g}},\"sd\":{\"half_normal\":{\"sd\":%g}}}"},
        {"ndlm", ",\"priors\":{\"theta\":{\"normal\":{\"mean\":0,\"sd\":%g}},\"drift_sd\":{\"half_"
                 "normal\":{\"sd\":%g}},\"sd\":{\"half_normal\":{\"sd\":%g}}}"},
    };
    static const double size[] = {1e6, 1e-6};
    for (size_t m = 0; m < 3; m++)
        for (size_t s = 0; s < 2; s++) {
            char model[400];
            const double A = 4.0 * size[s];
#pragma GCC diagnostic push
#pragma GCC diagnostic ignored "-Wformat-nonliteral"
            snprintf(model, sizeof model, models[m][1], A, A, A);
#pragma GCC diagnostic pop
            run(models[m][0], false, 6, &worlds[1], size[s], model, true);
        }
}

static void identical(void)
{
    struct err e = ERR_INIT;
    struct level_data x;
    for (int lower_bound = 0; lower_bound < 2; lower_bound++) {
        struct design *d = small_design(
            "emax", false, 4,
            lower_bound ? ",\"priors\":{\"sd\":{\"lognormal\":{\"meanlog\":0,\"sdlog\":1}}}" : "",
            "");
        struct plan *plan;
        plan = plan_new(d, &d->model);
        struct posterior *p = posterior_new(plan);
        level_data_init(&x, 4);
        for (size_t k = 0; k < 4; k++) {
            x.n[k] = 3;
            x.mean[k] = 1.5;
        }
        const enum status status = posterior_start(p, &x, (struct rng_key){.seed = 1}, &e);
        CU_ASSERT_EQUAL(status, lower_bound ? STATUS_OK : STATUS_INPUT);
        if (!lower_bound)
            CU_ASSERT_PTR_NOT_NULL(
                strstr(e.faults[0].message, "give sd a prior that vanishes at 0"));
        level_data_release(&x);
        posterior_free(p);
        plan_free(plan);
        design_free(d);
    }
    err_release(&e);
}

static const struct unit_test tests[] = {
    {"continuous endpoints", continuous},
    {"binary endpoints", binary},
    {"2 and 128 levels", sizes},
    {"responses of size 1e6 and 1e-6", scales},
    {"identical replicates", identical},
    {"extreme priors", extreme_priors},
    UNIT_END,
};

int main(void)
{
    return unit_main("awkward", tests);
}
