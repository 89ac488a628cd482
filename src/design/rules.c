/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rules.c: the one list of rules across fields, and what all of them use. */
#include "design/rules.h"

#include <math.h>
#include <stdarg.h>
#include <string.h>

#include "base/base.h"
#include "base/json_read.h"
#include "base/mem.h"
#include "base/number.h"
#include "design/design_messages.h"

const struct rule design_rules[] = {
    {"levels_increase", "level values increase strictly", rule_levels_increase},
    {"labels_unique", "labels are unique", rule_labels_unique},
    {"control_exists", "the control is a label; off the curve there must be one",
     rule_control_exists},
    {"range_ordered", "a range runs from low to high, continuous only", rule_range_ordered},
    {"failure_binary", "dropped: failure is for binary", rule_failure_binary},
    {"reference_alone", "a reference stands only without a control; its label exists",
     rule_reference_alone},
    {"reference_possible", "a reference number is a possible response", rule_reference_possible},
    {"columns_distinct", "data columns have different names", rule_columns_distinct},
    {"aliases_exist", "level_values name labels", rule_aliases_exist},
    {"curve_keys", "shift, order, spacing stand with their curve", rule_curve_keys},
    {"order_fits", "order 2 has 3 levels or more and no actual spacing", rule_order_fits},
    {"prior_names", "priors name parameters of the model, each once", rule_prior_names},
    {"prior_cuts", "min is below max, above is below below, some mass is left", rule_prior_cuts},
    {"prior_support", "positive parameters have no prior mass below 0", rule_prior_support},
    {"curve_levels", "2 levels or more lie on the curve and suit it", rule_curve_levels},
    {"priors_complete", "without a range every scaled prior is given", rule_priors_complete},
    {"target_arguments", "a target has the keys of its rule", rule_target_arguments},
    {"target_gains", "rules on gains have a control or a reference", rule_target_gains},
    {"target_of", "of is best or a label", rule_target_of},
    {"target_scale", "link is for binary; rates stay below 1", rule_target_scale},
    {"condition_arguments", "a condition has the keys of its measure", rule_condition_arguments},
    {"condition_gains", "measures of gains have a control or a reference", rule_condition_gains},
    {"condition_names", "conditions name targets and active levels that exist",
     rule_condition_names},
    {"condition_scale", "link is for binary; rates stay within 0 and 1", rule_condition_scale},
    {"success_binds", "only stop_futility may be non-binding", rule_success_binds},
    {"ratio_per_level", "ratio has one entry per level", rule_ratio_per_level},
    {"block_multiple", "block is 1 or a multiple of the ratio's sum", rule_block_multiple},
    {"start_fits", "the start subjects are no more than all subjects", rule_start_fits},
    {"adapt_target", "adapt names a target", rule_adapt_target},
    {"share_bounds", "at_least and at_most name active levels and can be met", rule_share_bounds},
    {"control_share", "control_share has a control and adapt", rule_control_share},
    {"accrual_ordered", "rates start at 0, from increases, the last rate is above 0",
     rule_accrual_ordered},
    {"dropout_per_level", "fraction has one entry per level", rule_dropout_per_level},
    {"points", "first_at and every, or at", rule_points},
    {"points_ordered", "at increases strictly", rule_points_ordered},
    {"points_whole", "points counted in subjects are whole numbers, not too many",
     rule_points_whole},
    {"scenario_names", "scenario names are unique", rule_scenario_names},
    {"truth_endpoint", "means are for continuous, rates for binary", rule_truth_endpoint},
    {"truth_per_level", "means and rates have one entry per level", rule_truth_per_level},
    {"truth_keys", "curve and parameters stand together, control with them off the curve",
     rule_truth_keys},
    {"truth_parameters", "parameters are those of the curve, all and possible",
     rule_truth_parameters},
    {"truth_curve", "the curve suits the levels and gives finite responses", rule_truth_curve},
    {"truth_possible", "true means lie in the range", rule_truth_possible},
    {"truth_sd", "sd is there exactly when the endpoint asks for it", rule_truth_sd},
    {"truth_overrides", "accrual and dropout of a scenario obey their rules", rule_truth_overrides},
    {"truth_null", "null is worked out where it is not given", rule_truth_null},
    {NULL, NULL, NULL},
};

/* --- the tree --- */

cJSON *tree_at(cJSON *object, const char *key)
{
    return cJSON_GetObjectItemCaseSensitive(object, key);
}

bool tree_given(const cJSON *object, const char *key)
{
    return json_member(object, key) != NULL;
}

bool tree_number(const cJSON *object, const char *key, double *out)
{
    const cJSON *item = json_member(object, key);

    if (!cJSON_IsNumber(item))
        return false;
    *out = item->valuedouble;
    return true;
}

const char *tree_text(const cJSON *object, const char *key)
{
    const cJSON *item = json_member(object, key);

    return cJSON_IsString(item) ? item->valuestring : NULL;
}

bool tree_flag(const cJSON *object, const char *key, bool otherwise)
{
    const cJSON *item = json_member(object, key);

    return cJSON_IsBool(item) ? cJSON_IsTrue(item) : otherwise;
}

bool tree_is(const cJSON *object, const char *key, const char *word)
{
    const char *s = tree_text(object, key);

    return s != NULL && strcmp(s, word) == 0;
}

size_t tree_count(const cJSON *list)
{
    const cJSON *item;
    size_t count = 0;

    cJSON_ArrayForEach(item, list) count++;
    return count;
}

void tree_put(cJSON *object, const char *key, cJSON *item)
{
    if (tree_given(object, key))
        BUG("a default for a key that is given");
    if (item == NULL || !cJSON_AddItemToObject(object, key, item))
        mem_exhausted();
}

void tree_put_number(cJSON *object, const char *key, double x)
{
    tree_put(object, key, cJSON_CreateNumber(x));
}

void tree_put_text(cJSON *object, const char *key, const char *s)
{
    tree_put(object, key, cJSON_CreateString(s));
}

cJSON *tree_numbers(const double *x, size_t count)
{
    cJSON *list = cJSON_CreateArray();

    for (size_t i = 0; i < count; i++) {
        cJSON *item = cJSON_CreateNumber(x[i]);

        if (list == NULL || item == NULL || !cJSON_AddItemToArray(list, item))
            mem_exhausted();
    }
    return list;
}

double *tree_per_level(struct reader *r, const cJSON *item)
{
    const size_t levels = r->d->levels, count = tree_count(item);
    const cJSON *entry;
    double *x;
    size_t k = 0;

    if (levels == 0 || !(cJSON_IsNumber(item) || cJSON_IsArray(item)))
        return NULL;
    if (cJSON_IsArray(item) && count != levels) {
        reader_fault(r, MSG_PER_LEVEL, count, levels);
        return NULL;
    }
    x = mem_new(levels, sizeof *x);
    for (; cJSON_IsNumber(item) && k < levels; k++)
        x[k] = item->valuedouble;
    if (cJSON_IsArray(item))
        cJSON_ArrayForEach(entry, item) x[k++] =
            cJSON_IsNumber(entry) ? entry->valuedouble : NAN; /* faulty: already said */
    return x;
}

/* --- faults --- */

void reader_at(struct reader *r, const char *format, ...)
{
    va_list arguments;

    text_clear(&r->place);
    va_start(arguments, format);
    text_addv(&r->place, format, arguments);
    va_end(arguments);
}

void reader_under(struct reader *r, const char *key)
{
    json_pointer_add(&r->place, key);
}

void reader_fault(struct reader *r, const char *format, ...)
{
    struct text message = TEXT_INIT;
    va_list arguments;

    va_start(arguments, format);
    text_addv(&message, format, arguments);
    va_end(arguments);
    err_add(r->e, STATUS_INPUT, r->file, 0, text_s(&r->place), "%s", text_s(&message));
    text_release(&message);
}

int reader_level(struct reader *r, const char *label)
{
    const struct design *d = r->d;
    const char *list[LEVELS_MAX + 1], *near;
    struct text known = TEXT_INIT;
    int found;

    if (!r->labels_known)
        return LEVEL_NONE;
    found = design_level_find(d, label);
    if (found >= 0)
        return found;
    for (size_t k = 0; k < d->levels; k++) {
        list[k] = d->level[k].label;
        text_addf(&known, "%s%s", k > 0 ? ", " : "", list[k]);
    }
    list[d->levels] = NULL;
    near = text_nearest(label, list);
    if (near != NULL)
        reader_fault(r, MSG_LABEL_NEAR, label, near);
    else
        reader_fault(r, MSG_LABEL, label, text_s(&known));
    text_release(&known);
    return LEVEL_NONE;
}

int reader_active(struct reader *r, const char *label)
{
    const int found = reader_level(r, label);

    if (found == LEVEL_NONE || found != r->d->control)
        return found;
    reader_fault(r, MSG_NOT_ACTIVE, label);
    return LEVEL_NONE;
}

int reader_target(struct reader *r, const char *name)
{
    const struct design *d = r->d;
    const char **list, *near;
    struct text known = TEXT_INIT;
    const int found = design_target_find(d, name);

    if (found >= 0 || !r->targets_known)
        return found;
    list = mem_new(d->targets + 1, sizeof *list);
    for (size_t i = 0; i < d->targets; i++) {
        list[i] = d->target[i].name;
        text_addf(&known, "%s%s", i > 0 ? ", " : "", list[i]);
    }
    near = text_nearest(name, list);
    if (near != NULL)
        reader_fault(r, MSG_TARGET_NEAR, name, near);
    else
        reader_fault(r, MSG_TARGET, name, d->targets > 0 ? text_s(&known) : "(none)");
    text_release(&known);
    mem_free(list);
    return -1;
}
