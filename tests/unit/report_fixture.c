/* SPDX-License-Identifier: GPL-3.0-or-later */
/* report_fixture.c: hand-filled analyses. Every array is owned by the fixture's list of blocks. */
#include "report_fixture.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/mem.h"

enum { BLOCKS = 2048, FIXTURE_DRAWS = 16 };

struct fixture {
    struct design d;
    struct data data;
    struct analysis a;
    struct analysis_report r;
    void *block[BLOCKS];
    size_t blocks;
};

static void *keep(struct fixture *f, void *p)
{
    f->block[f->blocks++] = p;
    return p;
}

static double *numbers(struct fixture *f, size_t n)
{
    return keep(f, mem_new(n, sizeof(double)));
}

static char *words(struct fixture *f, const char *s)
{
    return keep(f, mem_text(s));
}

/* ---- rows a design points to ---- */

static void say_effective(const struct target *t, const struct design *d, struct text *out)
{
    (void)d;
    text_addf(out, "the lowest active level with at least %.0f%% of the largest active gain",
              100 * t->fraction);
}

static void say_minimum(const struct target *t, const struct design *d, struct text *out)
{
    (void)d;
    text_addf(out, "the lowest active level with a gain of at least %g", t->effect);
}

static void say_margin(const struct target *t, const struct design *d, struct text *out)
{
    text_addf(out, "the lowest active level at most %g worse than %s", t->margin,
              t->of >= 0 ? d->level[t->of].label : "the best level");
}

static const struct target_rule effective = {"effective_dose", ARG_FRACTION, ARG_FRACTION, true,
                                             say_effective,    NULL};
static const struct target_rule minimum = {"minimum_effect", ARG_EFFECT, ARG_EFFECT, true,
                                           say_minimum,      NULL};
static const struct target_rule margin = {"within_margin", ARG_MARGIN | ARG_OF, ARG_MARGIN,
                                          false,           say_margin,          NULL};

static void say_gain(const struct condition *c, const struct design *d, struct text *out)
{
    text_addf(out, "probability that the selected level of %s has a gain above %g",
              d->target[c->target].name, c->gain);
}

static void say_any_gain(const struct condition *c, const struct design *d, struct text *out)
{
    (void)d;
    text_addf(out, "probability that the largest active gain is above %g", c->gain);
}

static void say_level(const struct condition *c, const struct design *d, struct text *out)
{
    text_addf(out, "probability that the selected level of %s is the target",
              d->target[c->target].name);
}

static const struct measure pr_gain = {
    "pr_gain", ARG_TARGET | ARG_LEVEL | ARG_GAIN, 0, true, false, say_gain, NULL};
static const struct measure pr_any_gain = {"pr_any_gain", ARG_GAIN,     0,   true,
                                           false,         say_any_gain, NULL};
static const struct measure pr_level = {"pr_level", ARG_TARGET, ARG_TARGET, false,
                                        false,      say_level,  NULL};

static const struct curve emax = {.key = "emax", .formula = "E0 + Emax d / (ED50 + d)"};
static const struct curve walk = {
    .key = "ndlm", .formula = "a random walk over the levels", .kind = CURVE_WALK};

/* ---- design ---- */

static void set_levels(struct fixture *f, size_t n)
{
    f->d.levels = f->a.levels = f->data.by_level.levels = n;
    f->d.level = keep(f, mem_new(n, sizeof *f->d.level));
    f->d.control = f->d.reference_level = LEVEL_NONE;
    f->d.control_on_curve = true;
}

static void set_level(struct fixture *f, size_t k, const char *label, double value)
{
    f->d.level[k].label = words(f, label);
    f->d.level[k].value = value;
}

static void set_target(struct fixture *f, size_t t, const char *name,
                       const struct target_rule *rule, double number, int of)
{
    struct target *x = &f->d.target[t];
    x->name = words(f, name);
    x->rule = rule;
    x->fraction = x->effect = x->margin = number;
    x->of = of;
}

static void set_targets(struct fixture *f, size_t n)
{
    f->d.targets = f->a.targets = n;
    f->d.target = keep(f, mem_new(n, sizeof *f->d.target));
    f->a.target = keep(f, mem_new(n, sizeof *f->a.target));
}

static struct condition condition_on(const struct measure *m, int target, bool above,
                                     double threshold)
{
    return (struct condition){.measure = m,
                              .target = target,
                              .level = LEVEL_NONE,
                              .above = above,
                              .threshold = threshold};
}

static void set_conditions(struct fixture *f, struct conditions *when, struct decision_result *x,
                           enum join join, size_t n)
{
    when->join = join;
    when->count = n;
    when->list = keep(f, mem_new(n, sizeof *when->list));
    x->condition = keep(f, mem_new(n, sizeof *x->condition));
}

static void design_common(struct fixture *f, const char *title, const char *endpoint)
{
    f->d.title = words(f, title);
    f->d.endpoint_name = words(f, endpoint);
    f->d.time_unit = words(f, "week");
    f->d.observed_after = 4;
    f->d.precision = 0.005;
    f->d.subjects = 240;
    memset(f->d.sha256, 'a', SHA256_HEX - 1);
    memset(f->d.resolved_sha256, 'b', SHA256_HEX - 1);
    memset(f->data.sha256, 'c', SHA256_HEX - 1);
    f->d.analyses.count = 6;
}

/* ---- results ---- */

static double bump(double x)
{
    return 1 / (1 + x * x); /* any smooth shape will do */
}

static void set_spread(struct spread *s, double mean, double sd)
{
    *s = (struct spread){mean, sd, mean - 1.96 * sd, mean, mean + 1.96 * sd};
}

static void level_arrays(struct fixture *f, struct level_result *l)
{
    l->pr_target = numbers(f, f->a.targets);
    l->pr_meets = numbers(f, f->a.targets);
    l->mcse_target = numbers(f, f->a.targets);
    l->mcse_meets = numbers(f, f->a.targets);
    l->open = true;
}

static void level_probabilities(struct fixture *f, size_t k, double at)
{
    struct level_result *l = &f->a.level[k];
    for (size_t t = 0; t < f->a.targets; t++) {
        const double x = (at - 0.6 + 0.2 * (double)t) * (double)f->a.levels;
        if ((int)k == f->d.control)
            continue;
        l->pr_target[t] = 0.42 * bump(x);
        l->pr_meets[t] = x > 4 ? 0.9999 : 0.5 + x / 8.1 < 0 ? 0 : 0.5 + x / 8.1;
        l->mcse_target[t] = l->mcse_meets[t] = 0.0045;
    }
}

static void fill_level(struct fixture *f, size_t k, double base, double rise, double sd)
{
    struct level_result *l = &f->a.level[k];
    const double at = (double)k / (double)(f->a.levels - 1), sign = f->d.higher_is_better ? 1 : -1;
    level_arrays(f, l);
    set_spread(&l->response, base + rise * at / (0.3 + at), sd);
    if (f->d.reference_level >= 0) {
        set_spread(&l->gain, sign * rise * at / (0.3 + at), (int)k == f->d.control ? 0 : 1.4 * sd);
        l->pr_positive = (int)k == f->d.control ? 0 : 0.9 + 0.0999 * at;
    } else {
        set_spread(&l->gain, NAN, NAN);
        l->pr_positive = NAN;
    }
    level_probabilities(f, k, at);
    l->next_share = 1 / (double)f->a.levels;
}

static void fill_data(struct fixture *f, size_t k, double n)
{
    struct level_data *d = &f->data.by_level;
    d->randomized[k] = n + 5;
    d->n[k] = n;
    if (f->d.type == ENDPOINT_BINARY) {
        d->events[k] = floor(n * f->a.level[k].response.mean);
    } else {
        d->mean[k] = n > 0 ? f->a.level[k].response.mean + (k % 2 ? 0.21 : -0.17) : 0;
        d->ss[k] = 6.25 * (n > 1 ? n - 1 : 0);
    }
    f->data.observed += n;
    f->data.subjects += (size_t)n + 5;
}

static void fill_results(struct fixture *f, double base, double rise, double sd)
{
    const size_t n = f->a.levels;
    f->a.level = keep(f, mem_new(n, sizeof *f->a.level));
    f->data.by_level.randomized = numbers(f, n);
    f->data.by_level.n = numbers(f, n);
    f->data.by_level.mean = numbers(f, n);
    f->data.by_level.ss = numbers(f, n);
    f->data.by_level.events = numbers(f, n);
    for (size_t k = 0; k < n; k++) {
        fill_level(f, k, base, rise, sd);
        fill_data(f, k, 10 + (double)(k * 7 % 11));
    }
    f->data.pending = 4 * (double)n;
    f->data.dropped = (double)n;
    f->data.dropped_as_failure = NAN;
}

static void fill_selection(struct fixture *f)
{
    for (size_t t = 0; t < f->a.targets; t++) {
        struct target_result *x = &f->a.target[t];
        for (size_t k = 0; k < f->a.levels; k++)
            if (f->a.level[k].pr_target[t] > x->pr_selected) {
                x->pr_selected = f->a.level[k].pr_target[t];
                x->selected = (int)k;
            }
        x->pr_none = 0.0002;
        x->mcse = 0.0045;
    }
}

static void fill_curve(struct fixture *f, double base, double rise, double sd)
{
    const double last = f->d.level[f->d.levels - 1].value;
    struct curve_result *c = &f->a.curve;
    c->points = 61;
    c->value = numbers(f, c->points);
    c->mean = numbers(f, c->points);
    c->q025 = numbers(f, c->points);
    c->q975 = numbers(f, c->points);
    for (size_t i = 0; i < c->points; i++) {
        const double at = (double)i / 60;
        c->value[i] = at * last;
        c->mean[i] = base + rise * at / (0.2 + at);
        c->q025[i] = c->mean[i] - 1.9 * sd;
        c->q975[i] = c->mean[i] + 1.9 * sd;
    }
}

static void fill_parameters(struct fixture *f)
{
    static const char *const names[] = {"E0", "Emax", "ED50", "sd"};
    static const struct parameter named[] = {
        {.name = "E0"}, {.name = "Emax"}, {.name = "ED50"}, {.name = "sd"}};
    f->a.parameters = f->d.model.parameters = 4;
    f->a.model = &f->d.model;
    f->a.parameter = keep(f, mem_new(4, sizeof *f->a.parameter));
    for (size_t p = 0; p < 4; p++) {
        struct parameter_result *x = &f->a.parameter[p];
        x->name = names[p];
        set_spread(&x->value, 1 + 2.5 * (double)p, 0.3 + (double)p);
        x->diag = (struct convergence){1.0012, 11900, 9800, 0.0039 * (1 + 9 * (double)p)};
        x->sd_over_prior_sd = p == 2 ? 0.96 : 0.4;
        f->d.model.parameter[p] = &named[p];
        f->d.model.prior[p] = p == 3 ? prior_fixed(2.6) : prior_normal(0, 2 + (double)p);
    }
    f->a.parameter[3].value = (struct spread){2.6, 0, 2.6, 2.6, 2.6}; /* fixed */
    f->a.parameter[3].diag = (struct convergence){NAN, NAN, NAN, NAN};
    f->a.parameter[3].sd_over_prior_sd = NAN;
}

static void fill_common(struct fixture *f)
{
    f->data.cut = 26;
    f->data.cut_text = words(f, "26");
    f->a.number = 2;
    f->a.diagnostics = (struct analysis_diagnostics){.chains = 8,
                                                     .draws = 16000,
                                                     .max_rhat = 1.0023,
                                                     .min_ess_bulk = 9800,
                                                     .min_ess_tail = 8700,
                                                     .kish = 0.93,
                                                     .second_name = "quadrature",
                                                     .second_difference = 0.0007,
                                                     .lack_of_fit_p = NAN,
                                                     .trusted = true};
    fill_parameters(f);
    fill_selection(f);
    f->r = (struct analysis_report){.d = &f->d, .data = &f->data, .a = &f->a, .seed = 20261201};
}

static void fill_draws(struct fixture *f)
{
    double *parameter = numbers(f, FIXTURE_DRAWS * f->a.parameters);
    double *response = numbers(f, FIXTURE_DRAWS * f->a.levels);
    for (size_t i = 0; i < FIXTURE_DRAWS * f->a.parameters; i++)
        parameter[i] = (double)i / 8;
    for (size_t i = 0; i < FIXTURE_DRAWS * f->a.levels; i++)
        response[i] = -(double)i / 4;
    f->r.draws = (struct draws){.n = FIXTURE_DRAWS,
                                .stride = FIXTURE_DRAWS,
                                .chains = 8,
                                .levels = f->a.levels,
                                .parameters = f->a.parameters,
                                .response = response,
                                .parameter = parameter};
}

static void warn(struct fixture *f, const char *sentence)
{
    struct analysis_diagnostics *g = &f->a.diagnostics;
    g->warnings = 1;
    g->warning = keep(f, mem_new(1, sizeof *g->warning));
    g->warning[0] = words(f, sentence);
}

/* ---- the cases ---- */

static void itch_decisions(struct fixture *f)
{
    f->d.decisions = f->a.decisions = 2;
    f->d.decision = keep(f, mem_new(2, sizeof *f->d.decision));
    f->a.decision = keep(f, mem_new(2, sizeof *f->a.decision));
    f->d.decision[0].action = ACTION_STOP_SUCCESS;
    f->d.decision[0].binding = true;
    f->d.decision[0].from = 120;
    set_conditions(f, &f->d.decision[0].when, &f->a.decision[0], JOIN_ALL, 2);
    f->d.decision[0].when.list[0] = condition_on(&pr_gain, 0, true, 0.99);
    f->d.decision[0].when.list[1] = condition_on(&pr_level, 0, true, 0.4);
    f->a.decision[0].condition[0] = (struct condition_result){0.93, 0.002, 4, false, false, false};
    f->a.decision[0].condition[1] = (struct condition_result){0.41, 0.0045, 4, true, true, false};
    f->d.decision[1].action = ACTION_STOP_FUTILITY;
    set_conditions(f, &f->d.decision[1].when, &f->a.decision[1], JOIN_ONE, 1);
    f->d.decision[1].when.list[0] = condition_on(&pr_any_gain, -1, false, 0.1);
    f->d.decision[1].when.list[0].gain = 1;
    f->a.decision[1].condition[0] =
        (struct condition_result){0.9998, 0.0001, LEVEL_NONE, false, false, false};
    f->a.decision[1].applies = true;
    f->d.has_final = true;
    set_conditions(f, &f->d.final_success, &f->a.final_success, JOIN_ONE, 1);
    f->d.final_success.list[0] = condition_on(&pr_gain, 0, true, 0.975);
    f->a.final_success.condition[0] = f->a.decision[0].condition[0];
}

static void itch(struct fixture *f)
{
    static const char *const labels[] = {"Placebo", "5 mg", "10 mg", "20 mg", "40 mg", "80 mg"};
    static const double values[] = {0, 5, 10, 20, 40, 80};
    design_common(f, "Oral agent for chronic itch, dose-ranging",
                  "Change in weekly worst itch at week 4");
    f->d.quantity = words(f, "dose");
    f->d.unit = words(f, "mg");
    f->d.model.curve = &emax;
    set_levels(f, 6);
    for (size_t k = 0; k < 6; k++)
        set_level(f, k, labels[k], values[k]);
    f->d.control = f->d.reference_level = 0;
    set_targets(f, 3);
    set_target(f, 0, "ED90", &effective, 0.9, OF_BEST);
    set_target(f, 1, "MED", &minimum, 1, OF_BEST);
    set_target(f, 2, "near best", &margin, 0.2, OF_BEST);
    fill_results(f, -1.1, -2.6, 0.31);
    fill_curve(f, -1.1, -2.6, 0.31);
    itch_decisions(f);
    fill_common(f);
}

static void days(struct fixture *f)
{
    static const double values[] = {3, 4, 5, 6, 7, 8, 10};
    char label[16];
    design_common(f, "Shorter antibiotic courses", "Cure at day 21");
    f->d.quantity = words(f, "duration");
    f->d.unit = words(f, "days");
    f->d.model.curve = &walk;
    f->d.type = ENDPOINT_BINARY;
    f->d.higher_is_better = true;
    set_levels(f, 7);
    for (size_t k = 0; k < 7; k++) {
        snprintf(label, sizeof label, "%.0f days", values[k]);
        set_level(f, k, label, values[k]);
    }
    set_targets(f, 1);
    set_target(f, 0, "shortest", &margin, 0.05, 6);
    fill_results(f, 0.71, 0.2, 0.035);
    f->data.by_level.n[1] = f->data.by_level.events[1] = 0;
    f->data.dropped_as_failure = 3;
    f->data.dropped = 0;
    fill_common(f);
    f->a.level[5].open = false;
    f->a.level[5].next_share = 0;
    f->a.level[5].pr_target[0] = f->a.level[5].pr_meets[0] = 0;
    f->a.target[0].close = true;
    warn(f, "No outcomes yet at 4 days.");
}

static void many(struct fixture *f)
{
    char label[32];
    design_common(f, "A <wide> \"range\" & more", "Response with <tags> & 'quotes'");
    f->d.quantity = words(f, "dose");
    f->d.unit = words(f, "\xC2\xB5g");
    f->d.model.curve = &walk;
    f->d.higher_is_better = true;
    set_levels(f, 128);
    for (size_t k = 0; k < 128; k++) {
        snprintf(label, sizeof label, "dose <%zu> & \"x\"", k + 1);
        set_level(f, k, label, 2.5 * (double)k);
    }
    f->d.control = f->d.reference_level = 0;
    set_targets(f, 2);
    set_target(f, 0, "T<1>", &effective, 0.9, OF_BEST);
    set_target(f, 1, "T&2", &minimum, 1, OF_BEST);
    fill_results(f, 1e6, 2e5, 4e4);
    fill_common(f);
}

static void distrust(struct fixture *f)
{
    f->a.diagnostics.trusted = false;
    f->a.diagnostics.max_rhat = 1.31;
    warn(f, "R-hat of ED50 is 1.31, above 1.01.");
    f->a.recommendation = RECOMMEND_UNDETERMINED;
    for (size_t k = 0; k < f->a.levels; k++)
        f->a.level[k].next_share = NAN;
}

static void finish(struct fixture *f)
{
    f->a.likelihood.exists = true;
    f->a.likelihood.message = words(f, "ED50 runs off beyond the levels.");
    f->a.likelihood.rows = 1;
    f->a.likelihood.row[0] = (struct likelihood_row){"ED50", NAN, NAN};
    f->a.likelihood.log_likelihood = f->a.likelihood.aic = NAN;
    f->a.final = true;
    f->a.number = 7;
    f->a.recommendation = RECOMMEND_NO_SUCCESS;
    f->a.final_success.applies = true;
    for (size_t k = 0; k < f->a.levels; k++)
        f->a.level[k].next_share = NAN;
}

/* ---- models beside ---- */

static void fill_likelihood(struct fixture *f)
{
    static const char *const names[] = {"E0", "Emax", "ED50", "sd", "drift_variance"};
    struct likelihood_fit *x = &f->a.likelihood;
    x->exists = x->converged = true;
    x->log_likelihood = -231.21234567891;
    x->aic = 470.42469135782;
    x->rows = 5;
    for (size_t i = 0; i < x->rows; i++)
        x->row[i] =
            (struct likelihood_row){names[i], 1.23456789012 * (double)(i + 1), i == 3 ? NAN : 0.25};
    for (size_t k = 0; k < f->a.levels; k++)
        x->response[k] = f->a.level[k].response.mean + 0.05;
    f->a.curve.likelihood = numbers(f, f->a.curve.points);
    for (size_t i = 0; i < f->a.curve.points; i++)
        f->a.curve.likelihood[i] = f->a.curve.mean[i] + 0.05;
}

static struct level_result *copied_levels(struct fixture *f)
{
    struct level_result *level = keep(f, mem_new(f->a.levels, sizeof *level));
    memcpy(level, f->a.level, f->a.levels * sizeof *level);
    return level;
}

/* Figures by level that do not exist. */
static void void_levels(struct fixture *f, struct analysis *a)
{
    a->level = copied_levels(f);
    a->curve = (struct curve_result){0, NULL, NULL, NULL, NULL, NULL};
    for (size_t k = 0; k < a->levels; k++) {
        struct level_result *l = &a->level[k];
        set_spread(&l->response, NAN, NAN);
        set_spread(&l->gain, NAN, NAN);
        l->pr_positive = NAN;
        l->pr_target = numbers(f, a->targets);
        l->pr_meets = numbers(f, a->targets);
        l->mcse_target = l->mcse_meets = numbers(f, a->targets);
        for (size_t t = 0; t < a->targets; t++)
            l->pr_target[t] = l->pr_meets[t] = NAN;
    }
}

static void models(struct fixture *f)
{
    struct analysis *x = keep(f, mem_new(3, sizeof *x));
    f->d.sensitivities = 3;
    f->d.sensitivity = keep(f, mem_new(3, sizeof *f->d.sensitivity));
    for (size_t i = 0; i < 3; i++) {
        f->d.sensitivity[i] = f->d.model;
        f->d.sensitivity[i].curve = i == 0 ? &walk : &emax;
        x[i] = f->a;
        x[i].model = &f->d.sensitivity[i];
    }
    x[0].curve.points = 0;
    x[0].diagnostics.lack_of_fit_p = 0.031;
    x[1].diagnostics.trusted = false;
    x[2].diagnostics = (struct analysis_diagnostics){
        .max_rhat = NAN, .min_ess_bulk = NAN, .kish = NAN, .lack_of_fit_p = NAN};
    x[2].failure = words(f, "the posterior may be improper");
    void_levels(f, &x[2]);
    fill_likelihood(f);
    f->a.diagnostics.lack_of_fit_p = 0.4;
    f->a.sensitivities = 3;
    f->a.sensitivity = x;
}

struct fixture *fixture_new(enum fixture_kind kind)
{
    struct fixture *f = mem_new(1, sizeof *f);
    if (kind == FIXTURE_DAYS)
        days(f);
    else if (kind == FIXTURE_MANY)
        many(f);
    else
        itch(f);
    if (kind == FIXTURE_DISTRUSTED)
        distrust(f);
    if (kind == FIXTURE_FINAL)
        finish(f);
    if (kind == FIXTURE_MODELS)
        models(f);
    fill_draws(f);
    return f;
}

const struct analysis_report *fixture_report(const struct fixture *f)
{
    return &f->r;
}

void fixture_free(struct fixture *f)
{
    for (size_t i = 0; f && i < f->blocks; i++)
        mem_free(f->block[i]);
    mem_free(f);
}
