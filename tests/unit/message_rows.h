/* SPDX-License-Identifier: GPL-3.0-or-later */
/* message_rows.h: the messages of a *_messages.h header as rows, and which malformed input earns
 * each. */
#ifndef TERRACE_TEST_MESSAGE_ROWS_H
#define TERRACE_TEST_MESSAGE_ROWS_H

#include <stddef.h>

#include "base/status.h"

/* Adds the rows of directory/name.h, read from the header itself. */
void message_rows_read(const char *directory, const char *name);
/* Asserts that a fault of e, as it is printed, holds `expected`, and that no other case earned its
 * row. */
void message_rows_earn(const struct err *e, const char *expected, const char *by);
/* Asserts that every row was earned; returns how many there are. */
size_t message_rows_all_earned(void);
void message_rows_forget(void);

#endif
