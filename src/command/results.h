/* SPDX-License-Identifier: GPL-3.0-or-later */
/* results.h: where a command's files go, and standard output and files together. */
#ifndef TERRACE_RESULTS_H
#define TERRACE_RESULTS_H

#include "base/file.h"
#include "command/options.h"

/* Which files a command may own in its directory. */
struct result_files {
    const char *command;      /* for the default name STEM-COMMAND */
    const char *main_file;    /* its JSON, renamed into place last */
    const char *const *files; /* NULL-terminated, main_file among them */
    bool private_files;       /* readable by their owner only */
};

/* --out, or STEM-COMMAND with the STEM of `input`. Owned by the caller (mem_free). */
char *results_path(const struct options *o, const struct result_files *f, const char *input);

/* Opens the directory, or adds the fault that it is taken. When faults stand in `e` already, only
 * looks whether an existing directory is free, and opens nothing. */
enum status results_open(struct outdir **out, const char *path, const struct options *o,
                         const struct result_files *f, struct err *e);

/* What the command prints: its JSON with --json, nothing with --quiet, else `tables`. */
enum status results_print(const struct options *o, const struct text *json,
                          const struct text *tables, struct err *e);

#endif
