/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_design_schema.c: for every field the JSON Schema and the parser reject the same values.
 */
#include <CUnit/CUnit.h>

#include "analysis/vocabulary_rows.h"
#include "base/json_read.h"
#include "design/design.h"
#include "design/fields.h"
#include "design/schema.h"
#include "design_files.h"
#include "schema_takes.h"
#include "unit.h"

#define BAD "tests/designs/bad/"
#define GOOD "tests/designs/good/"

/* --- the two judges side by side --- */

static cJSON *parse(const char *bytes, size_t length)
{
    struct err e = ERR_INIT;
    cJSON *tree;

    json_parse(bytes, length, "x", &tree, &e);
    err_release(&e);
    return tree;
}

static cJSON *schema_tree(const struct field *row)
{
    struct text bytes = TEXT_INIT;
    cJSON *tree;

    schema_of(&bytes, row, &terrace_vocabulary);
    tree = parse(text_s(&bytes), bytes.length);
    CU_ASSERT_PTR_NOT_NULL_FATAL(tree);
    text_release(&bytes);
    return tree;
}

static bool parser_takes(const struct field *row, const cJSON *item)
{
    cJSON *copy = cJSON_Duplicate(item, true);
    struct err e = ERR_INIT;
    bool taken;

    fields_check(copy, row, &terrace_vocabulary, "x", &e);
    taken = e.count == 0;
    err_release(&e);
    cJSON_Delete(copy);
    return taken;
}

static size_t judged, refused;

/* True when both take it; a failed assertion when they differ. */
static bool both_take(const cJSON *schema, const struct field *row, const cJSON *item,
                      const char *what)
{
    const bool by_schema = schema_takes(schema, item), by_parser = parser_takes(row, item);

    if (by_schema != by_parser) {
        char *text = cJSON_PrintUnformatted(item);

        printf("# %s: the schema %s, the parser %s: %s\n", what, by_schema ? "takes" : "refuses",
               by_parser ? "takes" : "refuses", text);
        cJSON_free(text);
    }
    CU_ASSERT_EQUAL(by_schema, by_parser);
    judged++;
    refused += !by_parser;
    return by_schema && by_parser;
}

static void whole_files(void)
{
    static const char *const directories[] = {GOOD, BAD};
    cJSON *schema = schema_tree(&design_fields);

    for (size_t k = 0; k < 2; k++) {
        struct file_list list = files_in(directories[k], ".json");

        CU_ASSERT(list.count > 3);
        for (size_t i = 0; i < list.count; i++) {
            struct text bytes = file_bytes(directories[k], list.name[i], ".json");
            cJSON *tree = parse(text_s(&bytes), bytes.length);

            if (tree != NULL) {
                const bool taken = both_take(schema, &design_fields, tree, list.name[i]);

                CU_ASSERT(taken || k == 1);
            }
            cJSON_Delete(tree);
            text_release(&bytes);
        }
        files_release(&list);
    }
    cJSON_Delete(schema);
}

/* --- values for one row --- */

static cJSON *sample(const struct field *f);

static cJSON *sample_object(const struct field *f)
{
    cJSON *object = cJSON_CreateObject();
    struct field row;

    for (size_t i = 0; field_nested(f, &terrace_vocabulary, i, &row); i++)
        if (row.required || (f->one_member && i == 0) ||
            (f->one_of != NULL && strcmp(f->one_of[0], row.key) == 0))
            cJSON_AddItemToObject(object, row.key, sample(&row));
    return object;
}

static double sample_number(const struct field *f)
{
    if (f->kind == FIELD_WHOLE)
        return f->low;
    return f->low / 2 + f->high / 2;
}

/* Some value that the row takes. */
static cJSON *sample(const struct field *f)
{
    struct field row;
    cJSON *list;

    switch (f->kind) {
    case FIELD_TEXT:
        return cJSON_CreateString("a text");
    case FIELD_WORD:
        return cJSON_CreateString(field_word(f, &terrace_vocabulary, 0));
    case FIELD_NUMBER:
    case FIELD_WHOLE:
        return cJSON_CreateNumber(sample_number(f));
    case FIELD_FLAG:
        return cJSON_CreateTrue();
    case FIELD_OBJECT:
        return sample_object(f);
    case FIELD_MAP:
        list = cJSON_CreateObject();
        cJSON_AddItemToObject(list, "a name", sample(f->nested));
        return list;
    case FIELD_LIST:
        list = cJSON_CreateArray();
        for (double i = 0; i < f->low; i++)
            cJSON_AddItemToArray(list, sample(f->nested));
        return list;
    case FIELD_CHOICE:
        field_nested(f, &terrace_vocabulary, 0, &row);
        return sample(&row);
    case FIELD_END:
        break;
    }
    return NULL;
}

struct bench {
    const struct field *row;
    cJSON *schema;
    const char *path;
};

static bool try_item(const struct bench *b, cJSON *item)
{
    const bool taken = both_take(b->schema, b->row, item, b->path);

    cJSON_Delete(item);
    return taken;
}

static void try_json(const struct bench *b, const char *json)
{
    cJSON *item = cJSON_Parse(json);

    CU_ASSERT_PTR_NOT_NULL_FATAL(item);
    try_item(b, item);
}

static void try_types(const struct bench *b)
{
    static const char *const values[] = {"null",
                                         "true",
                                         "\"\"",
                                         "\"any\"",
                                         "\"none\"",
                                         "\"a\\nb\"",
                                         "\"a\\n\"",
                                         "\"\\u0080\"",
                                         "\"\\u00a0\"",
                                         "\"n/2N\"",
                                         "\"as_largest\"",
                                         "-1",
                                         "0",
                                         "0.3",
                                         "1",
                                         "2",
                                         "8",
                                         "200.5",
                                         "1e7",
                                         "1e99",
                                         "1e101",
                                         "-1e101",
                                         "1e-300",
                                         "[]",
                                         "[1]",
                                         "[1, 2]",
                                         "[\"a\", 2]",
                                         "[null, null]",
                                         "{}",
                                         "{\"note\": \"x\"}",
                                         "{\"note\": 1}",
                                         "{\"\": 1}",
                                         "{\"a\\tb\": 0.5}",
                                         "{\"all\": [], \"any\": []}",
                                         "{\"all\": [], \"measure\": \"pr_gain\"}"};

    for (size_t i = 0; i < sizeof values / sizeof values[0]; i++)
        try_json(b, values[i]);
}

static void try_numbers(const struct bench *b)
{
    const struct field *f = b->row;
    const double step = f->kind == FIELD_WHOLE ? 1 : 1e-9;
    const double values[] = {f->low,        f->high,        f->low - step, f->high + step,
                             f->low + step, f->high - step, f->low + 0.5,  f->low + 8};

    for (size_t i = 0; i < sizeof values / sizeof values[0]; i++)
        try_item(b, cJSON_CreateNumber(values[i]));
    CU_ASSERT_FALSE(try_item(b, cJSON_CreateNumber(f->high * 2 + 1)));
}

static void try_members(const struct bench *b)
{
    cJSON *whole = sample(b->row);
    const cJSON *member;
    cJSON *more = cJSON_Duplicate(whole, true);
    struct field row;

    cJSON_AddItemToObject(more, "no such key", cJSON_CreateNumber(1));
    CU_ASSERT_FALSE(try_item(b, more));
    cJSON_ArrayForEach(member, whole)
    {
        cJSON *less = cJSON_Duplicate(whole, true), *wrong = cJSON_Duplicate(whole, true);

        cJSON_DeleteItemFromObjectCaseSensitive(less, member->string);
        CU_ASSERT_FALSE(try_item(b, less)); /* a sample holds what is required */
        cJSON_ReplaceItemInObjectCaseSensitive(wrong, member->string, cJSON_CreateNull());
        CU_ASSERT_FALSE(try_item(b, wrong));
    }
    for (size_t i = 0; field_nested(b->row, &terrace_vocabulary, i, &row); i++) {
        cJSON *with = cJSON_Duplicate(whole, true);

        if (json_member(with, row.key) == NULL)
            cJSON_AddItemToObject(with, row.key, sample(&row));
        try_item(b, with);
    }
    cJSON_Delete(whole);
}

static void try_lengths(const struct bench *b)
{
    const double top = b->row->high < 200 ? b->row->high + 1 : b->row->low + 1;
    cJSON *list = cJSON_CreateArray();

    for (double n = 0; n <= top; n++) {
        const bool fits = n >= b->row->low && n <= b->row->high;

        CU_ASSERT_EQUAL(both_take(b->schema, b->row, list, b->path), fits);
        cJSON_AddItemToArray(list, sample(b->row->nested));
    }
    cJSON_Delete(list);
}

static size_t rows_tried;

static void try_row(const struct field *f, const char *path)
{
    struct bench b = {f, schema_tree(f), path};
    struct text inside = TEXT_INIT;
    struct field row;

    rows_tried++;
    CU_ASSERT(try_item(&b, sample(f)));
    try_types(&b);
    if (f->kind == FIELD_NUMBER || f->kind == FIELD_WHOLE)
        try_numbers(&b);
    if (f->kind == FIELD_OBJECT)
        try_members(&b);
    if (f->kind == FIELD_LIST)
        try_lengths(&b);
    cJSON_Delete(b.schema);
    CU_ASSERT_PTR_NOT_NULL(f->help);
    for (size_t i = 0; field_nested(f, &terrace_vocabulary, i, &row); i++) {
        text_clear(&inside);
        text_addf(&inside, "%s/%s", path, row.key == NULL ? "*" : row.key);
        try_row(&row, text_s(&inside));
    }
    text_release(&inside);
}

static void every_row(void)
{
    judged = refused = rows_tried = 0;
    try_row(&design_fields, "");
    CU_ASSERT(rows_tried > 500);
    CU_ASSERT(refused > 10000);
    CU_ASSERT(judged - refused > 2000);
}

/* The defaults of the table are values that the table takes. */
static void check_fallback(const struct field *f)
{
    struct field row;

    if (f->fallback != NULL) {
        cJSON *value = cJSON_Parse(f->fallback);

        CU_ASSERT_PTR_NOT_NULL_FATAL(value);
        CU_ASSERT(parser_takes(f, value));
        CU_ASSERT_FALSE(f->required);
        cJSON_Delete(value);
    }
    for (size_t i = 0; field_nested(f, &terrace_vocabulary, i, &row); i++)
        check_fallback(&row);
}

static void fallbacks(void)
{
    check_fallback(&design_fields);
}

static void comment_names_rules(void)
{
    struct text bytes = TEXT_INIT;
    const char *comment;
    cJSON *tree;

    design_schema(&bytes, &terrace_vocabulary);
    tree = parse(text_s(&bytes), bytes.length);
    comment = json_member(tree, "$comment")->valuestring;
    CU_ASSERT_PTR_NOT_NULL(strstr(comment, "duplicate keys"));
    CU_ASSERT_PTR_NOT_NULL(strstr(comment, "levels_increase"));
    CU_ASSERT_PTR_NOT_NULL(strstr(comment, "truth_null"));
    cJSON_Delete(tree);
    text_release(&bytes);
}

static const struct unit_test tests[] = {
    {"good and malformed designs are judged alike", whole_files},
    {"every row of the table is judged alike", every_row},
    {"defaults are allowed values", fallbacks},
    {"the comment names the rules of the parser", comment_names_rules},
    UNIT_END};

int main(void)
{
    return unit_main("design schema", tests);
}
