/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fields_prior.c: the rows of the field table that are read off the lists of curves and priors. */
#include "design/fields_prior.h"

#include <string.h>

#include "design/fields_limits.h"
#include "design/prior.h"

const struct parameter parameter_control = {
    .name = "control",
    .role = ROLE_CONTROL,
    .coordinate = COORDINATE_SELF,
    .help = "mean (binary: logit) of a control off the curve",
};

const struct parameter parameter_sd = {
    .name = "sd",
    .variance = "variance",
    .role = ROLE_RESIDUAL,
    .coordinate = COORDINATE_LOG,
    .positive = true,
    .help = "residual standard deviation of a continuous endpoint",
};

/* Whether an earlier parameter of the list of all curves has the name of parameters[at] of curve c.
 */
static bool named_before(size_t c, size_t at)
{
    const char *name = curves[c]->parameters[at].name;

    for (size_t k = 0; k <= c; k++)
        for (size_t j = 0; curves[k]->parameters[j].name != NULL && (k < c || j < at); j++)
            if (strcmp(curves[k]->parameters[j].name, name) == 0)
                return true;
    return false;
}

/* A walk through the parameters of all curves, each name once, then `control` and `sd`. */
struct walk {
    size_t curve, at, extra;
};

static const struct parameter *walk_next(struct walk *w)
{
    while (curves[w->curve] != NULL) {
        const struct parameter *p = &curves[w->curve]->parameters[w->at];

        if (p->name == NULL) {
            w->curve++;
            w->at = 0;
        } else if (!named_before(w->curve, w->at++)) {
            return p;
        }
    }
    w->extra++;
    if (w->extra == 1)
        return &parameter_control;
    return w->extra == 2 ? &parameter_sd : NULL;
}

const char *curve_word(const struct vocabulary *v, size_t i)
{
    (void)v;
    return curves[i] == NULL ? NULL : curves[i]->key;
}

static bool family_rows(const struct vocabulary *v, const void *data, size_t i, struct field *out);

static const struct field prior_field = {
    .kind = FIELD_OBJECT,
    .nested_from = family_rows,
    .one_member = true,
    .help = "a prior: one family with its numbers",
    .shared = "prior",
};

/* The numbers of one family (`data`), then the cuts that any may carry. */
static bool argument_rows(const struct vocabulary *v, const void *data, size_t i, struct field *out)
{
    static const struct field cuts[] = {
        {.key = "above",
         .kind = FIELD_NUMBER,
         .low = -NUMBER_LIMIT,
         .high = NUMBER_LIMIT,
         .help = "lower cut of the prior, which is renormalised"},
        {.key = "below",
         .kind = FIELD_NUMBER,
         .low = -NUMBER_LIMIT,
         .high = NUMBER_LIMIT,
         .help = "upper cut of the prior, which is renormalised"},
    };
    const struct prior_family *family = data;
    size_t own = 0;

    (void)v;
    while (own < PRIOR_ARGS && family->args[own].key != NULL)
        own++;
    if (i >= own + 2)
        return false;
    if (i >= own) {
        *out = cuts[i - own];
        return true;
    }
    const struct prior_arg *a = &family->args[i];
    const bool bounded = i == 0 && family->most > 0;
    *out = (struct field){.key = a->key,
                          .kind = FIELD_NUMBER,
                          .required = true,
                          .low = bounded       ? family->least
                                 : a->positive ? 0
                                               : -NUMBER_LIMIT,
                          .low_open = !bounded && a->positive,
                          .high = bounded ? family->most : NUMBER_LIMIT,
                          .help = a->help};
    return true;
}

static bool family_rows(const struct vocabulary *v, const void *data, size_t i, struct field *out)
{
    const struct prior_family *family = prior_families[i];

    (void)v;
    (void)data;
    if (family == NULL)
        return false;
    *out = (struct field){.key = family->key,
                          .kind = FIELD_OBJECT,
                          .nested_from = argument_rows,
                          .data = family,
                          .help = family->sentence};
    return true;
}

bool prior_rows(const struct vocabulary *v, const void *data, size_t i, struct field *out)
{
    struct walk w = {0, 0, 0};
    const struct parameter *p;

    (void)v;
    (void)data;
    while ((p = walk_next(&w)) != NULL) {
        const char *names[] = {p->name, p->variance};
        const size_t count = p->variance == NULL ? 1 : 2;

        if (i < count) {
            *out = prior_field;
            out->key = names[i];
            out->help = p->help;
            return true;
        }
        i -= count;
    }
    return false;
}

bool parameter_rows(const struct vocabulary *v, const void *data, size_t i, struct field *out)
{
    struct walk w = {0, 0, 0};
    const struct parameter *p = walk_next(&w);

    (void)v;
    (void)data;
    while (i-- > 0 && p != NULL)
        p = walk_next(&w);
    if (p == NULL || p == &parameter_control || p == &parameter_sd)
        return false; /* these two stand beside the parameters */
    *out = (struct field){.key = p->name,
                          .kind = FIELD_NUMBER,
                          .low = -NUMBER_LIMIT,
                          .high = NUMBER_LIMIT,
                          .help = p->help};
    return true;
}
