/* SPDX-License-Identifier: GPL-3.0-or-later */
/* replay.c: reads the committed corpus of one target (its directory is CORPUS), as a test. */
#include <dirent.h>
#include <string.h>

#include "base/file.h"
#include "fuzz.h"

static size_t replay(const char *directory)
{
    size_t count = 0;
    DIR *d = opendir(directory);
    for (const struct dirent *x = d ? readdir(d) : NULL; x != NULL; x = readdir(d)) {
        struct text bytes = TEXT_INIT;
        struct err e = ERR_INIT;
        char path[512];
        snprintf(path, sizeof path, "%s/%s", directory, x->d_name);
        if (x->d_name[0] != '.' && file_read(path, &bytes, &e) == STATUS_OK) {
            LLVMFuzzerTestOneInput((const uint8_t *)text_s(&bytes), bytes.length);
            count++;
        }
        err_release(&e);
        text_release(&bytes);
    }
    if (d)
        closedir(d);
    return count;
}

int main(int argc, char **argv)
{
    LLVMFuzzerInitialize(&argc, &argv);
    const size_t count = replay(CORPUS);
    printf("%s - fuzz: the %zu inputs of %s\n", count > 0 ? "ok" : "not ok", count, CORPUS);
    return count > 0 ? 0 : 1;
}
