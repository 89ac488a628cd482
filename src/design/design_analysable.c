/* SPDX-License-Identifier: GPL-3.0-or-later */
/* design_analysable.c: what this version of `analyze` cannot do yet, a rule each. When it can, the
 * row goes. */
#include <string.h>

#include "base/base.h"
#include "design/design.h"
#include "design/design_messages.h"

struct request {
    const struct design *d;
    struct err *e;
};

#define FAULT(q, pointer, ...) \
    ((void)err_add((q)->e, STATUS_INPUT, (q)->d->file, 0, (pointer), __VA_ARGS__))

static bool is_in(const char *word, const char *const *list)
{
    for (; *list != NULL; list++)
        if (strcmp(word, *list) == 0)
            return true;
    return false;
}

static const char *const ready_families[] = {"normal",  "half_normal", "lognormal",
                                             "uniform", "fixed",       NULL};

/* The name under which the prior stands. */
static void prior_pointer(const struct model *m, size_t i, struct text *out)
{
    text_addf(out, "/model/priors/%s",
              m->prior[i].on_variance ? m->parameter[i]->variance : m->parameter[i]->name);
}

static void check_families(const struct request *q)
{
    const struct model *m = &q->d->model;

    for (size_t i = 0; i < m->parameters; i++) {
        struct text place = TEXT_INIT;

        prior_pointer(m, i, &place);
        if (!is_in(m->prior[i].family->key, ready_families))
            FAULT(q, text_s(&place), MSG_LATER_FAMILY, m->prior[i].family->key,
                  "normal, half_normal, lognormal, fixed");
        text_release(&place);
    }
}

static void check_cuts(const struct request *q)
{
    const struct model *m = &q->d->model;

    for (size_t i = 0; i < m->parameters; i++) {
        struct text place = TEXT_INIT;

        prior_pointer(m, i, &place);
        if (prior_is_truncated(&m->prior[i]))
            FAULT(q, text_s(&place), MSG_LATER_TRUNCATED);
        text_release(&place);
    }
}

static void check_sensitivity(const struct request *q)
{
    if (q->d->sensitivities > 0)
        FAULT(q, "/sensitivity", MSG_LATER_SENSITIVITY);
}

static const struct {
    const char *name;
    void (*check)(const struct request *q);
} not_yet[] = {
    {"families", check_families},
    {"truncation", check_cuts},
    {"sensitivity models", check_sensitivity},
};

enum status design_check_analysable(const struct design *d, struct err *e)
{
    const struct request q = {d, e};
    const size_t before = e->count;

    for (size_t i = 0; i < COUNT_OF(not_yet); i++)
        not_yet[i].check(&q);
    return e->count == before ? STATUS_OK : STATUS_INPUT;
}
