/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fuzz_data.c: any bytes as a data file of one of four designs. The first byte says which (its two
 * lowest bits); with its third bit set, the rest of the first line is the argument of --cut. */
#include <math.h>
#include <string.h>

#include "analysis/vocabulary_rows.h"
#include "base/mem.h"
#include "design/data.h"
#include "design/design.h"
#include "fuzz.h"

static struct design *designs[4]; /* read once */

int LLVMFuzzerInitialize(int *argc, char ***argv)
{
    static const char *const names[] = {"tests/data/binary.json", "tests/data/continuous.json",
                                        "tests/data/timed.json", "tests/data/quarter.json"};
    struct err e = ERR_INIT;
    (void)argc, (void)argv;
    base_init();
    for (size_t i = 0; i < COUNT_OF(names); i++)
        FUZZ_PROMISE(design_read(&designs[i], names[i], &terrace_vocabulary, &e) == STATUS_OK);
    return 0;
}

static void look_at_sums(const struct data *data, const struct design *d)
{
    double n = 0;
    for (size_t k = 0; k < d->levels; k++) {
        const struct level_data *x = &data->by_level;
        FUZZ_PROMISE(isfinite(x->mean[k]) && isfinite(x->ss[k]) && x->ss[k] >= 0);
        FUZZ_PROMISE(x->events[k] >= 0 && x->events[k] <= x->n[k] && x->n[k] <= x->randomized[k]);
        n += x->n[k];
    }
    FUZZ_PROMISE(data->observed + data->pending + data->dropped == (double)data->subjects);
    FUZZ_PROMISE(n == data->observed);
}

static void ask_for_the_analysis(const struct data *data, const struct design *d)
{
    struct err e = ERR_INIT;
    long number;
    double point;
    fuzz_look_at_faults(data_analysis_number(data, d, 0, false, false, &number, &point, &e), &e);
    err_release(&e);
}

/* The argument of --cut, or NULL; moves the start of the table. */
static char *take_cut(const char **table, const char *end)
{
    const char flags = *(*table)++;
    const char *line = flags & 4 ? memchr(*table, '\n', (size_t)(end - *table)) : NULL;
    char *cut = NULL;
    if (line) {
        cut = mem_text_n(*table, (size_t)(line - *table));
        *table = line + 1;
    }
    if (cut && !text_is_utf8(cut, strlen(cut))) { /* options.c has refused it */
        mem_free(cut);
        cut = NULL;
    }
    return cut;
}

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t size)
{
    if (size == 0)
        return 0;
    const struct design *d = designs[bytes[0] & 3];
    const char *table = (const char *)bytes;
    char *cut = take_cut(&table, table + size);
    const size_t length = size - (size_t)(table - (const char *)bytes);
    char *copy = mem_text_n(table, length);
    struct err e = ERR_INIT;
    struct data *data = NULL;
    const enum status status = data_parse(&data, copy, length, "data.csv", d, cut, &e);
    FUZZ_PROMISE((data != NULL) == (status == STATUS_OK));
    fuzz_look_at_faults(status, &e);
    if (data) {
        look_at_sums(data, d);
        ask_for_the_analysis(data, d);
    }
    data_free(data);
    err_release(&e);
    mem_free(copy);
    mem_free(cut);
    return 0;
}
