/* SPDX-License-Identifier: GPL-3.0-or-later */
/* file.h: bytes in, and result directories out, whole or not at all. */
#ifndef TERRACE_FILE_H
#define TERRACE_FILE_H

#include <stdbool.h>
#include <stddef.h>

#include "base/status.h"
#include "base/text.h"

/* Reads a regular file whole (at most 1 GiB). Missing or unreadable: STATUS_SYSTEM, except that a
 * missing file is STATUS_INPUT (the argument is wrong). A directory is STATUS_INPUT. */
enum status file_read(const char *path, struct text *out, struct err *e);

/* A command's results on their way into a directory. Nothing is made before the first file is
 * there to be written, and from then on nothing is allocated: a process that ends while it computes
 * leaves nothing behind.
 *
 *   outdir_open   refuses (STATUS_INPUT) when the directory already holds `main_file` unless
 *                 `force`. Touches nothing.
 *   outdir_claim  makes the directory (and its parents) if missing, takes a lock against a second
 *                 writer, looks again, sets right what a killed run left, and holds signals (see
 *                 base.h). outdir_add calls it; one who writes long may call it early.
 *   outdir_add    writes one of `files` under a temporary name and fsyncs it. Call in any order.
 *   outdir_commit puts an older result aside, renames all into place, `main_file` last, fsyncs the
 *                 directory and removes the older result; when a step fails it puts the older
 *                 result back, whole.
 *   outdir_free   removes temporary files, and the directories this run made when they are empty;
 *                 lets signals through. After a commit it only frees.
 *
 * `files` (NULL-terminated) lists every file the command may own in the directory, `main_file`
 * among them. private_files: mode 0600 (else 0644, less the umask). */
struct outdir;
enum status outdir_open(struct outdir **out, const char *path, const char *main_file,
                        const char *const *files, bool force, bool private_files, struct err *e);
enum status outdir_claim(struct outdir *d, struct err *e);
enum status outdir_add(struct outdir *d, const char *name, const struct text *bytes, struct err *e);
enum status outdir_commit(struct outdir *d, struct err *e);
void outdir_free(struct outdir *d); /* abandons what was not committed; NULL is fine */

/* File name without directories and without its last extension, e.g. "a/b.json" -> "b". */
char *file_stem(const char *path);

/* Test hook: the n-th write, fsync or rename from now on fails with `error_number` (n = 0: none).
 */
void file_fail_at(unsigned long n, int error_number);

#endif
