/* SPDX-License-Identifier: GPL-3.0-or-later */
/* small_design.h: a design for engine tests from a few words. */
#ifndef SMALL_DESIGN_H
#define SMALL_DESIGN_H

#include <CUnit/CUnit.h>
#include <stdio.h>
#include <string.h>

#include "analysis/vocabulary_rows.h"
#include "base/text.h"
#include "design/design.h"

/* Levels 0, 10, 20, ... (the last gap doubled, so that actual spacing differs from steps); `model`
 * is the members of the model object after "curve", `more` further members of the design. */
static inline struct design *small_design(const char *curve, bool binary, size_t levels,
                                          const char *model, const char *more)
{
    struct text t = TEXT_INIT;
    struct err e = ERR_INIT;
    struct design *d = NULL;
    text_addf(&t, "{\"terrace\":1,\"title\":\"test\",\"levels\":{\"control\":\"L0\",\"list\":[");
    for (size_t k = 0; k < levels; k++)
        text_addf(&t, "%s{\"label\":\"L%zu\",\"value\":%zu}", k ? "," : "", k,
                  k * 10 + (k + 1 == levels ? 10 : 0));
    text_addf(&t,
              "]},\"endpoint\":{\"name\":\"y\",\"type\":\"%s\",\"better\":\"higher\"%s},"
              "\"model\":{\"curve\":\"%s\"%s},\"subjects\":240%s}",
              binary ? "binary" : "continuous", binary ? "" : ",\"range\":[-8,8]", curve, model,
              more);
    if (design_parse(&d, text_s(&t), t.length, "test", &terrace_vocabulary, &e) != STATUS_OK) {
        struct text m = TEXT_INIT;
        err_text(&e, &m);
        fputs(text_s(&m), stderr);
        text_release(&m);
        CU_FAIL_FATAL("the test's design is not accepted");
    }
    err_release(&e);
    text_release(&t);
    return d;
}

#endif
