/* SPDX-License-Identifier: GPL-3.0-or-later */
/* data.c: a data file read whole, its sums by level, and which analysis it is. */
#include "design/data.h"

#include <math.h>
#include <string.h>

#include "base/file.h"
#include "base/mem.h"
#include "base/number.h"
#include "design/data_messages.h"
#include "design/data_rows.h"

void level_data_init(struct level_data *d, size_t levels)
{
    *d = (struct level_data){.levels = levels};
    double **const all[] = {&d->randomized, &d->n, &d->mean, &d->ss, &d->events};
    for (size_t i = 0; i < sizeof all / sizeof *all; i++)
        *all[i] = mem_new(levels, sizeof(double));
}

void level_data_release(struct level_data *d)
{
    double *const all[] = {d->randomized, d->n, d->mean, d->ss, d->events};
    for (size_t i = 0; i < sizeof all / sizeof *all; i++)
        mem_free(all[i]);
    *d = (struct level_data){0};
}

/* the outcome that counts for a fit, if there is one in hand */
static bool outcome_of(const struct design *d, const struct subject *s, double *outcome)
{
    if (s->has_response)
        *outcome = s->response;
    else if (s->status == SUBJECT_DROPPED && d->dropped == DROPPED_FAILURE)
        *outcome = d->higher_is_better ? 0.0 : 1.0;
    else
        return false;
    return true;
}

/* two passes, so that sums of squares lose no digits */
static void sum_levels(struct data *data, const struct design *d)
{
    struct level_data *x = &data->by_level;
    double outcome;
    for (size_t i = 0; i < data->subjects; i++) {
        const struct subject *s = &data->subject[i];
        x->randomized[s->level] += 1.0;
        if (!outcome_of(d, s, &outcome))
            continue;
        x->n[s->level] += 1.0;
        x->mean[s->level] += outcome;
        x->events[s->level] += d->type == ENDPOINT_BINARY ? outcome : 0.0;
    }
    for (size_t k = 0; k < x->levels; k++)
        x->mean[k] = x->n[k] > 0.0 && d->type == ENDPOINT_CONTINUOUS ? x->mean[k] / x->n[k] : 0.0;
    for (size_t i = 0; d->type == ENDPOINT_CONTINUOUS && i < data->subjects; i++) {
        const struct subject *s = &data->subject[i];
        if (outcome_of(d, s, &outcome))
            x->ss[s->level] += (outcome - x->mean[s->level]) * (outcome - x->mean[s->level]);
    }
}

static void count_subjects(struct data *data, const struct design *d)
{
    const bool failure = d->dropped == DROPPED_FAILURE;
    data->dropped_as_failure = failure ? 0.0 : NAN;
    for (size_t i = 0; i < data->subjects; i++) {
        const enum subject_status status = data->subject[i].status;
        if (status == SUBJECT_DROPPED && failure)
            data->dropped_as_failure += 1.0;
        if (status == SUBJECT_OBSERVED || (status == SUBJECT_DROPPED && failure))
            data->observed += 1.0;
        else if (status == SUBJECT_PENDING)
            data->pending += 1.0;
        else
            data->dropped += 1.0;
    }
}

static enum status read_table(struct data *data, const struct design *d,
                              const struct csv_table *table, const char *cut, struct err *e)
{
    struct data_reader r = {.table = table, .d = d, .data = data, .e = e};
    const size_t before = e->count;
    data_find_columns(&r);
    if (e->count > before)
        return STATUS_INPUT;
    data_read_subjects(&r);
    data_read_times(&r, cut);
    if (e->count > before)
        return STATUS_INPUT;
    level_data_init(&data->by_level, d->levels);
    sum_levels(data, d);
    count_subjects(data, d);
    return STATUS_OK;
}

enum status data_parse(struct data **out, const char *bytes, size_t length, const char *file,
                       const struct design *d, const char *cut, struct err *e)
{
    struct csv_table table = CSV_TABLE_INIT;
    struct data *data = mem_new(1, sizeof *data);
    data->file = mem_text(file);
    sha256_hex(data->sha256, bytes, length);
    *out = NULL;
    enum status status = csv_read(bytes, length, file, &table, e);
    if (status == STATUS_OK)
        status = read_table(data, d, &table, cut, e);
    if (status == STATUS_OK)
        *out = data;
    else
        data_free(data);
    csv_table_release(&table);
    return status;
}

enum status data_read(struct data **out, const char *path, const struct design *d, const char *cut,
                      struct err *e)
{
    struct text bytes = TEXT_INIT;
    enum status status = file_read(path, &bytes, e);
    *out = NULL;
    if (status == STATUS_OK)
        status = data_parse(out, text_s(&bytes), bytes.length, path, d, cut, e);
    text_release(&bytes);
    return status;
}

void data_free(struct data *data)
{
    if (!data)
        return;
    for (size_t i = 0; data->subject && i < data->subjects; i++)
        mem_free(data->subject[i].id);
    for (size_t i = 0; i < data->warnings; i++)
        mem_free(data->warning[i]);
    mem_free(data->warning);
    mem_free(data->subject);
    mem_free(data->cut_text);
    mem_free(data->file);
    level_data_release(&data->by_level);
    mem_free(data);
}

/* ---- which analysis ---- */

/* where the trial stands in the unit of the planned points; NaN when the file cannot tell */
static double progress_of(const struct data *data, const struct design *d)
{
    switch (d->analyses.counted) {
    case COUNTED_RANDOMIZED:
        return (double)data->subjects;
    case COUNTED_OBSERVED:
        return data->observed;
    case COUNTED_TIME:
        break;
    }
    return data->cut;
}

static double point_of(const struct analyses *a, long number)
{
    const double every = a->first_at + (double)(number - 1) * a->every;
    return (size_t)number <= a->count ? a->at[number - 1] : every;
}

static long points_reached(const struct analyses *a, double progress)
{
    const double slack = 1e-9 * fmax(1.0, fabs(progress));
    long reached = 0;
    while (((size_t)reached < a->count || a->open_ended) &&
           point_of(a, reached + 1) <= progress + slack)
        reached++;
    return reached;
}

static enum status fault(struct err *e, const struct data *data, const char *sentence)
{
    return err_add(e, STATUS_INPUT, data->file, 0, NULL, "%s", sentence);
}

static enum status next_reached(const struct data *data, const struct design *d, long reached,
                                double progress, struct err *e)
{
    const struct analyses *a = &d->analyses;
    char have[NUMBER_CHARS], need[NUMBER_CHARS];
    if (a->count == 0 && !a->open_ended)
        return fault(e, data, DATA_MSG_NONE_PLANNED);
    if (progress != progress)
        return fault(e, data, DATA_MSG_NO_TIME);
    if (reached == 0)
        return err_add(e, STATUS_INPUT, data->file, 0, NULL, DATA_MSG_NONE_REACHED,
                       number_shortest(have, progress), number_shortest(need, point_of(a, 1)));
    return STATUS_OK;
}

enum status data_analysis_number(const struct data *data, const struct design *d, long asked,
                                 bool final, bool pending_ok, long *number, double *point,
                                 struct err *e)
{
    const struct analyses *a = &d->analyses;
    const double progress = progress_of(data, d);
    const long reached = progress == progress ? points_reached(a, progress) : 0;
    char pending[NUMBER_CHARS];
    *number = final ? reached + 1 : asked > 0 ? asked : reached;
    *point = INFINITY;
    if (final && data->pending > 0.0 && !pending_ok)
        return err_add(e, STATUS_INPUT, data->file, 0, NULL, DATA_MSG_PENDING,
                       number_shortest(pending, data->pending));
    if (final)
        return STATUS_OK;
    if (asked > 0 && (size_t)asked > a->count && !a->open_ended)
        return a->count == 0 ? fault(e, data, DATA_MSG_NONE_PLANNED)
                             : err_add(e, STATUS_INPUT, data->file, 0, NULL, DATA_MSG_ANALYSIS,
                                       asked, a->count, a->count);
    if (asked <= 0) {
        const enum status status = next_reached(data, d, reached, progress, e);
        if (status != STATUS_OK)
            return status;
    }
    *point = point_of(a, *number);
    return STATUS_OK;
}
