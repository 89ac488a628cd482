/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_design_messages.c: every message a design can earn is earned by one malformed design, with
 * the words and the place that stand beside it, and no two of them earn the same. */
#include <CUnit/CUnit.h>

#include "analysis/vocabulary_rows.h"
#include "design/design.h"
#include "design_files.h"
#include "message_rows.h"
#include "unit.h"

#define BAD "tests/designs/bad/"

/* --- the malformed designs --- */

static void judge(const char *name, struct err *e)
{
    struct text bytes = file_bytes(BAD, name, ".json");
    struct text file = TEXT_INIT;
    struct design *d;

    text_addf(&file, "%s.json", name);
    (void)design_parse(&d, text_s(&bytes), bytes.length, text_s(&file), &terrace_vocabulary, e);
    design_free(d);
    text_release(&bytes);
    text_release(&file);
}

static void check_design(const char *name)
{
    struct text expected = file_bytes(BAD, name, ".txt");
    struct err e = ERR_INIT;

    if (expected.length > 0)
        expected.s[--expected.length] = '\0'; /* its line end */
    CU_ASSERT(expected.length > 0);
    judge(name, &e);
    message_rows_earn(&e, text_s(&expected), name);
    err_release(&e);
    text_release(&expected);
}

static void one_design_one_message(void)
{
    struct file_list list = files_in(BAD, ".json");

    message_rows_read("src/design/", "design_messages");
    message_rows_read("src/base/", "json_messages");
    CU_ASSERT(list.count >= 40);
    for (size_t i = 0; i < list.count; i++)
        check_design(list.name[i]);
    CU_ASSERT(message_rows_all_earned() > 90);
    files_release(&list);
    message_rows_forget();
}

static void all_faults_in_one_run(void)
{
    static const char text[] =
        "{\"terrace\": 2, \"title\": \"\", \"subjects\": 10, \"seed\": -1, \"extra\": 0, \"seed\": "
        "1,\n"
        " \"levels\": {\"list\": [{\"label\": \"a\", \"value\": 1}, {\"label\": \"a\", \"value\": "
        "0}]},\n"
        " \"endpoint\": {\"name\": \"x\", \"type\": \"binary\", \"better\": \"higher\"},\n"
        " \"model\": {\"curve\": \"emax\", \"shift\": 2},\n"
        " \"targets\": {\"t\": {\"rule\": \"optimal\", \"effect\": 0}},\n"
        " \"allocation\": {\"ratio\": [1, 2, 3]}}";
    static const char *const places[] = {"/terrace",
                                         "/seed",
                                         "/title",
                                         "/seed",
                                         "/extra",
                                         "/levels/list/1/value",
                                         "/levels/list/1/label",
                                         "/model/shift",
                                         "/targets/t/effect",
                                         "/targets/t/effect",
                                         "/allocation/ratio"};
    struct err e = ERR_INIT;
    struct design *d;

    CU_ASSERT_EQUAL(design_parse(&d, text, strlen(text), "x", &terrace_vocabulary, &e),
                    STATUS_INPUT);
    CU_ASSERT_PTR_NULL(d);
    CU_ASSERT_EQUAL(e.count, sizeof places / sizeof places[0]);
    for (size_t i = 0; i < sizeof places / sizeof places[0]; i++) {
        size_t wanted = 0, found = 0;

        for (size_t j = 0; j < sizeof places / sizeof places[0]; j++)
            wanted += strcmp(places[j], places[i]) == 0;
        for (size_t j = 0; j < e.count; j++)
            found += strcmp(e.faults[j].pointer, places[i]) == 0;
        CU_ASSERT_EQUAL(found, wanted);
    }
    err_release(&e);
}

static const struct unit_test tests[] = {
    {"each message is earned by one malformed design", one_design_one_message},
    {"all faults of a design in one run, and no more", all_faults_in_one_run},
    UNIT_END};

int main(void)
{
    return unit_main("design messages", tests);
}
