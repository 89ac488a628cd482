/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_curves.c: one battery over every curve: lists, formula, levels that suit. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/base.h"
#include "design/curve.h"
#include "unit.h"

enum { LEVELS = 6, POINTS = 37 }; /* points: no multiple of any lane */

static const double itch[LEVELS] = {0, 5, 10, 20, 40, 80};

static struct curve_levels levels_of(const double *value, size_t count)
{
    return (struct curve_levels){.count = count, .value = value, .shift = 1};
}

/* --- formulas, with libm --- */

static double linear_at(double d, const double *v, double largest)
{
    (void)largest;
    return v[0] + v[1] * d;
}

static double log_linear_at(double d, const double *v, double largest)
{
    (void)largest;
    return v[0] + v[1] * log(d + 1);
}

static double quadratic_at(double d, const double *v, double largest)
{
    return v[0] + v[1] * d / largest + v[2] * pow(d / largest, 2);
}

static double emax_at(double d, const double *v, double largest)
{
    (void)largest;
    return v[0] + v[1] * d / (v[2] + d);
}

static double sigmoid_at(double d, const double *v, double largest)
{
    (void)largest;
    return v[0] + v[1] * pow(d, v[3]) / (pow(v[2], v[3]) + pow(d, v[3]));
}

static double logistic_at(double d, const double *v, double largest)
{
    (void)largest;
    return v[0] + v[1] / (1 + exp((v[2] - d) / v[3]));
}

static double exponential_at(double d, const double *v, double largest)
{
    (void)largest;
    return v[0] + v[1] * expm1(fmin(d / v[2], 30)); /* bounded there */
}

/* What the interface says of each curve. */
static const struct known {
    const char *key;
    const char *roles;      /* L linear, S shape */
    const char *positive;   /* y, n */
    const char *parameters; /* in order */
    bool monotone;
    double (*at)(double d, const double *v, double largest); /* NULL: no formula */
    double value[CURVE_PARAMETERS_MAX];
} known[] = {
    {"linear", "LL", "nn", "E0 slope", true, linear_at, {-1, 0.03}},
    {"log_linear", "LL", "nn", "E0 slope", true, log_linear_at, {2, -0.4}},
    {"quadratic", "LLL", "nnn", "E0 b1 b2", false, quadratic_at, {1, 4, -3}},
    {"emax", "LLS", "nny", "E0 Emax ED50", true, emax_at, {-1, -2.4, 8}},
    {"sigmoid_emax", "LLSS", "nnyy", "E0 Emax ED50 h", true, sigmoid_at, {-1, 3, 12, 2.5}},
    {"logistic", "LLSS", "nnny", "E0 Emax ED50 spread", true, logistic_at, {0.5, 2, -15, 9}},
    {"exponential", "LLS", "nny", "E0 rise scale", true, exponential_at, {-1, 0.7, 40}},
    {"ndlm", "LLS", "nny", "theta slope drift_sd", false, NULL, {0}},
    {"independent", "L", "n", "theta", false, NULL, {0}},
};

static void the_list(void)
{
    CU_ASSERT_PTR_NULL(curves[COUNT_OF(known)]);
    CU_ASSERT_PTR_NULL(curve_find("cubic"));
    for (size_t i = 0; i < COUNT_OF(known); i++) {
        const struct curve *c = curve_find(known[i].key);

        CU_ASSERT_PTR_NOT_NULL_FATAL(c);
        CU_ASSERT_PTR_EQUAL(c, curves[i]);
        CU_ASSERT_EQUAL(c->kind == CURVE_BASIS, known[i].at != NULL);
        CU_ASSERT_EQUAL(c->monotone, known[i].monotone);
        CU_ASSERT_EQUAL(c->basis != NULL, c->kind == CURVE_BASIS);
        CU_ASSERT(c->formula != NULL && strlen(c->formula) > 0);
    }
    CU_ASSERT_EQUAL(curve_find("ndlm")->kind, CURVE_WALK);
    CU_ASSERT_EQUAL(curve_find("independent")->kind, CURVE_FREE);
    CU_ASSERT_EQUAL(curve_find("sigmoid_emax")->levels_wanted, 5);
    CU_ASSERT_EQUAL(curve_find("logistic")->levels_wanted, 5);
    CU_ASSERT(curve_find("emax")->levels_wanted <= 2); /* no warning for what is allowed */
}

static void check_parameters(const struct curve *c, const struct known *k)
{
    char names[100] = "";
    size_t i = 0, shapes = 0, linear = 0;

    for (; c->parameters[i].name != NULL; i++) {
        const struct parameter *p = &c->parameters[i];

        const size_t used = strlen(names);
        snprintf(names + used, sizeof names - used, "%s%s", i > 0 ? " " : "", p->name);
        CU_ASSERT_EQUAL(p->role, k->roles[i] == 'L' ? ROLE_LINEAR : ROLE_SHAPE);
        CU_ASSERT_EQUAL(p->positive, k->positive[i] == 'y');
        CU_ASSERT(p->help != NULL && strlen(p->help) > 0);
        CU_ASSERT_EQUAL(p->order, c->kind == CURVE_WALK && strcmp(p->name, "slope") == 0 ? 2 : 0);
        CU_ASSERT_EQUAL(p->variance != NULL, strcmp(p->name, "drift_sd") == 0);
        if (p->variance != NULL)
            CU_ASSERT_STRING_EQUAL(p->variance, "drift_variance");
        CU_ASSERT_EQUAL(p->coordinate,
                        p->positive && p->variance == NULL ? COORDINATE_LOG : COORDINATE_SELF);
        shapes += p->role == ROLE_SHAPE;
        linear += p->role == ROLE_LINEAR;
    }
    CU_ASSERT_STRING_EQUAL(names, k->parameters);
    CU_ASSERT(i <= CURVE_PARAMETERS_MAX && shapes <= SHAPES_MAX && linear < COLUMNS_MAX);
    if (c->kind == CURVE_BASIS)
        CU_ASSERT_EQUAL(curve_columns(c), linear);
}

static void parameters_of_the_interface(void)
{
    for (size_t i = 0; i < COUNT_OF(known); i++)
        check_parameters(curve_find(known[i].key), &known[i]);
}

static void means_follow_the_formula(void)
{
    const struct curve_levels at = levels_of(itch, LEVELS);
    double theta[LEVELS];

    for (size_t i = 0; i < COUNT_OF(known); i++) {
        if (known[i].at == NULL)
            continue;
        curve_mean(curve_find(known[i].key), &at, known[i].value, theta);
        for (size_t k = 0; k < LEVELS; k++)
            CU_ASSERT_DOUBLE_EQUAL(theta[k], known[i].at(itch[k], known[i].value, 80), 1e-13);
    }
}

static void means_at_negative_levels(void)
{
    static const double value[] = {-4, -0.5, 3};
    struct curve_levels at = levels_of(value, 3);
    static const struct {
        size_t known;
        double shift;
    } c[] = {{0, 1}, {2, 1}, {5, 1}};
    double theta[3];

    for (size_t i = 0; i < COUNT_OF(c); i++) {
        const struct known *k = &known[c[i].known];

        curve_mean(curve_find(k->key), &at, k->value, theta);
        for (size_t j = 0; j < 3; j++)
            CU_ASSERT_DOUBLE_EQUAL(theta[j], k->at(value[j], k->value, 3), 1e-13);
    }
    at.shift = 4.25;
    curve_mean(curve_find("log_linear"), &at, (const double[]){1, 2}, theta);
    for (size_t j = 0; j < 3; j++)
        CU_ASSERT_DOUBLE_EQUAL(theta[j], 1 + 2 * log(value[j] + 4.25), 1e-13);
}

/* --- the basis at many shape numbers at once --- */

struct shapes {
    double value[SHAPES_MAX][POINTS], log_value[SHAPES_MAX][POINTS];
};

/* From far below the levels to far above them. */
static void spread_shapes(struct shapes *s, const struct curve *c)
{
    const bool signed_first = strcmp(c->key, "logistic") == 0;

    for (size_t i = 0; i < POINTS; i++) {
        const double t = (double)i / (POINTS - 1);

        s->value[0][i] = signed_first ? -100 + 250 * t : exp(-9 + 18 * t);
        s->value[1][i] = exp(1.5 - 3 * fmod(7 * t, 1));
        for (size_t j = 0; j < SHAPES_MAX; j++)
            s->log_value[j][i] = s->value[j][i] > 0 ? log(s->value[j][i]) : -700;
    }
}

static size_t shape_parameter(const struct curve *c, size_t shape)
{
    return curve_columns(c) + shape;
}

/* Column j alone: the formula with coefficient j at 1 and the others at 0. */
static void check_basis(const struct known *k)
{
    const struct curve *c = curve_find(k->key);
    const struct curve_levels at = levels_of(itch, LEVELS);
    const size_t columns = curve_columns(c);
    struct shapes s;
    const double *const shape[SHAPES_MAX] = {s.value[0], s.value[1]};
    const double *const log_shape[SHAPES_MAX] = {s.log_value[0], s.log_value[1]};
    double x[(COLUMNS_MAX - 1) * LEVELS * POINTS];

    spread_shapes(&s, c);
    c->basis(&at, POINTS, shape, log_shape, x);
    for (size_t j = 1; j < columns; j++)
        for (size_t l = 0; l < LEVELS; l++)
            for (size_t i = 0; i < POINTS; i++) {
                double v[CURVE_PARAMETERS_MAX + SHAPES_MAX] = {0}, want;

                v[j] = 1;
                v[shape_parameter(c, 0)] = s.value[0][i];
                v[shape_parameter(c, 1)] = s.value[1][i];
                want = k->at(itch[l], v, 80);
                CU_ASSERT_DOUBLE_EQUAL(x[((j - 1) * LEVELS + l) * POINTS + i], want,
                                       1e-12 * fmax(fabs(want), 1e-3));
            }
}

static void basis_follows_the_formula(void)
{
    for (size_t i = 0; i < COUNT_OF(known); i++)
        if (known[i].at != NULL)
            check_basis(&known[i]);
}

/* One point at a time or many: the same bits. */
static void blocks_do_not_show(void)
{
    const struct curve_levels at = levels_of(itch, LEVELS);
    double many[(COLUMNS_MAX - 1) * LEVELS * POINTS], one[(COLUMNS_MAX - 1) * LEVELS];
    struct shapes s;

    for (size_t f = 0; f < COUNT_OF(known); f++) {
        const struct curve *c = curve_find(known[f].key);
        size_t differ = 0;

        if (c->kind != CURVE_BASIS)
            continue;
        spread_shapes(&s, c);
        c->basis(&at, POINTS, (const double *const[]){s.value[0], s.value[1]},
                 (const double *const[]){s.log_value[0], s.log_value[1]}, many);
        for (size_t i = 0; i < POINTS; i++) {
            c->basis(&at, 1, (const double *const[]){&s.value[0][i], &s.value[1][i]},
                     (const double *const[]){&s.log_value[0][i], &s.log_value[1][i]}, one);
            for (size_t r = 0; r < (curve_columns(c) - 1) * LEVELS; r++)
                differ += memcmp(&one[r], &many[r * POINTS + i], sizeof one[r]) != 0;
        }
        CU_ASSERT_EQUAL(differ, 0);
    }
}

/* Shares of Emax rise from exactly 0 at level 0 and stay within 0 and 1, whatever the extremes. */
static void extremes_stay_in_bounds(void)
{
    static const char *const saturating[] = {"emax", "sigmoid_emax"};
    static const double extreme[][2] = {
        {1e-250, 1e-6}, {1e-250, 300}, {1e250, 1e-6}, {1e250, 300}, {20, 1e9}};
    const struct curve_levels at = levels_of(itch, LEVELS);
    double theta[LEVELS];

    for (size_t f = 0; f < COUNT_OF(saturating); f++)
        for (size_t e = 0; e < COUNT_OF(extreme); e++) {
            const double v[] = {0, 1, extreme[e][0], extreme[e][1]};

            curve_mean(curve_find(saturating[f]), &at, v, theta);
            CU_ASSERT_EQUAL(theta[0], 0);
            for (size_t k = 1; k < LEVELS; k++)
                CU_ASSERT(theta[k] >= theta[k - 1] && theta[k] <= 1);
        }
}

/* --- levels that suit --- */

static void levels_that_suit(void)
{
    static const double values[][2] = {{0, 5}, {2, 5}, {-3, 5}, {-3, 0}, {-3, -1}, {-1, 4}};
    static const struct {
        const char *curve, *suits; /* y or n for each pair of values */
    } want[] = {
        {"linear", "yyyyyy"},      {"log_linear", "yynnnn"}, /* shift 1 */
        {"quadratic", "yyynny"},   {"emax", "yynnnn"},       {"sigmoid_emax", "yynnnn"},
        {"logistic", "yyyyyy"},    {"ndlm", "yyyyyy"},       {"independent", "yyyyyy"},
        {"exponential", "yyyyyy"},
    };

    for (size_t i = 0; i < COUNT_OF(want); i++)
        for (size_t j = 0; j < COUNT_OF(values); j++) {
            const struct curve *c = curve_find(want[i].curve);
            const struct curve_levels at = levels_of(values[j], 2);
            const char *fault = c->level_fault == NULL ? NULL : c->level_fault(&at);

            CU_ASSERT_EQUAL(fault == NULL, want[i].suits[j] == 'y');
            CU_ASSERT(fault == NULL || strstr(fault, "must be") != NULL);
        }
}

static void zero_alone_suits_no_saturating_curve(void)
{
    const struct curve_levels at = levels_of(itch, 1);

    CU_ASSERT_PTR_NOT_NULL(curve_find("emax")->level_fault(&at));
    CU_ASSERT_PTR_NOT_NULL(curve_find("sigmoid_emax")->level_fault(&at));
    CU_ASSERT_PTR_NOT_NULL(curve_find("quadratic")->level_fault(&at));
}

static void shift_decides_for_log_linear(void)
{
    static const double value[] = {-3, 5};
    struct curve_levels at = levels_of(value, 2);
    const struct curve *c = curve_find("log_linear");

    at.shift = 3;
    CU_ASSERT_PTR_NOT_NULL(c->level_fault(&at));
    at.shift = 3.001;
    CU_ASSERT_PTR_NULL(c->level_fault(&at));
}

static const struct unit_test tests[] = {
    {"the list", the_list},
    {"parameters of the interface", parameters_of_the_interface},
    {"means follow the formula", means_follow_the_formula},
    {"means at negative levels", means_at_negative_levels},
    {"the basis follows the formula", basis_follows_the_formula},
    {"blocks of points do not show", blocks_do_not_show},
    {"extremes stay in bounds", extremes_stay_in_bounds},
    {"levels that suit", levels_that_suit},
    {"0 alone suits no saturating curve", zero_alone_suits_no_saturating_curve},
    {"the shift decides for log_linear", shift_decides_for_log_linear},
    UNIT_END,
};

int main(void)
{
    return unit_main("curves", tests);
}
