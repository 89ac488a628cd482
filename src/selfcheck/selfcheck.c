/* SPDX-License-Identifier: GPL-3.0-or-later */
/* selfcheck.c: figures of a check, and all checks in turn. */
#include "selfcheck/selfcheck.h"

#include <math.h>
#include <stdarg.h>
#include <string.h>

#include "base/mem.h"
#include "base/text.h"

static struct check_figure *figure_new(struct check_result *r)
{
    if (r->count == r->capacity) {
        r->capacity = r->capacity ? 2 * r->capacity : 8;
        r->figure = mem_grow(r->figure, r->capacity, sizeof *r->figure);
    }
    r->figure[r->count] = (struct check_figure){.passed = false};
    return &r->figure[r->count++];
}

void check_add(struct check_result *r, double published, double ours, double allowed,
               const char *what, ...)
{
    struct check_figure *f = figure_new(r);
    struct text t = TEXT_INIT;
    va_list arguments;
    va_start(arguments, what);
    text_addv(&t, what, arguments);
    va_end(arguments);
    f->what = text_take(&t);
    f->published = published;
    f->ours = ours;
    f->allowed = allowed;
    f->passed = fabs(ours - published) <= allowed; /* a NaN fails */
}

void check_add_text(struct check_result *r, const char *published, const char *ours,
                    const char *what)
{
    struct check_figure *f = figure_new(r);
    f->what = mem_text(what);
    f->published_text = mem_text(published);
    f->ours_text = mem_text(ours);
    f->passed = strcmp(published, ours) == 0;
    f->ours = f->passed ? 0 : 1;
}

double check_digits(double published, int digits)
{
    if (published == 0)
        return 0.5 * pow(10, -digits);
    return 0.5 * pow(10, floor(log10(fabs(published))) + 1 - digits) * (1 + 1e-9);
}

void check_run(struct check_result *out, const struct check *c, double nudge)
{
    *out = (struct check_result){.check = c};
    c->run(out, nudge);
    out->passed = out->count > 0;
    for (size_t i = 0; i < out->count; i++)
        out->passed = out->passed && out->figure[i].passed;
}

void check_release(struct check_result *r)
{
    for (size_t i = 0; i < r->count; i++) {
        mem_free(r->figure[i].what);
        mem_free(r->figure[i].published_text);
        mem_free(r->figure[i].ours_text);
    }
    mem_free(r->figure);
    *r = (struct check_result){0};
}

void selfcheck_run(struct selfcheck *out, void (*told)(const struct check *c))
{
    *out = (struct selfcheck){0};
    while (checks[out->count])
        out->count++;
    out->result = mem_new(out->count, sizeof *out->result);
    for (size_t i = 0; i < out->count; i++) {
        if (told)
            told(checks[i]);
        check_run(&out->result[i], checks[i], 0);
        *(out->result[i].passed ? &out->passed : &out->failed) += 1;
    }
}

void selfcheck_release(struct selfcheck *s)
{
    for (size_t i = 0; i < s->count; i++)
        check_release(&s->result[i]);
    mem_free(s->result);
    *s = (struct selfcheck){0};
}
