/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_file.c: result directories, whole or not at all: every step fails once, with and without an
 * older result in place; modes, the lock, what is read. */
#include "base/file.h"

#include <dirent.h>
#include <errno.h>
#include <fcntl.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

#include "base/base.h"
#include "base/mem.h"
#include "unit.h"

enum { STEPS = 30 };

static const char *const owned[] = {"main.json", "page.html", "draws.csv", NULL};

/* --- a directory of our own --- */

static void make_directory(char path[64])
{
    snprintf(path, 64, "/tmp/terrace-file-XXXXXX");
    CU_ASSERT_PTR_NOT_NULL_FATAL(mkdtemp(path));
}

static void path_of(char out[128], const char *directory, const char *name)
{
    snprintf(out, 128, "%s/%s", directory, name);
}

static void put(const char *directory, const char *name, const char *words, mode_t mode)
{
    char path[128];
    path_of(path, directory, name);
    const int fd = open(path, O_WRONLY | O_CREAT | O_TRUNC, mode);
    CU_ASSERT_FATAL(fd >= 0);
    CU_ASSERT_EQUAL(write(fd, words, strlen(words)), (ssize_t)strlen(words));
    close(fd);
}

static bool holds(const char *directory, const char *name, const char *words)
{
    struct text bytes = TEXT_INIT;
    struct err e = ERR_INIT;
    char path[128];
    path_of(path, directory, name);
    const bool same =
        file_read(path, &bytes, &e) == STATUS_OK && strcmp(text_s(&bytes), words) == 0;
    text_release(&bytes);
    err_release(&e);
    return same;
}

static bool present(const char *directory, const char *name)
{
    char path[128];
    path_of(path, directory, name);
    return access(path, F_OK) == 0;
}

static mode_t mode_of(const char *directory, const char *name)
{
    struct stat about = {0};
    char path[128];
    path_of(path, directory, name);
    CU_ASSERT_EQUAL(stat(path, &about), 0);
    return about.st_mode & 0777;
}

/* Temporary files and locks start with a dot. */
static size_t hidden_files(const char *path)
{
    size_t count = 0;
    DIR *d = opendir(path);
    CU_ASSERT_PTR_NOT_NULL_FATAL(d);
    for (const struct dirent *x = readdir(d); x != NULL; x = readdir(d))
        count += x->d_name[0] == '.' && strcmp(x->d_name, ".") != 0 && strcmp(x->d_name, "..") != 0;
    closedir(d);
    return count;
}

static void remove_directory(const char *path)
{
    char name[128];
    for (size_t i = 0; owned[i] != NULL; i++) {
        path_of(name, path, owned[i]);
        unlink(name);
    }
    path_of(name, path, "notes.txt");
    unlink(name);
    CU_ASSERT_EQUAL(rmdir(path), 0);
}

/* page.html and main.json; an older draws.csv is the command's too, but not of this run */
static enum status write_results(const char *path, const char *words, bool force, bool is_private,
                                 struct err *e)
{
    struct outdir *d;
    struct text bytes = TEXT_INIT;
    text_add(&bytes, words);
    enum status status = outdir_open(&d, path, "main.json", owned, force, is_private, e);
    if (status == STATUS_OK)
        status = outdir_add(d, "main.json", &bytes, e);
    if (status == STATUS_OK)
        status = outdir_add(d, "page.html", &bytes, e);
    if (status == STATUS_OK)
        status = outdir_commit(d, e);
    outdir_free(d);
    text_release(&bytes);
    return status;
}

static void results(const char *path, const char *words, bool force, bool is_private,
                    enum status want)
{
    struct err e = ERR_INIT;
    CU_ASSERT_EQUAL(write_results(path, words, force, is_private, &e), want);
    CU_ASSERT_EQUAL(hidden_files(path), 0);
    err_release(&e);
}

/* --- tests --- */

static void force_and_modes(void)
{
    char path[64];
    const mode_t before = umask(022);
    make_directory(path);
    put(path, "notes.txt", "mine", 0644);
    put(path, "draws.csv", "older", 0644);
    results(path, "one", false, true, STATUS_OK);
    CU_ASSERT_EQUAL(mode_of(path, "main.json"), 0600);
    CU_ASSERT_EQUAL(mode_of(path, "page.html"), 0600);
    CU_ASSERT_FALSE(present(path, "draws.csv")); /* else it would seem to belong to "one" */
    results(path, "two", false, true, STATUS_INPUT);
    CU_ASSERT(holds(path, "main.json", "one") && holds(path, "page.html", "one"));
    results(path, "two", true, false, STATUS_OK);
    CU_ASSERT(holds(path, "main.json", "two") && holds(path, "page.html", "two"));
    CU_ASSERT_EQUAL(mode_of(path, "main.json"), 0644);
    CU_ASSERT(holds(path, "notes.txt", "mine")); /* what is not the command's stays */
    remove_directory(path);
    umask(before);
}

/* what a killed run left behind: readable by all, or a link that leads elsewhere */
static void leftover_of_a_killed_run(void)
{
    char path[64], link[128], notes[128];
    make_directory(path);
    put(path, ".terrace-new.main.json", "left behind by a killed run", 0644);
    put(path, "notes.txt", "mine", 0644);
    path_of(link, path, ".terrace-new.page.html");
    path_of(notes, path, "notes.txt");
    CU_ASSERT_EQUAL(symlink(notes, link), 0);
    results(path, "one", false, true, STATUS_OK);
    CU_ASSERT_EQUAL(mode_of(path, "main.json"), 0600);
    CU_ASSERT(holds(path, "main.json", "one") && holds(path, "page.html", "one"));
    CU_ASSERT(holds(path, "notes.txt", "mine"));
    remove_directory(path);
}

/* Step n fails; the number of steps a whole run takes is returned by the caller's count. */
static bool fails_at(unsigned long n, bool older)
{
    char path[64];
    struct err e = ERR_INIT;
    make_directory(path);
    if (older) {
        put(path, "main.json", "old", 0600);
        put(path, "page.html", "old", 0600);
        put(path, "draws.csv", "old", 0600);
    }
    file_fail_at(n, ENOSPC);
    const enum status status = write_results(path, "new", older, true, &e);
    file_fail_at(0, 0);
    CU_ASSERT_EQUAL(hidden_files(path), 0);
    if (status == STATUS_OK) {
        CU_ASSERT(holds(path, "main.json", "new") && holds(path, "page.html", "new"));
    } else {
        CU_ASSERT_EQUAL(status, STATUS_SYSTEM);
        CU_ASSERT_EQUAL(e.count, 1);
        CU_ASSERT_PTR_NOT_NULL(strstr(e.faults[0].message, strerror(ENOSPC)));
        CU_ASSERT_FALSE(holds(path, "main.json", "new"));
        CU_ASSERT_FALSE(holds(path, "page.html", "new"));
        for (size_t i = 0; owned[i] != NULL; i++)
            CU_ASSERT(older ? holds(path, owned[i], "old") : !present(path, owned[i]));
    }
    remove_directory(path);
    err_release(&e);
    return status != STATUS_OK;
}

/* two writes, two fsyncs, the start of the commit, three older files put aside, two renames, the
 * directory's fsync */
static void every_step_fails_once(void)
{
    for (int older = 0; older <= 1; older++) {
        unsigned long failed = 0;
        for (unsigned long n = 1; n <= STEPS; n++)
            failed += fails_at(n, older != 0);
        CU_ASSERT_EQUAL(failed, 11);
    }
}

static void abandoned(void)
{
    char path[64], inner[128], slash[128];
    const char *const names[] = {inner, slash};
    struct err e = ERR_INIT;
    make_directory(path);
    path_of(inner, path, "made");
    path_of(slash, path, "made/inner//");
    for (size_t i = 0; i < COUNT_OF(names); i++) {
        struct outdir *d = NULL;
        struct text bytes = TEXT_INIT;
        text_add(&bytes, "words");
        CU_ASSERT_EQUAL_FATAL(outdir_open(&d, names[i], "main.json", owned, false, true, &e),
                              STATUS_OK);
        CU_ASSERT_EQUAL(outdir_add(d, "page.html", &bytes, &e), STATUS_OK);
        outdir_free(d);
        CU_ASSERT_FALSE(present(path, "made"));
        text_release(&bytes);
    }
    outdir_free(NULL);
    remove_directory(path);
    err_release(&e);
}

/* The exit status of a child that runs `run`. */
static int status_of_child(int (*run)(const char *path), const char *path)
{
    int status = -1;
    fflush(stdout);
    const pid_t child = fork();
    if (child == 0)
        _exit(run(path));
    waitpid(child, &status, 0);
    return WIFEXITED(status) ? WEXITSTATUS(status) : -1;
}

/* 0: refused as the second writer */
static int write_second(const char *path)
{
    struct err e = ERR_INIT;
    const enum status got = write_results(path, "two", true, true, &e);
    const bool told = e.count == 1 && strstr(e.faults[0].message, "another run") != NULL;
    return got == STATUS_INPUT && told ? 0 : 1;
}

/* A child of ours is the second writer: the lock belongs to a process. */
static void second_writer(void)
{
    char path[64];
    struct err e = ERR_INIT;
    struct outdir *d = NULL;
    make_directory(path);
    CU_ASSERT_EQUAL_FATAL(outdir_open(&d, path, "main.json", owned, false, true, &e), STATUS_OK);
    CU_ASSERT_EQUAL(hidden_files(path), 0); /* nothing is made before there is a result */
    CU_ASSERT_EQUAL_FATAL(outdir_claim(d, &e), STATUS_OK);
    CU_ASSERT_EQUAL(status_of_child(write_second, path), 0);
    CU_ASSERT(present(path, ".terrace.lock")); /* still ours */
    outdir_free(d);
    results(path, "one", false, true, STATUS_OK);
    remove_directory(path);
    err_release(&e);
}

/* A result that appears while another run computes is not replaced without force. */
static void finished_meanwhile(void)
{
    char path[64];
    struct err e = ERR_INIT;
    struct outdir *d = NULL;
    make_directory(path);
    CU_ASSERT_EQUAL_FATAL(outdir_open(&d, path, "main.json", owned, false, true, &e), STATUS_OK);
    results(path, "one", false, true, STATUS_OK);
    CU_ASSERT_EQUAL(outdir_claim(d, &e), STATUS_INPUT);
    outdir_free(d);
    CU_ASSERT(holds(path, "main.json", "one"));
    CU_ASSERT_EQUAL(hidden_files(path), 0);
    remove_directory(path);
    err_release(&e);
}

/* Claims the directory often; how often another held it at the same time. */
static int claim_often(const char *path)
{
    int wrong = 0;
    char held[128];
    path_of(held, path, "held");
    for (int i = 0; i < 20000; i++) {
        struct err e = ERR_INIT;
        struct outdir *d = NULL;
        if (outdir_open(&d, path, "main.json", owned, true, true, &e) == STATUS_OK &&
            outdir_claim(d, &e) == STATUS_OK) {
            const int fd = open(held, O_WRONLY | O_CREAT | O_EXCL, 0600);
            wrong += fd < 0;
            close(fd);
            unlink(held);
        }
        outdir_free(d);
        err_release(&e);
    }
    return wrong > 100 ? 100 : wrong;
}

/* The lock is removed by the one who holds it while others have it open. */
static void many_writers(void)
{
    char path[64];
    pid_t child[4];
    make_directory(path);
    fflush(stdout);
    for (size_t i = 0; i < COUNT_OF(child); i++)
        if ((child[i] = fork()) == 0)
            _exit(claim_often(path));
    for (size_t i = 0; i < COUNT_OF(child); i++) {
        int status = -1;
        waitpid(child[i], &status, 0);
        CU_ASSERT(WIFEXITED(status) && WEXITSTATUS(status) == 0);
    }
    CU_ASSERT_EQUAL(hidden_files(path), 0);
    remove_directory(path);
}

/* A commit was killed after the older result was put aside and one new file moved. */
static void killed_in_the_commit(void)
{
    char path[64];
    make_directory(path);
    put(path, ".terrace-old.main.json", "old", 0600);
    put(path, ".terrace-old.page.html", "old", 0600);
    put(path, "page.html", "new", 0600);
    put(path, "draws.csv", "new", 0600);
    results(path, "two", false, true, STATUS_INPUT); /* finds the older result, whole again */
    CU_ASSERT(holds(path, "main.json", "old") && holds(path, "page.html", "old"));
    CU_ASSERT_FALSE(present(path, "draws.csv"));
    put(path, ".terrace-old.page.html", "older", 0600); /* and after the main file was in place */
    results(path, "two", true, true, STATUS_OK);
    CU_ASSERT(holds(path, "main.json", "two") && holds(path, "page.html", "two"));
    remove_directory(path);
}

/* A signal that comes while files stand half-written ends the process once they are gone. */
static int told_to_end_while_writing(const char *path)
{
    struct err e = ERR_INIT;
    struct outdir *d = NULL;
    struct text bytes = TEXT_INIT;
    base_watch_signals();
    text_add(&bytes, "words");
    outdir_open(&d, path, "main.json", owned, true, true, &e);
    outdir_add(d, "main.json", &bytes, &e);
    raise(SIGTERM);
    if (base_signal_caught() != SIGTERM || outdir_commit(d, &e) == STATUS_OK)
        return 1;
    outdir_free(d);
    return 2; /* not reached */
}

static int told_to_end_early(const char *path)
{
    struct err e = ERR_INIT;
    struct outdir *d = NULL;
    base_watch_signals();
    outdir_open(&d, path, "main.json", owned, true, true, &e);
    raise(SIGINT);
    return 2; /* not reached */
}

static void ended_by_a_signal(void)
{
    char path[64], made[128];
    make_directory(path);
    results(path, "old", false, true, STATUS_OK);
    path_of(made, path, "made");
    CU_ASSERT_EQUAL(status_of_child(told_to_end_while_writing, path), 128 + SIGTERM);
    CU_ASSERT_EQUAL(status_of_child(told_to_end_early, path), 128 + SIGINT);
    CU_ASSERT_EQUAL(status_of_child(told_to_end_while_writing, made), 128 + SIGTERM);
    CU_ASSERT_EQUAL(status_of_child(told_to_end_early, made), 128 + SIGINT);
    CU_ASSERT_FALSE(present(path, "made"));
    CU_ASSERT_EQUAL(hidden_files(path), 0);
    CU_ASSERT(holds(path, "main.json", "old") && holds(path, "page.html", "old"));
    remove_directory(path);
}

static void impossible_directories(void)
{
    static const char *const impossible[] = {"", "/dev/null", "/dev/null/below",
                                             "/proc/terrace-nowhere"};
    for (size_t i = 0; i < COUNT_OF(impossible); i++) {
        struct err e = ERR_INIT;
        CU_ASSERT(write_results(impossible[i], "words", true, true, &e) != STATUS_OK);
        CU_ASSERT_EQUAL(e.count, 1);
        err_release(&e);
    }
}

static void reading(void)
{
    char path[64], big[128];
    struct text bytes = TEXT_INIT, words = TEXT_INIT;
    struct err e = ERR_INIT;
    make_directory(path);
    path_of(big, path, "notes.txt");
    for (int i = 0; i < 20000; i++)
        text_addf(&words, "%09d\n", i);
    put(path, "notes.txt", text_s(&words), 0600);
    CU_ASSERT_EQUAL(file_read(big, &bytes, &e), STATUS_OK); /* more than one block */
    CU_ASSERT_STRING_EQUAL(text_s(&bytes), text_s(&words));
    CU_ASSERT_EQUAL(e.count, 0);
    CU_ASSERT_EQUAL(file_read(path, &bytes, &e), STATUS_INPUT);
    CU_ASSERT_EQUAL(file_read("/dev/null", &bytes, &e), STATUS_INPUT);
    path_of(big, path, "nothing.csv");
    CU_ASSERT_EQUAL(file_read(big, &bytes, &e), STATUS_INPUT);
    path_of(big, path, "notes.txt/below");
    CU_ASSERT_EQUAL(file_read(big, &bytes, &e), STATUS_INPUT);
    CU_ASSERT_EQUAL(e.count, 4);
    text_release(&bytes);
    text_release(&words);
    remove_directory(path);
    err_release(&e);
}

static void stems(void)
{
    static const char *const pairs[][2] = {{"a/b.json", "b"},        {"b", "b"},
                                           {"a.d/b", "b"},           {"a/b.c.json", "b.c"},
                                           {"a/.hidden", ".hidden"}, {"a/", ""}};
    for (size_t i = 0; i < COUNT_OF(pairs); i++) {
        char *stem = file_stem(pairs[i][0]);
        CU_ASSERT_STRING_EQUAL(stem, pairs[i][1]);
        mem_free(stem);
    }
}

static const struct unit_test tests[] = {
    {"force, modes, and what is not ours", force_and_modes},
    {"leftovers of a killed run", leftover_of_a_killed_run},
    {"every step fails once", every_step_fails_once},
    {"abandoned results", abandoned},
    {"a second writer", second_writer},
    {"a result that appears meanwhile", finished_meanwhile},
    {"one writer at a time", many_writers},
    {"a commit that was killed", killed_in_the_commit},
    {"ended by a signal", ended_by_a_signal},
    {"impossible directories", impossible_directories},
    {"reading", reading},
    {"stems of names", stems},
    UNIT_END,
};

int main(void)
{
    return unit_main("file", tests);
}
