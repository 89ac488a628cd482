/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_curve_priors.c: the default priors of every curve against numbers worked by hand. */
#include <math.h>
#include <string.h>

#include "base/base.h"
#include "design/curve.h"
#include "unit.h"

enum { LEVELS = 6 };

static const double itch[LEVELS] = {0, 5, 10, 20, 40, 80};

static struct curve_levels levels_of(const double *value, size_t count)
{
    return (struct curve_levels){.count = count, .value = value, .shift = 1};
}

/* A worked case: levels 0, 5, 10, 20, 40, 80; A = 5, C = 0.5,
 * D = 80, K = 6; ln sqrt(5 x 80) = ln 20. */
static const struct expected_prior {
    const char *curve, *parameter, *family;
    double arg[2];
    bool scaled;
    int order;
} expected[] = {
    {"linear", "E0", "normal", {0.5, 5}, true, 1},
    {"linear", "slope", "normal", {0, 0.0625}, true, 1},
    {"log_linear", "E0", "normal", {0.5, 5}, true, 1},
    {"log_linear", "slope", "normal", {0, 1.13779903}, true, 1}, /* 5 / ln 81 */
    {"quadratic", "E0", "normal", {0.5, 5}, true, 1},
    {"quadratic", "b1", "normal", {0, 5}, true, 1},
    {"quadratic", "b2", "normal", {0, 5}, true, 1},
    {"emax", "E0", "normal", {0.5, 5}, true, 1},
    {"emax", "Emax", "normal", {0, 5}, true, 1},
    {"emax", "ED50", "lognormal", {2.99573227, 1}, false, 1},
    {"sigmoid_emax", "E0", "normal", {0.5, 5}, true, 1},
    {"sigmoid_emax", "Emax", "normal", {0, 5}, true, 1},
    {"sigmoid_emax", "ED50", "lognormal", {2.99573227, 1}, false, 1},
    {"sigmoid_emax", "h", "lognormal", {0, 0.5}, false, 1},
    {"logistic", "E0", "normal", {0.5, 5}, true, 1},
    {"logistic", "Emax", "normal", {0, 5}, true, 1},
    {"logistic", "ED50", "normal", {40, 40}, false, 1},
    {"logistic", "spread", "lognormal", {2.07944154, 0.75}, false, 1}, /* ln 8 */
    {"exponential", "E0", "normal", {0.5, 5}, true, 1},
    {"exponential", "rise", "normal", {0, 2.5}, true, 1},
    {"exponential", "scale", "lognormal", {4.38202663, 0.5}, false, 1}, /* ln 80 */
    {"ndlm", "theta", "normal", {0.5, 5}, true, 1},
    {"ndlm", "drift_sd", "half_normal", {2.23606798}, true, 1}, /* 5 / sqrt 5 */
    {"ndlm", "theta", "normal", {0.5, 5}, true, 2},
    {"ndlm", "slope", "normal", {0, 1}, true, 2},
    {"ndlm", "drift_sd", "half_normal", {0.44721360}, true, 2}, /* 5 / 5^1.5 */
    {"independent", "theta", "normal", {0.5, 5}, true, 1},
};

static size_t parameter_index(const struct curve *c, const char *name)
{
    size_t i = 0;

    while (c->parameters[i].name != NULL && strcmp(c->parameters[i].name, name) != 0)
        i++;
    return i;
}

static void check_prior(const struct expected_prior *e, const struct curve_levels *at)
{
    const struct default_scales scales = {
        .A = 5, .C = 0.5, .known = true, .levels = at, .shift = at->shift, .order = e->order};
    const struct curve *c = curve_find(e->curve);
    bool scaled = !e->scaled;
    const struct prior p = c->default_prior(parameter_index(c, e->parameter), &scales, &scaled);

    CU_ASSERT_STRING_EQUAL(p.family->key, e->family);
    CU_ASSERT_DOUBLE_EQUAL(p.arg[0], e->arg[0], 5e-9);
    CU_ASSERT_DOUBLE_EQUAL(p.arg[1], e->arg[1], 5e-9);
    CU_ASSERT_EQUAL(scaled, e->scaled);
    CU_ASSERT(!p.on_variance && !prior_is_truncated(&p));
}

static void default_priors_of_a_worked_case(void)
{
    const struct curve_levels at = levels_of(itch, LEVELS);
    size_t parameters = 0;

    for (size_t i = 0; i < COUNT_OF(expected); i++)
        check_prior(&expected[i], &at);
    for (size_t f = 0; curves[f] != NULL; f++) /* none is left out; ndlm stands twice */
        parameters += parameter_index(curves[f], "") + (curves[f]->kind == CURVE_WALK ? 2 : 0);
    CU_ASSERT_EQUAL(parameters, COUNT_OF(expected));
}

/* Levels that start above 0, or below it. */
static void default_priors_elsewhere(void)
{
    static const double days[] = {3, 5, 7, 12}, below[] = {-10, 0, 30};
    struct curve_levels at = levels_of(days, 4);

    check_prior(&(struct expected_prior){"emax", "ED50", "lognormal", {log(6), 1}, false, 1}, &at);
    check_prior(&(struct expected_prior){"linear", "slope", "normal", {0, 5.0 / 9}, true, 1}, &at);
    check_prior(&(struct expected_prior){"logistic", "ED50", "normal", {7.5, 4.5}, false, 1}, &at);
    at.shift = 2;
    check_prior(
        &(struct expected_prior){"log_linear", "slope", "normal", {0, 5 / log(14.0 / 5)}, true, 1},
        &at);
    at = levels_of(below, 3);
    check_prior(&(struct expected_prior){"logistic", "ED50", "normal", {10, 20}, false, 1}, &at);
    check_prior(
        &(struct expected_prior){"logistic", "spread", "lognormal", {log(4), 0.75}, false, 1}, &at);
}

/* A default prior of a positive number has no mass below 0. */
static void positive_numbers_have_positive_priors(void)
{
    const struct curve_levels at = levels_of(itch, LEVELS);
    const struct default_scales scales = {
        .A = 1.5, .known = true, .levels = &at, .shift = 1, .order = 2};

    for (size_t f = 0; curves[f] != NULL; f++)
        for (size_t i = 0; curves[f]->parameters[i].name != NULL; i++) {
            bool scaled;
            const struct prior p = curves[f]->default_prior(i, &scales, &scaled);

            if (curves[f]->parameters[i].positive) {
                CU_ASSERT(p.family->support_low >= 0);
            } else if (curves[f]->parameters[i].role == ROLE_LINEAR) {
                CU_ASSERT_STRING_EQUAL(p.family->key, "normal");
            }
        }
}

static const struct unit_test tests[] = {
    {"a worked case", default_priors_of_a_worked_case},
    {"levels that start elsewhere", default_priors_elsewhere},
    {"positive numbers have positive priors", positive_numbers_have_positive_priors},
    UNIT_END,
};

int main(void)
{
    return unit_main("curve priors", tests);
}
