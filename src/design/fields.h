/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fields.h: the field table: one row says all there is to say about one field of the design file.
 *
 * Parser, range check, message, default and JSON Schema are read off the same row, so that for one
 * field they cannot disagree. What depends on several fields or on several elements of a list is no
 * row: it is a named rule (rules.h).
 */
#ifndef TERRACE_FIELDS_H
#define TERRACE_FIELDS_H

#include <cjson/cJSON.h>
#include <stdbool.h>
#include <stddef.h>

#include "base/status.h"
#include "base/text.h"
#include "design/vocabulary.h"

enum field_kind {
    FIELD_END,    /* ends a list of rows */
    FIELD_TEXT,   /* a string without control characters */
    FIELD_WORD,   /* one of some fixed words */
    FIELD_NUMBER, /* any number in the range */
    FIELD_WHOLE,  /* a whole number in the range */
    FIELD_FLAG,   /* true or false */
    FIELD_OBJECT, /* fixed keys: the nested rows; `note` may stand there too */
    FIELD_MAP,    /* free keys, every value by the one nested row */
    FIELD_LIST,   /* every element by the one nested row */
    FIELD_CHOICE  /* by the one nested row whose JSON type, or for objects whose tag, is met */
};

struct field;

/* The i-th row that is not written in the table but taken from another list (curves, priors, rules,
 * measures). False behind the last. */
typedef bool (*field_source)(const struct vocabulary *v, const void *data, size_t i,
                             struct field *out);
/* The same for words. NULL behind the last. */
typedef const char *(*word_source)(const struct vocabulary *v, size_t i);

struct field {
    const char *key; /* NULL for elements and alternatives */
    enum field_kind kind;
    bool required;
    double low, high;         /* numbers: the range; texts: low = 1 forbids the empty string; lists:
                                 the number of elements */
    bool low_open, high_open; /* the bound itself is out */
    double multiple_of;       /* whole numbers; 0: no demand */
    bool elsewhere; /* texts: `any`, `best`, `none` have a meaning of their own, refused */
    const char *const *words;   /* FIELD_WORD: fixed words, NULL-terminated; or */
    word_source words_from;     /* words of another list */
    const struct field *nested; /* rows ended by FIELD_END */
    field_source nested_from;   /* more rows */
    const void *data;           /* for nested_from */
    const char *const *one_of;  /* objects: exactly one of these keys, NULL-terminated */
    bool one_member;            /* objects: exactly one of the nested rows' keys */
    const char *tag;       /* alternatives: the object has this member; NULL: the last resort */
    const char *fallback;  /* default as JSON, filled in where the field is absent */
    const char *otherwise; /* default that a rule works out, in words */
    const char *unit;      /* for people; NULL: none */
    const char *when;      /* when it is needed or may stand, where that is a rule */
    const char *help;      /* what it is, for people */
    const char *shared;    /* name of this row among the schema's $defs */
    bool unresolved;       /* left out of the resolved design ("$schema") */
};

/* The whole file. */
extern const struct field design_fields;

/* The i-th row nested in f, table rows first. False behind the last. */
bool field_nested(const struct field *f, const struct vocabulary *v, size_t i, struct field *out);
/* The i-th word of a FIELD_WORD, or NULL. */
const char *field_word(const struct field *f, const struct vocabulary *v, size_t i);

/* "a number", "a list", ...: what the row takes, for messages. */
void field_describe(const struct field *f, const struct vocabulary *v, struct text *out);
/* The range of a number in words: "greater than 0 and at most 1". */
void field_range(const struct field *f, struct text *out);
/* The number of entries of a list: "from 2 to 128", "exactly 2". */
void field_count(const struct field *f, struct text *out);
/* The words of a FIELD_WORD, separated by commas. */
void field_words(const struct field *f, const struct vocabulary *v, struct text *out);

/* Reserved words of labels, NULL-terminated. */
extern const char *const field_reserved[];

/* Checks `tree` against `row` and makes it the clean tree that rules work on: notes are taken out,
 * defaults of the table are put in, and every faulty or missing required value is a JSON null
 * (which no field allows), so that rules can tell "faulty, already said" from "absent". One fault
 * per violation is added, with its JSON pointer. */
void fields_check(cJSON *tree, const struct field *row, const struct vocabulary *v,
                  const char *file, struct err *e);

/* Whether a text has control characters (C0, DEL, C1). */
bool field_has_control(const char *s);

#endif
