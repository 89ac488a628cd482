/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rules_prior.c: rules about priors, and the priors in force where none is given. */
#include <math.h>
#include <string.h>

#include "base/base.h"
#include "base/number.h"
#include "design/design_messages.h"
#include "design/fields_prior.h"
#include "design/rules.h"

#define BINARY_SCALE 1.5 /* A of a binary endpoint, on the logit; C is 0 */

/* --- prior_names --- */

static bool is_variance(const struct parameter *p, const char *name)
{
    return p->variance != NULL && strcmp(p->variance, name) == 0;
}

static void check_name(struct reader *r, const cJSON *priors, const struct model *m,
                       const char *name)
{
    const int at = model_parameter(m, name);
    struct text names = TEXT_INIT;

    if (at >= 0) {
        if (is_variance(m->parameter[at], name) && tree_given(priors, m->parameter[at]->name))
            reader_fault(r, MSG_PRIOR_TWICE, m->parameter[at]->name, name);
        return;
    }
    for (size_t i = 0; i < m->parameters; i++)
        text_addf(&names, "%s%s", i > 0 ? ", " : "", m->parameter[i]->name);
    reader_fault(r, MSG_PRIOR_NAME, m->curve->key, name, text_s(&names));
    text_release(&names);
}

static void check_names(struct reader *r, cJSON *tree, struct model *m, const char *where)
{
    const cJSON *priors = tree_at(tree, "priors"), *item;

    if (m->curve == NULL || !r->endpoint_known)
        return;
    cJSON_ArrayForEach(item, priors)
    {
        reader_at(r, "%s/priors/%s", where, item->string);
        check_name(r, priors, m, item->string);
    }
}

void rule_prior_names(struct reader *r)
{
    each_model(r, check_names);
}

/* --- prior_cuts --- */

/* The family's member of a prior; its key is the family. */
static const cJSON *family_tree(const cJSON *prior)
{
    return cJSON_IsObject(prior) ? prior->child : NULL;
}

/* False when some number is faulty. */
static bool read_prior(const cJSON *tree, struct prior *p)
{
    *p = (struct prior){
        .family = prior_family_find(tree->string), .above = -INFINITY, .below = INFINITY};
    if (p->family == NULL)
        BUG("the field table lets through a prior that does not exist");
    for (size_t i = 0; i < PRIOR_ARGS && p->family->args[i].key != NULL; i++)
        if (!tree_number(tree, p->family->args[i].key, &p->arg[i]))
            return false;
    return (!tree_given(tree, "above") || tree_number(tree, "above", &p->above)) &&
           (!tree_given(tree, "below") || tree_number(tree, "below", &p->below));
}

static bool is_uniform(const struct prior *p)
{
    return strcmp(p->family->key, "uniform") == 0;
}

static double support_low(const struct prior *p)
{
    return is_uniform(p) ? p->arg[0] : p->family->support_low;
}

static double support_high(const struct prior *p)
{
    return is_uniform(p) ? p->arg[1] : INFINITY;
}

static bool has_mass(const struct prior *p)
{
    const double low = fmax(p->above, support_low(p)), high = fmin(p->below, support_high(p));

    if (prior_is_fixed(p))
        return p->above < p->arg[0] && p->arg[0] < p->below;
    return low < high && prior_mass(p) > PRIOR_LEAST_MASS;
}

/* Cuts that cut nothing off are none. */
static void drop_idle_cuts(struct prior *p)
{
    if (prior_is_fixed(p) || p->above <= support_low(p))
        p->above = -INFINITY;
    if (prior_is_fixed(p) || p->below >= support_high(p))
        p->below = INFINITY;
}

static bool check_cut(struct reader *r, const struct prior *p)
{
    char a[NUMBER_CHARS], b[NUMBER_CHARS];

    if (is_uniform(p) && p->arg[0] >= p->arg[1])
        reader_fault(r, MSG_PRIOR_UNIFORM, number_shortest(a, p->arg[0]),
                     number_shortest(b, p->arg[1]));
    else if (isfinite(p->above) && isfinite(p->below) && p->above >= p->below)
        reader_fault(r, MSG_PRIOR_BOUNDS, number_shortest(a, p->above),
                     number_shortest(b, p->below));
    else if (!has_mass(p))
        reader_fault(r, MSG_PRIOR_NO_MASS);
    else
        return true;
    return false;
}

static void check_cuts(struct reader *r, cJSON *tree, struct model *m, const char *where)
{
    const cJSON *priors = tree_at(tree, "priors"), *item;

    cJSON_ArrayForEach(item, priors)
    {
        const cJSON *family = family_tree(item);
        struct prior prior;
        int at;

        if (family == NULL || !read_prior(family, &prior))
            continue;
        reader_at(r, "%s/priors/%s/%s", where, item->string, family->string);
        if (!check_cut(r, &prior) || m->curve == NULL)
            continue;
        at = model_parameter(m, item->string);
        if (at < 0)
            continue;
        drop_idle_cuts(&prior);
        prior_settle(&prior);
        prior.on_variance = is_variance(m->parameter[at], item->string);
        m->prior[at] = prior;
    }
}

void rule_prior_cuts(struct reader *r)
{
    each_model(r, check_cuts);
}

/* --- prior_support --- */

static void check_positive(struct reader *r, const struct parameter *p, const struct prior *prior,
                           const char *name)
{
    /* a drift of exactly 0 is a flat curve; an sd of 0 is no model */
    const bool zero = p->coordinate == COORDINATE_SELF;
    char spare[NUMBER_CHARS];

    if (prior_is_fixed(prior)) {
        if (prior->arg[0] < 0 || (prior->arg[0] == 0 && !zero))
            reader_fault(r, MSG_PRIOR_FIXED, name, number_shortest(spare, prior->arg[0]),
                         zero ? "at least 0" : "greater than 0");
    } else if (fmax(support_low(prior), prior->above) < 0) {
        reader_fault(r, MSG_PRIOR_NEGATIVE, name);
    }
}

static void check_support(struct reader *r, cJSON *tree, struct model *m, const char *where)
{
    const cJSON *priors = tree_at(tree, "priors"), *item;

    cJSON_ArrayForEach(item, priors)
    {
        const int at = m->curve == NULL ? -1 : model_parameter(m, item->string);

        if (at < 0 || m->prior[at].family == NULL || !m->parameter[at]->positive)
            continue;
        reader_at(r, "%s/priors/%s", where, item->string);
        check_positive(r, m->parameter[at], &m->prior[at], item->string);
        if (prior_is_fixed(&m->prior[at]) && m->prior[at].on_variance) {
            /* a known variance is a known standard deviation: nobody downstream need ask */
            m->prior[at].arg[0] = sqrt(fmax(m->prior[at].arg[0], 0));
            m->prior[at].on_variance = false;
        }
    }
}

void rule_prior_support(struct reader *r)
{
    each_model(r, check_support);
}

/* --- priors_complete --- */

static struct default_scales scales_of(const struct design *d, const struct model *m,
                                       const struct curve_levels *levels)
{
    struct default_scales s = {
        .levels = levels, .shift = m->shift, .order = m->order, .known = true};

    if (d->type == ENDPOINT_BINARY) {
        s.A = BINARY_SCALE;
    } else if (d->has_scales) {
        s.A = d->scales.A;
        s.C = d->scales.C;
    } else if (d->has_range) {
        s.A = (d->range[1] - d->range[0]) / 4;
        s.C = d->range[0] + (d->range[1] - d->range[0]) / 2;
    } else {
        s.known = false;
        s.A = 1; /* stands in; a prior made from it is never used */
    }
    return s;
}

static struct prior default_prior(const struct model *m, const struct parameter *p,
                                  const struct default_scales *s, bool *scaled)
{
    *scaled = true;
    if (p == &parameter_control)
        return prior_normal(s->C, s->A);
    if (p == &parameter_sd)
        return prior_half_normal(s->A);
    return m->curve->default_prior((size_t)(p - m->curve->parameters), s, scaled);
}

static cJSON *prior_tree(const struct prior *p)
{
    cJSON *prior = cJSON_CreateObject(), *family = cJSON_CreateObject();

    for (size_t i = 0; i < PRIOR_ARGS && p->family->args[i].key != NULL; i++)
        tree_put_number(family, p->family->args[i].key, p->arg[i]);
    tree_put(prior, p->family->key, family);
    return prior;
}

static void complete(struct reader *r, cJSON *tree, struct model *m, const char *where)
{
    cJSON *priors = tree_at(tree, "priors");
    double value[LEVELS_MAX];
    struct curve_levels levels;
    struct default_scales scales;

    if (m->curve == NULL || !cJSON_IsObject(priors) || !r->levels_known || !r->scale_known)
        return;
    levels = design_curve_levels(r->d, m, value);
    scales = scales_of(r->d, m, &levels);
    reader_at(r, "%s/priors", where);
    for (size_t i = 0; i < m->parameters; i++) {
        const struct parameter *p = m->parameter[i];
        struct prior prior;
        bool scaled;

        if (tree_given(priors, p->name) || (p->variance != NULL && tree_given(priors, p->variance)))
            continue;
        prior = default_prior(m, p, &scales, &scaled);
        if (scaled && !scales.known) {
            reader_fault(r, MSG_PRIOR_MISSING, p->name);
            continue;
        }
        m->prior[i] = prior;
        tree_put(priors, p->name, prior_tree(&prior));
    }
}

void rule_priors_complete(struct reader *r)
{
    each_model(r, complete);
}
