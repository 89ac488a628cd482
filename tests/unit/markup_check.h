/* SPDX-License-Identifier: GPL-3.0-or-later */
/* markup_check.h: whether a page is well formed: every tag closed in order, attributes quoted and
 * unique, every & an entity, no id twice. Stricter than HTML asks. */
#ifndef TERRACE_MARKUP_CHECK_H
#define TERRACE_MARKUP_CHECK_H

#include <stdbool.h>
#include <stddef.h>

/* True when well formed; else prints what is wrong and where, and returns false. */
bool markup_is_sound(const char *page);

size_t markup_count(const char *text, const char *word); /* occurrences, without overlap */

#endif
