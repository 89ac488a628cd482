/* SPDX-License-Identifier: GPL-3.0-or-later */
/* csv_read.h: RFC 4180 through libcsv, with line numbers of our own and every fault of the file.
 *
 * libcsv's default mode accepts `1"2` and an unterminated quote, its strict mode stops at the first
 * fault, blank lines vanish and a BOM stays in the first header: all of this is handled here.
 */
#ifndef TERRACE_CSV_READ_H
#define TERRACE_CSV_READ_H

#include <stddef.h>

#include "base/status.h"

struct csv_row {
    long line;     /* line of the file on which the row starts, from 1 */
    size_t count;  /* fields in this row */
    char **fields; /* owned, NUL-terminated, quotes removed, text as written otherwise */
};

struct csv_table {
    size_t columns;
    char **header; /* owned: `columns` names */
    long header_line;
    size_t count, capacity;
    struct csv_row *rows; /* owned; blank lines are left out; a row may have a wrong count of
                             fields only when a fault was added */
};

#define CSV_TABLE_INIT         \
    {                          \
        0, NULL, 0, 0, 0, NULL \
    }

void csv_table_release(struct csv_table *t);

/* Reads `length` bytes; `file` is for messages. Faults (each with its line): bad quoting, a row
 * with more or fewer fields than the header, invalid UTF-8, a NUL byte, an empty file, an empty or
 * doubled column name. Returns the highest status. */
enum status csv_read(const char *bytes, size_t length, const char *file, struct csv_table *out,
                     struct err *e);

#endif
