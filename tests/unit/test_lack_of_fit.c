/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_lack_of_fit.c: the posterior predictive probability of the discrepancy between levels:
 * chi-square tails, binomial draws, repetition by simulation, right and wrong curves.
 */
#include <gsl/gsl_cdf.h>
#include <gsl/gsl_randist.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "analysis/analysis.h"
#include "analysis/binomial.h"
#include "analysis/lack_of_fit.h"
#include "analysis/vocabulary_rows.h"
#include "base/mem.h"
#include "unit.h"

/* ---- chi-square ---- */

static void tails_are_those_of_the_handbook(void)
{
    /* Abramowitz & Stegun, table 26.8: upper 5% and 0.1% points */
    CU_ASSERT_DOUBLE_EQUAL(chi_square_tail(3.84146, 1), 0.05, 1e-6);
    CU_ASSERT_DOUBLE_EQUAL(chi_square_tail(5.99146, 2), 0.05, 1e-6);
    CU_ASSERT_DOUBLE_EQUAL(chi_square_tail(11.0705, 5), 0.05, 1e-6);
    CU_ASSERT_DOUBLE_EQUAL(chi_square_tail(29.588, 10), 0.001, 1e-6);
    CU_ASSERT_EQUAL(chi_square_tail(0, 7), 1);
    CU_ASSERT_EQUAL(chi_square_tail(1e9, 128), 0);
    CU_ASSERT_EQUAL(chi_square_tail(INFINITY, 3), 0);
}

static void tails_agree_with_gsl(void)
{
    for (size_t df = 1; df <= 128; df++)
        for (double x = 0.1; x < 400; x *= 1.7) {
            const double there = gsl_cdf_chisq_Q(x, (double)df);
            CU_ASSERT_DOUBLE_EQUAL(chi_square_tail(x, df), there, 2e-8 * there + 1e-300);
        }
}

/* ---- binomial draws ---- */

/* Pearson's statistic of 40,000 draws against the exact probabilities, cells of at least 20. */
static double pearson(double n, double p, uint64_t seed, size_t *df)
{
    enum { DRAWS = 40000, MOST = 4096 };
    static unsigned seen[MOST];
    const struct rng_key key = {seed, RNG_REPEATED, 0, 0, 1};
    struct rng_serial r;
    double statistic = 0, expected = 0, found = 0;
    const double first = fmax(0, floor(n * p - MOST / 2));
    rng_serial_init(&r, &key);
    memset(seen, 0, sizeof seen);
    for (int i = 0; i < DRAWS; i++) {
        const double k = binomial_draw(&r, n, p);
        CU_ASSERT_FATAL(k >= 0 && k <= n && k >= first && k < first + MOST);
        seen[(size_t)(k - first)]++;
    }
    *df = 0;
    for (size_t c = 0; c < MOST && first + (double)c <= n; c++) {
        expected += DRAWS * gsl_ran_binomial_pdf((unsigned)(first + (double)c), p, (unsigned)n);
        found += seen[c];
        if (expected < 20)
            continue;
        statistic += (found - expected) * (found - expected) / expected;
        expected = found = 0;
        (*df)++;
    }
    return statistic;
}

static void binomial_draws_have_their_distribution(void)
{
    static const struct {
        double n, p;
    } cases[] = {{1, 0.3},   {7, 0.5},      {30, 0.2},  {40, 0.3},     {21, 0.49},
                 {200, 0.9}, {1000, 0.004}, {900, 0.5}, {30000, 0.31}, {100000, 0.0002}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        size_t df;
        const double x = pearson(cases[i].n, cases[i].p, 100 + i, &df);
        const double q = chi_square_tail(x, df > 1 ? df - 1 : 1);
        if (!(q > 0.001))
            printf("# n %g p %g: chi-square %g on %zu\n", cases[i].n, cases[i].p, x, df);
        CU_ASSERT(q > 0.001);
    }
}

static void certain_outcomes(void)
{
    const struct rng_key key = {1, RNG_REPEATED, 0, 0, 1};
    struct rng_serial r;
    rng_serial_init(&r, &key);
    CU_ASSERT_EQUAL(binomial_draw(&r, 0, 0.4), 0);
    CU_ASSERT_EQUAL(binomial_draw(&r, 50, 0), 0);
    CU_ASSERT_EQUAL(binomial_draw(&r, 50, 1), 50);
}

/* ---- given draws ---- */

enum { LEVELS = 3, DRAWS = 4000 };

struct case_of {
    struct design d;
    struct parameter residual;
    struct level_data data;
    double response[LEVELS * DRAWS], sd[DRAWS];
    struct draws draws;
};

/* Level 1 has no outcomes. */
static struct case_of *case_new(enum endpoint_type type)
{
    struct case_of *x = mem_new(1, sizeof *x);
    x->residual = (struct parameter){.name = "sd", .role = ROLE_RESIDUAL};
    x->d.type = type;
    x->d.levels = LEVELS;
    x->d.model.parameters = 1;
    x->d.model.parameter[0] = &x->residual;
    level_data_init(&x->data, LEVELS);
    x->data.n[0] = 12;
    x->data.n[2] = 30;
    x->draws = (struct draws){.n = DRAWS,
                              .stride = DRAWS,
                              .chains = 8,
                              .points = DRAWS,
                              .levels = LEVELS,
                              .parameters = 1,
                              .link = x->response,
                              .response = x->response,
                              .parameter = x->sd};
    return x;
}

static void case_free(struct case_of *x)
{
    level_data_release(&x->data);
    mem_free(x);
}

static double p_of(const struct case_of *x)
{
    const struct rng_key key = {9, RNG_SAMPLER, 0, 0, 1};
    return lack_of_fit_p(&x->d, &x->data, &x->draws, key);
}

/* Means and sd that vary over the draws; data repeated by the test's own normal numbers. */
static void continuous_agrees_with_repetition(void)
{
    struct case_of *x = case_new(ENDPOINT_CONTINUOUS);
    const struct rng_key key = {5, RNG_PRIOR, 0, 0, 1};
    struct rng_serial r;
    size_t reached = 0;
    rng_serial_init(&r, &key);
    x->data.mean[0] = 0.9;
    x->data.mean[2] = 2.2;
    for (size_t i = 0; i < DRAWS; i++) {
        double observed = 0, repeated = 0;
        x->sd[i] = 1.5 + rng_serial_uniform(&r);
        for (size_t k = 0; k < LEVELS; k++) {
            const double m = (double)k + 0.3 * rng_serial_normal(&r), n = x->data.n[k];
            const double mean = m + (n > 0 ? x->sd[i] * rng_serial_normal(&r) / sqrt(n) : 0);
            x->response[k * DRAWS + i] = m;
            observed += n * pow((x->data.mean[k] - m) / x->sd[i], 2);
            repeated += n * pow((mean - m) / x->sd[i], 2);
        }
        reached += repeated >= observed;
    }
    CU_ASSERT_DOUBLE_EQUAL(p_of(x), (double)reached / DRAWS, 4 * 0.5 / sqrt(DRAWS));
    case_free(x);
}

/* One rate for every draw: the exact probability by summing over both tables. */
static double exact_p(const struct case_of *x, double p0, double p2)
{
    const double n0 = x->data.n[0], n2 = x->data.n[2];
    double total = 0;
    for (double a = 0; a <= n0; a++)
        for (double b = 0; b <= n2; b++) {
            const double there = pow(a - n0 * p0, 2) / (n0 * p0 * (1 - p0)) +
                                 pow(b - n2 * p2, 2) / (n2 * p2 * (1 - p2));
            const double here = pow(x->data.events[0] - n0 * p0, 2) / (n0 * p0 * (1 - p0)) +
                                pow(x->data.events[2] - n2 * p2, 2) / (n2 * p2 * (1 - p2));
            if (there >= here - 1e-9)
                total += gsl_ran_binomial_pdf((unsigned)a, p0, (unsigned)n0) *
                         gsl_ran_binomial_pdf((unsigned)b, p2, (unsigned)n2);
        }
    return total;
}

static void binary_agrees_with_enumeration(void)
{
    struct case_of *x = case_new(ENDPOINT_BINARY);
    x->data.events[0] = 4;
    x->data.events[2] = 20;
    for (size_t i = 0; i < DRAWS; i++) {
        x->response[i] = 0.2;
        x->response[DRAWS + i] = NAN; /* a level without outcomes is never looked at */
        x->response[2 * DRAWS + i] = 0.55;
    }
    CU_ASSERT_DOUBLE_EQUAL(p_of(x), exact_p(x, 0.2, 0.55), 4 * 0.5 / sqrt(2000));
    CU_ASSERT_EQUAL(p_of(x), p_of(x)); /* its stream starts anew each time */
    x->data.events[2] = 30;
    CU_ASSERT(p_of(x) < 0.001);
    case_free(x);
}

static void rates_of_0_and_1(void)
{
    struct case_of *x = case_new(ENDPOINT_BINARY);
    x->data.events[2] = 30;
    for (size_t i = 0; i < DRAWS; i++)
        x->response[2 * DRAWS + i] = 1;
    CU_ASSERT_EQUAL(p_of(x), 1);
    x->data.events[2] = 29;
    CU_ASSERT_EQUAL(p_of(x), 0);
    case_free(x);
}

static void one_level_has_none(void)
{
    struct case_of *x = case_new(ENDPOINT_CONTINUOUS);
    x->data.n[2] = 0;
    CU_ASSERT_TRUE(isnan(p_of(x)));
    case_free(x);
}

/* ---- whole analyses ---- */

#define LEVEL_LIST                                                         \
    "\"levels\": {\"control\": \"A\", \"list\": [{\"label\": \"A\", "      \
    "\"value\": 0}, {\"label\": \"B\", \"value\": 1}, {\"label\": \"C\", " \
    "\"value\": 2}, {\"label\": \"D\", \"value\": 3}, {\"label\": \"E\", " \
    "\"value\": 4}]}"

static void parse(struct design **d, const char *type, const char *curve)
{
    struct err e = ERR_INIT;
    struct text json = TEXT_INIT;
    text_addf(&json,
              "{\"terrace\": 1, \"title\": \"t\", " LEVEL_LIST ", \"endpoint\": {\"name\": \"x\", "
              "\"type\": \"%s\", \"better\": \"higher\"%s}, \"model\": {\"curve\": \"%s\"}, "
              "\"subjects\": 3000}",
              type, strcmp(type, "continuous") == 0 ? ", \"range\": [-20, 20]" : "", curve);
    design_parse(d, text_s(&json), json.length, "test", &terrace_vocabulary, &e);
    for (size_t i = 0; i < e.count; i++)
        printf("# %s: %s\n", e.faults[i].pointer, e.faults[i].message);
    CU_ASSERT_PTR_NOT_NULL_FATAL(*d);
    text_release(&json);
    err_release(&e);
}

/* An umbrella over five levels of 400 subjects each. */
static void umbrella(struct level_data *data, bool binary)
{
    static const double mean[5] = {0.05, 1.46, 2.02, 1.52, 0.01},
                        events[5] = {80, 193, 241, 197, 78};
    level_data_init(data, 5);
    for (size_t k = 0; k < 5; k++) {
        data->n[k] = data->randomized[k] = 400;
        data->mean[k] = binary ? 0 : mean[k];
        data->ss[k] = binary ? 0 : 4 * 399;
        data->events[k] = binary ? events[k] : 0;
    }
}

static double analysed(const char *type, const char *curve, size_t *warnings)
{
    struct design *d = NULL;
    struct level_data data;
    struct analyst *w;
    struct analysis a;
    struct err e = ERR_INIT;
    const struct analysis_request r = {.number = 1,
                                       .point = 1,
                                       .randomized = 2000,
                                       .observed = 2000,
                                       .seed = 3,
                                       .live = true,
                                       .threads = 2};
    parse(&d, type, curve);
    umbrella(&data, strcmp(type, "binary") == 0);
    w = analyst_new(d);
    analysis_init(&a, d);
    CU_ASSERT_EQUAL(analysis_run(&a, w, &data, &r, &e), STATUS_OK);
    const double p = a.diagnostics.lack_of_fit_p;
    *warnings = 0;
    for (size_t i = 0; i < a.diagnostics.warnings; i++)
        *warnings += strstr(a.diagnostics.warning[i], "does not fit the level means") != NULL;
    analysis_release(&a);
    analyst_free(w);
    level_data_release(&data);
    design_free(d);
    err_release(&e);
    return p;
}

static void a_wrong_curve_is_seen(void)
{
    static const char *const types[] = {"continuous", "binary"};
    for (size_t i = 0; i < 2; i++) {
        size_t warnings;
        CU_ASSERT(analysed(types[i], "linear", &warnings) < 0.001);
        CU_ASSERT_EQUAL(warnings, 1);
        CU_ASSERT(analysed(types[i], "quadratic", &warnings) > 0.05);
        CU_ASSERT_EQUAL(warnings, 0);
        CU_ASSERT(analysed(types[i], "independent", &warnings) > 0.2);
        CU_ASSERT_EQUAL(warnings, 0);
    }
}

static const struct unit_test tests[] = {
    {"chi-square tails: handbook", tails_are_those_of_the_handbook},
    {"chi-square tails: GSL", tails_agree_with_gsl},
    {"binomial draws have their distribution", binomial_draws_have_their_distribution},
    {"certain outcomes", certain_outcomes},
    {"continuous: agrees with repetition", continuous_agrees_with_repetition},
    {"binary: agrees with enumeration", binary_agrees_with_enumeration},
    {"rates of 0 and 1", rates_of_0_and_1},
    {"one level: none", one_level_has_none},
    {"a wrong curve is seen, a right one is not", a_wrong_curve_is_seen},
    UNIT_END};

int main(void)
{
    return unit_main("lack of fit", tests);
}
