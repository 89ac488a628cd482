/* SPDX-License-Identifier: GPL-3.0-or-later */
/* data_rows.h: from the rows of a data file to subjects; shared by the files that read data. */
#ifndef TERRACE_DATA_ROWS_H
#define TERRACE_DATA_ROWS_H

#include "base/csv_read.h"
#include "design/data.h"

/* What reading needs: the table, the columns found (-1: absent) and where faults go. */
struct data_reader {
    const struct csv_table *table;
    const struct design *d;
    struct data *data;
    struct err *e;
    long subject, level, response, enrolled, status;
};

/* Finds the columns; adds faults for missing ones. */
void data_find_columns(struct data_reader *r);
/* Subjects with level, status and response. */
void data_read_subjects(struct data_reader *r);
/* Enrolments, the cut and everything that is checked against it. */
void data_read_times(struct data_reader *r, const char *cut);
/* A field without the blanks around it: owned by the caller. */
char *data_field(const struct data_reader *r, size_t row, long column);
/* Adds a fault at a row. */
#define data_fault(r, line, ...) \
    err_add((r)->e, STATUS_INPUT, (r)->data->file, (line), NULL, __VA_ARGS__)

#endif
