/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fields_words.c: what a row of the field table nests, and what it takes, in words. */
#include "base/number.h"
#include "design/fields.h"
#include "design/fields_limits.h"

bool field_nested(const struct field *f, const struct vocabulary *v, size_t i, struct field *out)
{
    if (f->nested != NULL) {
        size_t rows = 0;

        for (; f->nested[rows].kind != FIELD_END; rows++) {
            if (rows == i) {
                *out = f->nested[i];
                return true;
            }
        }
        i -= rows;
    }
    return f->nested_from != NULL && f->nested_from(v, f->data, i, out);
}

const char *field_word(const struct field *f, const struct vocabulary *v, size_t i)
{
    return f->words != NULL ? f->words[i] : f->words_from(v, i);
}

bool field_has_control(const char *s)
{
    for (; *s != '\0'; s++) {
        const unsigned char c = (unsigned char)*s, next = (unsigned char)s[1];

        if (c < 0x20 || c == 0x7F || (c == 0xC2 && next >= 0x80 && next <= 0x9F))
            return true; /* C1 controls are U+0080 to U+009F */
    }
    return false;
}

static void add_number(struct text *out, double x)
{
    char spare[NUMBER_CHARS];

    text_add(out, number_shortest(spare, x));
}

void field_range(const struct field *f, struct text *out)
{
    if (f->kind != FIELD_WHOLE && f->low <= -NUMBER_LIMIT && f->high >= NUMBER_LIMIT) {
        text_add(out, "within 1e100 of 0");
        return;
    }
    if (f->low >= f->high) {
        add_number(out, f->low);
        return;
    }
    if (f->high < COUNT_LIMIT && !f->low_open && !f->high_open) {
        text_add(out, "from ");
        add_number(out, f->low);
        text_add(out, " to ");
        add_number(out, f->high);
        return;
    }
    text_add(out, f->low_open ? "greater than " : "at least ");
    add_number(out, f->low);
    text_add(out, f->high_open ? " and less than " : " and at most ");
    add_number(out, f->high);
}

void field_count(const struct field *f, struct text *out)
{
    text_add(out, f->low < f->high ? "from " : "exactly ");
    add_number(out, f->low);
    if (f->low < f->high) {
        text_add(out, " to ");
        add_number(out, f->high);
    }
}

void field_words(const struct field *f, const struct vocabulary *v, struct text *out)
{
    for (size_t i = 0; field_word(f, v, i) != NULL; i++)
        text_addf(out, "%s%s", i > 0 ? ", " : "", field_word(f, v, i));
}

void field_describe(const struct field *f, const struct vocabulary *v, struct text *out)
{
    static const char *const plain[] = {
        [FIELD_TEXT] = "a string",        [FIELD_NUMBER] = "a number",
        [FIELD_WHOLE] = "a whole number", [FIELD_LIST] = "a list",
        [FIELD_FLAG] = "true or false",   [FIELD_OBJECT] = "an object",
        [FIELD_MAP] = "an object",        [FIELD_WORD] = "one of the words ",
    };
    struct field option;

    if (f->kind != FIELD_CHOICE) {
        text_add(out, plain[f->kind]);
        if (f->kind == FIELD_WORD)
            field_words(f, v, out);
        return;
    }
    for (size_t i = 0; field_nested(f, v, i, &option); i++) {
        if (option.tag != NULL)
            continue; /* said by the last alternative */
        if (i > 0 && f->nested[i - 1].tag == NULL)
            text_add(out, " or ");
        field_describe(&option, v, out);
    }
}
