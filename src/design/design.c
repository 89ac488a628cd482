/* SPDX-License-Identifier: GPL-3.0-or-later */
/* design.c: reads, checks and resolves a design file; small questions about a design. */
#include "design/design.h"

#include <string.h>

#include "base/base.h"
#include "base/file.h"
#include "base/json_read.h"
#include "base/json_write.h"
#include "base/mem.h"
#include "design/fields.h"
#include "design/rules.h"

/* The tree, also when names stand twice in it (said by json_parse), so that the other faults are
 * found in the same run. NULL when the syntax is wrong. */
static cJSON *parse_tree(const char *bytes, size_t length, const char *file, struct err *e)
{
    const size_t before = e->count;
    const char *end = NULL;
    cJSON *tree;

    if (json_parse(bytes, length, file, &tree, e) == STATUS_OK)
        return tree;
    for (size_t i = before; i < e->count; i++)
        if (e->faults[i].pointer == NULL)
            return NULL; /* a fault with a line is one of syntax */
    tree = cJSON_ParseWithLengthOpts(bytes, length, &end, 0);
    if (tree == NULL)
        mem_exhausted();
    return tree;
}

enum status design_parse(struct design **out, const char *bytes, size_t length, const char *file,
                         const struct vocabulary *v, struct err *e)
{
    return design_parse_scaled(out, bytes, length, file, v, NULL, e);
}

enum status design_parse_scaled(struct design **out, const char *bytes, size_t length,
                                const char *file, const struct vocabulary *v,
                                const struct prior_scales *scales, struct err *e)
{
    struct reader r = {.v = v, .file = file, .e = e};
    const size_t before = e->count;
    struct design *d;

    *out = NULL;
    r.tree = parse_tree(bytes, length, file, e);
    if (r.tree == NULL)
        return STATUS_INPUT;
    fields_check(r.tree, &design_fields, v, file, e);
    d = r.d = mem_new(1, sizeof *d);
    d->file = mem_text(file);
    d->has_scales = scales != NULL;
    if (scales)
        d->scales = *scales;
    sha256_hex(d->sha256, bytes, length);
    if (cJSON_IsObject(r.tree)) {
        reader_fill(&r);
        for (const struct rule *rule = design_rules; rule->name != NULL; rule++)
            rule->apply(&r);
    }
    if (e->count == before) {
        json_canonical(&d->resolved, r.tree);
        sha256_hex(d->resolved_sha256, text_s(&d->resolved), d->resolved.length);
        *out = d;
    } else {
        design_free(d);
    }
    cJSON_Delete(r.tree);
    text_release(&r.place);
    return e->count == before ? STATUS_OK : STATUS_INPUT;
}

enum status design_read(struct design **out, const char *path, const struct vocabulary *v,
                        struct err *e)
{
    struct text bytes = TEXT_INIT;
    enum status status = file_read(path, &bytes, e);

    *out = NULL;
    if (status == STATUS_OK)
        status = design_parse(out, text_s(&bytes), bytes.length, path, v, e);
    text_release(&bytes);
    return status;
}

/* --- the end of a design --- */

static void scenario_release(struct scenario *s)
{
    mem_free(s->name);
    mem_free(s->response);
    mem_free(s->sd);
    mem_free(s->accrual.steps);
    mem_free(s->dropout);
}

static void lists_release(struct design *d)
{
    for (size_t i = 0; i < d->levels; i++)
        mem_free(d->level[i].label);
    for (size_t i = 0; i < d->targets; i++)
        mem_free(d->target[i].name);
    for (size_t i = 0; i < d->decisions; i++)
        mem_free(d->decision[i].when.list);
    for (size_t i = 0; i < d->scenarios; i++)
        scenario_release(&d->scenario[i]);
    for (size_t i = 0; i < d->aliases; i++)
        mem_free(d->alias[i].text);
    mem_free(d->level);
    mem_free(d->target);
    mem_free(d->decision);
    mem_free(d->scenario);
    mem_free(d->alias);
    mem_free(d->final_success.list);
    mem_free(d->sensitivity);
}

void design_free(struct design *d)
{
    if (d == NULL)
        return;
    lists_release(d);
    mem_free(d->file);
    mem_free(d->title);
    mem_free(d->quantity);
    mem_free(d->unit);
    mem_free(d->time_unit);
    mem_free(d->endpoint_name);
    mem_free(d->allocation.ratio);
    mem_free(d->allocation.at_least);
    mem_free(d->allocation.at_most);
    mem_free(d->analyses.at);
    mem_free(d->accrual.steps);
    mem_free(d->dropout);
    mem_free(d->columns.subject);
    mem_free(d->columns.level);
    mem_free(d->columns.response);
    mem_free(d->columns.enrolled);
    mem_free(d->columns.status);
    text_release(&d->resolved);
    mem_free(d);
}

/* --- small questions --- */

const char *action_key(enum action a)
{
    return a == ACTION_STOP_SUCCESS ? "stop_success" : "stop_futility";
}

bool design_has_gain(const struct design *d)
{
    return d->reference_level >= 0 || d->has_reference_number;
}

bool design_is_active(const struct design *d, size_t level)
{
    return (int)level != d->control;
}

double design_sign(const struct design *d)
{
    return d->higher_is_better ? 1 : -1;
}

struct curve_levels design_curve_levels(const struct design *d, const struct model *m,
                                        double value[LEVELS_MAX])
{
    size_t count = 0;

    for (size_t k = 0; k < d->levels; k++)
        if (d->control_on_curve || (int)k != d->control)
            value[count++] = d->level[k].value;
    return (struct curve_levels){.count = count, .value = value, .shift = m->shift};
}

const char *model_formula(const struct model *m)
{
    return m->order == 2 && m->curve->formula_second ? m->curve->formula_second : m->curve->formula;
}

int design_target_find(const struct design *d, const char *name)
{
    for (size_t i = 0; i < d->targets; i++)
        if (strcmp(d->target[i].name, name) == 0)
            return (int)i;
    return -1;
}

int design_level_find(const struct design *d, const char *label)
{
    for (size_t k = 0; k < d->levels; k++)
        if (strcmp(d->level[k].label, label) == 0)
            return (int)k;
    return LEVEL_NONE;
}
