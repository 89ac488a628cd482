/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fuzz_table.c: any bytes as a table for `fit`, and the design behind a fit of it. The first byte
 * chooses the curve. */
#include <math.h>
#include <string.h>

#include "analysis/vocabulary_rows.h"
#include "base/mem.h"
#include "design/fit_table.h"
#include "fuzz.h"

static const char *const curve_names[] = {"linear", "log_linear",   "quadratic",
                                          "emax",   "sigmoid_emax", "logistic",
                                          "ndlm",   "independent",  "exponential"};

int LLVMFuzzerInitialize(int *argc, char ***argv)
{
    (void)argc, (void)argv;
    base_init();
    return 0;
}

static void look_at_table(const struct fit_table *t)
{
    for (size_t k = 0; k < t->levels; k++) {
        const struct level_data *x = &t->data.by_level;
        FUZZ_PROMISE(isfinite(t->value[k]) && (k == 0 || t->value[k] > t->value[k - 1]));
        FUZZ_PROMISE(isfinite(x->mean[k]) && isfinite(x->ss[k]) && x->ss[k] >= 0);
        FUZZ_PROMISE(x->events[k] >= 0 && x->events[k] <= x->n[k]);
    }
}

static void make_design(const struct fit_table *t, const char *curve)
{
    struct err e = ERR_INIT;
    struct design *d = NULL;
    const struct fit_request q = {.curve = curve, .higher_is_better = true, .seed = 1};
    const enum status status = fit_design(&d, t, &q, &terrace_vocabulary, &e);
    FUZZ_PROMISE((d != NULL) == (status == STATUS_OK));
    fuzz_look_at_faults(status, &e);
    design_free(d);
    err_release(&e);
}

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t size)
{
    if (size == 0)
        return 0;
    char *copy = mem_text_n((const char *)bytes + 1, size - 1);
    struct err e = ERR_INIT;
    struct fit_table *t = NULL;
    const enum status status = fit_table_parse(&t, copy, size - 1, "table.csv", NULL, &e);
    FUZZ_PROMISE((t != NULL) == (status == STATUS_OK));
    fuzz_look_at_faults(status, &e);
    if (t) {
        look_at_table(t);
        make_design(t, curve_names[bytes[0] % COUNT_OF(curve_names)]);
    }
    fit_table_free(t);
    err_release(&e);
    mem_free(copy);
    return 0;
}
