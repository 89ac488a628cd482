/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rules_targets.c: rules about targets. */
#include <string.h>

#include "base/base.h"
#include "base/number.h"
#include "design/design_messages.h"
#include "design/row_args.h"
#include "design/rules.h"

/* One target at a time, the place set to it. */
static void each_target(struct reader *r,
                        void (*f)(struct reader *r, cJSON *tree, struct target *t))
{
    cJSON *tree = tree_at(r->tree, "targets"), *item;
    size_t i = 0;

    cJSON_ArrayForEach(item, tree)
    {
        reader_at(r, "/targets");
        reader_under(r, item->string);
        f(r, item, &r->d->target[i++]);
    }
}

static const struct target_rule *rule_find(const struct vocabulary *v, const char *key)
{
    for (size_t i = 0; v->rules[i] != NULL; i++)
        if (strcmp(v->rules[i]->key, key) == 0)
            return v->rules[i];
    BUG("the field table lets through a rule that does not exist");
}

static void check_arguments(struct reader *r, cJSON *tree, struct target *t)
{
    const char *key = tree_text(tree, "rule");

    if (key == NULL)
        return;
    t->rule = rule_find(r->v, key);
    row_args_check(r, tree, key, t->rule->allowed, t->rule->required,
                   ARG_FRACTION | ARG_EFFECT | ARG_OF | ARG_MARGIN);
    tree_number(tree, "fraction", &t->fraction);
    tree_number(tree, "effect", &t->effect);
    tree_number(tree, "margin", &t->margin);
    t->by_meets = tree_number(tree_at(tree, "select"), "meets", &t->meets);
}

void rule_target_arguments(struct reader *r)
{
    each_target(r, check_arguments);
}

static void check_gains(struct reader *r, cJSON *tree, struct target *t)
{
    (void)tree;
    if (t->rule == NULL || !t->rule->needs_gain || row_args_gain(r))
        return;
    reader_under(r, "rule");
    reader_fault(r, MSG_NO_GAIN, t->rule->key);
}

void rule_target_gains(struct reader *r)
{
    each_target(r, check_gains);
}

static void check_of(struct reader *r, cJSON *tree, struct target *t)
{
    const char *of = tree_text(tree, "of");

    t->of = OF_BEST;
    if (t->rule == NULL || (t->rule->allowed & ARG_OF) == 0)
        return;
    if (!tree_given(tree, "of"))
        tree_put_text(tree, "of", "best");
    if (of == NULL || strcmp(of, "best") == 0)
        return;
    reader_under(r, "of");
    t->of = reader_level(r, of);
}

void rule_target_of(struct reader *r)
{
    each_target(r, check_of);
}

static void check_scale(struct reader *r, cJSON *tree, struct target *t)
{
    t->link = row_args_link(r, tree);
    row_args_rate(r, tree, "effect", t->link, 0, 1);
    row_args_rate(r, tree, "margin", t->link, 0, 1);
}

void rule_target_scale(struct reader *r)
{
    each_target(r, check_scale);
}
