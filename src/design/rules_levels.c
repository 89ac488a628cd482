/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rules_levels.c: rules about levels, control, reference, endpoint and the data file. */
#include <math.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "design/design_messages.h"
#include "design/rules.h"

static cJSON *levels_tree(struct reader *r)
{
    return tree_at(r->tree, "levels");
}

void rule_levels_increase(struct reader *r)
{
    const struct design *d = r->d;
    char a[NUMBER_CHARS], b[NUMBER_CHARS];

    r->levels_known = d->levels > 0;
    for (size_t k = 0; k < d->levels; k++) {
        if (isnan(d->level[k].value)) {
            r->levels_known = false;
        } else if (k > 0 && d->level[k].value <= d->level[k - 1].value) {
            r->levels_known = false;
            reader_at(r, "/levels/list/%zu/value", k);
            reader_fault(r, MSG_ORDER, number_shortest(a, d->level[k].value),
                         number_shortest(b, d->level[k - 1].value));
        }
    }
}

void rule_labels_unique(struct reader *r)
{
    const struct design *d = r->d;

    r->labels_known = d->levels > 0;
    for (size_t k = 0; k < d->levels; k++) {
        if (d->level[k].label == NULL) {
            r->labels_known = false;
            continue;
        }
        for (size_t j = 0; j < k; j++) {
            if (d->level[j].label == NULL || strcmp(d->level[j].label, d->level[k].label) != 0)
                continue;
            reader_at(r, "/levels/list/%zu/label", k);
            reader_fault(r, MSG_LABEL_TWICE, d->level[k].label);
            break;
        }
    }
}

void rule_control_exists(struct reader *r)
{
    cJSON *levels = levels_tree(r);
    const char *label = tree_text(levels, "control");
    struct design *d = r->d;

    d->control_on_curve = tree_flag(levels, "control_on_curve", true);
    if (label != NULL) {
        reader_at(r, "/levels/control");
        d->control = reader_level(r, label);
    }
    d->reference_level = d->control;
    if (!d->control_on_curve && !tree_given(levels, "control")) {
        reader_at(r, "/levels/control_on_curve");
        reader_fault(r, MSG_OFF_CURVE);
    }
    if (tree_given(levels, "control") && d->control == LEVEL_NONE)
        r->levels_known = false; /* which levels lie on the curve is open */
}

void rule_reference_alone(struct reader *r)
{
    cJSON *levels = levels_tree(r);
    const cJSON *reference = tree_at(levels, "reference");
    struct design *d = r->d;

    if (reference == NULL)
        return;
    reader_at(r, "/levels/reference");
    if (tree_given(levels, "control")) {
        reader_fault(r, MSG_TWO_REFERENCES);
    } else if (cJSON_IsString(reference)) {
        d->reference_level = reader_level(r, reference->valuestring);
    } else if (cJSON_IsNumber(reference)) {
        d->has_reference_number = true;
        d->reference_number = reference->valuedouble;
    }
}

void rule_range_ordered(struct reader *r)
{
    cJSON *endpoint = tree_at(r->tree, "endpoint"), *range = tree_at(endpoint, "range");
    const cJSON *low = cJSON_GetArrayItem(range, 0), *high = cJSON_GetArrayItem(range, 1);
    struct design *d = r->d;
    char a[NUMBER_CHARS], b[NUMBER_CHARS];

    r->scale_known = range == NULL && r->endpoint_known;
    if (range == NULL)
        return;
    reader_at(r, "/endpoint/range");
    if (tree_is(endpoint, "type", "binary")) {
        reader_fault(r, MSG_RANGE_BINARY);
    } else if (cJSON_IsNumber(low) && cJSON_IsNumber(high)) {
        if (low->valuedouble < high->valuedouble) {
            r->scale_known = r->endpoint_known;
            d->has_range = true;
            d->range[0] = low->valuedouble;
            d->range[1] = high->valuedouble;
        } else {
            reader_fault(r, MSG_RANGE_ORDER, number_shortest(a, low->valuedouble),
                         number_shortest(b, high->valuedouble));
        }
    }
}

void rule_failure_binary(struct reader *r)
{
    cJSON *endpoint = tree_at(r->tree, "endpoint");

    if (!tree_is(endpoint, "dropped", "failure"))
        return;
    r->d->dropped = DROPPED_FAILURE;
    reader_at(r, "/endpoint/dropped");
    if (tree_is(endpoint, "type", "continuous"))
        reader_fault(r, MSG_DROPPED);
}

void rule_reference_possible(struct reader *r)
{
    const struct design *d = r->d;
    const double x = d->reference_number;
    char a[NUMBER_CHARS], b[NUMBER_CHARS], c[NUMBER_CHARS];

    if (!d->has_reference_number || !r->endpoint_known)
        return;
    reader_at(r, "/levels/reference");
    if (d->type == ENDPOINT_BINARY) {
        if (x <= 0 || x >= 1)
            reader_fault(r, MSG_REFERENCE_RATE, number_shortest(a, x));
    } else if (d->has_range && (x < d->range[0] || x > d->range[1])) {
        reader_fault(r, MSG_OUTSIDE, number_shortest(a, x), number_shortest(b, d->range[0]),
                     number_shortest(c, d->range[1]));
    }
}

void rule_columns_distinct(struct reader *r)
{
    static const char *const keys[] = {"subject", "level", "response", "enrolled", "status"};
    cJSON *columns = tree_at(tree_at(r->tree, "data"), "columns");

    for (size_t i = 0; i < sizeof keys / sizeof keys[0]; i++) {
        const char *name = tree_text(columns, keys[i]);

        for (size_t j = 0; name != NULL && j < i; j++) {
            if (!tree_is(columns, keys[j], name))
                continue;
            reader_at(r, "/data/columns/%s", keys[i]);
            reader_fault(r, MSG_COLUMN_TWICE, name, keys[j], keys[i]);
            break;
        }
    }
}

void rule_aliases_exist(struct reader *r)
{
    const cJSON *aliases = tree_at(tree_at(r->tree, "data"), "level_values"), *item;
    struct design *d = r->d;

    d->alias = mem_new(tree_count(aliases), sizeof *d->alias);
    cJSON_ArrayForEach(item, aliases)
    {
        int level;

        if (!cJSON_IsString(item))
            continue;
        reader_at(r, "/data/level_values");
        reader_under(r, item->string);
        level = reader_level(r, item->valuestring);
        if (level >= 0)
            d->alias[d->aliases++] = (struct level_alias){mem_text(item->string), (size_t)level};
    }
}
