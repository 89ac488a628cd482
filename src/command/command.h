/* SPDX-License-Identifier: GPL-3.0-or-later */
/* command.h: a command is one row; the one list of commands.
 *
 * Adding a command is a file cmd_NAME.c that defines its row, and a line in commands.c.
 */
#ifndef TERRACE_COMMAND_H
#define TERRACE_COMMAND_H

#include <stdbool.h>
#include <stddef.h>

#include "base/status.h"
#include "base/text.h"
#include "command/options.h"

/* What a command knows about its surroundings. */
struct terminal {
    bool out_colour; /* standard output is a terminal and NO_COLOR is unset */
    bool progress;   /* tell progress on standard error */
};

struct command {
    const char *name;
    const char *arguments; /* as in the help, e.g. "DESIGN DATA" */
    size_t arguments_needed;
    const char *job;            /* one line for the list of commands */
    const char *help;           /* a paragraph for `--help` */
    const char *const *example; /* NULL-terminated: one worked example, line by line */
    const struct option *options;
    /* Runs on options that were read; faults of values may already stand in `e`: a command adds
     * its own and computes nothing when there is any. NULL: a later version has it. */
    enum status (*run)(const struct options *o, const struct terminal *t, struct err *e);
};

extern const struct command *const commands[]; /* NULL-terminated, in the order of the help */
extern const struct command command_check, command_analyze, command_fit, command_selfcheck;

const struct command *command_find(const char *name);

/* `terrace --help`, and a command's own. */
void help_program(struct text *out);
void help_command(struct text *out, const struct command *c);

/* STATUS_INPUT unless there are exactly `needed` arguments (c->arguments names them). */
enum status arguments_check(const struct options *o, const struct command *c, size_t needed,
                            struct err *e);

/* A standard stream that the caller closed is opened such that using it fails: else the next file
 * opened would take its number, and tables would be printed into a result. */
void terminal_open_descriptors(void);

/* The surroundings of this process: terminals, NO_COLOR, --progress, --quiet. */
struct terminal terminal_look(const struct options *o);

/* Bytes to standard output, flushed: STATUS_SYSTEM when they did not all arrive. */
enum status output_write(const struct text *bytes, struct err *e);
/* A line for the user on standard error. */
void output_note(const char *line);

/* Number of threads: --threads, else the processors this process may use. */
int threads_wanted(const struct options *o);

#endif
