/* SPDX-License-Identifier: GPL-3.0-or-later */
/* inject.c: makes one call of a whole run fail. Linked with the program's own objects into
 * tests/inject/terrace; the program that users get knows nothing of it.
 *
 * INJECT=alloc:N  the N-th allocation of the process is refused, whoever asks (but for libgomp and
 *                 the loader, which end the process in ways of their own)
 * INJECT_CALLER=W count allocations only of the library (or program) whose file name holds W
 * INJECT=io:N     the N-th call on files or standard output fails with EIO (INJECT_ERRNO: another)
 * INJECT_REPORT   a file that gets the line `allocations A calls B failed NAME` at the end
 */
#undef _GNU_SOURCE
#define _GNU_SOURCE
#include <dlfcn.h>
#include <errno.h>
#include <fcntl.h>
#include <stdarg.h>
#include <stdatomic.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

/* The C library's allocator under its other names: ours stand before it, for every library. */
extern void *__libc_malloc(size_t size);
extern void *__libc_calloc(size_t count, size_t size);
extern void *__libc_realloc(void *old, size_t size);
extern void *__libc_memalign(size_t alignment, size_t size);

static atomic_bool watching; /* from base_init to the report */
static atomic_ulong allocations, calls;
static unsigned long allocation_to_fail, call_to_fail;
static int call_error = EIO;
static const char *failed = "nothing", *caller_wanted;

/* ---- memory ---- */

static bool is_counted(const void *caller)
{
    Dl_info who;
    const char *file = dladdr(caller, &who) != 0 && who.dli_fname ? who.dli_fname : "";
    return !strstr(file, "libgomp") && !strstr(file, "ld-linux") &&
           (!caller_wanted || !*caller_wanted || strstr(file, caller_wanted));
}

static bool refused(const void *caller)
{
    if (!atomic_load(&watching) || !is_counted(caller))
        return false;
    if (atomic_fetch_add(&allocations, 1) + 1 != allocation_to_fail)
        return false;
    failed = "allocation";
    errno = ENOMEM;
    return true;
}

void *malloc(size_t size)
{
    return refused(__builtin_return_address(0)) ? NULL : __libc_malloc(size);
}

void *calloc(size_t count, size_t size)
{
    return refused(__builtin_return_address(0)) ? NULL : __libc_calloc(count, size);
}

void *realloc(void *old, size_t size)
{
    return refused(__builtin_return_address(0)) ? NULL : __libc_realloc(old, size);
}

void *aligned_alloc(size_t alignment, size_t size)
{
    return refused(__builtin_return_address(0)) ? NULL : __libc_memalign(alignment, size);
}

int posix_memalign(void **out, size_t alignment, size_t size)
{
    void *p = refused(__builtin_return_address(0)) ? NULL : __libc_memalign(alignment, size);
    if (p)
        *out = p;
    return p ? 0 : ENOMEM;
}

/* ---- files ---- */

static bool fails(const char *name)
{
    if (!atomic_load(&watching) || atomic_fetch_add(&calls, 1) + 1 != call_to_fail)
        return false;
    failed = name;
    errno = call_error;
    return true;
}

/* --wrap=NAME: calls of NAME in the program's objects come here, __real_NAME is the library's. */
#define WRAP(type, name, parameters, arguments)             \
    extern type __real_##name parameters;                   \
    type __wrap_##name parameters;                          \
    type __wrap_##name parameters                           \
    {                                                       \
        return fails(#name) ? -1 : __real_##name arguments; \
    }

WRAP(int, fstat, (int fd, struct stat *s), (fd, s))
WRAP(int, fstatat, (int fd, const char *p, struct stat *s, int flags), (fd, p, s, flags))
WRAP(int, fsync, (int fd), (fd))
WRAP(int, linkat, (int a, const char *p, int b, const char *q, int flags), (a, p, b, q, flags))
WRAP(int, mkdir, (const char *p, mode_t mode), (p, mode))
WRAP(int, renameat, (int a, const char *p, int b, const char *q), (a, p, b, q))
WRAP(int, rmdir, (const char *p), (p))
WRAP(int, stat, (const char *p, struct stat *s), (p, s))
WRAP(int, unlinkat, (int fd, const char *p, int flags), (fd, p, flags))
WRAP(ssize_t, read, (int fd, void *bytes, size_t size), (fd, bytes, size))

/* The message of mem.c goes by write too: only a failed message would come of it. */
extern ssize_t __real_write(int fd, const void *bytes, size_t size);
ssize_t __wrap_write(int fd, const void *bytes, size_t size);
ssize_t __wrap_write(int fd, const void *bytes, size_t size)
{
    return fd > 2 && fails("write") ? -1 : __real_write(fd, bytes, size);
}

/* As on Linux, the descriptor is closed also when closing fails. */
extern int __real_close(int fd);
int __wrap_close(int fd);
int __wrap_close(int fd)
{
    const bool fail = fails("close");
    const int cause = errno, done = __real_close(fd);
    errno = fail ? cause : errno;
    return fail ? -1 : done;
}

extern int __real_open(const char *path, int flags, ...);
extern int __real_openat(int fd, const char *path, int flags, ...);
extern int __real_fcntl(int fd, int command, ...);
int __wrap_open(const char *path, int flags);
int __wrap_openat(int fd, const char *path, int flags, ...);
int __wrap_fcntl(int fd, int command, ...);

int __wrap_open(const char *path, int flags)
{
    return fails("open") ? -1 : __real_open(path, flags);
}

int __wrap_openat(int fd, const char *path, int flags, ...)
{
    mode_t mode;
    va_list rest;
    va_start(rest, flags);
    mode = flags & O_CREAT ? va_arg(rest, mode_t) : 0;
    va_end(rest);
    return fails("openat") ? -1 : __real_openat(fd, path, flags, mode);
}

int __wrap_fcntl(int fd, int command, ...)
{
    void *more;
    va_list rest;
    va_start(rest, command);
    more = command == F_GETFD ? NULL : va_arg(rest, void *);
    va_end(rest);
    return fails("fcntl") ? -1 : __real_fcntl(fd, command, more);
}

extern size_t __real_fwrite(const void *bytes, size_t size, size_t count, FILE *f);
size_t __wrap_fwrite(const void *bytes, size_t size, size_t count, FILE *f);
size_t __wrap_fwrite(const void *bytes, size_t size, size_t count, FILE *f)
{
    return f == stdout && fails("fwrite") ? 0 : __real_fwrite(bytes, size, count, f);
}

extern int __real_fflush(FILE *f);
int __wrap_fflush(FILE *f);
int __wrap_fflush(FILE *f)
{
    return fails("fflush") ? EOF : __real_fflush(f);
}

/* ---- start and end ---- */

static void report(void)
{
    const char *path = getenv("INJECT_REPORT");
    char line[128];
    atomic_store(&watching, false);
    const int fd = path ? __real_open(path, O_WRONLY | O_CREAT | O_TRUNC, 0600) : -1;
    if (fd < 0)
        return;
    const int length = snprintf(line, sizeof line, "allocations %lu calls %lu failed %s\n",
                                atomic_load(&allocations), atomic_load(&calls), failed);
    if (__real_write(fd, line, (size_t)length) != length)
        failed = "the report";
    __real_close(fd);
}

static void ask(void)
{
    const char *what = getenv("INJECT"), *error = getenv("INJECT_ERRNO");
    const char *number = what ? strchr(what, ':') : NULL;
    caller_wanted = getenv("INJECT_CALLER");
    if (error)
        call_error = (int)strtol(error, NULL, 10);
    if (number && strncmp(what, "alloc:", 6) == 0)
        allocation_to_fail = strtoul(number + 1, NULL, 10);
    if (number && strncmp(what, "io:", 3) == 0)
        call_to_fail = strtoul(number + 1, NULL, 10);
    atomic_store(&watching, true);
}

extern void __real_base_init(void);
void __wrap_base_init(void);
void __wrap_base_init(void)
{
    __real_base_init();
    ask();
}

/* The program ends by _exit where memory is refused or a signal came. */
extern _Noreturn void __real__exit(int status);
_Noreturn void __wrap__exit(int status);
_Noreturn void __wrap__exit(int status)
{
    report();
    __real__exit(status);
}

__attribute__((destructor)) static void at_the_end(void)
{
    report();
}
