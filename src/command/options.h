/* SPDX-License-Identifier: GPL-3.0-or-later */
/* options.h: the command line, read against one table of options a command.
 *
 * A row of a table is the only place an option is described: parsing, the range of its value, its
 * help line and the nearest-name suggestion come from it. Options stand anywhere before `--`;
 * `--name value` and `--name=value`; no abbreviations; repeated only where the row says so.
 */
#ifndef TERRACE_OPTIONS_H
#define TERRACE_OPTIONS_H

#include <stdbool.h>
#include <stddef.h>

#include "base/status.h"
#include "base/text.h"

enum option_kind { OPTION_FLAG, OPTION_TEXT, OPTION_WHOLE };

struct option {
    const char *name; /* without dashes; NULL ends a table */
    char letter;      /* short form, or 0 */
    enum option_kind kind;
    bool repeated;     /* may be given more than once */
    const char *value; /* the value's name in the help; NULL for flags */
    double low, high;  /* OPTION_WHOLE: range allowed */
    const char *help;  /* one line */
};

extern const struct option common_options[];

/* One option as given. */
struct option_given {
    const struct option *option;
    const char *text; /* borrowed from argv; NULL for flags */
    double number;    /* OPTION_WHOLE */
};

/* A command line after reading. Strings are borrowed from argv. */
struct options {
    const struct option *own; /* the command's table */
    size_t count;
    struct option_given *given; /* owned, in the order typed */
    size_t arguments;
    const char **argument; /* owned list */
    bool usable; /* false: an unknown option or a missing value left the arguments in doubt */
};

#define OPTIONS_INIT                 \
    {                                \
        NULL, 0, NULL, 0, NULL, true \
    }

/* Reads `count` words (the command's name is not among them) against `own` and the common table.
 * Every fault is added; STATUS_OK or STATUS_INPUT. `command` is for messages. */
enum status options_parse(struct options *out, const char *command, const struct option *own,
                          size_t count, const char *const *words, struct err *e);
void options_release(struct options *o);

/* Asking for a name that stands in neither table is a BUG. */
bool options_has(const struct options *o, const char *name);
const char *options_text(const struct options *o, const char *name); /* NULL: not given */
double options_number(const struct options *o, const char *name, double absent);
/* The i-th value of a repeated option, or NULL beyond the last. */
const char *options_each(const struct options *o, const char *name, size_t i);

/* The row for a word such as "--seed", "--seed=5" or "-o" in either table (`own` may be NULL), or
 * NULL. */
const struct option *option_find(const struct option *own, const char *word);

/* The table as help lines, options in the first column. */
void options_help(struct text *out, const struct option *table);

#endif
