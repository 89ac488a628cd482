/* SPDX-License-Identifier: GPL-3.0-or-later */
/* terminal.c: what the process is attached to: terminals, processors, standard output. */
/* sched_getaffinity is Linux's own. */
#undef _GNU_SOURCE
#define _GNU_SOURCE
#include <errno.h>
#include <fcntl.h>
#include <sched.h>
#include <stdio.h>
#include <stdlib.h>
#include <unistd.h>

#include "command/command.h"

/* https://no-color.org: present and not empty. */
static bool no_color(void)
{
    const char *value = getenv("NO_COLOR");
    return value && *value;
}

/* A terminal that says it cannot colour is taken at its word. */
static bool terminal_colours(int descriptor)
{
    const char *kind = getenv("TERM");
    bool dumb = !kind || (kind[0] == 'd' && kind[1] == 'u' && kind[2] == 'm' && kind[3] == 'b' &&
                          kind[4] == '\0');
    return isatty(descriptor) && !dumb && !no_color();
}

void terminal_open_descriptors(void)
{
    for (int fd = STDIN_FILENO; fd <= STDERR_FILENO; fd++) {
        if (fcntl(fd, F_GETFD) == -1 && errno == EBADF &&
            open("/dev/null", fd == STDIN_FILENO ? O_WRONLY : O_RDONLY) < 0) {
            return; /* no /dev/null: as it was */
        }
    }
}

struct terminal terminal_look(const struct options *o)
{
    struct terminal t;
    t.out_colour = terminal_colours(STDOUT_FILENO);
    t.progress = options_has(o, "progress") || (isatty(STDERR_FILENO) && !options_has(o, "quiet"));
    return t;
}

enum status output_write(const struct text *bytes, struct err *e)
{
    errno = 0;
    size_t written = fwrite(text_s(bytes), 1, bytes->length, stdout);
    if (written != bytes->length || fflush(stdout) != 0) {
        return err_system(e, NULL, "write to standard output");
    }
    return STATUS_OK;
}

void output_note(const char *line)
{
    fprintf(stderr, "%s\n", line);
}

int threads_wanted(const struct options *o)
{
    double asked = options_number(o, "threads", 0);
    if (asked >= 1) {
        return (int)asked;
    }
    cpu_set_t set;
    CPU_ZERO(&set);
    if (sched_getaffinity(0, sizeof set, &set) != 0) {
        return 1; /* more processors than the set holds: one thread is always right */
    }
    int count = CPU_COUNT(&set);
    return count > 0 ? count : 1;
}
