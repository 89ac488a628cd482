/* SPDX-License-Identifier: GPL-3.0-or-later */
/* manual.h: the manual page and the shell completion, made from the table of commands and their
 * options; a build writes them to files. */
#ifndef TERRACE_MANUAL_H
#define TERRACE_MANUAL_H

#include "base/text.h"

void manual_page(struct text *out);       /* man(7) */
void manual_completion(struct text *out); /* bash */

#endif
