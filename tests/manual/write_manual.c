/* SPDX-License-Identifier: GPL-3.0-or-later */
/* write_manual.c: a step of the build: `page` or `completion` to standard output. */
#include <stdio.h>
#include <string.h>

#include "base/base.h"
#include "command/manual.h"

int main(int count, char **words)
{
    struct text t = TEXT_INIT;
    base_init();
    if (count == 2 && strcmp(words[1], "page") == 0)
        manual_page(&t);
    else
        manual_completion(&t);
    const size_t done = fwrite(text_s(&t), 1, t.length, stdout);
    const int status = done == t.length && fflush(stdout) == 0 ? 0 : 1;
    text_release(&t);
    return status;
}
