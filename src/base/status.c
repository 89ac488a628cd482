/* SPDX-License-Identifier: GPL-3.0-or-later */
/* status.c: the list of faults that travels up with a status. */
#include "base/status.h"

#include <errno.h>
#include <stdarg.h>
#include <string.h>

#include "base/mem.h"
#include "base/text.h"

void err_release(struct err *e)
{
    for (size_t i = 0; i < e->count; i++) {
        mem_free(e->faults[i].file);
        mem_free(e->faults[i].pointer);
        mem_free(e->faults[i].message);
    }
    mem_free(e->faults);
    *e = (struct err)ERR_INIT;
}

static struct fault *fault_new(struct err *e)
{
    if (e->count == e->capacity) {
        e->capacity = e->capacity == 0 ? 4 : 2 * e->capacity;
        e->faults = mem_grow(e->faults, e->capacity, sizeof e->faults[0]);
    }
    return &e->faults[e->count++];
}

enum status err_add(struct err *e, enum status status, const char *file, long line,
                    const char *pointer, const char *format, ...)
{
    struct fault *f = fault_new(e);
    struct text message = TEXT_INIT;
    va_list arguments;

    va_start(arguments, format);
    text_addv(&message, format, arguments);
    va_end(arguments);
    f->file = mem_text(file);
    f->line = line;
    f->pointer = mem_text(pointer);
    f->message = text_take(&message);
    if (status > e->status)
        e->status = status;
    return status;
}

void err_move(struct err *to, struct err *from)
{
    for (size_t i = 0; i < from->count; i++)
        *fault_new(to) = from->faults[i];
    if (from->status > to->status)
        to->status = from->status;
    mem_free(from->faults);
    *from = (struct err)ERR_INIT;
}

enum status err_system(struct err *e, const char *file, const char *what)
{
    char reason[128];

    if (strerror_r(errno, reason, sizeof reason) != 0)
        return err_add(e, STATUS_SYSTEM, file, 0, NULL, "cannot %s", what);
    return err_add(e, STATUS_SYSTEM, file, 0, NULL, "cannot %s: %s", what, reason);
}

void err_text(const struct err *e, struct text *out)
{
    for (size_t i = 0; i < e->count; i++) {
        const struct fault *f = &e->faults[i];

        if (f->file != NULL) {
            text_add_line(out, f->file);
            if (f->line > 0)
                text_addf(out, ":%ld", f->line);
            text_add(out, ": ");
        }
        if (f->pointer != NULL && f->pointer[0] != '\0') {
            text_add_line(out, f->pointer);
            text_add(out, ": ");
        }
        text_add_line(out, f->message);
        text_add(out, "\n");
    }
}
