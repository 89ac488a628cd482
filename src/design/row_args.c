/* SPDX-License-Identifier: GPL-3.0-or-later */
/* row_args.c: which optional keys a target rule or a measure takes, by its row (vocabulary.h). */
#include "design/row_args.h"

#include "base/base.h"
#include "base/number.h"
#include "design/design_messages.h"

static const struct {
    unsigned bit;
    const char *key;
} keys[] = {
    {ARG_FRACTION, "fraction"}, {ARG_EFFECT, "effect"}, {ARG_OF, "of"},
    {ARG_MARGIN, "margin"},     {ARG_TARGET, "target"}, {ARG_LEVEL, "level"},
    {ARG_GAIN, "gain"},         {ARG_VALUE, "value"},   {ARG_PER_ARM, "per_arm"},
    {ARG_ALPHA, "alpha"},       {ARG_SCALE, "scale"},
};

static void add_keys(struct text *out, unsigned allowed)
{
    const size_t start = out->length;

    for (size_t i = 0; i < COUNT_OF(keys); i++)
        if (allowed & keys[i].bit)
            text_addf(out, "%s%s", out->length > start ? ", " : "", keys[i].key);
    if (out->length == start)
        text_add(out, "no keys of its own");
}

void row_args_check(struct reader *r, const cJSON *tree, const char *key, unsigned allowed,
                    unsigned required, unsigned considered)
{
    struct text taken = TEXT_INIT, place = TEXT_INIT;

    text_add(&place, text_s(&r->place));
    add_keys(&taken, allowed & considered);
    for (size_t i = 0; i < COUNT_OF(keys); i++) {
        const bool given = tree_given(tree, keys[i].key);

        if ((considered & keys[i].bit) == 0)
            continue;
        if (given && (allowed & keys[i].bit) == 0) {
            reader_under(r, keys[i].key);
            reader_fault(r, MSG_ARG_NOT_TAKEN, key, keys[i].key, text_s(&taken));
            reader_at(r, "%s", text_s(&place));
        } else if (!given && (required & keys[i].bit) != 0) {
            reader_fault(r, MSG_ARG_MISSING, key, keys[i].key);
        }
    }
    text_release(&taken);
    text_release(&place);
}

bool row_args_gain(const struct reader *r)
{
    const cJSON *levels = tree_at(r->tree, "levels");

    return !cJSON_IsObject(levels) || tree_given(levels, "control") ||
           tree_given(levels, "reference");
}

bool row_args_reference_level(const struct reader *r)
{
    cJSON *levels = tree_at(r->tree, "levels");

    return !cJSON_IsObject(levels) || tree_given(levels, "control") ||
           (tree_given(levels, "reference") && !cJSON_IsNumber(tree_at(levels, "reference")));
}

bool row_args_link(struct reader *r, const cJSON *tree)
{
    struct text place = TEXT_INIT;

    if (!tree_is(tree, "scale", "link"))
        return false;
    if (r->endpoint_known && r->d->type == ENDPOINT_CONTINUOUS) {
        text_add(&place, text_s(&r->place));
        reader_under(r, "scale");
        reader_fault(r, MSG_LINK);
        reader_at(r, "%s", text_s(&place));
        text_release(&place);
    }
    return true;
}

void row_args_rate(struct reader *r, const cJSON *tree, const char *key, bool link, double low,
                   double high)
{
    struct text place = TEXT_INIT;
    char a[NUMBER_CHARS], b[NUMBER_CHARS], c[NUMBER_CHARS];
    double x;

    if (link || !r->endpoint_known || r->d->type != ENDPOINT_BINARY ||
        !tree_number(tree, key, &x) || (low < x && x < high))
        return;
    text_add(&place, text_s(&r->place));
    reader_under(r, key);
    reader_fault(r, MSG_FRACTION, number_shortest(a, x), number_shortest(b, low),
                 number_shortest(c, high));
    reader_at(r, "%s", text_s(&place));
    text_release(&place);
}
