/* SPDX-License-Identifier: GPL-3.0-or-later */
/* file.c: whole files in, whole result directories out. */
#include "base/file.h"

#include <errno.h>
#include <fcntl.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "base/base.h"
#include "base/mem.h"

#define LOCK_NAME ".terrace.lock"
#define TEMPORARY ".terrace-new."
#define OLD ".terrace-old."
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

/* One file that the command may have in the directory, under its three names. */
struct owned_file {
    char *name, *temporary, *old;
    bool written;   /* stands under the temporary name */
    bool moved;     /* has been renamed into place */
    bool put_aside; /* an older one stands under the old name */
};

struct outdir {
    char *path, *main_file;
    char *part;       /* room for one part of the path */
    size_t made_from; /* length of the part of the path that was there before */
    bool force, private_files, claimed, committed;
    int directory, lock; /* descriptors, or -1 */
    size_t count;
    struct owned_file *file; /* main_file first */
};

static char *hidden_name(const char *before, const char *name)
{
    struct text t = TEXT_INIT;
    text_addf(&t, "%s%s", before, name);
    return text_take(&t);
}

static void list_files(struct outdir *d, const char *const *files)
{
    while (files[d->count])
        d->count++;
    d->file = mem_new(d->count, sizeof *d->file);
    size_t next = 1;
    for (size_t i = 0; i < d->count; i++) {
        const bool is_main = strcmp(files[i], d->main_file) == 0;
        if (next == d->count && !is_main)
            BUG("a result directory without its main file");
        struct owned_file *f = &d->file[is_main ? 0 : next++];
        f->name = mem_text(files[i]);
        f->temporary = hidden_name(TEMPORARY, files[i]);
        f->old = hidden_name(OLD, files[i]);
    }
}

static bool is_there(const struct outdir *d, const char *name)
{
    struct stat about;
    return fstatat(d->directory, name, &about, AT_SYMLINK_NOFOLLOW) == 0;
}

static enum status refuse_finished(const struct outdir *d, struct err *e)
{
    if (d->force)
        return STATUS_OK;
    errno = ENOENT;
    if (!is_there(d, d->main_file))
        return errno == ENOENT ? STATUS_OK : err_system(e, d->path, "look into the directory");
    return err_add(e, STATUS_INPUT, d->path, 0, NULL,
                   "the directory already holds a finished result (%s); name another with --out, "
                   "or replace it with --force",
                   d->main_file);
}

/* Opens the directory if it is there. */
static enum status look(struct outdir *d, struct err *e)
{
    struct stat about;
    if (*d->path == '\0')
        return err_add(e, STATUS_INPUT, NULL, 0, NULL, "the name of the directory is empty");
    d->directory = open(d->path, O_RDONLY | O_DIRECTORY | O_CLOEXEC);
    if (d->directory >= 0)
        return refuse_finished(d, e);
    if (errno == ENOENT)
        return STATUS_OK;
    if (errno == ENOTDIR && stat(d->path, &about) == 0)
        return err_add(e, STATUS_INPUT, d->path, 0, NULL, "this is not a directory");
    return err_system(e, d->path, "open the directory");
}

enum status outdir_open(struct outdir **out, const char *path, const char *main_file,
                        const char *const *files, bool force, bool private_files, struct err *e)
{
    struct outdir *d = mem_new(1, sizeof *d);
    *d = (struct outdir){.path = mem_text(path),
                         .part = mem_text(path),
                         .made_from = SIZE_MAX,
                         .main_file = mem_text(main_file),
                         .force = force,
                         .private_files = private_files,
                         .directory = -1,
                         .lock = -1};
    list_files(d, files);
    const enum status status = look(d, e);
    *out = status == STATUS_OK ? d : NULL;
    if (status != STATUS_OK)
        outdir_free(d);
    return status;
}

/* ---- the claim ---- */

/* The path's part that ends before its first slash at or after `from`, or the whole; its length. */
static size_t part_of(const struct outdir *d, size_t from)
{
    from += strspn(d->path + from, "/");
    from += strcspn(d->path + from, "/");
    memcpy(d->part, d->path, from);
    d->part[from] = '\0';
    return from;
}

static enum status make_path(struct outdir *d, struct err *e)
{
    size_t before = 0, end = part_of(d, 0);
    for (; end > before; before = end, end = part_of(d, end)) {
        if (d->part[end - 1] == '/')
            break; /* slashes at the end */
        if (fails_here() || mkdir(d->part, 0777) != 0) {
            if (errno != EEXIST)
                return err_system(e, d->part, "make the directory");
        } else if (d->made_from == SIZE_MAX) {
            d->made_from = before;
        }
    }
    d->directory = open(d->path, O_RDONLY | O_DIRECTORY | O_CLOEXEC);
    return d->directory >= 0 ? STATUS_OK : err_system(e, d->path, "open the directory");
}

/* Whether the file locked is still the one that others find: one who ends removes it. */
static bool lock_is_found(const struct outdir *d)
{
    struct stat ours, found;
    return fstat(d->lock, &ours) == 0 &&
           fstatat(d->directory, LOCK_NAME, &found, AT_SYMLINK_NOFOLLOW) == 0 &&
           ours.st_ino == found.st_ino && ours.st_dev == found.st_dev;
}

static enum status take_lock(struct outdir *d, struct err *e)
{
    for (;;) {
        struct flock whole = {.l_type = F_WRLCK, .l_whence = SEEK_SET};
        d->lock = openat(d->directory, LOCK_NAME, O_RDWR | O_CREAT | O_CLOEXEC | O_NOFOLLOW, 0600);
        if (d->lock < 0)
            return err_system(e, d->path, "write in the directory");
        const bool locked = fcntl(d->lock, F_SETLK, &whole) == 0;
        if (locked && lock_is_found(d))
            return STATUS_OK;
        const int cause = errno;
        const bool taken = !locked && (cause == EACCES || cause == EAGAIN);
        if (!locked && !taken)
            unlinkat(d->directory, LOCK_NAME, 0); /* nobody can lock here */
        close(d->lock);
        d->lock = -1;
        if (locked)
            continue;
        errno = cause;
        if (!taken)
            return err_system(e, d->path, "lock the directory");
        return err_add(e, STATUS_INPUT, d->path, 0, NULL,
                       "another run is writing to this directory; name another with --out");
    }
}

/* Puts back what stands aside, main file last, so that a directory that holds one is whole. Until
 * then the others keep their old names too (where the file system has links): a main file aside
 * means that all of the older result is aside. */
static bool put_back(struct outdir *d)
{
    const int dir = d->directory;
    for (size_t i = d->count; i-- > 0;) {
        const struct owned_file *f = &d->file[i];
        if (!f->put_aside)
            continue;
        if (fails_here())
            return false;
        unlinkat(dir, f->name, 0);
        if ((i == 0 || linkat(dir, f->old, dir, f->name, 0) != 0) &&
            renameat(dir, f->old, dir, f->name) != 0)
            return false;
    }
    for (size_t i = 1; i < d->count; i++)
        if (d->file[i].put_aside)
            unlinkat(dir, d->file[i].old, 0);
    return true;
}

/* A run killed in the middle of its commit left an older result aside: without a main file it is
 * the valid one, beside a main file it is done with. */
static enum status set_right(struct outdir *d, struct err *e)
{
    const bool replaced = is_there(d, d->main_file);
    const bool whole = is_there(d, d->file[0].old);
    for (size_t i = 0; i < d->count; i++) {
        struct owned_file *f = &d->file[i];
        f->put_aside = whole && !replaced && is_there(d, f->old);
        if (replaced)
            unlinkat(d->directory, f->old, 0);
        else if (whole && !f->put_aside)
            unlinkat(d->directory, f->name, 0); /* of the run that was killed */
    }
    if (!put_back(d))
        return err_system(e, d->path, "put an earlier result back in the directory");
    for (size_t i = 0; i < d->count; i++)
        d->file[i].put_aside = false;
    return STATUS_OK;
}

enum status outdir_claim(struct outdir *d, struct err *e)
{
    enum status status = STATUS_OK;
    if (d->claimed)
        return STATUS_OK;
    d->claimed = true;
    base_hold_signals();
    if (d->directory < 0)
        status = make_path(d, e);
    if (status == STATUS_OK)
        status = take_lock(d, e);
    if (status == STATUS_OK)
        status = set_right(d, e);
    return status == STATUS_OK ? refuse_finished(d, e) : status;
}

/* ---- files ---- */

static bool write_all(int fd, const struct text *bytes)
{
    size_t done = 0;
    while (done < bytes->length) {
        if (fails_here())
            return false;
        const ssize_t put = write(fd, text_s(bytes) + done, bytes->length - done);
        if (put < 0 && (errno != EINTR || base_signal_caught() != 0))
            return false;
        done += put > 0 ? (size_t)put : 0;
    }
    return !fails_here() && fsync(fd) == 0;
}

static struct owned_file *find_file(const struct outdir *d, const char *name)
{
    for (size_t i = 0; i < d->count; i++)
        if (strcmp(d->file[i].name, name) == 0)
            return &d->file[i];
    BUG("a result file that its command does not list");
}

enum status outdir_add(struct outdir *d, const char *name, const struct text *bytes, struct err *e)
{
    struct owned_file *f = find_file(d, name);
    const enum status status = outdir_claim(d, e);
    if (status != STATUS_OK)
        return status;
    /* what a killed run left under this name has a mode, or leads to a place, of its own */
    unlinkat(d->directory, f->temporary, 0);
    const int fd = openat(d->directory, f->temporary, O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC,
                          d->private_files ? 0600 : 0644);
    if (fd < 0)
        return err_system(e, d->path, "create a file in the directory");
    f->written = true;
    const bool whole = write_all(fd, bytes);
    const int cause = errno;
    const bool closed = close(fd) == 0;
    if (whole && closed)
        return STATUS_OK;
    errno = whole ? errno : cause;
    return err_system(e, d->path, "write a result file in the directory");
}

/* ---- the commit ---- */

/* An old main file goes first, so that a directory that holds one is always whole. */
static bool put_old_aside(struct outdir *d)
{
    for (size_t i = 0; i < d->count; i++) {
        struct owned_file *f = &d->file[i];
        if (fails_here())
            return false;
        f->put_aside = renameat(d->directory, f->name, d->directory, f->old) == 0;
        if (!f->put_aside && errno != ENOENT)
            return false;
    }
    return true;
}

static bool move_into_place(struct outdir *d)
{
    for (size_t i = d->count; i-- > 0;) {
        struct owned_file *f = &d->file[i];
        if (!f->written)
            continue;
        if (fails_here() || renameat(d->directory, f->temporary, d->directory, f->name) != 0)
            return false;
        f->written = false;
        f->moved = true;
    }
    return true;
}

/* Takes back what has been moved into place and puts the older result there again. */
static enum status withdraw(struct outdir *d, struct err *e)
{
    const int cause = errno;
    for (size_t i = 0; i < d->count; i++)
        if (d->file[i].moved)
            unlinkat(d->directory, d->file[i].name, 0);
    const bool back = put_back(d);
    errno = cause;
    err_system(e, d->path, "put the results into place in the directory");
    if (!back)
        err_add(e, STATUS_SYSTEM, d->path, 0, NULL,
                "the earlier result could not be put back; it is kept in files named " OLD
                "NAME, and the next run into this directory puts it back");
    return STATUS_SYSTEM;
}

static void unlock(struct outdir *d)
{
    if (d->lock >= 0) {
        unlinkat(d->directory, LOCK_NAME, 0); /* while it is held: see lock_is_found */
        close(d->lock);
    }
    d->lock = -1;
}

enum status outdir_commit(struct outdir *d, struct err *e)
{
    const enum status status = outdir_claim(d, e);
    if (status != STATUS_OK)
        return status;
    errno = EINTR;
    if (base_signal_caught() != 0 || fails_here() || !put_old_aside(d) || !move_into_place(d) ||
        fails_here() || fsync(d->directory) != 0)
        return withdraw(d, e);
    d->committed = true;
    for (size_t i = 0; i < d->count; i++)
        if (d->file[i].put_aside)
            unlinkat(d->directory, d->file[i].old, 0);
    unlock(d);
    return STATUS_OK;
}

/* ---- the end ---- */

static void remove_made(const struct outdir *d)
{
    for (size_t end = strlen(d->path); end > d->made_from; end--) {
        if (d->path[end] != '\0' && d->path[end] != '/')
            continue;
        memcpy(d->part, d->path, end);
        d->part[end] = '\0';
        if (rmdir(d->part) != 0 && errno != ENOENT)
            return; /* not empty: another's, or another run's */
    }
}

static void abandon(const struct outdir *d)
{
    for (size_t i = 0; i < d->count; i++)
        if (d->file[i].written)
            unlinkat(d->directory, d->file[i].temporary, 0);
}

static void release_names(struct outdir *d)
{
    for (size_t i = 0; i < d->count; i++) {
        mem_free(d->file[i].name);
        mem_free(d->file[i].temporary);
        mem_free(d->file[i].old);
    }
    mem_free(d->file);
    mem_free(d->path);
    mem_free(d->part);
    mem_free(d->main_file);
    mem_free(d);
}

void outdir_free(struct outdir *d)
{
    if (!d)
        return;
    const bool claimed = d->claimed;
    abandon(d);
    unlock(d);
    if (d->directory >= 0)
        close(d->directory);
    if (d->made_from != SIZE_MAX && !d->committed)
        remove_made(d);
    release_names(d);
    if (claimed)
        base_release_signals();
}
