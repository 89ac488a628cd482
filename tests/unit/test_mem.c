/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_mem.c: every way to ask for memory ends with status 4 when it is refused or overflows. */
#include "base/mem.h"

#include <stdint.h>
#include <stdio.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

#include "base/text.h"
#include "unit.h"

static void ask_new(size_t count)
{
    mem_free(mem_new(count, 8));
}

static void ask_grow(size_t count)
{
    mem_free(mem_grow(NULL, count, 8));
}

static void ask_aligned(size_t count)
{
    mem_free(mem_aligned(count, 8));
}

static void ask_text(size_t count)
{
    (void)count;
    mem_free(mem_text("words"));
}

static void ask_growing_text(size_t count)
{
    struct text t = TEXT_INIT;
    (void)count;
    text_add(&t, "words");
    text_release(&t);
}

/* The exit status of a child that asks, its n-th allocation refused; its message into `said`. */
static int status_of(void (*ask)(size_t), size_t count, unsigned long n, char said[64])
{
    int ends[2], status = -1;
    ssize_t got = 0;
    CU_ASSERT_EQUAL_FATAL(pipe(ends), 0);
    fflush(stdout);
    const pid_t child = fork();
    if (child == 0) {
        dup2(ends[1], STDERR_FILENO);
        mem_refuse_at(n);
        ask(count);
        ask(count);
        _exit(0);
    }
    close(ends[1]);
    got = read(ends[0], said, 63);
    said[got > 0 ? got : 0] = '\0';
    close(ends[0]);
    waitpid(child, &status, 0);
    return WIFEXITED(status) ? WEXITSTATUS(status) : -1;
}

static void refused(void)
{
    static void (*const asks[])(size_t) = {ask_new, ask_grow, ask_aligned, ask_text,
                                           ask_growing_text};
    char said[64];
    for (size_t i = 0; i < sizeof asks / sizeof *asks; i++) {
        CU_ASSERT_EQUAL(status_of(asks[i], 3, 2, said), 4);
        CU_ASSERT_STRING_EQUAL(said, "terrace: out of memory\n");
        CU_ASSERT_EQUAL(status_of(asks[i], 3, 3, said), 0); /* only two are made */
        CU_ASSERT_EQUAL(status_of(asks[i], 3, 0, said), 0);
        CU_ASSERT_STRING_EQUAL(said, "");
    }
}

static void overflows(void)
{
    static void (*const asks[])(size_t) = {ask_new, ask_grow, ask_aligned};
    char said[64];
    for (size_t i = 0; i < sizeof asks / sizeof *asks; i++) {
        CU_ASSERT_EQUAL(status_of(asks[i], SIZE_MAX / 8 + 2, 0, said), 4); /* 8 x count wraps */
        CU_ASSERT_EQUAL(status_of(asks[i], SIZE_MAX / 16, 0, said), 4);
    }
}

static void what_is_given(void)
{
    double *zeroed = mem_new(1000, sizeof *zeroed), *aligned = mem_aligned(3, sizeof *aligned);
    void *nothing = mem_new(0, 8);
    double sum = 0.0;
    for (size_t i = 0; i < 1000; i++)
        sum += zeroed[i] != 0.0;
    CU_ASSERT_EQUAL(sum, 0.0);
    CU_ASSERT_EQUAL((uintptr_t)aligned % 64, 0);
    CU_ASSERT(aligned[0] == 0.0 && aligned[2] == 0.0);
    CU_ASSERT_PTR_NOT_NULL(nothing);
    char *part = mem_text_n("words", 3);
    CU_ASSERT_STRING_EQUAL(part, "wor");
    CU_ASSERT_PTR_NULL(mem_text(NULL));
    part = mem_grow(part, 100, 1);
    CU_ASSERT_STRING_EQUAL(part, "wor");
    mem_free(part);
    mem_free(nothing);
    mem_free(zeroed);
    mem_free(aligned);
    mem_free(NULL);
}

static const struct unit_test tests[] = {
    {"refused memory ends with status 4", refused},
    {"sizes that overflow end with status 4", overflows},
    {"what is given", what_is_given},
    UNIT_END,
};

int main(void)
{
    return unit_main("memory", tests);
}
