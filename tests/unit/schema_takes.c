/* SPDX-License-Identifier: GPL-3.0-or-later */
/* schema_takes.c: a small validator of the JSON Schema keywords that schema.c writes; it stands for
 * the world's validators. */
#include "schema_takes.h"

#include <CUnit/CUnit.h>
#include <math.h>
#include <string.h>

#include "base/json_read.h"
#include "base/text.h"

static bool valid(const cJSON *root, const cJSON *schema, const cJSON *item);

static bool is_type(const char *type, const cJSON *item)
{
    if (strcmp(type, "string") == 0)
        return cJSON_IsString(item);
    if (strcmp(type, "number") == 0)
        return cJSON_IsNumber(item);
    if (strcmp(type, "integer") == 0)
        return cJSON_IsNumber(item) && floor(item->valuedouble) == item->valuedouble;
    if (strcmp(type, "boolean") == 0)
        return cJSON_IsBool(item);
    if (strcmp(type, "array") == 0)
        return cJSON_IsArray(item);
    if (strcmp(type, "object") == 0)
        return cJSON_IsObject(item);
    CU_FAIL("a type the validator does not know");
    return false;
}

/* The one pattern that schema.c writes: a control character somewhere. */
static bool has_pattern(const char *s)
{
    uint32_t code = 0;
    size_t step;

    for (; (step = text_utf8_step(s, strlen(s), &code)) > 0; s += step)
        if (code <= 0x1F || (code >= 0x7F && code <= 0x9F))
            return true;
    return false;
}

static double count_of(const cJSON *item)
{
    const cJSON *child;
    double count = 0;

    cJSON_ArrayForEach(child, item) count++;
    return count;
}

static bool number_fits(const char *key, double bound, const cJSON *item)
{
    const double x = item->valuedouble;

    if (strcmp(key, "minItems") == 0)
        return !cJSON_IsArray(item) || count_of(item) >= bound;
    if (strcmp(key, "maxItems") == 0)
        return !cJSON_IsArray(item) || count_of(item) <= bound;
    if (strcmp(key, "minLength") == 0)
        return !cJSON_IsString(item) || (double)text_columns(item->valuestring) >= bound;
    if (!cJSON_IsNumber(item))
        return true;
    if (strcmp(key, "minimum") == 0)
        return x >= bound;
    if (strcmp(key, "maximum") == 0)
        return x <= bound;
    if (strcmp(key, "exclusiveMinimum") == 0)
        return x > bound;
    if (strcmp(key, "exclusiveMaximum") == 0)
        return x < bound;
    if (strcmp(key, "multipleOf") == 0)
        return fmod(x, bound) == 0;
    CU_FAIL("a keyword the validator does not know");
    return false;
}

static size_t alternatives(const cJSON *root, const cJSON *list, const cJSON *item)
{
    const cJSON *schema;
    size_t met = 0;

    cJSON_ArrayForEach(schema, list) met += valid(root, schema, item);
    return met;
}

static bool members_fit(const cJSON *root, const cJSON *schema, const cJSON *item)
{
    const cJSON *properties = json_member(schema, "properties"), *member;
    const cJSON *others = json_member(schema, "additionalProperties");
    const cJSON *names = json_member(schema, "propertyNames");

    if (!cJSON_IsObject(item))
        return true;
    cJSON_ArrayForEach(member, item)
    {
        const cJSON *known = json_member(properties, member->string);
        cJSON *name = cJSON_CreateString(member->string);
        const bool named = names == NULL || valid(root, names, name);

        cJSON_Delete(name);
        if (!named || (known == NULL && cJSON_IsFalse(others)) ||
            (known != NULL && !valid(root, known, member)) ||
            (known == NULL && cJSON_IsObject(others) && !valid(root, others, member)))
            return false;
    }
    return true;
}

static bool words_fit(const char *key, const cJSON *words, const cJSON *item)
{
    const cJSON *word;

    cJSON_ArrayForEach(word, words)
    {
        if (strcmp(key, "required") == 0) {
            if (cJSON_IsObject(item) && json_member(item, word->valuestring) == NULL)
                return false;
        } else if (cJSON_IsString(item) && strcmp(word->valuestring, item->valuestring) == 0) {
            return true;
        }
    }
    return strcmp(key, "required") == 0;
}

static bool elements_fit(const cJSON *root, const cJSON *schema, const cJSON *item)
{
    const cJSON *element;

    if (!cJSON_IsArray(item))
        return true;
    cJSON_ArrayForEach(element, item) if (!valid(root, schema, element))
    {
        return false;
    }
    return true;
}

static bool keyword_fits(const cJSON *root, const cJSON *word, const cJSON *item)
{
    static const char *const silent[] = {
        "$schema",       "$comment",    "$defs",      "title",
        "default",       "description", "properties", "additionalProperties",
        "propertyNames", NULL};
    const char *key = word->string;

    for (size_t i = 0; silent[i] != NULL; i++)
        if (strcmp(key, silent[i]) == 0)
            return true; /* says nothing, or is read by members_fit */
    if (strcmp(key, "$ref") == 0)
        return valid(root,
                     json_member(json_member(root, "$defs"), strrchr(word->valuestring, '/') + 1),
                     item);
    if (strcmp(key, "type") == 0)
        return is_type(word->valuestring, item);
    if (strcmp(key, "enum") == 0 || strcmp(key, "required") == 0)
        return words_fit(key, word, item);
    if (strcmp(key, "anyOf") == 0)
        return alternatives(root, word, item) > 0;
    if (strcmp(key, "oneOf") == 0)
        return alternatives(root, word, item) == 1;
    if (strcmp(key, "not") == 0)
        return !valid(root, word, item);
    if (strcmp(key, "items") == 0)
        return elements_fit(root, word, item);
    if (strcmp(key, "pattern") == 0)
        return !cJSON_IsString(item) || has_pattern(item->valuestring);
    return number_fits(key, word->valuedouble, item);
}

static bool valid(const cJSON *root, const cJSON *schema, const cJSON *item)
{
    const cJSON *word;

    cJSON_ArrayForEach(word, schema) if (!keyword_fits(root, word, item))
    {
        return false;
    }
    return members_fit(root, schema, item);
}

bool schema_takes(const cJSON *schema, const cJSON *item)
{
    return valid(schema, schema, item);
}
