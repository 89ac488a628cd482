/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_json.c: JSON in (what is refused, with its line and place) and out (canonical, indented). */
#include <string.h>

#include "base/base.h"
#include "base/json_read.h"
#include "base/json_write.h"
#include "unit.h"

static cJSON *parsed(const char *s)
{
    struct err e = ERR_INIT;
    cJSON *tree = NULL;
    CU_ASSERT_EQUAL(json_parse(s, strlen(s), "x", &tree, &e), STATUS_OK);
    CU_ASSERT_EQUAL(e.count, 0);
    err_release(&e);
    return tree;
}

static void canonical(const char *in, const char *want)
{
    struct text out = TEXT_INIT;
    cJSON *tree = parsed(in);
    CU_ASSERT_PTR_NOT_NULL_FATAL(tree);
    json_canonical(&out, tree);
    CU_ASSERT_STRING_EQUAL(text_s(&out), want);
    cJSON_Delete(tree);
    text_release(&out);
}

/* RFC 8785, 3.2.2 to 3.2.4: the example and its bytes */
static void canonical_example(void)
{
    canonical("{\n  \"numbers\": [333333333.33333329, 1E30, 4.50,\n"
              "              2e-3, 0.000000000000000000000000001],\n"
              "  \"string\": \"\\u20ac$\\u000F\\u000aA'\\u0042\\u0022\\u005c\\\\\\\"\\/\",\n"
              "  \"literals\": [null, true, false]\n}",
              "{\"literals\":[null,true,false],"
              "\"numbers\":[333333333.3333333,1e+30,4.5,0.002,1e-27],"
              "\"string\":\"\xe2\x82\xac$\\u000f\\nA'B\\\"\\\\\\\\\\\"/\"}");
    canonical(" [ ] ", "[]");
    canonical("{\"b\":{},\"a\":-0.0,\"B\":1}", "{\"B\":1,\"a\":0,\"b\":{}}");
}

/* U+1F600 sorts before U+FB33: its first UTF-16 unit is D83D. */
static void canonical_order(void)
{
    canonical("{\"\xef\xac\xb3\":1,\"\xf0\x9f\x98\x80\":2,\"\xe2\x82\xac\":3,\"ab\":4,\"a\":5}",
              "{\"a\":5,\"ab\":4,\"\xe2\x82\xac\":3,\"\xf0\x9f\x98\x80\":2,\"\xef\xac\xb3\":1}");
}

static void refused_with_line(void)
{
    static const struct {
        const char *bytes;
        size_t length;
        long line;
    } wrong[] = {
#define BYTES(s) (s), sizeof(s) - 1
        {BYTES(""), 0},
        {BYTES("\xEF\xBB\xBF{}"), 1},
        {BYTES("{\n\"a\": 01}"), 2},
        {BYTES("[1,\n\n1e999]"), 3},
        {BYTES("{\"a\": 1}\n\n{}"), 3},
        {BYTES("[\"a\tb\"]"), 1},
        {BYTES("[\n\"\xff\"]"), 2},
        {BYTES("[1,\r\n2,\r\n]"), 3},
        {BYTES("[\"\\ud800\"]"), 1},
        {BYTES("[\"a\0b\"]"), 1},
        {BYTES("[NaN]"), 1},
        {BYTES("[.5]"), 1},
        {BYTES("[5.]"), 1},
        {BYTES("{\"a\": 1"), 1},
        {BYTES("// no\n1"), 1},
#undef BYTES
    };
    for (size_t i = 0; i < COUNT_OF(wrong); i++) {
        struct err e = ERR_INIT;
        cJSON *tree = NULL;
        CU_ASSERT_EQUAL(json_parse(wrong[i].bytes, wrong[i].length, "x.json", &tree, &e),
                        STATUS_INPUT);
        CU_ASSERT_PTR_NULL(tree);
        CU_ASSERT_EQUAL_FATAL(e.count, 1);
        if (wrong[i].line > 0)
            CU_ASSERT_EQUAL(e.faults[0].line, wrong[i].line);
        CU_ASSERT_STRING_EQUAL(e.faults[0].file, "x.json");
        err_release(&e);
    }
}

/* Every doubled name is told, each with its pointer (RFC 6901, section 3). */
static void doubled_names(void)
{
    static const char in[] =
        "{\"a/b\": [0, {\"~\": 1, \"~\": 2, \"\\u007e\": 3}], \"a/b\": 1, \"A/b\": 2}";
    struct err e = ERR_INIT;
    cJSON *tree = NULL;
    CU_ASSERT_EQUAL(json_parse(in, sizeof in - 1, "x", &tree, &e), STATUS_INPUT);
    CU_ASSERT_PTR_NULL(tree);
    CU_ASSERT_EQUAL_FATAL(e.count, 2);
    CU_ASSERT_STRING_EQUAL(e.faults[0].pointer, "/a~1b");
    CU_ASSERT_STRING_EQUAL(e.faults[1].pointer, "/a~1b/1/~0");
    CU_ASSERT_PTR_NOT_NULL(strstr(e.faults[1].message, "3 times"));
    err_release(&e);
}

static void depth(void)
{
    for (int deep = 64; deep <= 65; deep++) {
        struct text t = TEXT_INIT;
        struct err e = ERR_INIT;
        cJSON *tree = NULL;
        for (int i = 0; i < deep; i++)
            text_add(&t, "[");
        for (int i = 0; i < deep; i++)
            text_add(&t, "]");
        CU_ASSERT_EQUAL(json_parse(text_s(&t), t.length, "x", &tree, &e),
                        deep == 64 ? STATUS_OK : STATUS_INPUT);
        cJSON_Delete(tree);
        text_release(&t);
        err_release(&e);
    }
}

static void members(void)
{
    cJSON *tree = parsed("{\"Name\": 1, \"name\": {\"deep\": 2}}");
    CU_ASSERT_PTR_NOT_NULL_FATAL(tree);
    CU_ASSERT_EQUAL(json_member(tree, "Name")->valuedouble, 1.0);
    CU_ASSERT(cJSON_IsObject(json_member(tree, "name")));
    CU_ASSERT_PTR_NULL(json_member(tree, "NAME"));
    CU_ASSERT_PTR_NULL(json_member(tree, "deep"));
    cJSON_Delete(tree);
}

static void written(void)
{
    struct text out = TEXT_INIT;
    struct json_writer w;
    json_writer_init(&w, &out);
    json_open(&w, '{');
    json_key_string(&w, "a\"", "x\n");
    json_key_maybe(&w, "none", __builtin_nan(""));
    json_key(&w, "list");
    json_open_inline(&w, '[');
    json_number(&w, -0.0);
    json_number(&w, 0.1);
    json_string(&w, NULL);
    json_close(&w);
    json_key(&w, "empty");
    json_open(&w, '[');
    json_close(&w);
    json_key(&w, "more");
    json_open(&w, '[');
    json_bool(&w, true);
    json_null(&w);
    json_close(&w);
    json_close(&w);
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&out), "\n  \"a\\\"\": \"x\\n\",\n"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&out), "\n  \"none\": null,\n"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&out), "\n  \"list\": [0, 0.1, null],\n"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&out), "\n  \"empty\": [],\n"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&out), "\n    true,\n    null\n  ]\n}"));
    cJSON *tree = parsed(text_s(&out)); /* and our own reader takes it */
    CU_ASSERT_PTR_NOT_NULL(tree);
    cJSON_Delete(tree);
    text_release(&out);
}

static const struct unit_test tests[] = {
    {"the canonical example", canonical_example},
    {"canonical order of names", canonical_order},
    {"faults with their lines", refused_with_line},
    {"doubled names with their places", doubled_names},
    {"depth", depth},
    {"members by exact name", members},
    {"what is written", written},
    UNIT_END,
};

int main(void)
{
    return unit_main("JSON", tests);
}
