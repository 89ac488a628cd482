/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_build.c: the digest of the sources, made once more here, and the words of the build. */
#include "base/build.h"

#include <glob.h>
#include <stdlib.h>
#include <string.h>

#include "base/base.h"
#include "base/file.h"
#include "base/text.h"
#include "unit.h"

static int by_name(const void *a, const void *b)
{
    return strcmp(*(char *const *)a, *(char *const *)b);
}

/* the line `DIGEST  NAME` of one file */
static void add_line(struct text *lines, const char *path)
{
    struct text bytes = TEXT_INIT;
    struct err e = ERR_INIT;
    char hex[SHA256_HEX];
    CU_ASSERT_EQUAL_FATAL(file_read(path, &bytes, &e), STATUS_OK);
    text_addf(lines, "%s  %s\n", sha256_hex(hex, text_s(&bytes), bytes.length), path);
    text_release(&bytes);
    err_release(&e);
}

static void digest_of_the_sources(void)
{
    static const char *const patterns[] = {"Makefile", "src/*/*.[ch]", "models/*.[ch]",
                                           "src/*/*.css", "src/*/*.js"};
    struct text lines = TEXT_INIT;
    char hex[SHA256_HEX];
    glob_t found = {0};
    for (size_t i = 0; i < COUNT_OF(patterns); i++)
        glob(patterns[i], i > 0 ? GLOB_APPEND : 0, NULL, &found);
    CU_ASSERT_FATAL(found.gl_pathc > 100);
    qsort(found.gl_pathv, found.gl_pathc, sizeof *found.gl_pathv, by_name);
    for (size_t i = 0; i < found.gl_pathc; i++)
        add_line(&lines, found.gl_pathv[i]);
    CU_ASSERT_STRING_EQUAL(source_sha256(), sha256_hex(hex, text_s(&lines), lines.length));
    globfree(&found);
    text_release(&lines);
}

static void words_of_the_build(void)
{
    const char *words = build_words();
    CU_ASSERT(strncmp(words, "gcc ", 4) == 0 || strncmp(words, "clang ", 6) == 0);
    CU_ASSERT_PTR_NOT_NULL(strstr(words, ", x86-64"));
    CU_ASSERT_EQUAL(strspn(strchr(words, ' ') + 1, "0123456789"),
                    strcspn(strchr(words, ' ') + 1, ".")); /* a number, not a macro's name */
}

static const struct unit_test tests[] = {
    {"the digest of the sources is the one of the files", digest_of_the_sources},
    {"the words name compiler and family", words_of_the_build},
    UNIT_END,
};

int main(void)
{
    return unit_main("build", tests);
}
