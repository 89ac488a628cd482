/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rules_truth.c: rules about the truths of scenarios. */
#include <math.h>
#include <string.h>

#include "base/base.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/vecmath.h"
#include "design/design_messages.h"
#include "design/rules_schedule.h"

/* One scenario at a time; `i` is its place in the list. */
static void each_scenario(struct reader *r,
                          void (*f)(struct reader *r, cJSON *tree, struct scenario *s, size_t i))
{
    cJSON *scenarios = tree_at(r->tree, "scenarios"), *item;
    size_t i = 0;

    cJSON_ArrayForEach(item, scenarios)
    {
        if (cJSON_IsObject(item))
            f(r, item, &r->d->scenario[i], i);
        i++;
    }
}

/* --- scenario_names --- */

static void check_name(struct reader *r, cJSON *tree, struct scenario *s, size_t i)
{
    (void)tree;
    reader_at(r, "/scenarios/%zu/name", i);
    for (size_t j = 0; s->name != NULL && j < i; j++) {
        const char *other = r->d->scenario[j].name;

        if (other == NULL || strcmp(other, s->name) != 0)
            continue;
        reader_fault(r, MSG_SCENARIO_TWICE, s->name);
        break;
    }
}

void rule_scenario_names(struct reader *r)
{
    each_scenario(r, check_name);
}

/* --- truth_endpoint, truth_per_level --- */

static void check_endpoint(struct reader *r, cJSON *tree, struct scenario *s, size_t i)
{
    s->kind = TRUTH_MEANS;
    if (tree_given(tree, "curve"))
        s->kind = TRUTH_CURVE;
    if (tree_given(tree, "draw"))
        s->kind = TRUTH_PRIOR;
    if (!r->endpoint_known)
        return;
    if (r->d->type == ENDPOINT_BINARY && tree_given(tree, "means")) {
        reader_at(r, "/scenarios/%zu/means", i);
        reader_fault(r, MSG_MEANS_BINARY);
    }
    if (r->d->type == ENDPOINT_CONTINUOUS && tree_given(tree, "rates")) {
        reader_at(r, "/scenarios/%zu/rates", i);
        reader_fault(r, MSG_RATES_CONTINUOUS);
    }
}

void rule_truth_endpoint(struct reader *r)
{
    each_scenario(r, check_endpoint);
}

static void read_levels(struct reader *r, cJSON *tree, struct scenario *s, size_t i)
{
    const char *key = tree_given(tree, "rates") ? "rates" : "means";

    reader_at(r, "/scenarios/%zu/%s", i, key);
    if (s->kind == TRUTH_MEANS)
        s->response = tree_per_level(r, tree_at(tree, key));
}

void rule_truth_per_level(struct reader *r)
{
    each_scenario(r, read_levels);
}

/* --- truth_keys --- */

static void key_without(struct reader *r, const cJSON *tree, const char *key, const char *other,
                        size_t i)
{
    reader_at(r, "/scenarios/%zu/%s", i, key);
    if (tree_given(tree, key) && !tree_given(tree, other))
        reader_fault(r, MSG_SCENARIO_KEY, key, other);
}

static void check_keys(struct reader *r, cJSON *tree, struct scenario *s, size_t i)
{
    const bool off_curve = !r->d->control_on_curve;

    (void)s;
    key_without(r, tree, "parameters", "curve", i);
    key_without(r, tree, "control", "curve", i);
    if (!tree_given(tree, "curve"))
        return;
    reader_at(r, "/scenarios/%zu/control", i);
    if (tree_given(tree, "control") && !off_curve)
        reader_fault(r, MSG_NO_OFF_CONTROL);
    reader_at(r, "/scenarios/%zu", i);
    if (!tree_given(tree, "parameters"))
        reader_fault(r, MSG_SCENARIO_NEEDS, "curve", "parameters");
    if (!tree_given(tree, "control") && off_curve)
        reader_fault(r, MSG_SCENARIO_NEEDS, "curve", "control");
}

void rule_truth_keys(struct reader *r)
{
    each_scenario(r, check_keys);
}

/* --- truth_parameters --- */

static const struct parameter *curve_parameter(const struct curve *c, const char *name)
{
    for (const struct parameter *p = c->parameters; p->name != NULL; p++)
        if (strcmp(p->name, name) == 0)
            return p;
    return NULL;
}

static void check_parameter(struct reader *r, const struct curve *c, const cJSON *item)
{
    const struct parameter *p = curve_parameter(c, item->string);
    struct text names = TEXT_INIT;
    char spare[NUMBER_CHARS];

    if (p == NULL) {
        curve_parameter_names(c, 1, &names);
        reader_fault(r, MSG_PARAMETER, c->key, item->string, text_s(&names));
        text_release(&names);
    } else if (p->positive && cJSON_IsNumber(item) && item->valuedouble <= 0) {
        reader_fault(r, MSG_PARAMETER_POSITIVE, p->name, number_shortest(spare, item->valuedouble));
    }
}

static void no_formula(struct reader *r, const struct curve *c)
{
    struct text with = TEXT_INIT;

    for (size_t i = 0; curves[i] != NULL; i++)
        if (curves[i]->kind == CURVE_BASIS)
            text_addf(&with, "%s%s", with.length > 0 ? ", " : "", curves[i]->key);
    reader_fault(r, MSG_NO_FORMULA, c->key, text_s(&with));
    text_release(&with);
}

static void check_parameters(struct reader *r, cJSON *tree, struct scenario *s, size_t i)
{
    const cJSON *parameters = tree_at(tree, "parameters"), *item;
    const char *key = tree_text(tree, "curve");

    if (key == NULL)
        return;
    s->curve = curve_find(key);
    reader_at(r, "/scenarios/%zu/curve", i);
    if (s->curve->kind != CURVE_BASIS) {
        no_formula(r, s->curve);
        s->curve = NULL;
        return;
    }
    cJSON_ArrayForEach(item, parameters)
    {
        reader_at(r, "/scenarios/%zu/parameters/%s", i, item->string);
        check_parameter(r, s->curve, item);
    }
    reader_at(r, "/scenarios/%zu/parameters", i);
    if (!cJSON_IsObject(parameters))
        return;
    for (const struct parameter *p = s->curve->parameters; p->name != NULL; p++)
        if (!tree_given(parameters, p->name))
            reader_fault(r, MSG_PARAMETER_MISSING, p->name, s->curve->key);
}

void rule_truth_parameters(struct reader *r)
{
    each_scenario(r, check_parameters);
}

/* --- truth_curve --- */

/* False when a value is missing or impossible (already said). */
static bool read_values(const struct curve *c, const cJSON *parameters, double *value)
{
    for (size_t i = 0; c->parameters[i].name != NULL; i++)
        if (!tree_number(parameters, c->parameters[i].name, &value[i]) ||
            (c->parameters[i].positive && value[i] <= 0))
            return false;
    return true;
}

/* theta on the curve, and the control off it, as responses in list order. */
static void fill_response(const struct design *d, struct scenario *s, const double *theta,
                          double control)
{
    size_t on_curve = 0;

    s->response = mem_new(d->levels, sizeof *s->response);
    for (size_t k = 0; k < d->levels; k++) {
        const bool off = !d->control_on_curve && (int)k == d->control;
        const double x = off ? control : theta[on_curve++];

        s->response[k] = d->type == ENDPOINT_BINARY ? vm_logistic(x) : x;
    }
}

static void check_curve(struct reader *r, cJSON *tree, struct scenario *s, size_t i)
{
    const struct design *d = r->d;
    double place[LEVELS_MAX], theta[LEVELS_MAX], value[CURVE_PARAMETERS_MAX] = {0}, control = 0;
    struct curve_levels levels;
    const char *fault;

    if (s->curve == NULL || !r->levels_known || !r->endpoint_known)
        return;
    levels = design_curve_levels(d, &d->model, place);
    fault = s->curve->level_fault == NULL ? NULL : s->curve->level_fault(&levels);
    reader_at(r, "/scenarios/%zu/curve", i);
    if (fault != NULL) {
        reader_fault(r, MSG_CURVE_LEVELS, s->curve->key, fault);
        return;
    }
    tree_number(tree, "control", &control);
    if (!read_values(s->curve, tree_at(tree, "parameters"), value))
        return;
    curve_mean(s->curve, &levels, value, theta);
    fill_response(d, s, theta, control);
    reader_at(r, "/scenarios/%zu/parameters", i);
    for (size_t k = 0; k < d->levels; k++)
        if (!isfinite(s->response[k]) && r->labels_known)
            reader_fault(r, MSG_NOT_FINITE, d->level[k].label);
}

void rule_truth_curve(struct reader *r)
{
    each_scenario(r, check_curve);
}

/* --- truth_possible --- */

static void check_possible(struct reader *r, cJSON *tree, struct scenario *s, size_t i)
{
    const struct design *d = r->d;
    char a[NUMBER_CHARS], b[NUMBER_CHARS], c[NUMBER_CHARS];

    (void)tree;
    for (size_t k = 0; d->has_range && s->response != NULL && k < d->levels; k++) {
        if (!isfinite(s->response[k]) ||
            (s->response[k] >= d->range[0] && s->response[k] <= d->range[1]))
            continue;
        if (s->kind == TRUTH_MEANS)
            reader_at(r, "/scenarios/%zu/means/%zu", i, k);
        else
            reader_at(r, "/scenarios/%zu/parameters", i);
        reader_fault(r, MSG_OUTSIDE, number_shortest(a, s->response[k]),
                     number_shortest(b, d->range[0]), number_shortest(c, d->range[1]));
    }
}

void rule_truth_possible(struct reader *r)
{
    each_scenario(r, check_possible);
}

/* --- truth_sd, truth_overrides --- */

static void check_sd(struct reader *r, cJSON *tree, struct scenario *s, size_t i)
{
    const bool given = tree_given(tree, "sd");

    if (!r->endpoint_known)
        return;
    reader_at(r, "/scenarios/%zu%s", i, given ? "/sd" : "");
    if (r->d->type == ENDPOINT_BINARY) {
        if (given)
            reader_fault(r, MSG_SD_BINARY);
    } else if (s->kind == TRUTH_PRIOR) {
        if (given)
            reader_fault(r, MSG_SD_DRAW);
    } else if (!given) {
        reader_fault(r, MSG_SD_MISSING);
    } else {
        s->sd = tree_per_level(r, tree_at(tree, "sd"));
    }
}

void rule_truth_sd(struct reader *r)
{
    each_scenario(r, check_sd);
}

static void check_overrides(struct reader *r, cJSON *tree, struct scenario *s, size_t i)
{
    struct text where = TEXT_INIT;

    tree_number(tree, "trend", &s->trend);
    text_addf(&where, "/scenarios/%zu/accrual", i);
    accrual_read(r, tree_at(tree, "accrual"), text_s(&where), &s->accrual);
    text_release(&where);
    reader_at(r, "/scenarios/%zu/dropout/fraction", i);
    s->dropout = tree_per_level(r, tree_at(tree_at(tree, "dropout"), "fraction"));
}

void rule_truth_overrides(struct reader *r)
{
    each_scenario(r, check_overrides);
}

/* --- truth_null --- */

/* Largest true gain <= 0, with the tolerance of all true responses: 1e-9 x max(1, largest |gain|).
 */
static bool null_by_gains(const struct design *d, const double *response)
{
    const double reference =
        d->has_reference_number ? d->reference_number : response[d->reference_level];
    double largest = -INFINITY, size = 1;

    for (size_t k = 0; k < d->levels; k++) {
        const double gain = design_sign(d) * (response[k] - reference);

        if (!design_is_active(d, k))
            continue;
        largest = fmax(largest, gain);
        size = fmax(size, fabs(gain));
    }
    return largest <= 1e-9 * size;
}

static void check_null(struct reader *r, cJSON *tree, struct scenario *s, size_t i)
{
    const cJSON *given = tree_at(tree, "null");

    (void)i;
    s->null_given = cJSON_IsBool(given);
    if (s->null_given)
        s->is_null = cJSON_IsTrue(given);
    if (given != NULL || !r->endpoint_known)
        return;
    s->is_null = s->response != NULL && design_has_gain(r->d) && null_by_gains(r->d, s->response);
    tree_put(tree, "null", cJSON_CreateBool(s->is_null));
}

void rule_truth_null(struct reader *r)
{
    each_scenario(r, check_null);
}
