/* SPDX-License-Identifier: GPL-3.0-or-later */
/* design_files.h: finds and reads the design files that several test programs share. */
#ifndef TERRACE_TEST_DESIGN_FILES_H
#define TERRACE_TEST_DESIGN_FILES_H

#include <dirent.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "base/mem.h"
#include "base/text.h"

enum { FILES_MAX = 400 };

struct file_list {
    size_t count;
    char *name[FILES_MAX]; /* without directory and suffix, sorted */
};

/* Moves to the root of the source tree, wherever below it the test was started. */
static inline void to_root(void)
{
    for (int up = 0; up < 6 && access("tests/designs/bad", R_OK) != 0; up++)
        if (chdir("..") != 0)
            return;
}

static inline int compare_strings(const void *a, const void *b)
{
    return strcmp(*(char *const *)a, *(char *const *)b);
}

static inline struct file_list files_in(const char *directory, const char *suffix)
{
    struct file_list list = {0};
    const struct dirent *entry;
    DIR *d;

    to_root();
    d = opendir(directory);
    while (d != NULL && (entry = readdir(d)) != NULL) {
        const size_t length = strlen(entry->d_name), tail = strlen(suffix);

        if (length > tail && strcmp(entry->d_name + length - tail, suffix) == 0 &&
            list.count < FILES_MAX)
            list.name[list.count++] = mem_text_n(entry->d_name, length - tail);
    }
    if (d != NULL)
        closedir(d);
    qsort(list.name, list.count, sizeof list.name[0], compare_strings);
    return list;
}

static inline void files_release(struct file_list *list)
{
    for (size_t i = 0; i < list->count; i++)
        mem_free(list->name[i]);
    list->count = 0;
}

/* The bytes of directory/name + suffix, as they are. */
static inline struct text file_bytes(const char *directory, const char *name, const char *suffix)
{
    struct text path = TEXT_INIT, bytes = TEXT_INIT;
    char block[4096];
    size_t n;
    FILE *f;

    to_root();
    text_addf(&path, "%s%s%s", directory, name, suffix);
    f = fopen(text_s(&path), "rb");
    text_add(&bytes, "");
    while (f != NULL && (n = fread(block, 1, sizeof block, f)) > 0)
        text_add_n(&bytes, block, n);
    if (f != NULL)
        fclose(f);
    text_release(&path);
    return bytes;
}

#endif
