/* SPDX-License-Identifier: GPL-3.0-or-later */
/* wrap.h: running text in lines of a page's width. */
#ifndef TERRACE_WRAP_H
#define TERRACE_WRAP_H

#include "base/text.h"

enum { WRAP_WIDTH = 96 };

/* Appends `s` broken at blanks so that no line passes WRAP_WIDTH columns (a longer word stays
 * whole). The first line starts with `first`, the others with as many blanks. Ends with a newline.
 */
void wrap_add(struct text *out, const char *first, const char *s);

#endif
