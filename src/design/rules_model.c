/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rules_model.c: rules about a model: its curve and the levels under it. */
#include <stdio.h>
#include <string.h>

#include "base/base.h"
#include "base/mem.h"
#include "design/design_messages.h"
#include "design/fields_prior.h"
#include "design/rules.h"

enum { WHERE_CHARS = 64 };

void each_model(struct reader *r,
                void (*f)(struct reader *r, cJSON *tree, struct model *m, const char *where))
{
    cJSON *list = tree_at(r->tree, "sensitivity"), *item;
    char where[WHERE_CHARS];
    size_t i = 0;

    f(r, tree_at(r->tree, "model"), &r->d->model, "/model");
    if (!cJSON_IsArray(list))
        return;
    cJSON_ArrayForEach(item, list)
    {
        snprintf(where, sizeof where, "/sensitivity/%zu", i);
        f(r, item, &r->d->sensitivity[i++], where);
    }
}

int model_parameter(const struct model *m, const char *name)
{
    for (size_t i = 0; i < m->parameters; i++) {
        const struct parameter *p = m->parameter[i];

        if (strcmp(p->name, name) == 0 || (p->variance != NULL && strcmp(p->variance, name) == 0))
            return (int)i;
    }
    return -1;
}

void curve_parameter_names(const struct curve *c, int order, struct text *out)
{
    size_t written = 0;

    for (const struct parameter *p = c->parameters; p->name != NULL; p++)
        if (p->order == 0 || p->order == order)
            text_addf(out, "%s%s", written++ > 0 ? ", " : "", p->name);
}

/* --- curve_keys --- */

/* Keys that mean something for one curve only. */
static const struct {
    const char *key, *curve;
} curve_keys[] = {{"shift", "log_linear"}, {"order", "ndlm"}, {"spacing", "ndlm"}};

static void add_parameters(struct model *m, const struct design *d)
{
    for (const struct parameter *p = m->curve->parameters; p->name != NULL; p++)
        if (p->order == 0 || p->order == m->order)
            m->parameter[m->parameters++] = p;
    if (!d->control_on_curve)
        m->parameter[m->parameters++] = &parameter_control;
    if (d->type == ENDPOINT_CONTINUOUS)
        m->parameter[m->parameters++] = &parameter_sd;
}

static void fill_curve_keys(cJSON *tree, struct model *m)
{
    double order = 1;

    m->shift = 1;
    tree_number(tree, "shift", &m->shift);
    tree_number(tree, "order", &order);
    m->order = (int)order;
    m->spacing_actual = tree_is(tree, "spacing", "actual");
    if (strcmp(m->curve->key, "log_linear") == 0 && !tree_given(tree, "shift"))
        tree_put_number(tree, "shift", m->shift);
    if (m->curve->kind == CURVE_WALK && !tree_given(tree, "order"))
        tree_put_number(tree, "order", m->order);
    if (m->curve->kind == CURVE_WALK && !tree_given(tree, "spacing"))
        tree_put_text(tree, "spacing", "steps");
}

static void read_curve(struct reader *r, cJSON *tree, struct model *m, const char *where)
{
    const char *key = tree_text(tree, "curve");

    if (key == NULL)
        return;
    m->curve = curve_find(key);
    if (m->curve == NULL)
        BUG("the field table lets through a curve that does not exist");
    for (size_t i = 0; i < COUNT_OF(curve_keys); i++) {
        if (!tree_given(tree, curve_keys[i].key) || strcmp(curve_keys[i].curve, key) == 0)
            continue;
        reader_at(r, "%s/%s", where, curve_keys[i].key);
        reader_fault(r, MSG_CURVE_KEY, curve_keys[i].key, curve_keys[i].curve, key);
    }
    fill_curve_keys(tree, m);
    add_parameters(m, r->d);
}

void rule_curve_keys(struct reader *r)
{
    each_model(r, read_curve);
}

/* --- order_fits --- */

static void check_order(struct reader *r, cJSON *tree, struct model *m, const char *where)
{
    double value[LEVELS_MAX];
    size_t on_curve;

    (void)tree;
    if (m->curve == NULL || m->order != 2)
        return;
    if (m->spacing_actual) {
        reader_at(r, "%s/spacing", where);
        reader_fault(r, MSG_SPACING);
    }
    on_curve = design_curve_levels(r->d, m, value).count;
    if (r->levels_known && on_curve < 3) {
        reader_at(r, "%s/order", where);
        reader_fault(r, MSG_ORDER_2, on_curve);
    }
}

void rule_order_fits(struct reader *r)
{
    each_model(r, check_order);
}

/* --- curve_levels --- */

static void check_levels(struct reader *r, cJSON *tree, struct model *m, const char *where)
{
    double value[LEVELS_MAX];
    struct curve_levels levels;
    const char *fault;

    (void)tree;
    if (m->curve == NULL || !r->levels_known)
        return;
    levels = design_curve_levels(r->d, m, value);
    reader_at(r, "%s/curve", where);
    if (levels.count < 2) {
        reader_fault(r, MSG_FEW_LEVELS, levels.count);
        m->curve = NULL; /* no default priors from such levels */
        return;
    }
    fault = m->curve->level_fault == NULL ? NULL : m->curve->level_fault(&levels);
    if (fault != NULL) {
        reader_fault(r, MSG_CURVE_LEVELS, m->curve->key, fault);
        m->curve = NULL;
    }
}

void rule_curve_levels(struct reader *r)
{
    each_model(r, check_levels);
}
