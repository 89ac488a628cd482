/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fields.c: reads a JSON tree against the field table. */
#include "design/fields.h"

#include <math.h>
#include <string.h>

#include "base/json_read.h"
#include "base/mem.h"
#include "base/number.h"
#include "design/design_messages.h"

/* Where the check stands. */
struct walk {
    const struct vocabulary *v;
    const char *file;
    struct err *e;
    struct text pointer;
};

#define FAULT(w, ...) \
    ((void)err_add((w)->e, STATUS_INPUT, (w)->file, 0, text_s(&(w)->pointer), __VA_ARGS__))

static const char *json_type(const cJSON *item)
{
    if (cJSON_IsString(item))
        return "a string";
    if (cJSON_IsNumber(item))
        return "a number";
    if (cJSON_IsArray(item))
        return "a list";
    if (cJSON_IsObject(item))
        return "an object";
    if (cJSON_IsBool(item))
        return cJSON_IsTrue(item) ? "true" : "false";
    return "null";
}

/* --- leaves --- */

static bool has_type(const struct field *f, const cJSON *item)
{
    switch (f->kind) {
    case FIELD_TEXT:
    case FIELD_WORD:
        return cJSON_IsString(item);
    case FIELD_NUMBER:
    case FIELD_WHOLE:
        return cJSON_IsNumber(item);
    case FIELD_FLAG:
        return cJSON_IsBool(item);
    case FIELD_LIST:
        return cJSON_IsArray(item);
    case FIELD_OBJECT:
    case FIELD_MAP:
        return cJSON_IsObject(item) &&
               (f->tag == NULL || cJSON_GetObjectItemCaseSensitive(item, f->tag) != NULL);
    case FIELD_CHOICE:
    case FIELD_END:
        break;
    }
    return true;
}

static bool is_reserved(const char *s)
{
    for (size_t i = 0; field_reserved[i] != NULL; i++)
        if (strcmp(s, field_reserved[i]) == 0)
            return true;
    return false;
}

static bool check_text(struct walk *w, const struct field *f, const char *s)
{
    if (f->low > 0 && s[0] == '\0')
        FAULT(w, MSG_EMPTY);
    else if (field_has_control(s))
        FAULT(w, MSG_CONTROL);
    else if (f->elsewhere && is_reserved(s))
        FAULT(w, MSG_RESERVED, s);
    else
        return true;
    return false;
}

static bool check_word(struct walk *w, const struct field *f, const char *s)
{
    struct text allowed = TEXT_INIT;
    const char *list[64], *near;
    size_t count = 0;

    for (; field_word(f, w->v, count) != NULL && count + 1 < 64; count++) {
        list[count] = field_word(f, w->v, count);
        if (strcmp(s, list[count]) == 0)
            return true;
    }
    list[count] = NULL;
    field_words(f, w->v, &allowed);
    near = text_nearest(s, list);
    if (near != NULL)
        FAULT(w, MSG_WORD_NEAR, s, near, text_s(&allowed));
    else
        FAULT(w, MSG_WORD, s, text_s(&allowed));
    text_release(&allowed);
    return false;
}

static bool check_number(struct walk *w, const struct field *f, double x)
{
    struct text range = TEXT_INIT;
    char a[NUMBER_CHARS], b[NUMBER_CHARS];

    if (f->kind == FIELD_WHOLE && floor(x) != x) {
        FAULT(w, MSG_WHOLE, number_shortest(a, x));
        return false;
    }
    if (x < f->low || x > f->high || (f->low_open && x <= f->low) ||
        (f->high_open && x >= f->high)) {
        field_range(f, &range);
        FAULT(w, MSG_RANGE, number_shortest(a, x), text_s(&range));
        text_release(&range);
        return false;
    }
    if (f->multiple_of > 0 && floor(x / f->multiple_of) * f->multiple_of != x) {
        FAULT(w, MSG_MULTIPLE, number_shortest(a, x), number_shortest(b, f->multiple_of));
        return false;
    }
    return true;
}

/* --- the tree --- */

/* Makes a faulty value the null that means "already said". */
static void spoil(cJSON *item)
{
    cJSON_Delete(item->child);
    item->child = NULL;
    item->type = (item->type & ~0xFF) | cJSON_NULL;
}

static void put(cJSON *object, const char *key, cJSON *item)
{
    if (item == NULL || !cJSON_AddItemToObject(object, key, item))
        mem_exhausted();
}

static void cut(struct text *pointer, size_t length)
{
    pointer->length = length;
    pointer->s[length] = '\0';
}

static bool check_value(struct walk *w, const struct field *f, cJSON *item);

static bool row_find(const struct field *f, const struct vocabulary *v, const char *key,
                     struct field *out)
{
    for (size_t i = 0; field_nested(f, v, i, out); i++)
        if (strcmp(out->key, key) == 0)
            return true;
    return false;
}

static void unknown_key(struct walk *w, const struct field *f, const char *key)
{
    enum { KEYS = 96 };
    struct text known = TEXT_INIT;
    const char *list[KEYS + 2], *near;
    struct field row;
    size_t count = 0;

    for (; count < KEYS && field_nested(f, w->v, count, &row); count++) {
        list[count] = row.key;
        text_addf(&known, "%s, ", row.key);
    }
    text_add(&known, "note");
    list[count] = "note";
    list[count + 1] = NULL;
    near = text_nearest(key, list);
    if (near != NULL)
        FAULT(w, MSG_KEY_NEAR, key, near);
    else
        FAULT(w, MSG_KEY, key, text_s(&known));
    text_release(&known);
}

/* One member of an object with fixed keys; true when it must leave the tree. */
static bool check_member(struct walk *w, const struct field *f, cJSON *item)
{
    static const struct field note = {.key = "note", .kind = FIELD_TEXT};
    const size_t length = w->pointer.length;
    struct field row;
    bool leaves = false;

    json_pointer_add(&w->pointer, item->string);
    if (row_find(f, w->v, item->string, &row)) {
        if (!check_value(w, &row, item))
            spoil(item);
        leaves = row.unresolved;
    } else {
        leaves = true;
        if (strcmp(item->string, note.key) != 0)
            unknown_key(w, f, item->string);
        else if (!cJSON_IsString(item))
            FAULT(w, MSG_TYPE, "a string", json_type(item));
    }
    cut(&w->pointer, length);
    return leaves;
}

static void fill_absent(struct walk *w, const struct field *f, cJSON *object)
{
    struct field row;

    for (size_t i = 0; field_nested(f, w->v, i, &row); i++) {
        cJSON *item;

        if (cJSON_GetObjectItemCaseSensitive(object, row.key) != NULL)
            continue;
        if (row.required) {
            FAULT(w, MSG_MISSING, row.key, row.help);
            put(object, row.key, cJSON_CreateNull());
        } else if (row.fallback != NULL) {
            item = cJSON_Parse(row.fallback);
            put(object, row.key, item);
            check_value(w, &row, item); /* fills in the defaults inside */
        }
    }
}

/* Exactly one of the keys of one_of, or of all rows (one_member). */
static bool check_one_of(struct walk *w, const struct field *f, const cJSON *object)
{
    struct text keys = TEXT_INIT;
    struct field row;
    const char *key;
    char spare[NUMBER_CHARS];
    size_t given = 0;

    for (size_t i = 0;; i++) {
        if (f->one_of != NULL)
            key = f->one_of[i];
        else
            key = field_nested(f, w->v, i, &row) ? row.key : NULL;
        if (key == NULL)
            break;
        given += cJSON_GetObjectItemCaseSensitive(object, key) != NULL;
        text_addf(&keys, "%s%s", i > 0 ? ", " : "", key);
    }
    if (given != 1)
        FAULT(w, MSG_ONE_OF, text_s(&keys), number_shortest(spare, (double)given));
    text_release(&keys);
    return given == 1;
}

static bool check_object(struct walk *w, const struct field *f, cJSON *object)
{
    cJSON *item = object->child;

    while (item != NULL) {
        cJSON *next = item->next;

        if (check_member(w, f, item))
            cJSON_Delete(cJSON_DetachItemViaPointer(object, item));
        item = next;
    }
    fill_absent(w, f, object);
    return (f->one_of == NULL && !f->one_member) || check_one_of(w, f, object);
}

static bool check_map(struct walk *w, const struct field *f, cJSON *object)
{
    static const struct field name = {.kind = FIELD_TEXT, .low = 1};
    const size_t length = w->pointer.length;
    bool names = true;
    cJSON *item;

    cJSON_ArrayForEach(item, object)
    {
        json_pointer_add(&w->pointer, item->string);
        names = check_text(w, &name, item->string) && names;
        if (!check_value(w, f->nested, item))
            spoil(item);
        cut(&w->pointer, length);
    }
    return names;
}

static bool check_list(struct walk *w, const struct field *f, cJSON *list)
{
    const size_t length = w->pointer.length;
    struct text allowed = TEXT_INIT;
    size_t count = 0;
    cJSON *item;

    cJSON_ArrayForEach(item, list)
    {
        json_pointer_add_index(&w->pointer, count++);
        if (!check_value(w, f->nested, item))
            spoil(item);
        cut(&w->pointer, length);
    }
    if ((double)count >= f->low && (double)count <= f->high)
        return true;
    field_count(f, &allowed);
    FAULT(w, MSG_COUNT, count, text_s(&allowed));
    text_release(&allowed);
    return false;
}

static bool check_typed(struct walk *w, const struct field *f, cJSON *item)
{
    switch (f->kind) {
    case FIELD_TEXT:
        return check_text(w, f, item->valuestring);
    case FIELD_WORD:
        return check_word(w, f, item->valuestring);
    case FIELD_NUMBER:
    case FIELD_WHOLE:
        return check_number(w, f, item->valuedouble);
    case FIELD_OBJECT:
        return check_object(w, f, item);
    case FIELD_MAP:
        return check_map(w, f, item);
    case FIELD_LIST:
        return check_list(w, f, item);
    case FIELD_FLAG:
    case FIELD_CHOICE:
    case FIELD_END:
        break;
    }
    return true;
}

/* True when the value as a whole is sound; faults inside it have spoiled its members only. */
static bool check_value(struct walk *w, const struct field *f, cJSON *item)
{
    struct text wanted = TEXT_INIT;
    struct field option;

    if (f->kind == FIELD_CHOICE) {
        for (size_t i = 0; field_nested(f, w->v, i, &option); i++)
            if (has_type(&option, item))
                return check_typed(w, &option, item);
    } else if (has_type(f, item)) {
        return check_typed(w, f, item);
    }
    field_describe(f, w->v, &wanted);
    FAULT(w, MSG_TYPE, text_s(&wanted), json_type(item));
    text_release(&wanted);
    return false;
}

void fields_check(cJSON *tree, const struct field *row, const struct vocabulary *v,
                  const char *file, struct err *e)
{
    struct walk w = {v, file, e, TEXT_INIT};

    text_add(&w.pointer, "");
    if (!check_value(&w, row, tree))
        spoil(tree);
    text_release(&w.pointer);
}
