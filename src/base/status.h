/* SPDX-License-Identifier: GPL-3.0-or-later */
/* status.h: the outcome of a call, and the list of faults that explains it.
 *
 * A function that can fail for a reason outside this program returns `enum status` and, unless
 * that is STATUS_OK, has added at least one fault to its last argument, a `struct err`. Callers
 * hand both up untouched; only commands print them and choose the exit status. Reading code adds
 * every fault it can find before it returns.
 */
#ifndef TERRACE_STATUS_H
#define TERRACE_STATUS_H

#include <stddef.h>

/* The values are the program's exit statuses. */
enum status {
    STATUS_OK = 0,
    STATUS_CHECK_FAILED = 1, /* a self check failed */
    STATUS_INPUT = 2,        /* the design, the data, an option or an argument is wrong */
    STATUS_DISTRUSTED = 3,   /* the computation cannot be trusted */
    STATUS_SYSTEM = 4        /* disk full, unreadable file, no memory */
};

/* One fault. `file` and `pointer` may be NULL, `line` 0: then the place is unknown. */
struct fault {
    char *file;    /* owned: the file as the user named it */
    long line;     /* 1-based line of the file, or 0 */
    char *pointer; /* owned: JSON pointer (RFC 6901), or NULL; "" is the whole document */
    char *message; /* owned: what is wrong and what is allowed, one line */
};

struct err {
    enum status status; /* the highest status added so far */
    size_t count, capacity;
    struct fault *faults; /* owned, in the order found */
};

#define ERR_INIT              \
    {                         \
        STATUS_OK, 0, 0, NULL \
    }

void err_release(struct err *e);

/* Adds a fault; returns `status` so that a caller may write `return err_add(...)`.
 * `file` and `pointer` are copied and may be NULL; `line` may be 0. */
enum status err_add(struct err *e, enum status status, const char *file, long line,
                    const char *pointer, const char *format, ...)
    __attribute__((format(printf, 6, 7)));

/* All faults of `from` go to the end of `to`; `from` is empty afterwards. */
void err_move(struct err *to, struct err *from);

/* Adds the fault for a failed system call: "cannot WHAT: strerror(errno)", STATUS_SYSTEM. */
enum status err_system(struct err *e, const char *file, const char *what);

/* One line a fault, "FILE:LINE: message", "FILE: /json/pointer: message" or "FILE: message",
 * each ended by a newline, appended to `out` (a struct text, see text.h). */
struct text;
void err_text(const struct err *e, struct text *out);

#endif
