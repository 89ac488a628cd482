/* SPDX-License-Identifier: GPL-3.0-or-later */
/* base.c: start-up of the libraries we stand on; the end of a program by a bug or a signal. */
#include "base/base.h"

#include <cjson/cJSON.h>
#include <gsl/gsl_errno.h>
#include <openssl/crypto.h>
#include <signal.h>
#include <stdatomic.h>
#include <stdio.h>
#include <stdlib.h>
#include <unistd.h>

#include "base/mem.h"

static void *cjson_new(size_t size)
{
    return mem_grow(NULL, 1, size);
}

/* libcrypto does not survive a refused allocation everywhere: it asks at our door, too. */
static void *crypto_new(size_t size, const char *file, int line)
{
    (void)file, (void)line;
    return mem_grow(NULL, 1, size);
}

static void *crypto_grow(void *old, size_t size, const char *file, int line)
{
    (void)file, (void)line;
    return mem_grow(old, 1, size);
}

static void crypto_free(void *p, const char *file, int line)
{
    (void)file, (void)line;
    mem_free(p);
}

/* GSL's callers look at statuses; what it cannot allocate it hands on as NULL, unseen. */
static void gsl_failed(const char *reason, const char *file, int line, int number)
{
    (void)reason, (void)file, (void)line;
    if (number == GSL_ENOMEM)
        mem_exhausted();
}

void base_init(void)
{
    cJSON_Hooks hooks = {cjson_new, mem_free};

    gsl_set_error_handler(gsl_failed);
    cJSON_InitHooks(&hooks);
    CRYPTO_set_mem_functions(crypto_new, crypto_grow, crypto_free);
}

void base_bug(const char *file, int line, const char *what)
{
    fprintf(stderr, "terrace: bug at %s:%d: %s\n", file, line, what);
    abort();
}

/* ---- ends by a signal ---- */

enum { SIGNALS_FREE = 0, SIGNALS_HELD = -1, SIGNAL_BASE = 128 };

/* FREE, HELD, or the number of the signal that came while held; lock-free, as a handler needs. */
static volatile atomic_int signal_state;

static void told_to_end(int number)
{
    int held = SIGNALS_HELD;

    if (atomic_load(&signal_state) == SIGNALS_FREE)
        _exit(SIGNAL_BASE + number);
    atomic_compare_exchange_strong(&signal_state, &held, number);
}

void base_watch_signals(void)
{
    static const int watched[] = {SIGHUP, SIGINT, SIGQUIT, SIGPIPE, SIGTERM, SIGXCPU};
    struct sigaction ours = {.sa_handler = told_to_end}; /* no SA_RESTART: a blocked write ends */
    struct sigaction before;

    sigemptyset(&ours.sa_mask);
    for (size_t i = 0; i < COUNT_OF(watched); i++)
        if (sigaction(watched[i], NULL, &before) == 0 && before.sa_handler != SIG_IGN)
            sigaction(watched[i], &ours, NULL);
    signal(SIGXFSZ, SIG_IGN);
}

void base_hold_signals(void)
{
    atomic_store(&signal_state, SIGNALS_HELD);
}

int base_signal_caught(void)
{
    const int state = atomic_load(&signal_state);

    return state > 0 ? state : 0;
}

void base_release_signals(void)
{
    const int state = atomic_exchange(&signal_state, SIGNALS_FREE);

    if (state > 0)
        _exit(SIGNAL_BASE + state);
}
