/* SPDX-License-Identifier: GPL-3.0-or-later */
/* design_fill.c: what a design holds without any rule: texts, numbers, room for the lists. */
#include <math.h>

#include "base/mem.h"
#include "design/rules.h"

static char *copy_text(const cJSON *object, const char *key)
{
    return mem_text(tree_text(object, key));
}

static void fill_levels(struct reader *r)
{
    cJSON *levels = tree_at(r->tree, "levels"), *list = tree_at(levels, "list"), *item;
    struct design *d = r->d;

    d->quantity = copy_text(levels, "quantity");
    d->unit = copy_text(levels, "unit");
    d->level = mem_new(tree_count(list), sizeof *d->level);
    cJSON_ArrayForEach(item, list)
    {
        struct level *level = &d->level[d->levels++];

        level->label = copy_text(item, "label");
        level->value = NAN; /* stays so when it is faulty */
        tree_number(item, "value", &level->value);
    }
}

static void fill_endpoint(struct reader *r)
{
    cJSON *endpoint = tree_at(r->tree, "endpoint");
    struct design *d = r->d;

    d->endpoint_name = copy_text(endpoint, "name");
    d->type = tree_is(endpoint, "type", "binary") ? ENDPOINT_BINARY : ENDPOINT_CONTINUOUS;
    d->higher_is_better = tree_is(endpoint, "better", "higher");
    tree_number(endpoint, "observed_after", &d->observed_after);
    r->endpoint_known =
        tree_text(endpoint, "type") != NULL && tree_text(endpoint, "better") != NULL;
}

static void fill_targets(struct reader *r)
{
    cJSON *targets = tree_at(r->tree, "targets"), *item;
    struct design *d = r->d;

    r->targets_known = cJSON_IsObject(targets);
    d->target = mem_new(tree_count(targets), sizeof *d->target);
    cJSON_ArrayForEach(item, targets) d->target[d->targets++].name = mem_text(item->string);
}

static void fill_decisions(struct reader *r)
{
    cJSON *decisions = tree_at(r->tree, "decisions"), *item;
    struct design *d = r->d;

    d->decision = mem_new(tree_count(decisions), sizeof *d->decision);
    cJSON_ArrayForEach(item, decisions)
    {
        struct decision *decision = &d->decision[d->decisions++];

        decision->action =
            tree_is(item, "action", "stop_futility") ? ACTION_STOP_FUTILITY : ACTION_STOP_SUCCESS;
        decision->binding = tree_flag(item, "binding", true);
        tree_number(item, "from", &decision->from);
        tree_number(item, "min_observed", &decision->min_observed);
    }
    d->has_final = tree_given(r->tree, "final");
}

static void fill_scenarios(struct reader *r)
{
    cJSON *scenarios = tree_at(r->tree, "scenarios"), *item;
    struct design *d = r->d;

    d->scenario = mem_new(tree_count(scenarios), sizeof *d->scenario);
    cJSON_ArrayForEach(item, scenarios) d->scenario[d->scenarios++].name = copy_text(item, "name");
}

static void fill_columns(struct reader *r)
{
    cJSON *columns = tree_at(tree_at(r->tree, "data"), "columns");
    struct column_names *names = &r->d->columns;

    names->subject = copy_text(columns, "subject");
    names->level = copy_text(columns, "level");
    names->response = copy_text(columns, "response");
    names->enrolled = copy_text(columns, "enrolled");
    names->status = copy_text(columns, "status");
}

void reader_fill(struct reader *r)
{
    const cJSON *mcmc = tree_at(r->tree, "mcmc");
    struct design *d = r->d;
    double seed = 1;

    d->control = d->reference_level = LEVEL_NONE;
    d->title = copy_text(r->tree, "title");
    d->time_unit = copy_text(r->tree, "time_unit");
    tree_number(r->tree, "subjects", &d->subjects);
    tree_number(tree_at(r->tree, "simulation"), "trials", &d->trials);
    tree_number(mcmc, "draws", &d->draws);
    tree_number(mcmc, "max_draws", &d->max_draws);
    tree_number(mcmc, "precision", &d->precision);
    tree_number(r->tree, "seed", &seed);
    d->seed = (uint64_t)seed;
    d->sensitivities = tree_count(tree_at(r->tree, "sensitivity"));
    d->sensitivity = mem_new(d->sensitivities, sizeof *d->sensitivity);
    fill_levels(r);
    fill_endpoint(r);
    fill_targets(r);
    fill_decisions(r);
    fill_scenarios(r);
    fill_columns(r);
}
