/* SPDX-License-Identifier: GPL-3.0-or-later */
/* file.c: whole files in, whole result directories out. */
#include "base/file.h"

#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "base/mem.h"

#define LOCK_NAME ".terrace.lock"
#define TEMPORARY ".terrace-new."
enum { READ_MOST = 1 << 30 };

/* ---- test hook ---- */

static unsigned long fail_in;
static int fail_with;

void file_fail_at(unsigned long n, int error_number)
{
    fail_in = n;
    fail_with = error_number;
}

/* true when this step is the one that a test wants to fail */
static bool fails_here(void)
{
    if (fail_in == 0 || --fail_in > 0)
        return false;
    errno = fail_with;
    return true;
}

/* ---- reading ---- */

static enum status read_all(int fd, const char *path, struct text *out, struct err *e)
{
    char buffer[65536];
    for (;;) {
        const ssize_t got = read(fd, buffer, sizeof buffer);
        if (got < 0 && errno == EINTR)
            continue;
        if (got < 0)
            return err_system(e, path, "read the file");
        if (got == 0)
            return STATUS_OK;
        if (out->length + (size_t)got > READ_MOST)
            return err_add(e, STATUS_INPUT, path, 0, NULL,
                           "the file is larger than 1 GiB, the most that is read");
        text_add_n(out, buffer, (size_t)got);
    }
}

enum status file_read(const char *path, struct text *out, struct err *e)
{
    const int fd = open(path, O_RDONLY | O_CLOEXEC);
    struct stat about;
    if (fd < 0 && (errno == ENOENT || errno == ENOTDIR))
        return err_add(e, STATUS_INPUT, path, 0, NULL, "there is no such file");
    if (fd < 0)
        return err_system(e, path, "open the file");
    enum status status = STATUS_OK;
    if (fstat(fd, &about) != 0)
        status = err_system(e, path, "examine the file");
    else if (!S_ISREG(about.st_mode))
        status = err_add(e, STATUS_INPUT, path, 0, NULL, "this is not a regular file");
    else
        status = read_all(fd, path, out, e);
    close(fd);
    return status;
}

char *file_stem(const char *path)
{
    const char *slash = strrchr(path, '/');
    const char *name = slash ? slash + 1 : path;
    const char *dot = strrchr(name, '.');
    return mem_text_n(name, dot && dot != name ? (size_t)(dot - name) : strlen(name));
}

/* ---- result directories ---- */

struct outdir {
    char *path, *main_file;
    bool made, committed, private_files;
    int directory, lock; /* descriptors, or -1 */
    size_t owned_count, count;
    char **owned; /* every file this command may have in the directory */
    char **name;  /* those written under a temporary name so far */
};

static enum status make_path(const char *path, bool *made, struct err *e)
{
    char *part = mem_text(path);
    enum status status = STATUS_OK;
    for (char *p = part + (*part != '\0'); status == STATUS_OK; p++) {
        const char was = *p;
        if (was == '\0' && p > part && p[-1] == '/')
            break; /* "results/": made already */
        if (was != '/' && was != '\0')
            continue;
        *p = '\0';
        if (mkdir(part, 0777) == 0)
            *made = true;
        else if (errno == EEXIST)
            *made = false;
        else
            status = err_system(e, part, "make the directory");
        *p = was;
        if (was == '\0')
            break;
    }
    mem_free(part);
    return status;
}

static char *temporary_name(const char *name)
{
    struct text t = TEXT_INIT;
    text_addf(&t, "%s%s", TEMPORARY, name);
    return text_take(&t);
}

static enum status take_lock(struct outdir *d, struct err *e)
{
    struct flock whole = {.l_type = F_WRLCK, .l_whence = SEEK_SET};
    d->lock = openat(d->directory, LOCK_NAME, O_RDWR | O_CREAT | O_CLOEXEC, 0600);
    if (d->lock < 0)
        return err_system(e, d->path, "write in the directory");
    if (fcntl(d->lock, F_SETLK, &whole) == 0)
        return STATUS_OK;
    close(d->lock);
    d->lock = -1;
    if (errno != EACCES && errno != EAGAIN)
        return err_system(e, d->path, "lock the directory");
    return err_add(e, STATUS_INPUT, d->path, 0, NULL,
                   "another run is writing to this directory; name another with --out");
}

static enum status refuse_finished(const struct outdir *d, bool force, struct err *e)
{
    if (force || faccessat(d->directory, d->main_file, F_OK, 0) != 0)
        return STATUS_OK;
    return err_add(e, STATUS_INPUT, d->path, 0, NULL,
                   "the directory already holds a finished result (%s); name another with --out, "
                   "or replace it with --force",
                   d->main_file);
}

enum status outdir_open(struct outdir **out, const char *path, const char *main_file,
                        const char *const *files, bool force, bool private_files, struct err *e)
{
    struct outdir *d = mem_new(1, sizeof *d);
    *d = (struct outdir){.path = mem_text(path),
                         .main_file = mem_text(main_file),
                         .private_files = private_files,
                         .directory = -1,
                         .lock = -1};
    while (files[d->owned_count])
        d->owned_count++;
    d->owned = mem_new(d->owned_count, sizeof *d->owned);
    for (size_t i = 0; i < d->owned_count; i++)
        d->owned[i] = mem_text(files[i]);
    *out = NULL;
    enum status status = make_path(path, &d->made, e);
    if (status == STATUS_OK) {
        d->directory = open(path, O_RDONLY | O_DIRECTORY | O_CLOEXEC);
        if (d->directory < 0 && errno == ENOTDIR)
            status = err_add(e, STATUS_INPUT, path, 0, NULL, "this is not a directory");
        else if (d->directory < 0)
            status = err_system(e, path, "open the directory");
    }
    if (status == STATUS_OK)
        status = refuse_finished(d, force, e);
    if (status == STATUS_OK)
        status = take_lock(d, e);
    if (status == STATUS_OK)
        *out = d;
    else
        outdir_free(d);
    return status;
}

static bool write_all(int fd, const struct text *bytes)
{
    size_t done = 0;
    while (done < bytes->length) {
        if (fails_here())
            return false;
        const ssize_t put = write(fd, text_s(bytes) + done, bytes->length - done);
        if (put < 0 && errno != EINTR)
            return false;
        done += put > 0 ? (size_t)put : 0;
    }
    return !fails_here() && fsync(fd) == 0;
}

enum status outdir_add(struct outdir *d, const char *name, const struct text *bytes, struct err *e)
{
    char *temporary = temporary_name(name);
    const mode_t mode = d->private_files ? 0600 : 0644;
    /* what a killed run left under this name has a mode, or leads to a place, of its own */
    unlinkat(d->directory, temporary, 0);
    const int fd = openat(d->directory, temporary, O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, mode);
    enum status status = STATUS_OK;
    if (fd < 0) {
        status = err_system(e, d->path, "create a file in the directory");
    } else {
        d->name = mem_grow(d->name, d->count + 1, sizeof *d->name);
        d->name[d->count++] = mem_text(name);
        if (!write_all(fd, bytes))
            status = err_system(e, d->path, "write a result file in the directory");
        if (close(fd) != 0 && status == STATUS_OK)
            status = err_system(e, d->path, "write a result file in the directory");
    }
    mem_free(temporary);
    return status;
}

static bool move_into_place(const struct outdir *d, const char *name)
{
    char *temporary = temporary_name(name);
    const bool done = !fails_here() && renameat(d->directory, temporary, d->directory, name) == 0;
    mem_free(temporary);
    return done;
}

static bool was_written(const struct outdir *d, const char *name)
{
    for (size_t i = 0; i < d->count; i++)
        if (strcmp(d->name[i], name) == 0)
            return true;
    return false;
}

/* An old main file goes first, so that a directory that holds one is always whole. */
static bool clear_old(const struct outdir *d)
{
    if (unlinkat(d->directory, d->main_file, 0) != 0 && errno != ENOENT)
        return false;
    for (size_t i = 0; i < d->owned_count; i++)
        if (!was_written(d, d->owned[i]) && unlinkat(d->directory, d->owned[i], 0) != 0 &&
            errno != ENOENT)
            return false;
    return true;
}

/* Takes back what has been moved into place: a failed run leaves no result. */
static void withdraw(const struct outdir *d)
{
    const int cause = errno;
    for (size_t i = 0; i < d->count; i++) {
        char *temporary = temporary_name(d->name[i]);
        if (faccessat(d->directory, temporary, F_OK, 0) != 0 && errno == ENOENT)
            unlinkat(d->directory, d->name[i], 0);
        mem_free(temporary);
    }
    errno = cause;
}

enum status outdir_commit(struct outdir *d, struct err *e)
{
    bool done = !fails_here() && clear_old(d);
    for (size_t i = 0; done && i < d->count; i++)
        if (strcmp(d->name[i], d->main_file) != 0)
            done = move_into_place(d, d->name[i]);
    if (done && was_written(d, d->main_file))
        done = move_into_place(d, d->main_file);
    if (done)
        done = !fails_here() && fsync(d->directory) == 0;
    if (!done) {
        withdraw(d);
        return err_system(e, d->path, "put the results into place in the directory");
    }
    d->committed = true;
    return STATUS_OK;
}

static void abandon(struct outdir *d)
{
    for (size_t i = 0; i < d->count; i++) {
        char *temporary = temporary_name(d->name[i]);
        unlinkat(d->directory, temporary, 0);
        mem_free(temporary);
    }
}

void outdir_free(struct outdir *d)
{
    if (!d)
        return;
    if (!d->committed && d->directory >= 0)
        abandon(d);
    if (d->lock >= 0) {
        unlinkat(d->directory, LOCK_NAME, 0);
        close(d->lock);
    }
    if (d->directory >= 0)
        close(d->directory);
    if (d->made && !d->committed)
        rmdir(d->path); /* only when it is empty */
    for (size_t i = 0; i < d->owned_count; i++)
        mem_free(d->owned[i]);
    for (size_t i = 0; i < d->count; i++)
        mem_free(d->name[i]);
    mem_free(d->owned);
    mem_free(d->name);
    mem_free(d->path);
    mem_free(d->main_file);
    mem_free(d);
}
