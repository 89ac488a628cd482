/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rules_decisions.c: rules about conditions and the decisions made of them. */
#include <stdio.h>
#include <string.h>

#include "base/base.h"
#include "base/mem.h"
#include "design/design_messages.h"
#include "design/row_args.h"
#include "design/rules.h"

typedef void condition_check(struct reader *r, cJSON *tree, struct condition *c);

/* The list that `all` or `any` holds, or NULL. */
static cJSON *joined(cJSON *tree, enum join *join)
{
    cJSON *all = tree_at(tree, "all"), *any = tree_at(tree, "any");

    *join = all != NULL ? JOIN_ALL : any != NULL ? JOIN_ANY : JOIN_ONE;
    return all != NULL ? all : any;
}

static void each_of(struct reader *r, cJSON *tree, const char *where, struct conditions *c,
                    condition_check *f)
{
    static const char *const keys[] = {[JOIN_ALL] = "all", [JOIN_ANY] = "any"};
    enum join join;
    cJSON *list = joined(tree, &join), *item;
    size_t i = 0;

    c->join = join;
    if (join == JOIN_ONE) {
        c->count = 1;
        if (c->list == NULL)
            c->list = mem_new(1, sizeof *c->list);
        reader_at(r, "%s", where);
        f(r, tree, c->list);
        return;
    }
    c->count = tree_count(list);
    if (c->list == NULL)
        c->list = mem_new(c->count, sizeof *c->list);
    cJSON_ArrayForEach(item, list)
    {
        reader_at(r, "%s/%s/%zu", where, keys[join], i);
        f(r, item, &c->list[i++]);
    }
}

/* Every condition of every decision and of `final`, the place set to it. */
static void each_condition(struct reader *r, condition_check *f)
{
    cJSON *decisions = tree_at(r->tree, "decisions"), *item;
    cJSON *success = tree_at(tree_at(r->tree, "final"), "success");
    struct design *d = r->d;
    char where[64];
    size_t i = 0;

    cJSON_ArrayForEach(item, decisions)
    {
        cJSON *when = tree_at(item, "if");

        snprintf(where, sizeof where, "/decisions/%zu/if", i);
        if (cJSON_IsObject(when))
            each_of(r, when, where, &d->decision[i].when, f);
        i++;
    }
    if (cJSON_IsObject(success))
        each_of(r, success, "/final/success", &d->final_success, f);
}

/* --- condition_arguments --- */

static const struct measure *measure_find(const struct vocabulary *v, const char *key)
{
    for (size_t i = 0; v->measures[i] != NULL; i++)
        if (strcmp(v->measures[i]->key, key) == 0)
            return v->measures[i];
    BUG("the field table lets through a measure that does not exist");
}

static void fill_numbers(cJSON *tree, struct condition *c)
{
    tree_number(tree, "gain", &c->gain);
    tree_number(tree, "value", &c->value);
    tree_number(tree, "per_arm", &c->per_arm);
    tree_number(tree, "alpha", &c->alpha);
    c->above = tree_number(tree, "above", &c->threshold);
    tree_number(tree, "below", &c->threshold);
    if ((c->measure->allowed & ARG_GAIN) && !tree_given(tree, "gain"))
        tree_put_number(tree, "gain", 0);
    if ((c->measure->allowed & ARG_SCALE) && !tree_given(tree, "scale"))
        tree_put_text(tree, "scale", "response");
}

static void check_arguments(struct reader *r, cJSON *tree, struct condition *c)
{
    const unsigned either = ARG_TARGET | ARG_LEVEL;
    const char *key = tree_text(tree, "measure");
    unsigned required;

    c->target = -1;
    c->level = LEVEL_NONE;
    if (key == NULL)
        return;
    c->measure = measure_find(r->v, key);
    required = c->measure->required;
    if ((c->measure->allowed & either) == either) {
        required &= ~either;
        if (tree_given(tree, "target") == tree_given(tree, "level"))
            reader_fault(r, MSG_ONE_SUBJECT, key);
    }
    row_args_check(r, tree, key, c->measure->allowed, required,
                   either | ARG_GAIN | ARG_VALUE | ARG_PER_ARM | ARG_ALPHA | ARG_SCALE);
    fill_numbers(tree, c);
}

void rule_condition_arguments(struct reader *r)
{
    each_condition(r, check_arguments);
}

/* --- the others --- */

static void check_gains(struct reader *r, cJSON *tree, struct condition *c)
{
    (void)tree;
    if (c->measure == NULL)
        return;
    reader_under(r, "measure");
    if (c->measure->needs_reference_level && !row_args_reference_level(r))
        reader_fault(r, MSG_NO_REFERENCE_LEVEL, c->measure->key);
    else if (c->measure->needs_gain && !row_args_gain(r))
        reader_fault(r, MSG_NO_GAIN, c->measure->key);
}

void rule_condition_gains(struct reader *r)
{
    each_condition(r, check_gains);
}

static void check_names(struct reader *r, cJSON *tree, struct condition *c)
{
    const char *target = tree_text(tree, "target"), *level = tree_text(tree, "level");

    if (c->measure == NULL)
        return;
    if (target != NULL && (c->measure->allowed & ARG_TARGET)) {
        reader_under(r, "target");
        c->target = reader_target(r, target);
    } else if (level != NULL && (c->measure->allowed & ARG_LEVEL)) {
        reader_under(r, "level");
        c->level = strcmp(level, "any") == 0 ? LEVEL_ANY : reader_active(r, level);
    }
}

void rule_condition_names(struct reader *r)
{
    each_condition(r, check_names);
}

static void check_scale(struct reader *r, cJSON *tree, struct condition *c)
{
    if (c->measure == NULL)
        return;
    c->link = row_args_link(r, tree);
    row_args_rate(r, tree, "gain", c->link, -1, 1);
    row_args_rate(r, tree, "value", c->link, 0, 1);
}

void rule_condition_scale(struct reader *r)
{
    each_condition(r, check_scale);
}

void rule_success_binds(struct reader *r)
{
    cJSON *decisions = tree_at(r->tree, "decisions"), *item;
    size_t i = 0;

    cJSON_ArrayForEach(item, decisions)
    {
        reader_at(r, "/decisions/%zu/binding", i++);
        if (tree_is(item, "action", "stop_success") && !tree_flag(item, "binding", true))
            reader_fault(r, MSG_BINDING, "stop_success");
    }
}
