/* SPDX-License-Identifier: GPL-3.0-or-later */
/* bench_analysis.c: microseconds of one simulated analysis (fit of 1,000 draws, targets, a
 * decision, next shares), as whole simulated trials will make by the million; and how large its
 * Monte Carlo error is: the root mean square over repeats and levels of Pr(target) about its mean.
 */
#include <math.h>
#include <stdio.h>
#include <string.h>
#include <time.h>

#include "analysis/analysis.h"
#include "analysis/vocabulary_rows.h"
#include "base/base.h"
#include "base/mem.h"

enum { LEVELS = 8, REPEATS = 300, ROUNDS = 7, SPREAD = 400 };

struct bench_case {
    const char *curve;
    bool binary;
    double trials; /* aim: whole trials of 7 analyses a second on one core */
};

static const struct bench_case cases[] = {
    {"ndlm", false, 1200}, {"sigmoid_emax", false, 1200}, {"ndlm", true, 700}, {"emax", true, 900}};

static struct design *design_for(const struct bench_case *c)
{
    struct text t = TEXT_INIT;
    struct err e = ERR_INIT;
    struct design *d = NULL;
    text_addf(&t, "{\"terrace\":1,\"title\":\"bench\",\"levels\":{\"control\":\"L0\",\"list\":[");
    for (size_t k = 0; k < LEVELS; k++)
        text_addf(&t, "%s{\"label\":\"L%zu\",\"value\":%zu}", k ? "," : "", k, k * 10);
    text_addf(&t,
              "]},\"endpoint\":{\"name\":\"y\",\"type\":\"%s\",\"better\":\"higher\"%s},"
              "\"model\":{\"curve\":\"%s\"},\"subjects\":240,"
              "\"targets\":{\"T\":{\"rule\":\"effective_dose\",\"fraction\":0.9}},"
              "\"allocation\":{\"adapt\":{\"target\":\"T\"},\"control_share\":0.2},"
              "\"analyses\":{\"first_at\":60,\"every\":30},"
              "\"final\":{\"success\":{\"measure\":\"pr_gain\",\"target\":\"T\",\"above\":0.975}}}",
              c->binary ? "binary" : "continuous", c->binary ? "" : ",\"range\":[-10,10]",
              c->curve);
    if (design_parse(&d, text_s(&t), t.length, "bench", &terrace_vocabulary, &e) != STATUS_OK) {
        struct text m = TEXT_INIT;
        err_text(&e, &m);
        fputs(text_s(&m), stderr);
    }
    text_release(&t);
    return d;
}

static void fill(struct level_data *x)
{
    for (size_t k = 0; k < LEVELS; k++) {
        const double dose = (double)k * 10.0, shape = dose / (15.0 + dose);
        const double wiggle = (double)(k * 7 % 5) / 5.0 - 0.4;
        x->n[k] = x->randomized[k] = 15.0;
        x->mean[k] = 2.0 * shape + 0.4 * wiggle;
        x->ss[k] = 14.0 * 6.0;
        x->events[k] = (double)(long)(15.0 * (0.2 + 0.4 * shape) + wiggle + 0.5);
    }
}

static double now(void)
{
    struct timespec t;
    clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

static struct analysis_request request(uint32_t trial)
{
    return (struct analysis_request){.number = 1,
                                     .point = 60,
                                     .adapted = true,
                                     .randomized = 120,
                                     .observed = 120,
                                     .seed = 1,
                                     .scenario = 1,
                                     .trial = trial,
                                     .threads = 1};
}

static double time_of(struct analysis *a, struct analyst *w, const struct level_data *x)
{
    struct err e = ERR_INIT;
    double best = 1e9;
    for (int round = 0; round < ROUNDS; round++) {
        const double start = now();
        for (uint32_t i = 0; i < REPEATS; i++) {
            const struct analysis_request r = request(i + 1);
            (void)analysis_run(a, w, x, &r, &e);
        }
        const double each = (now() - start) / REPEATS * 1e6;
        best = each < best ? each : best;
    }
    return best;
}

static double error_of(struct analysis *a, struct analyst *w, const struct level_data *x)
{
    struct err e = ERR_INIT;
    double sum[LEVELS] = {0}, squares[LEVELS] = {0}, variance = 0;
    for (uint32_t i = 0; i < SPREAD; i++) {
        const struct analysis_request r = request(i + 1);
        (void)analysis_run(a, w, x, &r, &e);
        for (size_t k = 0; k < LEVELS; k++) {
            const double p = a->level[k].pr_target[0];
            sum[k] += p / SPREAD;
            squares[k] += p * p / SPREAD;
        }
    }
    for (size_t k = 0; k < LEVELS; k++)
        variance += (squares[k] - sum[k] * sum[k]) / LEVELS;
    return sqrt(variance);
}

static void run_case(const struct bench_case *c)
{
    struct design *d = design_for(c);
    struct analyst *w;
    struct analysis a;
    struct level_data x;
    if (!d)
        return;
    w = analyst_new(d);
    analysis_init(&a, d);
    level_data_init(&x, LEVELS);
    fill(&x);
    const double each = time_of(&a, w, &x), error = error_of(&a, w, &x);
    printf("%-13s %-10s %6.1f us an analysis (7 of them: %5.0f trials/s, aim %.0f with "
           "all else); error of Pr(target) %.4f; us x error^2 %.2f\n",
           c->curve, c->binary ? "binary" : "continuous", each, 1e6 / (7.0 * each), c->trials,
           error, each * error * error * 1e3);
    level_data_release(&x);
    analysis_release(&a);
    analyst_free(w);
    design_free(d);
}

int main(int count, char **words)
{
    base_init();
    for (size_t i = 0; i < COUNT_OF(cases); i++)
        if (count < 2 || strcmp(words[1], cases[i].curve) == 0)
            run_case(&cases[i]);
    return 0;
}
