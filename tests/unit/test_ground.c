/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_ground.c: numbers, text, JSON, hashes, result directories and the allocation door. */
#include <errno.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

#include "base/base.h"
#include "base/file.h"
#include "base/json_read.h"
#include "base/json_write.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/sha256.h"
#include "unit.h"

/* RFC 8785, appendix B */
static void shortest_numbers(void)
{
    static const struct {
        double x;
        const char *text;
    } samples[] = {{0.0, "0"},
                   {-0.0, "0"},
                   {5e-324, "5e-324"},
                   {1.7976931348623157e308, "1.7976931348623157e+308"},
                   {9007199254740992.0, "9007199254740992"},
                   {295147905179352830000.0, "295147905179352830000"},
                   {9.999999999999997e22, "9.999999999999997e+22"},
                   {1e23, "1e+23"},
                   {999999999999999700000.0, "999999999999999700000"},
                   {1e21, "1e+21"},
                   {9.999999999999997e-7, "9.999999999999997e-7"},
                   {0.000001, "0.000001"},
                   {333333333.3333332, "333333333.3333332"},
                   {-0.0000033333333333333333, "-0.0000033333333333333333"},
                   {1424953923781206.2, "1424953923781206.2"}};
    char out[NUMBER_CHARS];
    for (size_t i = 0; i < COUNT_OF(samples); i++)
        CU_ASSERT_STRING_EQUAL(number_shortest(out, samples[i].x), samples[i].text);
    CU_ASSERT_STRING_EQUAL(number_fixed(out, -0.0001, 2), "0.00");
    CU_ASSERT_EQUAL(number_nine(1.23456789012), 1.23456789);
}

static void parsed_numbers(void)
{
    double x;
    CU_ASSERT(number_parse(" -1.5e-3 ", &x) && x == -1.5e-3);
    CU_ASSERT(number_parse(".5", &x) && x == 0.5);
    static const char *const wrong[] = {"",    "1e999", "nan", "inf", "0x10",
                                        "1,5", "1 2",   "--1", "1e"};
    for (size_t i = 0; i < COUNT_OF(wrong); i++)
        CU_ASSERT_FALSE(number_parse(wrong[i], &x));
    CU_ASSERT(number_parse_whole("12", 0, 20, &x) && x == 12);
    CU_ASSERT_FALSE(number_parse_whole("12.0", 0, 20, &x));
    CU_ASSERT_FALSE(number_parse_whole("21", 0, 20, &x));
}

static void escapes(void)
{
    struct text t = TEXT_INIT;
    text_add_html(&t, "a<b>&\"'");
    CU_ASSERT_STRING_EQUAL(text_s(&t), "a&lt;b&gt;&amp;&quot;&#39;");
    text_clear(&t);
    text_add_csv(&t, "a,\"b\"");
    CU_ASSERT_STRING_EQUAL(text_s(&t), "\"a,\"\"b\"\"\"");
    text_clear(&t);
    text_add_json(&t, "\"\\\n\x01\xc3\xa9");
    CU_ASSERT_STRING_EQUAL(text_s(&t), "\"\\\"\\\\\\n\\u0001\xc3\xa9\"");
    static const char *const list[] = {"analyze", "check", NULL};
    CU_ASSERT_STRING_EQUAL(text_nearest("anlyze", list), "analyze");
    CU_ASSERT_PTR_NULL(text_nearest("simulate", list));
    CU_ASSERT(text_is_utf8("\xe2\x82\xac", 3));
    CU_ASSERT_FALSE(text_is_utf8("\xc0\x80", 2));
    text_release(&t);
}

/* RFC 8785, 3.2.3: the sorting example (by UTF-16 code units) */
static void canonical_json(void)
{
    static const char in[] =
        "{\"\\u20ac\":\"Euro\",\"\\r\":\"CR\",\"\\ufb33\":\"Dalet\",\"1\":\"One\","
        "\"\\ud83d\\ude00\":\"Smile\",\"\\u0080\":\"Control\",\"\\u00f6\":\"o\"}";
    static const char *const order[] = {"CR", "One", "Control", "\"o\"", "Euro", "Smile", "Dalet"};
    struct err e = ERR_INIT;
    struct text out = TEXT_INIT;
    cJSON *tree = NULL;
    CU_ASSERT_EQUAL_FATAL(json_parse(in, sizeof in - 1, "x", &tree, &e), STATUS_OK);
    json_canonical(&out, tree);
    const char *at = text_s(&out);
    for (size_t i = 0; i < COUNT_OF(order); i++) {
        at = strstr(at, order[i]);
        CU_ASSERT_PTR_NOT_NULL_FATAL(at);
    }
    cJSON_Delete(tree);
    text_release(&out);
    err_release(&e);
}

/* FIPS 180-4, example "abc" */
static void hashes(void)
{
    char out[SHA256_HEX];
    CU_ASSERT_STRING_EQUAL(sha256_hex(out, "abc", 3),
                           "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
}

static const char *const owned[] = {"main.json", "page.html", NULL};

static char *fresh_directory(void)
{
    static char path[64];
    snprintf(path, sizeof path, "/tmp/terrace-test-XXXXXX");
    CU_ASSERT_PTR_NOT_NULL_FATAL(mkdtemp(path));
    return path;
}

static enum status write_results(const char *path, const char *words, bool force, struct err *e)
{
    struct outdir *d;
    struct text bytes = TEXT_INIT;
    text_add(&bytes, words);
    enum status status = outdir_open(&d, path, "main.json", owned, force, true, e);
    if (status == STATUS_OK)
        status = outdir_add(d, "page.html", &bytes, e);
    if (status == STATUS_OK)
        status = outdir_add(d, "main.json", &bytes, e);
    if (status == STATUS_OK)
        status = outdir_commit(d, e);
    outdir_free(d);
    text_release(&bytes);
    return status;
}

static bool holds(const char *path, const char *name, const char *words)
{
    struct text file = TEXT_INIT, bytes = TEXT_INIT;
    struct err e = ERR_INIT;
    text_addf(&file, "%s/%s", path, name);
    const bool same =
        file_read(text_s(&file), &bytes, &e) == STATUS_OK && strcmp(text_s(&bytes), words) == 0;
    text_release(&file);
    text_release(&bytes);
    err_release(&e);
    return same;
}

static void clear(const char *path)
{
    static const char *const names[] = {"main.json", "page.html", ".terrace.lock"};
    char file[128];
    for (size_t i = 0; i < COUNT_OF(names); i++) {
        snprintf(file, sizeof file, "%s/%s", path, names[i]);
        unlink(file);
    }
    CU_ASSERT_EQUAL(rmdir(path), 0); /* nothing else is left behind */
}

static void directories(void)
{
    char *path = fresh_directory(), file[128];
    struct err e = ERR_INIT;
    struct stat about;
    CU_ASSERT_EQUAL(write_results(path, "one", false, &e), STATUS_OK);
    CU_ASSERT(holds(path, "main.json", "one") && holds(path, "page.html", "one"));
    snprintf(file, sizeof file, "%s/main.json", path);
    CU_ASSERT_EQUAL(stat(file, &about), 0);
    CU_ASSERT_EQUAL(about.st_mode & 0777, 0600);
    CU_ASSERT_EQUAL(write_results(path, "two", false, &e), STATUS_INPUT);
    CU_ASSERT(holds(path, "main.json", "one"));
    CU_ASSERT_EQUAL(write_results(path, "two", true, &e), STATUS_OK);
    CU_ASSERT(holds(path, "main.json", "two"));
    clear(path);
    err_release(&e);
}

/* every write, fsync and rename fails in turn: never a finished result of the failed run */
static void injected_failures(void)
{
    unsigned long failures = 0;
    for (unsigned long n = 1; n < 40; n++) {
        char *path = fresh_directory();
        struct err e = ERR_INIT;
        file_fail_at(n, ENOSPC);
        const enum status status = write_results(path, "words", false, &e);
        file_fail_at(0, 0);
        if (status == STATUS_OK) {
            CU_ASSERT(holds(path, "main.json", "words"));
        } else {
            failures++;
            CU_ASSERT_EQUAL(status, STATUS_SYSTEM);
            CU_ASSERT_PTR_NOT_NULL(strstr(e.faults[0].message, "No space left"));
        }
        clear(path);
        err_release(&e);
    }
    CU_ASSERT(failures >= 7); /* two writes, two fsyncs, a commit, two renames, a directory fsync */
}

static void refused_memory(void)
{
    const pid_t child = fork();
    if (child == 0) {
        if (!freopen("/dev/null", "w", stderr))
            _exit(9);
        mem_refuse_at(3);
        for (int i = 0; i < 3; i++)
            mem_free(mem_new(10, 10));
        _exit(0);
    }
    int status = 0;
    waitpid(child, &status, 0);
    CU_ASSERT(WIFEXITED(status) && WEXITSTATUS(status) == 4);
}

static const struct unit_test tests[] = {
    {"shortest numbers", shortest_numbers},
    {"parsed numbers", parsed_numbers},
    {"escapes, nearest word, UTF-8", escapes},
    {"canonical JSON", canonical_json},
    {"SHA-256", hashes},
    {"result directories", directories},
    {"injected write failures", injected_failures},
    {"refused memory", refused_memory},
    UNIT_END,
};

int main(void)
{
    return unit_main("ground", tests);
}
