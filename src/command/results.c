/* SPDX-License-Identifier: GPL-3.0-or-later */
/* results.c: where a command's files go, and standard output and files together. */
#include "command/results.h"

#include "base/mem.h"
#include "command/command.h"

char *results_path(const struct options *o, const struct result_files *f, const char *input)
{
    const char *asked = options_text(o, "out");
    if (asked) {
        return mem_text(asked);
    }
    char *stem = file_stem(input);
    struct text path = TEXT_INIT;
    text_addf(&path, "%s-%s", stem, f->command);
    mem_free(stem);
    return text_take(&path);
}

enum status results_open(struct outdir **out, const char *path, const struct options *o,
                         const struct result_files *f, struct err *e)
{
    bool faulty = e->status != STATUS_OK;
    enum status status = outdir_open(out, path, f->main_file, f->files, options_has(o, "force"),
                                     f->private_files, e);
    if (faulty) {
        outdir_free(*out);
        *out = NULL;
        return e->status;
    }
    return status;
}

enum status results_print(const struct options *o, const struct text *json,
                          const struct text *tables, struct err *e)
{
    if (options_has(o, "json")) {
        return output_write(json, e);
    }
    return options_has(o, "quiet") ? STATUS_OK : output_write(tables, e);
}
