/* SPDX-License-Identifier: GPL-3.0-or-later */
/* csv_read.c: our own pass over the bytes cuts the file into records and finds every fault; libcsv
 * then takes each sound record apart, so that lines and rows cannot drift apart. */
#include "base/csv_read.h"

#include <csv.h>
#include <stdbool.h>
#include <stdlib.h>
#include <string.h>

#include "base/base.h"
#include "base/csv_messages.h"
#include "base/mem.h"
#include "base/text.h"

/* A row as it lies in the file: bytes without the line end, first line. */
struct record {
    const char *start;
    size_t length, fields;
    long line;
    bool blank, sound;
};

struct reader {
    const char *at, *end;
    long line;
    const char *file;
    struct err *e;
    struct csv_table *out;
    struct csv_row *row; /* the one being filled by libcsv */
};

#define FAULT(r, on_line, ...) \
    ((void)err_add((r)->e, STATUS_INPUT, (r)->file, (on_line), NULL, __VA_ARGS__))

static void row_release(struct csv_row *row)
{
    for (size_t i = 0; i < row->count; i++)
        mem_free(row->fields[i]);
    mem_free(row->fields);
}

void csv_table_release(struct csv_table *t)
{
    for (size_t i = 0; i < t->columns; i++)
        mem_free(t->header[i]);
    mem_free(t->header);
    for (size_t i = 0; i < t->count; i++)
        row_release(&t->rows[i]);
    mem_free(t->rows);
    *t = (struct csv_table)CSV_TABLE_INIT;
}

/* --- our pass --- */

static bool at_line_end(const struct reader *r)
{
    return r->at == r->end || *r->at == '\n' || *r->at == '\r';
}

/* One line end: LF, CR LF or CR. */
static void skip_line_end(struct reader *r)
{
    if (r->at == r->end)
        return;
    if (*r->at == '\r' && r->end - r->at > 1 && r->at[1] == '\n')
        r->at++;
    r->at++;
    r->line++;
}

/* The text between the quotes; r->at is on the opening one. False when it never closes. */
static bool skip_quoted(struct reader *r)
{
    r->at++;
    while (r->at < r->end) {
        if (*r->at == '"') {
            r->at++;
            if (r->at == r->end || *r->at != '"')
                return true;
            r->at++;
        } else if (*r->at == '\n' || *r->at == '\r') {
            skip_line_end(r);
        } else {
            r->at++;
        }
    }
    return false;
}

/* Goes to the comma or line end behind field `number` (from 1) of the record. */
static void scan_field(struct reader *r, struct record *record, size_t number)
{
    long line = r->line;
    bool quoted = r->at < r->end && *r->at == '"', inside = false;

    if (quoted && !skip_quoted(r)) {
        FAULT(r, line, CSV_MSG_QUOTE_OPEN, number);
        record->sound = false;
        return;
    }
    if (quoted && !at_line_end(r) && *r->at != ',') {
        FAULT(r, r->line, CSV_MSG_QUOTE_AFTER, number);
        record->sound = false;
    }
    for (; !at_line_end(r) && *r->at != ','; r->at++)
        inside = inside || *r->at == '"';
    if (inside && !quoted) {
        FAULT(r, line, CSV_MSG_QUOTE_INSIDE, number);
        record->sound = false;
    }
}

/* NUL bytes and broken UTF-8, the first of each in a record. */
static void check_bytes(struct reader *r, struct record *record)
{
    bool nul = false, broken = false;
    long line = record->line;

    for (size_t i = 0; i < record->length && !(nul && broken);) {
        unsigned char byte = (unsigned char)record->start[i];
        size_t step = text_utf8_step(record->start + i, record->length - i, NULL);

        if (step == 0 && !broken)
            FAULT(r, line, CSV_MSG_UTF8, (unsigned)byte);
        if (byte == 0 && !nul)
            FAULT(r, line, CSV_MSG_NUL);
        broken = broken || step == 0;
        nul = nul || byte == 0;
        line += byte == '\n' || (byte == '\r' && record->start[i + 1] != '\n');
        i += step == 0 ? 1 : step;
    }
    record->sound = record->sound && !nul && !broken;
}

/* The next record, blank ones too; r->at < r->end. */
static struct record scan_record(struct reader *r)
{
    struct record record = {r->at, 0, 0, r->line, false, true};

    for (;;) {
        record.fields++;
        scan_field(r, &record, record.fields);
        if (at_line_end(r))
            break;
        r->at++;
    }
    record.length = (size_t)(r->at - record.start);
    record.blank = true;
    for (size_t i = 0; i < record.length; i++)
        record.blank = record.blank && (record.start[i] == ' ' || record.start[i] == '\t');
    check_bytes(r, &record);
    skip_line_end(r);
    return record;
}

/* --- libcsv --- */

static void *csv_grow(void *old, size_t size)
{
    return mem_grow(old, 1, size);
}

/* libcsv strips blanks around fields unless told that there are none. */
static int never_blank(unsigned char c)
{
    (void)c;
    return 0;
}

static void take_field(void *bytes, size_t length, void *reader)
{
    struct csv_row *row = ((struct reader *)reader)->row;

    row->fields[row->count++] = mem_text_n(bytes, length);
}

/* Fields of a sound record, whose number is known. */
static void split_record(struct reader *r, struct csv_parser *parser, const struct record *record,
                         struct csv_row *row)
{
    *row = (struct csv_row){record->line, 0, mem_new(record->fields, sizeof *row->fields)};
    r->row = row;
    if (csv_parse(parser, record->start, record->length, take_field, NULL, r) != record->length ||
        csv_fini(parser, take_field, NULL, r) != 0 || row->count != record->fields)
        BUG("libcsv refuses what our pass accepts");
}

static void parser_init(struct csv_parser *parser)
{
    if (csv_init(parser, CSV_STRICT | CSV_STRICT_FINI | CSV_APPEND_NULL) != 0)
        BUG("csv_init");
    csv_set_realloc_func(parser, csv_grow);
    csv_set_free_func(parser, mem_free);
    csv_set_space_func(parser, never_blank);
}

/* --- header and rows --- */

static void check_header(struct reader *r)
{
    const struct csv_table *t = r->out;

    for (size_t i = 0; i < t->columns; i++) {
        if (t->header[i][strspn(t->header[i], " \t")] == '\0') {
            FAULT(r, t->header_line, CSV_MSG_NO_NAME, i + 1);
            continue;
        }
        for (size_t j = 0; j < i; j++)
            if (strcmp(t->header[i], t->header[j]) == 0) {
                FAULT(r, t->header_line, CSV_MSG_NAME_TWICE, t->header[i], j + 1, i + 1);
                break;
            }
    }
}

static void add_header(struct reader *r, struct csv_parser *parser, const struct record *record)
{
    struct csv_row row;

    r->out->header_line = record->line;
    if (!record->sound)
        return;
    split_record(r, parser, record, &row);
    r->out->columns = row.count;
    r->out->header = row.fields;
    check_header(r);
}

static struct csv_row *row_new(struct csv_table *t)
{
    if (t->count == t->capacity) {
        t->capacity = t->capacity == 0 ? 64 : 2 * t->capacity;
        t->rows = mem_grow(t->rows, t->capacity, sizeof t->rows[0]);
    }
    return &t->rows[t->count++];
}

static void add_row(struct reader *r, struct csv_parser *parser, const struct record *record)
{
    size_t columns = r->out->columns;

    if (!record->sound || columns == 0)
        return; /* without a sound header there is nothing to count against */
    if (record->fields != columns)
        FAULT(r, record->line, CSV_MSG_FIELDS, record->fields,
              record->fields == 1 ? "field" : "fields", columns);
    else
        split_record(r, parser, record, row_new(r->out));
}

static void read_records(struct reader *r)
{
    struct csv_parser parser;

    parser_init(&parser);
    while (r->at < r->end) {
        struct record record = scan_record(r);

        if (record.blank)
            continue;
        if (r->out->header_line == 0)
            add_header(r, &parser, &record);
        else
            add_row(r, &parser, &record);
    }
    csv_free(&parser);
}

enum status csv_read(const char *bytes, size_t length, const char *file, struct csv_table *out,
                     struct err *e)
{
    struct reader r = {bytes, bytes + length, 1, file, e, out, NULL};
    size_t before = e->count;

    if (length >= 2 && (memcmp(bytes, "\xFF\xFE", 2) == 0 || memcmp(bytes, "\xFE\xFF", 2) == 0))
        return err_add(e, STATUS_INPUT, file, 1, NULL, CSV_MSG_UTF16);
    if (length >= 3 && memcmp(bytes, "\xEF\xBB\xBF", 3) == 0)
        r.at += 3;
    read_records(&r);
    if (out->header_line == 0)
        FAULT(&r, 0, CSV_MSG_EMPTY);
    return e->count > before ? STATUS_INPUT : STATUS_OK;
}
