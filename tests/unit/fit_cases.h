/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fit_cases.h: likelihood fits of rows of data, for tests. */
#ifndef TERRACE_TEST_FIT_CASES_H
#define TERRACE_TEST_FIT_CASES_H

#include <CUnit/CUnit.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "analysis/vocabulary_rows.h"
#include "base/text.h"
#include "posterior/likelihood_fit.h"

/* A design over these values, labels L0, L1, ...; `model`: members after "curve"; `levels`: members
 * after "list". */
static inline struct design *fit_design(const char *curve, bool binary, size_t count,
                                        const double *value, const char *model, const char *levels)
{
    struct text t = TEXT_INIT;
    struct err e = ERR_INIT;
    struct design *d = NULL;
    text_add(&t, "{\"terrace\":1,\"title\":\"test\",\"levels\":{\"list\":[");
    for (size_t k = 0; k < count; k++)
        text_addf(&t, "%s{\"label\":\"L%zu\",\"value\":%.17g}", k ? "," : "", k, value[k]);
    text_addf(&t,
              "]%s},\"endpoint\":{\"name\":\"y\",\"type\":\"%s\",\"better\":\"higher\"%s},"
              "\"model\":{\"curve\":\"%s\"%s},\"subjects\":240}",
              levels, binary ? "binary" : "continuous", binary ? "" : ",\"range\":[-1e7,1e7]",
              curve, model);
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

/* One fit with all it rests on. */
struct fit_case {
    struct design *d;
    struct level_data data;
    struct likelihood_fit fit;
};

/* Levels with n, mean and sum of squares within, or n and events (ss NULL). */
static inline struct fit_case fit_groups(const char *curve, size_t count, const double *value,
                                         const double *n, const double *mean, const double *ss,
                                         const char *model, const char *levels)
{
    struct fit_case c = {.d = fit_design(curve, ss == NULL, count, value, model, levels)};
    level_data_init(&c.data, count);
    for (size_t k = 0; k < count; k++) {
        c.data.n[k] = c.data.randomized[k] = n[k];
        c.data.mean[k] = ss != NULL && n[k] > 0 ? mean[k] : 0.0;
        c.data.ss[k] = ss != NULL && n[k] > 0 ? ss[k] : 0.0;
        c.data.events[k] = ss == NULL ? mean[k] : 0.0;
    }
    likelihood_fit_run(&c.fit, c.d, &c.d->model, &c.data);
    return c;
}

/* Rows (x, y): levels are the distinct x. */
static inline struct fit_case fit_rows(const char *curve, size_t rows, const double *x,
                                       const double *y, const char *model)
{
    double value[LEVELS_MAX], n[LEVELS_MAX] = {0}, mean[LEVELS_MAX] = {0}, ss[LEVELS_MAX] = {0};
    size_t count = 0;
    for (size_t i = 0; i < rows; i++) {
        size_t k = 0;
        while (k < count && value[k] < x[i])
            k++;
        if (k < count && value[k] == x[i])
            continue;
        memmove(value + k + 1, value + k, (count - k) * sizeof *value);
        value[k] = x[i];
        count++;
    }
    for (size_t k = 0; k < count; k++) {
        for (size_t i = 0; i < rows; i++)
            if (x[i] == value[k]) {
                n[k] += 1;
                mean[k] += y[i];
            }
        mean[k] /= n[k];
        for (size_t i = 0; i < rows; i++)
            ss[k] += x[i] == value[k] ? (y[i] - mean[k]) * (y[i] - mean[k]) : 0.0;
    }
    return fit_groups(curve, count, value, n, mean, ss, model, "");
}

static inline void fit_case_release(struct fit_case *c)
{
    likelihood_fit_release(&c->fit);
    level_data_release(&c->data);
    design_free(c->d);
}

/* Row of a name; fails the test where there is none. */
static inline struct likelihood_row fit_row(const struct fit_case *c, const char *name)
{
    for (size_t i = 0; i < c->fit.rows; i++)
        if (strcmp(c->fit.row[i].name, name) == 0)
            return c->fit.row[i];
    CU_FAIL_FATAL("no such row");
    return (struct likelihood_row){name, NAN, NAN};
}

/* Within a relative difference; says what it got where not. */
static inline bool fit_close(const char *what, double got, double want, double relative)
{
    const bool close = fabs(got - want) <= relative * fabs(want);
    if (!close)
        fprintf(stderr, "%s: %.12g, not %.12g\n", what, got, want);
    return close;
}

#endif
