/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rules_allocation.c: rules about fixed and adapted shares. */
#include <math.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "design/design_messages.h"
#include "design/rules.h"

#define SUM_TOLERANCE 1e-9 /* ten shares of 0.1 sum to 1 */

static cJSON *allocation_tree(struct reader *r)
{
    return tree_at(r->tree, "allocation");
}

void rule_ratio_per_level(struct reader *r)
{
    cJSON *tree = allocation_tree(r);
    struct design *d = r->d;

    if (!cJSON_IsObject(tree) || d->levels == 0)
        return;
    if (!tree_given(tree, "ratio")) {
        d->allocation.ratio = mem_new(d->levels, sizeof(double));
        for (size_t k = 0; k < d->levels; k++)
            d->allocation.ratio[k] = 1;
        tree_put(tree, "ratio", tree_numbers(d->allocation.ratio, d->levels));
        return;
    }
    reader_at(r, "/allocation/ratio");
    d->allocation.ratio = tree_per_level(r, tree_at(tree, "ratio"));
}

void rule_block_multiple(struct reader *r)
{
    cJSON *tree = allocation_tree(r);
    struct allocation *a = &r->d->allocation;
    char spare[NUMBER_CHARS], other[NUMBER_CHARS];
    double sum = 0;

    for (size_t k = 0; a->ratio != NULL && k < r->d->levels; k++)
        sum += a->ratio[k];
    if (a->ratio == NULL || isnan(sum))
        return;
    if (!tree_given(tree, "block"))
        tree_put_number(tree, "block", sum);
    if (!tree_number(tree, "block", &a->block) || a->block == 1 || fmod(a->block, sum) == 0)
        return;
    reader_at(r, "/allocation/block");
    reader_fault(r, MSG_BLOCK, number_shortest(spare, a->block), number_shortest(other, sum));
}

void rule_start_fits(struct reader *r)
{
    struct design *d = r->d;
    char spare[NUMBER_CHARS], other[NUMBER_CHARS];
    double *per_level = &d->allocation.start_per_level;

    tree_number(tree_at(allocation_tree(r), "start"), "per_level", per_level);
    if (d->subjects == 0 || *per_level * (double)d->levels <= d->subjects)
        return;
    reader_at(r, "/allocation/start/per_level");
    reader_fault(r, MSG_START, number_shortest(spare, *per_level), d->levels,
                 number_shortest(other, d->subjects));
}

void rule_adapt_target(struct reader *r)
{
    cJSON *tree = allocation_tree(r), *adapt = tree_at(tree, "adapt");
    struct allocation *a = &r->d->allocation;
    const char *name = tree_text(adapt, "target");

    a->adapts = cJSON_IsObject(adapt);
    a->power_kind = tree_is(adapt, "power", "n/2N") ? POWER_N_OVER_2N : POWER_NUMBER;
    tree_number(adapt, "power", &a->power);
    tree_number(adapt, "information", &a->information);
    tree_number(adapt, "drop_below", &a->drop_below);
    a->urn = tree_is(tree, "method", "urn");
    tree_number(tree, "urn_mass", &a->urn_mass);
    reader_at(r, "/allocation/adapt/target");
    if (name != NULL)
        a->adapt_target = reader_target(r, name);
}

/* --- share_bounds --- */

/* A number for every active level, or numbers by label. The control's entry keeps `absent`. */
static double *read_bound(struct reader *r, cJSON *adapt, const char *key, double absent)
{
    const cJSON *tree = tree_at(adapt, key), *item;
    const struct design *d = r->d;
    double *x = mem_new(d->levels, sizeof *x);

    for (size_t k = 0; k < d->levels; k++)
        x[k] = cJSON_IsNumber(tree) && design_is_active(d, k) ? tree->valuedouble : absent;
    if (!cJSON_IsObject(tree))
        return x;
    cJSON_ArrayForEach(item, tree)
    {
        int level;

        reader_at(r, "/allocation/adapt/%s", key);
        reader_under(r, item->string);
        level = reader_active(r, item->string);
        if (level >= 0 && cJSON_IsNumber(item))
            x[level] = item->valuedouble;
    }
    return x;
}

static double active_sum(const struct design *d, const double *x)
{
    double sum = 0;

    for (size_t k = 0; k < d->levels; k++)
        if (design_is_active(d, k))
            sum += x[k];
    return sum;
}

static void check_sums(struct reader *r)
{
    const struct design *d = r->d;
    const double least = active_sum(d, d->allocation.at_least);
    const double most = active_sum(d, d->allocation.at_most);
    char spare[NUMBER_CHARS];

    if (least > 1 + SUM_TOLERANCE) {
        reader_at(r, "/allocation/adapt/at_least");
        reader_fault(r, MSG_LEAST_SUM, number_shortest(spare, least));
    }
    if (most < 1 - SUM_TOLERANCE) {
        reader_at(r, "/allocation/adapt/at_most");
        reader_fault(r, MSG_MOST_SUM, number_shortest(spare, most));
    }
}

static void check_order(struct reader *r, size_t k)
{
    const struct design *d = r->d;
    const double least = d->allocation.at_least[k], most = d->allocation.at_most[k];
    char spare[NUMBER_CHARS], other[NUMBER_CHARS];

    if (least <= most || d->level[k].label == NULL)
        return;
    reader_at(r, "/allocation/adapt/at_least");
    reader_fault(r, MSG_LEAST_MOST, number_shortest(spare, least), d->level[k].label,
                 number_shortest(other, most));
}

void rule_share_bounds(struct reader *r)
{
    cJSON *adapt = tree_at(allocation_tree(r), "adapt");
    struct design *d = r->d;

    if (d->levels == 0)
        return;
    d->allocation.at_least = read_bound(r, adapt, "at_least", 0);
    d->allocation.at_most = read_bound(r, adapt, "at_most", 1);
    if (!r->labels_known || !cJSON_IsObject(adapt))
        return;
    for (size_t k = 0; k < d->levels; k++)
        check_order(r, k);
    check_sums(r);
}

/* --- control_share --- */

static void default_share(struct reader *r, cJSON *tree)
{
    struct allocation *a = &r->d->allocation;
    double sum = 0;

    if (a->ratio == NULL || r->d->control < 0)
        return;
    for (size_t k = 0; k < r->d->levels; k++)
        sum += a->ratio[k];
    if (isnan(sum))
        return;
    a->control_kind = CONTROL_SHARE_NUMBER;
    a->control_share = a->ratio[r->d->control] / sum;
    if (a->adapts)
        tree_put_number(tree, "control_share", a->control_share);
}

void rule_control_share(struct reader *r)
{
    cJSON *tree = allocation_tree(r), *levels = tree_at(r->tree, "levels");
    struct allocation *a = &r->d->allocation;

    a->control_kind = CONTROL_SHARE_NONE;
    reader_at(r, "/allocation/control_share");
    if (!cJSON_IsObject(tree) || !tree_given(tree, "control_share")) {
        default_share(r, tree);
        return;
    }
    if (cJSON_IsObject(levels) && !tree_given(levels, "control"))
        reader_fault(r, MSG_SHARE_CONTROL);
    else if (!tree_given(tree, "adapt"))
        reader_fault(r, MSG_SHARE_ADAPT);
    if (tree_number(tree, "control_share", &a->control_share))
        a->control_kind = CONTROL_SHARE_NUMBER;
    else if (tree_is(tree, "control_share", "as_largest"))
        a->control_kind = CONTROL_SHARE_AS_LARGEST;
}
