/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rules_schedule.c: rules about accrual, dropout and planned analyses. */
#include "design/rules_schedule.h"

#include <math.h>

#include "base/mem.h"
#include "base/number.h"
#include "design/design_messages.h"
#include "design/fields_limits.h"
#include "design/rules.h"

/* --- accrual --- */

static void check_step(struct reader *r, const struct accrual *a, size_t i, const char *where)
{
    char spare[NUMBER_CHARS], other[NUMBER_CHARS];

    reader_at(r, "%s/rates/%zu/from", where, i);
    if (i == 0 && a->steps[0].from > 0)
        reader_fault(r, MSG_FIRST_FROM, number_shortest(spare, a->steps[0].from));
    if (i > 0 && a->steps[i].from <= a->steps[i - 1].from)
        reader_fault(r, MSG_INCREASING, number_shortest(spare, a->steps[i].from),
                     number_shortest(other, a->steps[i - 1].from));
    reader_at(r, "%s/rates/%zu/rate", where, i);
    if (i + 1 == a->count && a->steps[i].rate <= 0)
        reader_fault(r, MSG_LAST_RATE);
}

void accrual_read(struct reader *r, cJSON *tree, const char *where, struct accrual *a)
{
    cJSON *rates = tree_at(tree, "rates"), *item;
    const size_t count = tree_count(rates);

    if (count == 0)
        return;
    a->steps = mem_new(count, sizeof *a->steps);
    cJSON_ArrayForEach(item, rates)
    {
        struct rate_step *step = &a->steps[a->count++];

        step->from = step->rate = NAN; /* faulty values compare false with everything */
        tree_number(item, "from", &step->from);
        tree_number(item, "rate", &step->rate);
    }
    for (size_t i = 0; i < count; i++)
        check_step(r, a, i, where);
}

double accrual_expected_end(const struct accrual *a, double subjects)
{
    double enrolled = 0;

    for (size_t i = 0; i < a->count; i++) {
        const double length = i + 1 < a->count ? a->steps[i + 1].from - a->steps[i].from : INFINITY;

        if (enrolled + a->steps[i].rate * length >= subjects)
            return a->steps[i].from + (subjects - enrolled) / a->steps[i].rate;
        enrolled += a->steps[i].rate * length;
    }
    return INFINITY;
}

void rule_accrual_ordered(struct reader *r)
{
    accrual_read(r, tree_at(r->tree, "accrual"), "/accrual", &r->d->accrual);
}

void rule_dropout_per_level(struct reader *r)
{
    reader_at(r, "/dropout/fraction");
    r->d->dropout = tree_per_level(r, tree_at(tree_at(r->tree, "dropout"), "fraction"));
}

/* --- planned analyses --- */

static cJSON *analyses_tree(struct reader *r)
{
    return tree_at(r->tree, "analyses");
}

void rule_points(struct reader *r)
{
    cJSON *tree = analyses_tree(r);
    const bool first = tree_given(tree, "first_at"), every = tree_given(tree, "every");
    struct analyses *a = &r->d->analyses;

    a->counted = COUNTED_OBSERVED;
    if (tree_is(tree, "counted", "randomized"))
        a->counted = COUNTED_RANDOMIZED;
    if (tree_is(tree, "counted", "time"))
        a->counted = COUNTED_TIME;
    tree_number(tree, "lag", &a->lag);
    reader_at(r, "/analyses");
    if (cJSON_IsObject(tree) && (first != every || first == tree_given(tree, "at")))
        reader_fault(r, MSG_POINTS);
}

void rule_points_ordered(struct reader *r)
{
    const cJSON *at = tree_at(analyses_tree(r), "at"), *item;
    char spare[NUMBER_CHARS], other[NUMBER_CHARS];
    double last = NAN;
    size_t i = 0;

    cJSON_ArrayForEach(item, at)
    {
        reader_at(r, "/analyses/at/%zu", i++);
        if (cJSON_IsNumber(item) && item->valuedouble <= last)
            reader_fault(r, MSG_INCREASING, number_shortest(spare, item->valuedouble),
                         number_shortest(other, last));
        last = cJSON_IsNumber(item) ? item->valuedouble : NAN;
    }
}

/* What a planned point must stay below to be held: the end of enrolment. */
static double points_end(const struct design *d)
{
    if (d->analyses.counted != COUNTED_TIME)
        return d->subjects;
    return d->accrual.count > 0 ? accrual_expected_end(&d->accrual, d->subjects) : 0;
}

static void list_points(struct reader *r, const cJSON *at)
{
    struct analyses *a = &r->d->analyses;
    /* a listed time is held as long as enrolment is in fact open: none is left out beforehand */
    const double end = a->counted == COUNTED_TIME ? INFINITY : r->d->subjects;
    const cJSON *item;

    a->at = mem_new(tree_count(at), sizeof *a->at);
    cJSON_ArrayForEach(item, at) if (cJSON_IsNumber(item) && item->valuedouble < end)
        a->at[a->count++] = item->valuedouble;
}

static void step_points(struct reader *r, double first, double every)
{
    struct analyses *a = &r->d->analyses;
    const double end = points_end(r->d), planned = ceil((end - first) / every);
    char spare[NUMBER_CHARS];

    a->first_at = first;
    a->every = every;
    a->open_ended = a->counted == COUNTED_TIME;
    if (!(planned > 0) || isinf(end))
        return; /* none, or a faulty accrual: already said */
    if (planned > POINTS_MAX) {
        reader_at(r, "/analyses/every");
        reader_fault(r, MSG_MANY_POINTS, number_shortest(spare, planned), (int)POINTS_MAX);
        return;
    }
    a->at = mem_new((size_t)planned + 1, sizeof *a->at);
    while (first + every * (double)a->count < end && a->count <= (size_t)planned) {
        a->at[a->count] = first + every * (double)a->count;
        a->count++;
    }
}

/* The place is that of the item. */
static void check_whole(struct reader *r, const cJSON *item)
{
    const char *counted = tree_text(analyses_tree(r), "counted");
    char spare[NUMBER_CHARS];

    if (cJSON_IsNumber(item) && counted != NULL && r->d->analyses.counted != COUNTED_TIME &&
        floor(item->valuedouble) != item->valuedouble)
        reader_fault(r, MSG_WHOLE_POINT, counted, number_shortest(spare, item->valuedouble));
}

void rule_points_whole(struct reader *r)
{
    cJSON *tree = analyses_tree(r), *at = tree_at(tree, "at");
    const cJSON *item;
    double first = 0, every = 0;
    size_t i = 0;

    if (!cJSON_IsObject(tree))
        return;
    reader_at(r, "/analyses/first_at");
    check_whole(r, tree_at(tree, "first_at"));
    reader_at(r, "/analyses/every");
    check_whole(r, tree_at(tree, "every"));
    cJSON_ArrayForEach(item, at)
    {
        reader_at(r, "/analyses/at/%zu", i++);
        check_whole(r, item);
    }
    if (r->d->subjects == 0)
        return; /* faulty: already said */
    if (cJSON_IsArray(at))
        list_points(r, at);
    else if (tree_number(tree, "first_at", &first) && tree_number(tree, "every", &every))
        step_points(r, first, every);
}
