/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fit_design.c: the design behind a fit, as a JSON text that the design reader judges, so that
 * every rule, default and message is the design's. */
#include <string.h>

#include "base/json_read.h"
#include "base/json_write.h"
#include "base/mem.h"
#include "base/number.h"
#include "design/fit_messages.h"
#include "design/fit_table.h"

enum { SUBJECTS = 1000 }; /* asked for by the format; nothing of a fit depends on it */

static void put(cJSON *object, const char *key, cJSON *item)
{
    if (!item || !cJSON_AddItemToObject(object, key, item))
        mem_exhausted();
}

static cJSON *put_object(cJSON *object, const char *key)
{
    cJSON *item = cJSON_CreateObject();
    put(object, key, item);
    return item;
}

/* ---- --fix ---- */

/* Length of NAME in NAME=VALUE; 0 where it is none. */
static size_t fix_name(const char *word, double *value)
{
    const char *equals = strchr(word, '=');
    return equals && number_parse(equals + 1, value) ? (size_t)(equals - word) : 0;
}

static bool is_fixed_before(const struct fit_request *q, size_t i, size_t length)
{
    double value;
    for (size_t j = 0; j < i; j++)
        if (fix_name(q->fix[j], &value) == length && strncmp(q->fix[j], q->fix[i], length) == 0)
            return true;
    return false;
}

static void apply_fixes(cJSON *model, const struct fit_request *q, struct err *e)
{
    cJSON *priors = cJSON_GetObjectItemCaseSensitive(model, "priors");
    if (!priors && q->fixes > 0)
        priors = put_object(model, "priors");
    for (size_t i = 0; i < q->fixes; i++) {
        double value;
        const size_t length = fix_name(q->fix[i], &value);
        if (length == 0 || is_fixed_before(q, i, length)) {
            err_add(e, STATUS_INPUT, NULL, 0, NULL, length ? FIT_MSG_FIX_TWICE : FIT_MSG_FIX,
                    q->fix[i]);
            continue;
        }
        if (!cJSON_IsObject(priors))
            continue; /* the design reader says so */
        char *name = mem_text_n(q->fix[i], length);
        cJSON_DeleteItemFromObjectCaseSensitive(priors, name);
        put(put_object(put_object(priors, name), "fixed"), "value", cJSON_CreateNumber(value));
        mem_free(name);
    }
}

/* ---- the design ---- */

static cJSON *model_tree(const struct fit_request *q, struct err *e)
{
    cJSON *model = NULL;
    if (q->model) {
        if (json_parse(text_s(q->model), q->model->length, q->model_file, &model, e) != STATUS_OK)
            return NULL;
    } else {
        model = cJSON_CreateObject();
        put(model, "curve", cJSON_CreateString(q->curve));
    }
    if (cJSON_IsObject(model))
        apply_fixes(model, q, e);
    return model;
}

static void put_levels(cJSON *tree, const struct fit_table *t)
{
    cJSON *levels = put_object(tree, "levels"), *list = cJSON_CreateArray();
    put(levels, "list", list);
    for (size_t k = 0; k < t->levels; k++) {
        char label[NUMBER_CHARS];
        cJSON *level = cJSON_CreateObject();
        number_shortest(label, t->value[k]);
        put(level, "label", cJSON_CreateString(label));
        put(level, "value", cJSON_CreateNumber(t->value[k]));
        if (!cJSON_AddItemToArray(list, level))
            mem_exhausted();
    }
}

static void design_text(struct text *out, const struct fit_table *t, const struct fit_request *q,
                        cJSON *model)
{
    cJSON *tree = cJSON_CreateObject(), *endpoint;
    put(tree, "terrace", cJSON_CreateNumber(1));
    put(tree, "title", cJSON_CreateString("Fit"));
    put_levels(tree, t);
    endpoint = put_object(tree, "endpoint");
    put(endpoint, "name", cJSON_CreateString("Response"));
    put(endpoint, "type", cJSON_CreateString(t->binary ? "binary" : "continuous"));
    put(endpoint, "better", cJSON_CreateString(q->higher_is_better ? "higher" : "lower"));
    put(tree, "model", model);
    put(tree, "subjects", cJSON_CreateNumber(SUBJECTS));
    put(tree, "seed", cJSON_CreateNumber(q->seed));
    json_canonical(out, tree);
    cJSON_Delete(tree);
}

/* A fault of the design told where the user can mend it. */
static void tell(struct err *e, const struct fault *f, const struct fit_table *t,
                 const struct fit_request *q)
{
    static const char model[] = "/model", priors[] = "/model/priors";
    const char *pointer = f->pointer ? f->pointer : "";
    const bool of_model = strncmp(pointer, model, strlen(model)) == 0;
    const bool of_priors = strncmp(pointer, priors, strlen(priors)) == 0;
    if (!of_model)
        err_add(e, STATUS_INPUT, t->data.file, 0, NULL, "%s", f->message);
    else if (q->model_file)
        err_add(e, STATUS_INPUT, q->model_file, 0, pointer + strlen(model), "%s", f->message);
    else if (of_priors && q->fixes > 0)
        err_add(e, STATUS_INPUT, NULL, 0, NULL, "--fix (%s): %s", pointer + strlen(model),
                f->message);
    else
        err_add(e, STATUS_INPUT, NULL, 0, NULL, "--curve %s: %s", q->curve, f->message);
}

enum status fit_design(struct design **out, const struct fit_table *t, const struct fit_request *q,
                       const struct vocabulary *v, struct err *e)
{
    struct err own = ERR_INIT, of_model = ERR_INIT;
    struct text bytes = TEXT_INIT;
    const struct prior_scales scales = fit_table_scales(t);
    cJSON *model = model_tree(q, &of_model);
    *out = NULL;
    if (model) {
        design_text(&bytes, t, q, model);
        (void)design_parse_scaled(out, text_s(&bytes), bytes.length, "fit", v,
                                  t->binary ? NULL : &scales, &own);
    }
    if (*out) { /* a table of a fit does not say what its levels are */
        mem_free((*out)->quantity);
        (*out)->quantity = mem_text("level");
    }
    for (size_t i = 0; i < own.count; i++)
        tell(e, &own.faults[i], t, q);
    if (*out && of_model.status != STATUS_OK) {
        design_free(*out);
        *out = NULL;
    }
    err_move(e, &of_model);
    err_release(&own);
    text_release(&bytes);
    return *out ? STATUS_OK : e->status;
}
