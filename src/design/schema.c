/* SPDX-License-Identifier: GPL-3.0-or-later */
/* schema.c: the JSON Schema (2020-12) of the design file, read off the field table. */
#include "design/schema.h"

#include <string.h>

#include "base/base.h"
#include "base/json_write.h"
#include "base/mem.h"
#include "design/design.h"
#include "design/rules.h"

enum { SHARED_MAX = 32 };

#define CONTROL_PATTERN "[\\u0000-\\u001f\\u007f-\\u009f]"

/* Rows that are written once, under $defs. */
struct shared {
    size_t count;
    struct field row[SHARED_MAX];
};

struct writer {
    struct json_writer json;
    const struct vocabulary *v;
    struct shared shared;
};

static void write_row(struct writer *w, const struct field *f, bool define);

static void share(struct writer *w, const struct field *f)
{
    for (size_t i = 0; i < w->shared.count; i++)
        if (strcmp(w->shared.row[i].shared, f->shared) == 0)
            return;
    if (w->shared.count == SHARED_MAX)
        BUG("too many shared rows");
    w->shared.row[w->shared.count++] = *f;
}

static void write_type(struct writer *w, const char *type)
{
    json_key_string(&w->json, "type", type);
}

static void write_text(struct writer *w, const struct field *f)
{
    write_type(w, "string");
    if (f->low > 0)
        json_key_number(&w->json, "minLength", 1);
    json_key(&w->json, "not");
    json_open_inline(&w->json, '{');
    if (f->elsewhere) { /* neither reserved nor with control characters */
        json_key(&w->json, "anyOf");
        json_open_inline(&w->json, '[');
        json_open_inline(&w->json, '{');
        json_key_string(&w->json, "pattern", CONTROL_PATTERN);
        json_close(&w->json);
        json_open_inline(&w->json, '{');
        json_key(&w->json, "enum");
        json_open_inline(&w->json, '[');
        for (size_t i = 0; field_reserved[i] != NULL; i++)
            json_string(&w->json, field_reserved[i]);
        json_close(&w->json);
        json_close(&w->json);
        json_close(&w->json);
    } else {
        json_key_string(&w->json, "pattern", CONTROL_PATTERN);
    }
    json_close(&w->json);
}

static void write_word(struct writer *w, const struct field *f)
{
    json_key(&w->json, "enum");
    json_open_inline(&w->json, '[');
    for (size_t i = 0; field_word(f, w->v, i) != NULL; i++)
        json_string(&w->json, field_word(f, w->v, i));
    json_close(&w->json);
}

static void write_number(struct writer *w, const struct field *f)
{
    write_type(w, f->kind == FIELD_WHOLE ? "integer" : "number");
    json_key_number(&w->json, f->low_open ? "exclusiveMinimum" : "minimum", f->low);
    json_key_number(&w->json, f->high_open ? "exclusiveMaximum" : "maximum", f->high);
    if (f->multiple_of > 0)
        json_key_number(&w->json, "multipleOf", f->multiple_of);
}

static void write_required(struct writer *w, const struct field *f)
{
    struct field row;
    bool open = false;

    for (size_t i = 0; field_nested(f, w->v, i, &row); i++) {
        if (!row.required)
            continue;
        if (!open) {
            json_key(&w->json, "required");
            json_open_inline(&w->json, '[');
            open = true;
        }
        json_string(&w->json, row.key);
    }
    if (open)
        json_close(&w->json);
}

/* {"required": ["key"]} for each of the keys of which exactly one must stand. */
static void write_one_of(struct writer *w, const struct field *f)
{
    struct field row = {0};

    json_key(&w->json, "oneOf");
    json_open_inline(&w->json, '[');
    for (size_t i = 0; f->one_of != NULL ? f->one_of[i] != NULL : field_nested(f, w->v, i, &row);
         i++) {
        json_open_inline(&w->json, '{');
        json_key(&w->json, "required");
        json_open_inline(&w->json, '[');
        json_string(&w->json, f->one_of != NULL ? f->one_of[i] : row.key);
        json_close(&w->json);
        json_close(&w->json);
    }
    json_close(&w->json);
}

static void write_object(struct writer *w, const struct field *f)
{
    struct field row;

    write_type(w, "object");
    json_key(&w->json, "properties");
    json_open(&w->json, '{');
    for (size_t i = 0; field_nested(f, w->v, i, &row); i++) {
        json_key(&w->json, row.key);
        write_row(w, &row, false);
    }
    json_key(&w->json, "note");
    json_open_inline(&w->json, '{');
    write_type(w, "string");
    json_close(&w->json);
    json_close(&w->json);
    write_required(w, f);
    if (f->one_of != NULL || f->one_member)
        write_one_of(w, f);
    json_key_bool(&w->json, "additionalProperties", false);
}

static void write_map(struct writer *w, const struct field *f)
{
    static const struct field name = {.kind = FIELD_TEXT, .low = 1};

    write_type(w, "object");
    json_key(&w->json, "propertyNames");
    json_open_inline(&w->json, '{');
    write_text(w, &name);
    json_close(&w->json);
    json_key(&w->json, "additionalProperties");
    write_row(w, f->nested, false);
}

static void write_list(struct writer *w, const struct field *f)
{
    write_type(w, "array");
    json_key_number(&w->json, "minItems", f->low);
    json_key_number(&w->json, "maxItems", f->high);
    json_key(&w->json, "items");
    write_row(w, f->nested, false);
}

static void write_choice(struct writer *w, const struct field *f)
{
    struct field option;

    json_key(&w->json, "anyOf");
    json_open(&w->json, '[');
    for (size_t i = 0; field_nested(f, w->v, i, &option); i++)
        write_row(w, &option, false);
    json_close(&w->json);
}

static void write_kind(struct writer *w, const struct field *f)
{
    switch (f->kind) {
    case FIELD_TEXT:
        write_text(w, f);
        break;
    case FIELD_WORD:
        write_word(w, f);
        break;
    case FIELD_NUMBER:
    case FIELD_WHOLE:
        write_number(w, f);
        break;
    case FIELD_FLAG:
        write_type(w, "boolean");
        break;
    case FIELD_OBJECT:
        write_object(w, f);
        break;
    case FIELD_MAP:
        write_map(w, f);
        break;
    case FIELD_LIST:
        write_list(w, f);
        break;
    case FIELD_CHOICE:
        write_choice(w, f);
        break;
    case FIELD_END:
        break;
    }
}

/* help, unit, when, and a default that a rule works out, as one description. */
static void write_help(struct writer *w, const struct field *f)
{
    struct text t = TEXT_INIT;

    text_add(&t, f->help);
    if (f->unit != NULL)
        text_addf(&t, " (%s)", f->unit);
    if (f->when != NULL)
        text_addf(&t, "; %s", f->when);
    if (f->otherwise != NULL)
        text_addf(&t, "; default: %s", f->otherwise);
    json_key_string(&w->json, "description", text_s(&t));
    text_release(&t);
}

static void write_tree(struct json_writer *w, const cJSON *item)
{
    const cJSON *child;

    if (cJSON_IsString(item)) {
        json_string(w, item->valuestring);
    } else if (cJSON_IsNumber(item)) {
        json_number(w, item->valuedouble);
    } else if (cJSON_IsBool(item)) {
        json_bool(w, cJSON_IsTrue(item));
    } else {
        json_open_inline(w, cJSON_IsArray(item) ? '[' : '{');
        cJSON_ArrayForEach(child, item)
        {
            if (child->string != NULL)
                json_key(w, child->string);
            write_tree(w, child);
        }
        json_close(w);
    }
}

static void write_fallback(struct writer *w, const struct field *f)
{
    cJSON *value = cJSON_Parse(f->fallback);

    if (value == NULL)
        mem_exhausted();
    json_key(&w->json, "default");
    write_tree(&w->json, value);
    cJSON_Delete(value);
}

static void write_row(struct writer *w, const struct field *f, bool define)
{
    const bool refer = f->shared != NULL && !define;
    struct text where = TEXT_INIT;

    json_open(&w->json, '{');
    write_help(w, f);
    if (f->fallback != NULL)
        write_fallback(w, f);
    if (refer) {
        share(w, f);
        text_addf(&where, "#/$defs/%s", f->shared);
        json_key_string(&w->json, "$ref", text_s(&where));
        text_release(&where);
    } else {
        write_kind(w, f);
    }
    json_close(&w->json);
}

/* Writing one shared row may find more of them: the count grows on the way. */
static void write_shared(struct writer *w)
{
    json_key(&w->json, "$defs");
    json_open(&w->json, '{');
    for (size_t i = 0; i < w->shared.count; i++) {
        struct field row = w->shared.row[i];

        row.fallback = row.otherwise = row.when = NULL; /* those of the place of use */
        json_key(&w->json, row.shared);
        write_row(w, &row, true);
    }
    json_close(&w->json);
}

static void write_comment(struct writer *w)
{
    struct text t = TEXT_INIT;

    text_add(&t, "Only the parser checks: duplicate keys");
    for (const struct rule *r = design_rules; r->name != NULL; r++)
        text_addf(&t, "; %s (%s)", r->name, r->says);
    text_add(&t, ".");
    json_key_string(&w->json, "$comment", text_s(&t));
    text_release(&t);
}

void schema_of(struct text *out, const struct field *row, const struct vocabulary *v)
{
    struct writer w = {.v = v};

    json_writer_init(&w.json, out);
    json_open(&w.json, '{');
    json_key_string(&w.json, "$schema", "https://json-schema.org/draft/2020-12/schema");
    json_key_string(&w.json, "title", "Terrace design file");
    write_comment(&w);
    write_help(&w, row);
    write_kind(&w, row);
    if (w.shared.count > 0)
        write_shared(&w);
    json_close(&w.json);
    text_add(out, "\n");
}

void design_schema(struct text *out, const struct vocabulary *v)
{
    schema_of(out, &design_fields, v);
}
