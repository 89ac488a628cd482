/* SPDX-License-Identifier: GPL-3.0-or-later */
/* json_read.c: strict JSON: our scan, then cJSON's tree, then its names. */
#include "base/json_read.h"

#include <stdlib.h>
#include <string.h>

#include "base/base.h"
#include "base/json_messages.h"
#include "base/json_scan.h"
#include "base/mem.h"

const cJSON *json_member(const cJSON *object, const char *key)
{
    const cJSON *item;

    cJSON_ArrayForEach(item, object) if (item->string != NULL && strcmp(item->string, key) == 0)
    {
        return item;
    }
    return NULL;
}

void json_pointer_add(struct text *pointer, const char *token)
{
    text_add(pointer, "/");
    for (; *token != '\0'; token++) {
        if (*token == '~')
            text_add(pointer, "~0");
        else if (*token == '/')
            text_add(pointer, "~1");
        else
            text_add_n(pointer, token, 1);
    }
}

void json_pointer_add_index(struct text *pointer, size_t index)
{
    text_addf(pointer, "/%zu", index);
}

static void pointer_cut(struct text *pointer, size_t length)
{
    pointer->length = length;
    pointer->s[length] = '\0';
}

static int compare_names(const void *a, const void *b)
{
    return strcmp(*(const char *const *)a, *(const char *const *)b);
}

struct place {
    const char *file;
    struct text pointer;
    struct err *e;
};

static void report_twice(struct place *p, const char *name, size_t times)
{
    size_t length = p->pointer.length;

    json_pointer_add(&p->pointer, name);
    err_add(p->e, STATUS_INPUT, p->file, 0, text_s(&p->pointer), JSON_MSG_TWICE, name, times);
    pointer_cut(&p->pointer, length);
}

/* Sorted, equal names are neighbours: n log n also for a hostile file. */
static void check_names(struct place *p, const cJSON *object)
{
    size_t count = 0, i = 0;
    const cJSON *item;
    const char **names;

    cJSON_ArrayForEach(item, object) count++;
    names = mem_new(count, sizeof *names);
    cJSON_ArrayForEach(item, object) names[i++] = item->string;
    qsort(names, count, sizeof *names, compare_names);
    for (i = 0; i < count;) {
        size_t next = i + 1;

        while (next < count && strcmp(names[i], names[next]) == 0)
            next++;
        if (next - i > 1)
            report_twice(p, names[i], next - i);
        i = next;
    }
    mem_free(names);
}

/* Depth is bounded by the scan. */
static void check_tree(struct place *p, const cJSON *node)
{
    size_t length = p->pointer.length, index = 0;
    const cJSON *item;

    if (cJSON_IsObject(node))
        check_names(p, node);
    cJSON_ArrayForEach(item, node)
    {
        if (cJSON_IsObject(node))
            json_pointer_add(&p->pointer, item->string);
        else
            json_pointer_add_index(&p->pointer, index++);
        check_tree(p, item);
        pointer_cut(&p->pointer, length);
    }
}

enum status json_parse(const char *bytes, size_t length, const char *file, cJSON **tree,
                       struct err *e)
{
    struct place p = {file, TEXT_INIT, e};
    size_t before = e->count;
    const char *end = NULL;
    enum status status = json_scan(bytes, length, file, e);

    *tree = NULL;
    if (status != STATUS_OK)
        return status;
    *tree = cJSON_ParseWithLengthOpts(bytes, length, &end, 0);
    if (*tree == NULL)
        BUG("cJSON refuses what the scan accepts");
    text_add(&p.pointer, "");
    check_tree(&p, *tree);
    text_release(&p.pointer);
    if (e->count == before)
        return STATUS_OK;
    cJSON_Delete(*tree);
    *tree = NULL;
    return STATUS_INPUT;
}
