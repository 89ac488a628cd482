/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_csv.c: every message of the CSV reader by bytes in memory, with its line; what sound files
 * give. */
#include <string.h>

#include "base/base.h"
#include "base/csv_read.h"
#include "design_files.h"
#include "message_rows.h"
#include "unit.h"

#define BYTES(s) (s), sizeof(s) - 1

static void every_message_with_its_line(void)
{
    static const struct {
        const char *bytes;
        size_t length;
        const char *expected; /* as printed: file, line, words */
    } wrong[] = {
        {BYTES(" \n\n"), "x.csv: the file is empty"},
        {BYTES("\xFF\xFE"
               "a\0"),
         "x.csv:1: the file is UTF-16"},
        {BYTES("a,b\n\"1\n2\",\"\xff\"\n"), "x.csv:3: byte 0xff is not valid UTF-8"},
        {BYTES("a,b\r\n1,2\r\n3,\0\r\n"), "x.csv:3: a NUL byte"},
        {BYTES("a,b\n1,2\"3\n"), "x.csv:2: field 2 has a double quote but"},
        {BYTES("a,b\n\"1\n\"2,3\n"), "x.csv:3: field 1 goes on after its closing"},
        {BYTES("a,b\n\n1,\"2\n3,4\n"), "x.csv:3: field 2 starts with a double quote that is"},
        {BYTES("a,b\n\"x\ny\",2\n1\n"), "x.csv:4: the row has 1 field where the header has 2"},
        {BYTES("\na, \n1,2\n"), "x.csv:2: column 2 has no name"},
        {BYTES("a,b,a\n1,2,3\n"), "x.csv:1: the column name \"a\" stands for columns 1 and 3"},
    };
    to_root();
    message_rows_read("src/base/", "csv_messages");
    for (size_t i = 0; i < COUNT_OF(wrong); i++) {
        struct csv_table t = CSV_TABLE_INIT;
        struct err e = ERR_INIT;
        CU_ASSERT_EQUAL(csv_read(wrong[i].bytes, wrong[i].length, "x.csv", &t, &e), STATUS_INPUT);
        CU_ASSERT_EQUAL(e.count, 1);
        message_rows_earn(&e, wrong[i].expected, wrong[i].expected);
        csv_table_release(&t);
        err_release(&e);
    }
    CU_ASSERT_EQUAL(message_rows_all_earned(), COUNT_OF(wrong));
    message_rows_forget();
}

static void all_faults_in_one_run(void)
{
    static const char in[] = "a,b\n1\n1,2,3\n\"x\"y,2\nz\"z,\xc0\n1,2\n";
    static const long lines[] = {2, 3, 4, 5, 5};
    struct csv_table t = CSV_TABLE_INIT;
    struct err e = ERR_INIT;
    CU_ASSERT_EQUAL(csv_read(in, sizeof in - 1, "x", &t, &e), STATUS_INPUT);
    CU_ASSERT_EQUAL_FATAL(e.count, COUNT_OF(lines));
    for (size_t i = 0; i < COUNT_OF(lines); i++)
        CU_ASSERT_EQUAL(e.faults[i].line, lines[i]);
    csv_table_release(&t);
    err_release(&e);
}

/* RFC 4180, section 2, with a byte order mark, all three line ends and blank lines */
static void sound_file(void)
{
    static const char in[] = "\xEF\xBB\xBFname,\"the, value\"\r\n\r\n\"a \"\"b\"\"\r\nc\", 1 \n"
                             "  \n,\"\"\r\"last\",2";
    struct csv_table t = CSV_TABLE_INIT;
    struct err e = ERR_INIT;
    CU_ASSERT_EQUAL(csv_read(in, sizeof in - 1, "x", &t, &e), STATUS_OK);
    CU_ASSERT_EQUAL_FATAL(t.columns, 2);
    CU_ASSERT_EQUAL_FATAL(t.count, 3);
    CU_ASSERT_EQUAL(t.header_line, 1);
    CU_ASSERT_STRING_EQUAL(t.header[0], "name");
    CU_ASSERT_STRING_EQUAL(t.header[1], "the, value");
    CU_ASSERT_EQUAL(t.rows[0].line, 3);
    CU_ASSERT_STRING_EQUAL(t.rows[0].fields[0], "a \"b\"\r\nc");
    CU_ASSERT_STRING_EQUAL(t.rows[0].fields[1], " 1 ");
    CU_ASSERT_EQUAL(t.rows[1].line, 6);
    CU_ASSERT_EQUAL(t.rows[1].count, 2);
    CU_ASSERT_STRING_EQUAL(t.rows[1].fields[0], "");
    CU_ASSERT_STRING_EQUAL(t.rows[1].fields[1], "");
    CU_ASSERT_EQUAL(t.rows[2].line, 7);
    CU_ASSERT_STRING_EQUAL(t.rows[2].fields[0], "last");
    csv_table_release(&t);
    err_release(&e);
}

static void header_alone(void)
{
    struct csv_table t = CSV_TABLE_INIT;
    struct err e = ERR_INIT;
    CU_ASSERT_EQUAL(csv_read("a", 1, "x", &t, &e), STATUS_OK);
    CU_ASSERT_EQUAL(t.columns, 1);
    CU_ASSERT_EQUAL(t.count, 0);
    csv_table_release(&t);
    err_release(&e);
}

static const struct unit_test tests[] = {
    {"every message with its line", every_message_with_its_line},
    {"all faults in one run", all_faults_in_one_run},
    {"a sound file", sound_file},
    {"a header alone", header_alone},
    UNIT_END,
};

int main(void)
{
    return unit_main("CSV", tests);
}
