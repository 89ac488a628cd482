/* SPDX-License-Identifier: GPL-3.0-or-later */
/* base.h: what every room may rely on: start-up, version, BUG(), ends by a signal. */
#ifndef TERRACE_BASE_H
#define TERRACE_BASE_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#define TERRACE_VERSION "0.1.0"
#define TERRACE_PROGRAM "terrace " TERRACE_VERSION

#define COUNT_OF(array) (sizeof(array) / sizeof((array)[0]))

/* A broken promise between two rooms of this program: our bug, never the user's. Aborts. */
#define BUG(what) base_bug(__FILE__, __LINE__, (what))

/* Gives the libraries our door to malloc and switches off GSL's aborting error handler. Call once
 * at the start of a program (or of a test) that uses libterrace.a, before any other function. */
void base_init(void);

_Noreturn void base_bug(const char *file, int line, const char *what);

/* A process that is told to end (Ctrl-C, a closed pipe, ...) ends at once with status 128 + the
 * signal's number; between hold and release, where files stand half-written under temporary names,
 * only at the release, so that they can be taken back. Hold does not nest.
 *
 *   base_watch_signals    installs the handler; a file that may not grow is then a failed write
 *   base_signal_caught    number of the signal that came since the hold, or 0: finish early
 *   base_release_signals  ends the process if one came */
void base_watch_signals(void);
void base_hold_signals(void);
int base_signal_caught(void);
void base_release_signals(void);

#endif
