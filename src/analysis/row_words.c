/* SPDX-License-Identifier: GPL-3.0-or-later */
/* row_words.c: phrases that the sentences of target rules and measures share. */
#include "analysis/row_words.h"

#include "base/number.h"

const char *active_word(const struct design *d)
{
    return d->control >= 0 ? "active " : "";
}

void add_shortest_number(struct text *out, double x)
{
    char s[NUMBER_CHARS];
    text_add(out, number_shortest(s, x));
}

void add_over_reference(struct text *out, const struct design *d)
{
    if (d->reference_level >= 0) {
        text_addf(out, " over %s", d->level[d->reference_level].label);
    } else if (d->has_reference_number) {
        text_add(out, " over the reference ");
        add_shortest_number(out, d->reference_number);
    }
}

void add_scale_words(struct text *out, bool link)
{
    if (link)
        text_add(out, " (log-odds)");
}

void add_selected(struct text *out, const struct design *d, int target)
{
    text_addf(out, "the level selected for %s", d->target[target].name);
}
