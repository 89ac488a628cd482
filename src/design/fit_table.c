/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fit_table.c: reads the table of `fit`: rows or groups, sums by level. */
#include "design/fit_table.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/csv_read.h"
#include "base/file.h"
#include "base/mem.h"
#include "base/number.h"
#include "design/fit_messages.h"

#define MOST_IN_A_GROUP 1e9
#define LARGEST 1e100 /* as in a design */

/* One row of the file, read. */
struct entry {
    double level, n, mean, sd, events; /* rows: n 1 and mean or events; n 0: nothing known */
    long line;
};

struct table_reader {
    struct fit_table *t;
    const struct csv_table *csv;
    const char *file;
    struct err *e;
    long level, response, n, mean, sd, events; /* columns, -1: absent */
    size_t entries;
    struct entry *entry;
};

#define FAULT(r, line, ...) err_add((r)->e, STATUS_INPUT, (r)->file, (line), NULL, __VA_ARGS__)

static long column_of(const struct csv_table *csv, const char *name)
{
    for (size_t c = 0; c < csv->columns; c++)
        if (strcmp(csv->header[c], name) == 0)
            return (long)c;
    return -1;
}

static void check_endpoint(struct table_reader *r, const char *endpoint)
{
    const long line = r->csv->header_line;
    if (!endpoint)
        return;
    const bool binary = strcmp(endpoint, "binary") == 0;
    if (binary && r->mean >= 0)
        FAULT(r, line, FIT_MSG_ENDPOINT, endpoint, "mean");
    else if (!binary && r->events >= 0)
        FAULT(r, line, FIT_MSG_ENDPOINT, endpoint, "events");
    else
        r->t->binary = binary;
}

static void find_columns(struct table_reader *r, const char *endpoint)
{
    const struct csv_table *csv = r->csv;
    long *const columns[] = {&r->level, &r->response, &r->n, &r->mean, &r->sd, &r->events};
    static const char *const names[] = {"level", "response", "n", "mean", "sd", "events"};
    for (size_t i = 0; i < sizeof names / sizeof *names; i++)
        *columns[i] = column_of(csv, names[i]);
    r->t->groups = r->n >= 0;
    r->t->binary = r->events >= 0;
    if (r->response >= 0 && r->n >= 0) {
        FAULT(r, csv->header_line, FIT_MSG_BOTH);
    } else if (r->mean >= 0 && r->events >= 0) {
        FAULT(r, csv->header_line, FIT_MSG_MEAN_AND_EVENTS);
    } else if (r->level < 0 || (r->response < 0 && r->n < 0) ||
               (r->n >= 0 && r->events < 0 && (r->mean < 0 || r->sd < 0))) {
        struct text header = TEXT_INIT;
        for (size_t c = 0; c < csv->columns; c++)
            text_addf(&header, "%s%s", c ? "," : "", csv->header[c]);
        FAULT(r, csv->header_line, FIT_MSG_COLUMNS, text_s(&header));
        text_release(&header);
    } else {
        check_endpoint(r, endpoint);
    }
}

static const char *field(const struct table_reader *r, size_t row, long column)
{
    const char *s = column >= 0 ? r->csv->rows[row].fields[column] : "";
    while (*s == ' ')
        s++;
    return s;
}

static bool finite_number(const char *s, double *out)
{
    return number_parse(s, out) && fabs(*out) <= LARGEST;
}

static void read_response(struct table_reader *r, size_t row, struct entry *x)
{
    const char *word = field(r, row, r->response);
    double y;
    if (!*word) {
        r->t->left_out += 1;
    } else if (!finite_number(word, &y)) {
        FAULT(r, x->line, FIT_MSG_RESPONSE, word);
    } else if (r->t->binary && y != 0 && y != 1) {
        FAULT(r, x->line, FIT_MSG_BINARY, word);
    } else {
        x->n = 1;
        x->mean = y;
        x->events = y;
    }
}

static void read_group(struct table_reader *r, size_t row, struct entry *x)
{
    const char *n = field(r, row, r->n), *mean = field(r, row, r->mean);
    const char *sd = field(r, row, r->sd), *events = field(r, row, r->events);
    if (!number_parse_whole(n, 0, MOST_IN_A_GROUP, &x->n)) {
        FAULT(r, x->line, FIT_MSG_N, n);
        return;
    }
    if (r->t->binary) {
        if (!number_parse_whole(events, 0, x->n, &x->events))
            FAULT(r, x->line, FIT_MSG_EVENTS, events);
        return;
    }
    if (!(x->n == 0 && !*mean) && !finite_number(mean, &x->mean))
        FAULT(r, x->line, FIT_MSG_MEAN, mean);
    if (!(x->n <= 1 && !*sd) && (!finite_number(sd, &x->sd) || x->sd < 0))
        FAULT(r, x->line, FIT_MSG_SD, sd);
}

static void read_entries(struct table_reader *r)
{
    const struct csv_table *csv = r->csv;
    if (csv->count == 0)
        FAULT(r, csv->header_line, FIT_MSG_NO_ROWS);
    r->entry = mem_new(csv->count, sizeof *r->entry);
    for (size_t row = 0; row < csv->count; row++) {
        struct entry *x = &r->entry[r->entries];
        const char *word = field(r, row, r->level);
        *x = (struct entry){.line = csv->rows[row].line};
        if (csv->rows[row].count != csv->columns)
            continue; /* said by csv_read */
        if (!finite_number(word, &x->level))
            FAULT(r, x->line, FIT_MSG_LEVEL, word);
        else
            r->entries++;
        if (r->t->groups)
            read_group(r, row, x);
        else
            read_response(r, row, x);
    }
}

static int by_level(const void *a, const void *b)
{
    const struct entry *x = a, *y = b;
    if (x->level != y->level)
        return x->level < y->level ? -1 : 1;
    return x->line < y->line ? -1 : 1;
}

/* Adds an entry to the sums of its level (Welford 1962, Technometrics 4:419). */
static void add_entry(struct level_data *sums, size_t k, const struct entry *x, bool binary)
{
    sums->randomized[k] += x->n;
    sums->n[k] += x->n;
    if (binary) {
        sums->events[k] += x->events;
    } else if (x->n == 1) {
        const double off = x->mean - sums->mean[k];
        sums->mean[k] += off / sums->n[k];
        sums->ss[k] += off * (x->mean - sums->mean[k]);
    } else if (x->n > 1) { /* a group has one row */
        sums->mean[k] = x->mean;
        sums->ss[k] = (x->n - 1) * x->sd * x->sd;
    }
}

/* Levels in increasing order, and their number; more than fit are a fault. */
static void find_levels(struct table_reader *r)
{
    struct fit_table *t = r->t;
    qsort(r->entry, r->entries, sizeof *r->entry, by_level);
    for (size_t i = 0; i < r->entries; i++) {
        const struct entry *x = &r->entry[i], *before = i > 0 ? x - 1 : NULL;
        char level[NUMBER_CHARS];
        if (before && before->level == x->level) {
            if (t->groups)
                FAULT(r, x->line, FIT_MSG_TWICE, number_shortest(level, x->level), before->line);
            continue;
        }
        if (t->levels == LEVELS_MAX) {
            FAULT(r, x->line, FIT_MSG_MANY, LEVELS_MAX);
            return;
        }
        t->value[t->levels++] = x->level;
    }
    if (t->levels < LEVELS_MIN && r->e->status == STATUS_OK)
        FAULT(r, 0, FIT_MSG_FEW, t->levels);
}

static void sum_up(struct table_reader *r)
{
    struct fit_table *t = r->t;
    struct data *d = &t->data;
    level_data_init(&d->by_level, t->levels);
    for (size_t i = 0, k = 0; i < r->entries; i++) {
        while (k + 1 < t->levels && t->value[k] < r->entry[i].level)
            k++;
        add_entry(&d->by_level, k, &r->entry[i], t->binary);
        d->observed += r->entry[i].n;
    }
    d->subjects = (size_t)d->observed;
    d->dropped_as_failure = d->cut = NAN;
    if (!(d->observed > 0) && r->e->status == STATUS_OK)
        FAULT(r, 0, FIT_MSG_NONE);
}

static void read_table(struct table_reader *r, const char *endpoint)
{
    find_columns(r, endpoint);
    if (r->e->status != STATUS_OK)
        return;
    read_entries(r);
    find_levels(r);
    sum_up(r);
}

enum status fit_table_parse(struct fit_table **out, const char *bytes, size_t length,
                            const char *file, const char *endpoint, struct err *e)
{
    struct err own = ERR_INIT;
    struct csv_table csv = CSV_TABLE_INIT;
    struct fit_table *t = mem_new(1, sizeof *t);
    struct table_reader r = {.t = t, .csv = &csv, .file = file, .e = &own};
    t->data.file = mem_text(file);
    sha256_hex(t->data.sha256, bytes, length);
    csv_read(bytes, length, file, &csv, &own);
    if (csv.columns > 0)
        read_table(&r, endpoint);
    const enum status status = own.status;
    err_move(e, &own);
    mem_free(r.entry);
    csv_table_release(&csv);
    *out = status == STATUS_OK ? t : NULL;
    if (status != STATUS_OK)
        fit_table_free(t);
    return status;
}

enum status fit_table_read(struct fit_table **out, const char *path, const char *endpoint,
                           struct err *e)
{
    struct text bytes = TEXT_INIT;
    enum status status = file_read(path, &bytes, e);
    *out = NULL;
    if (status == STATUS_OK)
        status = fit_table_parse(out, text_s(&bytes), bytes.length, path, endpoint, e);
    text_release(&bytes);
    return status;
}

void fit_table_free(struct fit_table *t)
{
    if (!t)
        return;
    mem_free(t->data.file);
    level_data_release(&t->data.by_level);
    mem_free(t);
}

struct prior_scales fit_table_scales(const struct fit_table *t)
{
    const struct level_data *x = &t->data.by_level;
    double low = INFINITY, high = -INFINITY, sum = 0, filled = 0, ss = 0, n = 0;
    for (size_t k = 0; k < t->levels; k++) {
        if (!(x->n[k] > 0))
            continue;
        low = x->mean[k] < low ? x->mean[k] : low;
        high = x->mean[k] > high ? x->mean[k] : high;
        sum += x->mean[k];
        ss += x->ss[k];
        n += x->n[k];
        filled += 1;
    }
    const double pooled = n > filled ? sqrt(ss / (n - filled)) : 0, half = (high - low) / 2;
    const double A = half > pooled ? half : pooled;
    return (struct prior_scales){A > 0 ? A : 1, sum / filled};
}
