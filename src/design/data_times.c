/* SPDX-License-Identifier: GPL-3.0-or-later */
/* data_times.c: enrolments as numbers or calendar dates, the data cut and what it rules out. */
#include <math.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "design/data_messages.h"
#include "design/data_rows.h"

enum kind { KIND_NONE, KIND_NUMBER, KIND_DATE };
static const char *const kind_words[] = {"", "number", "date"};

/* days in one unit of time; 0: no calendar unit */
static double unit_days(const char *unit)
{
    static const struct {
        const char *word;
        double days;
    } units[] = {{"day", 1}, {"week", 7}, {"month", 30.4375}, {"year", 365.25}};
    for (size_t i = 0; i < sizeof units / sizeof *units; i++)
        if (strcmp(unit, units[i].word) == 0)
            return units[i].days;
    return 0.0;
}

static bool is_leap(long y)
{
    return (y % 4 == 0 && y % 100 != 0) || y % 400 == 0;
}

static long month_days(long y, long m)
{
    static const int days[] = {31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31};
    return days[m - 1] + (m == 2 && is_leap(y) ? 1 : 0);
}

/* Days since 1600-03-01 in the Gregorian calendar (ISO 8601), YYYY-MM-DD only. */
static bool parse_date(const char *s, double *days)
{
    long part[3] = {0, 0, 0};
    static const size_t width[3] = {4, 2, 2};
    for (size_t p = 0; p < 3; p++) {
        for (size_t i = 0; i < width[p]; i++, s++) {
            if (*s < '0' || *s > '9')
                return false;
            part[p] = part[p] * 10 + (*s - '0');
        }
        if (p < 2 && *s++ != '-')
            return false;
    }
    const long y = part[0], m = part[1], d = part[2];
    if (*s || y < 1601 || m < 1 || m > 12 || d < 1 || d > month_days(y, m))
        return false;
    const long from_march = (m + 9) % 12, year = y - 1600 - (m < 3 ? 1 : 0);
    *days = (double)(year * 365 + year / 4 - year / 100 + year / 400 + (from_march * 306 + 5) / 10 +
                     d - 1);
    return true;
}

static char *date_text(double days)
{
    long rest = (long)days, y = 1600, m = 3; /* walk from 1600-03-01; a few hundred steps */
    while (rest >= 365 + (is_leap(y + 1) ? 1 : 0)) {
        rest -= 365 + (is_leap(y + 1) ? 1 : 0);
        y++;
    }
    while (rest >= month_days(y, m)) {
        rest -= month_days(y, m);
        if (++m > 12) {
            m = 1;
            y++;
        }
    }
    struct text t = TEXT_INIT;
    text_addf(&t, "%04ld-%02ld-%02ld", y, m, rest + 1);
    return text_take(&t);
}

static enum kind parse_time(const char *word, double *value)
{
    if (parse_date(word, value))
        return KIND_DATE;
    return number_parse(word, value) ? KIND_NUMBER : KIND_NONE;
}

/* first enrolment in days, and days a unit: turn dates into time since the first enrolment */
struct clock {
    enum kind kind;
    double first, unit;
};

static char *time_text(const struct clock *c, double t)
{
    char number[NUMBER_CHARS];
    if (c->kind == KIND_DATE)
        return date_text(floor(c->first + t * c->unit + 1e-6));
    return mem_text(number_shortest(number, t));
}

static void read_enrolled(struct data_reader *r, struct clock *c)
{
    c->first = INFINITY;
    for (size_t i = 0; i < r->data->subjects; i++) {
        struct subject *s = &r->data->subject[i];
        double value = NAN;
        char *word = data_field(r, i, r->enrolled);
        const enum kind kind = parse_time(word, &value);
        if (!*word)
            data_fault(r, s->line, DATA_MSG_NO_ENROLLED);
        else if (kind == KIND_NONE)
            data_fault(r, s->line, DATA_MSG_ENROLLED, word);
        else if (c->kind != KIND_NONE && kind != c->kind)
            data_fault(r, s->line, DATA_MSG_MIXED, kind_words[kind], kind_words[c->kind]);
        else {
            c->kind = kind;
            s->enrolled = value;
            c->first = value < c->first ? value : c->first;
        }
        mem_free(word);
    }
}

static void dates_to_times(struct data_reader *r, struct clock *c)
{
    c->unit = unit_days(r->d->time_unit);
    r->data->dates = true;
    if (c->unit == 0.0) {
        data_fault(r, r->table->header_line, DATA_MSG_DATE_UNIT, r->d->time_unit);
        c->unit = 1.0;
    }
    for (size_t i = 0; i < r->data->subjects; i++)
        r->data->subject[i].enrolled = (r->data->subject[i].enrolled - c->first) / c->unit;
}

static double latest_time(const struct data_reader *r)
{
    double latest = -INFINITY;
    for (size_t i = 0; i < r->data->subjects; i++) {
        const struct subject *s = &r->data->subject[i];
        const double due = s->enrolled + (s->has_response ? r->d->observed_after : 0.0);
        latest = due > latest ? due : latest;
    }
    return latest > -INFINITY ? latest : NAN;
}

static void read_cut(struct data_reader *r, const struct clock *c, const char *cut)
{
    double value = NAN;
    r->data->cut = latest_time(r);
    if (cut && parse_time(cut, &value) != c->kind)
        data_fault(r, 0, DATA_MSG_CUT, cut, kind_words[c->kind]);
    else if (cut)
        r->data->cut = c->kind == KIND_DATE ? (value - c->first) / c->unit : value;
    if (r->data->cut == r->data->cut)
        r->data->cut_text = time_text(c, r->data->cut);
}

static void add_warning(struct data *data, char *sentence)
{
    data->warning = mem_grow(data->warning, data->warnings + 1, sizeof *data->warning);
    data->warning[data->warnings++] = sentence;
}

static void check_times(struct data_reader *r, const struct clock *c)
{
    struct data *data = r->data;
    const double slack = 1e-9 * fmax(1.0, fabs(data->cut));
    for (size_t i = 0; i < data->subjects; i++) {
        const struct subject *s = &data->subject[i];
        const double due = s->enrolled + r->d->observed_after;
        char *enrolled = time_text(c, s->enrolled), *then = time_text(c, due);
        if (s->enrolled > data->cut + slack)
            data_fault(r, s->line, DATA_MSG_AFTER_CUT, enrolled, data->cut_text);
        else if (s->has_response && due > data->cut + slack)
            data_fault(r, s->line, DATA_MSG_EARLY, then, data->cut_text);
        else if (s->status == SUBJECT_PENDING && due < data->cut - slack) {
            struct text t = TEXT_INIT;
            text_addf(&t, DATA_WARN_OVERDUE, s->line, s->id, then);
            add_warning(data, text_take(&t));
        }
        mem_free(enrolled);
        mem_free(then);
    }
}

void data_read_times(struct data_reader *r, const char *cut)
{
    struct clock clock = {KIND_NONE, 0.0, 1.0};
    r->data->cut = NAN;
    r->data->has_enrolled = r->enrolled >= 0;
    if (r->enrolled < 0) {
        if (cut)
            data_fault(r, 0, DATA_MSG_CUT_ALONE, r->d->columns.enrolled);
        return;
    }
    const size_t before = r->e->count;
    read_enrolled(r, &clock);
    if (clock.kind == KIND_DATE)
        dates_to_times(r, &clock);
    if (r->e->count > before)
        return; /* the cut is judged only against sound times */
    read_cut(r, &clock, cut);
    if (r->data->cut == r->data->cut)
        check_times(r, &clock);
}
