/* SPDX-License-Identifier: GPL-3.0-or-later */
/* data_rows.c: columns, levels, statuses and responses of a data file. */
#include "design/data_rows.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "design/data_messages.h"

static char *header_words(const struct csv_table *t)
{
    struct text words = TEXT_INIT;
    for (size_t c = 0; c < t->columns; c++)
        text_addf(&words, "%s%s", c ? ", " : "", t->header[c]);
    return text_take(&words);
}

static void missing_column(struct data_reader *r, const char *name)
{
    const struct csv_table *t = r->table;
    const char **list = mem_new(t->columns + 1, sizeof *list);
    for (size_t c = 0; c < t->columns; c++)
        list[c] = t->header[c];
    const char *near = text_nearest(name, list);
    char *words = header_words(t);
    if (near)
        data_fault(r, t->header_line, DATA_MSG_COLUMN_NEAR, name, near);
    else
        data_fault(r, t->header_line, DATA_MSG_COLUMN, name, words);
    mem_free(words);
    mem_free(list);
}

static long find_column(struct data_reader *r, const char *name, bool needed)
{
    for (size_t c = 0; c < r->table->columns; c++)
        if (strcmp(r->table->header[c], name) == 0)
            return (long)c;
    if (needed)
        missing_column(r, name);
    return -1;
}

void data_find_columns(struct data_reader *r)
{
    const struct column_names *names = &r->d->columns;
    r->subject = find_column(r, names->subject, true);
    r->level = find_column(r, names->level, true);
    r->response = find_column(r, names->response, true);
    r->enrolled = find_column(r, names->enrolled, false);
    r->status = find_column(r, names->status, false);
}

char *data_field(const struct data_reader *r, size_t row, long column)
{
    if (column < 0)
        return mem_text("");
    const char *s = r->table->rows[row].fields[column];
    size_t length = strlen(s);
    while (*s == ' ') {
        s++;
        length--;
    }
    while (length > 0 && s[length - 1] == ' ')
        length--;
    return mem_text_n(s, length);
}

static bool find_level(const struct design *d, const char *word, size_t *level)
{
    double value;
    const int label = design_level_find(d, word);
    if (label >= 0) {
        *level = (size_t)label;
        return true;
    }
    for (size_t i = 0; i < d->aliases; i++)
        if (strcmp(d->alias[i].text, word) == 0) {
            *level = d->alias[i].level;
            return true;
        }
    if (number_parse(word, &value))
        for (size_t k = 0; k < d->levels; k++)
            if (d->level[k].value == value) {
                *level = k;
                return true;
            }
    return false;
}

static void read_level(struct data_reader *r, size_t row, struct subject *s)
{
    char *word = data_field(r, row, r->level);
    if (*word == '\0') {
        data_fault(r, s->line, DATA_MSG_NO_LEVEL);
    } else if (!find_level(r->d, word, &s->level)) {
        struct text labels = TEXT_INIT;
        for (size_t k = 0; k < r->d->levels; k++)
            text_addf(&labels, "%s%s", k ? ", " : "", r->d->level[k].label);
        data_fault(r, s->line, DATA_MSG_LEVEL, word, text_s(&labels));
        text_release(&labels);
    }
    mem_free(word);
}

static void check_response(struct data_reader *r, const struct subject *s)
{
    char value[NUMBER_CHARS], low[NUMBER_CHARS], high[NUMBER_CHARS];
    const struct design *d = r->d;
    number_shortest(value, s->response);
    if (d->type == ENDPOINT_BINARY && s->response != 0.0 && s->response != 1.0)
        data_fault(r, s->line, DATA_MSG_BINARY, value);
    if (d->has_range && (s->response < d->range[0] || s->response > d->range[1]))
        data_fault(r, s->line, DATA_MSG_RANGE, value, number_shortest(low, d->range[0]),
                   number_shortest(high, d->range[1]));
}

static void read_response(struct data_reader *r, const char *word, struct subject *s)
{
    if (*word == '\0')
        return;
    if (!number_parse(word, &s->response)) {
        data_fault(r, s->line, DATA_MSG_NUMBER, word);
        return;
    }
    s->has_response = true;
    check_response(r, s);
}

static void read_status(struct data_reader *r, size_t row, const char *response, struct subject *s)
{
    static const char *const words[] = {"observed", "pending", "dropped"};
    char *word = data_field(r, row, r->status);
    s->status = *response ? SUBJECT_OBSERVED : SUBJECT_PENDING;
    if (*word) {
        size_t i = 0;
        while (i < 3 && strcmp(word, words[i]) != 0)
            i++;
        if (i == 3)
            data_fault(r, s->line, DATA_MSG_STATUS, word);
        else if (i == SUBJECT_OBSERVED && !*response)
            data_fault(r, s->line, DATA_MSG_OBSERVED);
        else if (i != SUBJECT_OBSERVED && *response)
            data_fault(r, s->line, DATA_MSG_CONFLICT, word, response);
        else
            s->status = (enum subject_status)i;
    }
    mem_free(word);
}

static int by_id(const void *a, const void *b)
{
    const struct subject *const *x = a, *const *y = b;
    const int order = strcmp((*x)->id, (*y)->id);
    return order ? order : (*x)->line < (*y)->line ? -1 : 1;
}

static void find_doubles(struct data_reader *r)
{
    const struct subject **sorted = mem_new(r->data->subjects, sizeof *sorted);
    for (size_t i = 0; i < r->data->subjects; i++)
        sorted[i] = &r->data->subject[i];
    qsort(sorted, r->data->subjects, sizeof *sorted, by_id);
    for (size_t i = 1; i < r->data->subjects; i++)
        if (*sorted[i]->id && strcmp(sorted[i - 1]->id, sorted[i]->id) == 0)
            data_fault(r, sorted[i]->line, DATA_MSG_TWICE, sorted[i]->id, sorted[i - 1]->line);
    mem_free(sorted);
}

void data_read_subjects(struct data_reader *r)
{
    const struct csv_table *t = r->table;
    if (t->count == 0)
        data_fault(r, t->header_line, DATA_MSG_NO_ROWS);
    r->data->subjects = t->count;
    r->data->subject = mem_new(t->count, sizeof *r->data->subject);
    for (size_t row = 0; row < t->count; row++) {
        struct subject *s = &r->data->subject[row];
        *s = (struct subject){.line = t->rows[row].line, .enrolled = NAN};
        s->id = data_field(r, row, r->subject);
        if (!*s->id)
            data_fault(r, s->line, DATA_MSG_NO_SUBJECT);
        read_level(r, row, s);
        char *response = data_field(r, row, r->response);
        read_response(r, response, s);
        read_status(r, row, response, s);
        mem_free(response);
    }
    find_doubles(r);
}
