/* SPDX-License-Identifier: GPL-3.0-or-later */
/* row_words.h: phrases that the sentences of target rules and measures share. */
#ifndef TERRACE_ROW_WORDS_H
#define TERRACE_ROW_WORDS_H

#include <stdbool.h>

#include "base/text.h"
#include "design/design.h"

/* "active " where there is a control, else "". */
const char *active_word(const struct design *d);
void add_shortest_number(struct text *out, double x);
/* " over Placebo", " over the reference 0.3", or nothing. */
void add_over_reference(struct text *out, const struct design *d);
/* " (log-odds)" on the link scale, else nothing. */
void add_scale_words(struct text *out, bool link);
/* "the level selected for ED90" */
void add_selected(struct text *out, const struct design *d, int target);

#endif
