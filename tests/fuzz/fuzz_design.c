/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fuzz_design.c: any bytes as a design file. Parser and JSON Schema take the same documents, and a
 * design that is taken can be read again from its canonical form. */
#include <string.h>

#include "analysis/vocabulary_rows.h"
#include "base/json_read.h"
#include "base/mem.h"
#include "design/design.h"
#include "design/fields.h"
#include "fuzz.h"
#include "tests/unit/schema_takes.h"

static cJSON *schema; /* parsed once */

int LLVMFuzzerInitialize(int *argc, char ***argv)
{
    struct text words = TEXT_INIT;
    (void)argc, (void)argv;
    base_init();
    design_schema(&words, &terrace_vocabulary);
    schema = cJSON_ParseWithLength(text_s(&words), words.length);
    FUZZ_PROMISE(schema != NULL);
    text_release(&words);
    return 0;
}

static void compare_with_schema(const char *bytes, size_t length)
{
    struct err e = ERR_INIT;
    cJSON *tree = NULL;
    if (json_parse(bytes, length, "design.json", &tree, &e) == STATUS_OK) {
        const bool taken = schema_takes(schema, tree); /* first: fields_check drops what is wrong */
        fields_check(tree, &design_fields, &terrace_vocabulary, "design.json", &e);
        FUZZ_PROMISE(taken == (e.count == 0));
    }
    fuzz_look_at_faults(e.status, &e);
    cJSON_Delete(tree);
    err_release(&e);
}

static void read_again(const struct design *d)
{
    struct err e = ERR_INIT;
    struct design *again = NULL;
    FUZZ_PROMISE(design_parse(&again, text_s(&d->resolved), d->resolved.length, "again.json",
                              &terrace_vocabulary, &e) == STATUS_OK);
    FUZZ_PROMISE(strcmp(again->resolved_sha256, d->resolved_sha256) == 0);
    design_free(again);
    err_release(&e);
}

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t size)
{
    struct err e = ERR_INIT;
    struct design *d = NULL;
    char *copy = mem_text_n((const char *)bytes, size); /* of just this size: see what is overrun */
    const enum status status = design_parse(&d, copy, size, "design.json", &terrace_vocabulary, &e);
    FUZZ_PROMISE((d != NULL) == (status == STATUS_OK));
    fuzz_look_at_faults(status, &e);
    compare_with_schema(copy, size);
    if (d)
        read_again(d);
    design_free(d);
    err_release(&e);
    mem_free(copy);
    return 0;
}
