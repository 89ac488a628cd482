/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_analysis.c: whole analyses with the real posterior: closed forms, sums, repeatability. */
#include "analysis/analysis.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "analysis/vocabulary_rows.h"
#include "base/number.h"
#include "unit.h"

/* Four levels, the first the control; higher is better. */
#define LEVELS                                                                       \
    "\"levels\": {\"control\": \"A\", \"list\": [{\"label\": \"A\", \"value\": 0}, " \
    "{\"label\": \"B\", \"value\": 1}, {\"label\": \"C\", \"value\": 2}, "           \
    "{\"label\": \"D\", \"value\": 4}]}"
#define TARGETS                                                                   \
    "\"targets\": {\"ED90\": {\"rule\": \"effective_dose\", \"fraction\": 0.9}, " \
    "\"MED\": {\"rule\": \"minimum_effect\", \"effect\": 0.1}, "                  \
    "\"best\": {\"rule\": \"optimal\"}}"
#define REST                                                                             \
    "\"allocation\": {\"adapt\": {\"target\": \"ED90\", \"information\": 0.5}}, "        \
    "\"decisions\": [{\"action\": \"stop_success\", \"if\": {\"measure\": \"pr_gain\", " \
    "\"level\": \"D\", \"gain\": 0, \"above\": 0.9999}}], \"final\": {\"success\": {"    \
    "\"measure\": \"pr_any_gain\", \"above\": 0.1}}, \"subjects\": 200, \"mcmc\": {"     \
    "\"max_draws\": 64000}"
#define CONTINUOUS                                                                       \
    "\"endpoint\": {\"name\": \"x\", \"type\": \"continuous\", \"better\": \"higher\", " \
    "\"range\": [-20, 20]}"
#define BINARY "\"endpoint\": {\"name\": \"x\", \"type\": \"binary\", \"better\": \"higher\"}"

static const char flat_free[] =
    "{\"terrace\": 1, \"title\": \"t\", " LEVELS ", " CONTINUOUS
    ", \"model\": {\"curve\": \"independent\", \"priors\": {\"theta\": {\"normal\": {\"mean\": 0, "
    "\"sd\": 10}}, \"sd\": {\"fixed\": {\"value\": 2}}}}, " TARGETS ", " REST "}";
static const char emax[] = "{\"terrace\": 1, \"title\": \"t\", " LEVELS ", " CONTINUOUS
                           ", \"model\": {\"curve\": \"emax\"}, " TARGETS ", " REST "}";
static const char binary_free[] =
    "{\"terrace\": 1, \"title\": \"t\", " LEVELS ", " BINARY
    ", \"model\": {\"curve\": \"independent\"}, " TARGETS ", " REST "}";
static const char binary_walk[] = "{\"terrace\": 1, \"title\": \"t\", " LEVELS ", " BINARY
                                  ", \"model\": {\"curve\": \"ndlm\"}, " TARGETS ", " REST "}";

struct world {
    struct design *d;
    struct level_data data;
    struct analyst *analyst;
    struct analysis a;
    struct analysis_request r;
    struct err e;
};

static void set_data(struct world *x)
{
    static const double n[4] = {10, 20, 5, 15}, mean[4] = {0.2, 1.1, 1.9, 2.3},
                        events[4] = {1, 6, 2, 9};
    level_data_init(&x->data, 4);
    for (size_t k = 0; k < 4; k++) {
        x->data.n[k] = n[k];
        x->data.randomized[k] = n[k] + 2;
        x->data.mean[k] = x->d->type == ENDPOINT_CONTINUOUS ? mean[k] : 0;
        x->data.ss[k] = x->d->type == ENDPOINT_CONTINUOUS ? 4 * (n[k] - 1) : 0;
        x->data.events[k] = x->d->type == ENDPOINT_BINARY ? events[k] : 0;
    }
}

static void start(struct world *x, const char *json)
{
    *x = (struct world){.e = ERR_INIT};
    design_parse(&x->d, json, strlen(json), "test", &terrace_vocabulary, &x->e);
    for (size_t i = 0; i < x->e.count; i++)
        printf("# %s: %s\n", x->e.faults[i].pointer, x->e.faults[i].message);
    CU_ASSERT_PTR_NOT_NULL_FATAL(x->d);
    set_data(x);
    x->analyst = analyst_new(x->d);
    analysis_init(&x->a, x->d);
    x->r = (struct analysis_request){.number = 1,
                                     .point = 50,
                                     .adapted = true,
                                     .randomized = 58,
                                     .observed = 50,
                                     .seed = 11,
                                     .live = true,
                                     .threads = 2};
}

static enum status run(struct world *x)
{
    const enum status status = analysis_run(&x->a, x->analyst, &x->data, &x->r, &x->e);
    for (size_t i = 0; i < x->a.diagnostics.warnings && status != STATUS_OK; i++)
        printf("# %s\n", x->a.diagnostics.warning[i]);
    return status;
}

static void release(struct world *x)
{
    analysis_release(&x->a);
    analyst_free(x->analyst);
    level_data_release(&x->data);
    design_free(x->d);
    err_release(&x->e);
}

static double phi(double z)
{
    return 0.5 * erfc(-z / sqrt(2));
}

/* Normal prior and data with a known sd: mean = v n y / sd^2, 1 / v = 1 / 100 + n / 4. */
static void normal_levels_in_closed_form(void)
{
    struct world x;
    double mean[4], var[4];
    start(&x, flat_free);
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    for (size_t k = 0; k < 4; k++) {
        const struct level_result *l = &x.a.level[k];
        var[k] = 1 / (0.01 + x.data.n[k] / 4);
        mean[k] = var[k] * x.data.n[k] * x.data.mean[k] / 4;
        CU_ASSERT_DOUBLE_EQUAL(l->response.mean, mean[k], 0.05 * sqrt(var[k]));
        CU_ASSERT_DOUBLE_EQUAL(l->response.sd / sqrt(var[k]), 1, 0.05);
        CU_ASSERT_DOUBLE_EQUAL(l->response.q975, mean[k] + 1.96 * sqrt(var[k]), 0.1 * sqrt(var[k]));
        if (k > 0) /* an exact conditional probability, and sd is fixed: no error at all */
            CU_ASSERT_DOUBLE_EQUAL(l->pr_positive, phi((mean[k] - mean[0]) / sqrt(var[k] + var[0])),
                                   1e-9);
    }
    CU_ASSERT_EQUAL(x.a.level[0].gain.sd, 0);
    CU_ASSERT_TRUE(isnan(x.a.parameter[x.a.parameters - 1].diag.rhat));
    CU_ASSERT_FALSE(x.a.diagnostics.imprecise);
    release(&x);
}

/* Logit-normal rates by Simpson's rule: the default prior is normal(0, 1.5) on the logit. */
static void rate_moments(double n, double events, double *mean, double *sd)
{
    enum { STEPS = 4000 };
    double total = 0, first = 0, second = 0;
    for (int i = 0; i <= STEPS; i++) {
        const double z = -15 + 30.0 * i / STEPS, p = 1 / (1 + exp(-z));
        const double weight = i == 0 || i == STEPS ? 1 : i % 2 ? 4 : 2;
        const double f = weight * exp(events * log(p) + (n - events) * log1p(-p) - z * z / 4.5);
        total += f;
        first += f * p;
        second += f * p * p;
    }
    *mean = first / total;
    *sd = sqrt(second / total - *mean * *mean);
}

static void binary_levels_by_quadrature(void)
{
    struct world x;
    start(&x, binary_free);
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    for (size_t k = 0; k < 4; k++) {
        double mean, sd;
        rate_moments(x.data.n[k], x.data.events[k], &mean, &sd);
        CU_ASSERT_DOUBLE_EQUAL(x.a.level[k].response.mean, mean, 0.05 * sd);
        CU_ASSERT_DOUBLE_EQUAL(x.a.level[k].response.sd / sd, 1, 0.05);
    }
    release(&x);
}

static void check_sums(const struct world *x)
{
    double shares = 0;
    for (size_t t = 0; t < x->a.targets; t++) {
        double sum = x->a.target[t].pr_none;
        for (size_t k = 0; k < 4; k++) {
            sum += x->a.level[k].pr_target[t];
            CU_ASSERT(x->a.level[k].pr_meets[t] >= x->a.level[k].pr_target[t]);
        }
        CU_ASSERT_DOUBLE_EQUAL(sum, 1, 1e-12);
        CU_ASSERT_EQUAL(x->a.level[0].pr_target[t], 0);
    }
    for (size_t k = 0; k < 4; k++)
        shares += x->a.level[k].next_share;
    CU_ASSERT_DOUBLE_EQUAL(shares, 1, 1e-12);
    CU_ASSERT_DOUBLE_EQUAL(x->a.level[0].next_share, 0.25, 1e-12);
}

static void probabilities_and_shares_sum_to_1(void)
{
    static const char *const designs[] = {flat_free, emax, binary_free, binary_walk};
    for (size_t i = 0; i < 4; i++) {
        struct world x;
        start(&x, designs[i]);
        CU_ASSERT_EQUAL(run(&x), STATUS_OK);
        check_sums(&x);
        CU_ASSERT_EQUAL(x.a.curve.points, i == 1 ? 61 : 0);
        CU_ASSERT(x.a.diagnostics.max_rhat <= 1.01);
        release(&x);
    }
}

static void write_number(struct text *out, double v)
{
    char s[NUMBER_CHARS];
    text_addf(out, "%s\n", isnan(v) ? "null" : number_shortest(s, v));
}

static void write_level(struct text *out, const struct world *x, size_t k)
{
    const struct level_result *l = &x->a.level[k];
    const double of_level[] = {l->response.mean, l->response.sd, l->response.q50,
                               l->gain.q975,     l->pr_positive, l->next_share};
    for (size_t i = 0; i < sizeof of_level / sizeof *of_level; i++)
        write_number(out, of_level[i]);
    for (size_t t = 0; t < x->a.targets; t++) {
        write_number(out, l->pr_target[t]);
        write_number(out, l->mcse_meets[t]);
    }
}

/* The figures of an analysis, so that two can be compared byte by byte. */
static struct text figures(const struct world *x)
{
    struct text out = TEXT_INIT;
    for (size_t k = 0; k < 4; k++)
        write_level(&out, x, k);
    for (size_t i = 0; i < x->a.parameters; i++) {
        write_number(&out, x->a.parameter[i].value.q025);
        write_number(&out, x->a.parameter[i].diag.ess_tail);
    }
    write_number(&out, x->a.decision[0].condition[0].value);
    write_number(&out, x->a.final_success.condition[0].mcse);
    write_number(&out, x->a.diagnostics.second_difference);
    return out;
}

static void the_same_bytes_again(void)
{
    static const char *const designs[] = {emax, binary_walk};
    for (size_t i = 0; i < 2; i++) {
        struct world x;
        start(&x, designs[i]);
        x.r.threads = 1;
        CU_ASSERT_EQUAL(run(&x), STATUS_OK);
        struct text one = figures(&x);
        x.r.threads = 4;
        CU_ASSERT_EQUAL(run(&x), STATUS_OK);
        struct text four = figures(&x);
        CU_ASSERT_STRING_EQUAL(text_s(&one), text_s(&four));
        x.r.seed = 12;
        CU_ASSERT_EQUAL(run(&x), STATUS_OK);
        struct text other = figures(&x);
        CU_ASSERT_STRING_NOT_EQUAL(text_s(&one), text_s(&other));
        text_release(&one);
        text_release(&four);
        text_release(&other);
        release(&x);
    }
}

/* The simulated fit has 1,000 draws: probabilities within 4 errors of the live ones. */
static void simulated_agrees_with_live(void)
{
    static const char *const designs[] = {emax, binary_walk};
    for (size_t i = 0; i < 2; i++) {
        struct world live, quick;
        start(&live, designs[i]);
        start(&quick, designs[i]);
        quick.r.live = false;
        CU_ASSERT_EQUAL(run(&live), STATUS_OK);
        CU_ASSERT_EQUAL(run(&quick), STATUS_OK);
        CU_ASSERT_EQUAL(quick.a.diagnostics.draws, 1000);
        for (size_t k = 1; k < 4; k++) {
            const struct level_result *a = &live.a.level[k], *b = &quick.a.level[k];
            CU_ASSERT_DOUBLE_EQUAL(a->response.mean, b->response.mean, 0.2 * a->response.sd);
            for (size_t t = 0; t < 3; t++)
                CU_ASSERT_DOUBLE_EQUAL(a->pr_target[t], b->pr_target[t], 0.08);
        }
        check_sums(&quick);
        release(&live);
        release(&quick);
    }
}

static void identical_replicates_are_refused(void)
{
    struct world x;
    start(&x, emax);
    for (size_t k = 0; k < 4; k++)
        x.data.ss[k] = 0;
    CU_ASSERT_EQUAL(run(&x), STATUS_INPUT);
    CU_ASSERT_EQUAL(x.e.count, 1);
    release(&x);
}

static void sparse_data_give_warnings_not_errors(void)
{
    static const char *const designs[] = {flat_free, emax, binary_free, binary_walk};
    for (size_t i = 0; i < 4; i++) {
        struct world x;
        start(&x, designs[i]);
        for (size_t k = 0; k < 4; k++)
            x.data.n[k] = x.data.mean[k] = x.data.ss[k] = x.data.events[k] = 0;
        CU_ASSERT_EQUAL(run(&x), STATUS_OK);
        CU_ASSERT(x.a.diagnostics.warnings >= 1);
        check_sums(&x);
        release(&x);
    }
}

/* theta ~ normal(0, 10) at every level: the best of three active levels is any of them. */
static void the_prior(void)
{
    struct world x;
    start(&x, flat_free);
    analysis_prior(&x.a, x.analyst, x.d);
    CU_ASSERT_EQUAL(analyst_draws(x.analyst).n, 65536);
    for (size_t k = 0; k < 4; k++) {
        CU_ASSERT_DOUBLE_EQUAL(x.a.level[k].response.mean, 0, 0.2);
        CU_ASSERT_DOUBLE_EQUAL(x.a.level[k].response.sd, 10, 0.15);
        CU_ASSERT_DOUBLE_EQUAL(x.a.level[k].pr_target[2], k > 0 ? 1.0 / 3 : 0, 0.01);
        CU_ASSERT_DOUBLE_EQUAL(x.a.level[k].pr_positive, k > 0 ? 0.5 : 0, 0.01);
    }
    /* no gain above 0: the control is best of four */
    CU_ASSERT_DOUBLE_EQUAL(x.a.target[0].pr_none, 0.25, 0.01);
    release(&x);
}

/* Levels on their own: the estimates are the raw means; emax has a curve between the levels. */
static void the_likelihood_fit(void)
{
    struct world x;
    start(&x, flat_free);
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    CU_ASSERT_TRUE(x.a.likelihood.exists && x.a.likelihood.converged);
    for (size_t k = 0; k < 4; k++)
        CU_ASSERT_DOUBLE_EQUAL(x.a.likelihood.response[k], x.data.mean[k], 1e-9);
    x.r.live = false; /* a simulated analysis has none, also where one stood before */
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    CU_ASSERT_FALSE(x.a.likelihood.exists);
    release(&x);
    start(&x, emax);
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    CU_ASSERT_TRUE(x.a.likelihood.converged);
    CU_ASSERT_EQUAL_FATAL(x.a.curve.points, 61);
    CU_ASSERT_DOUBLE_EQUAL(x.a.curve.likelihood[0], x.a.likelihood.response[0], 1e-9);
    CU_ASSERT_DOUBLE_EQUAL(x.a.curve.likelihood[60], x.a.likelihood.response[3], 1e-9);
    release(&x);
    start(&x, binary_walk);
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    CU_ASSERT_FALSE(x.a.likelihood.exists);
    release(&x);
}

static void the_last_analysis(void)
{
    struct world x;
    start(&x, emax);
    x.r.final = true;
    x.r.number = 2;
    x.r.point = INFINITY;
    CU_ASSERT_EQUAL(run(&x), STATUS_OK);
    CU_ASSERT_EQUAL(x.a.recommendation, RECOMMEND_SUCCESS);
    CU_ASSERT_TRUE(isnan(x.a.level[1].next_share));
    release(&x);
}

static const struct unit_test tests[] = {
    {"normal levels in closed form", normal_levels_in_closed_form},
    {"binary levels by quadrature", binary_levels_by_quadrature},
    {"probabilities and shares sum to 1", probabilities_and_shares_sum_to_1},
    {"the same bytes again, whatever the threads", the_same_bytes_again},
    {"simulated fits agree with live ones", simulated_agrees_with_live},
    {"identical replicates are refused", identical_replicates_are_refused},
    {"no data: warnings, not errors", sparse_data_give_warnings_not_errors},
    {"the prior", the_prior},
    {"the likelihood fit", the_likelihood_fit},
    {"the last analysis", the_last_analysis},
    UNIT_END};

int main(void)
{
    return unit_main("analysis", tests);
}
