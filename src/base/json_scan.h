/* SPDX-License-Identifier: GPL-3.0-or-later */
/* json_scan.h: the grammar of JSON (RFC 8259), checked before cJSON sees a byte. */
#ifndef TERRACE_JSON_SCAN_H
#define TERRACE_JSON_SCAN_H

#include <stddef.h>

#include "base/status.h"

enum { JSON_DEPTH = 64, JSON_NUMBER_CHARS = 63 /* more are cut off by cJSON */ };

/* Adds a fault with its line for each thing wrong; goes on after faults inside texts and numbers,
 * stops at a fault of the structure. `file` is for messages. Returns the highest status. */
enum status json_scan(const char *bytes, size_t length, const char *file, struct err *e);

#endif
