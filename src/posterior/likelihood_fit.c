/* SPDX-License-Identifier: GPL-3.0-or-later */
/* likelihood_fit.c: the likelihood fit's door: the model made ready, rows, words. */
#include "posterior/likelihood_fit.h"

#include <gsl/gsl_linalg.h>
#include <gsl/gsl_multifit.h>
#include <gsl/gsl_sf_gamma.h>
#include <math.h>
#include <string.h>

#include "base/base.h"
#include "base/mem.h"
#include "base/text.h"
#include "posterior/likelihood_parts.h"

#define LN_2_PI 1.83787706640934548356
#define SINGULAR 1e-13

void likelihood_fails(struct likelihood_fit *f, const char *sentence)
{
    struct text t = TEXT_INIT;
    text_add(&t, sentence);
    mem_free(f->message);
    f->message = text_take(&t);
    f->converged = false;
    f->log_likelihood = f->aic = NAN;
    for (size_t i = 0; i < f->rows; i++)
        f->row[i].estimate = f->row[i].se = NAN;
    for (size_t k = 0; k < LEVELS_MAX; k++)
        f->response[k] = NAN;
}

struct likelihood_row *likelihood_row(struct likelihood_fit *f, const char *name)
{
    for (size_t i = 0; i < f->rows; i++)
        if (strcmp(f->row[i].name, name) == 0)
            return &f->row[i];
    if (f->rows == LIKELIHOOD_ROWS)
        BUG("more rows than a likelihood fit has");
    f->row[f->rows] = (struct likelihood_row){name, NAN, NAN};
    return &f->row[f->rows++];
}

double likelihood_normal(double total, double rss, double variance)
{
    return -0.5 * (total * (LN_2_PI + log(variance)) + rss / variance);
}

double likelihood_coefficients(const struct likelihood_data *x)
{
    double sum = 0;
    for (size_t k = 0; x->binary && k < x->levels; k++)
        sum += gsl_sf_lnfact((unsigned)x->n[k]) - gsl_sf_lnfact((unsigned)x->events[k]) -
               gsl_sf_lnfact((unsigned)(x->n[k] - x->events[k]));
    return sum;
}

bool likelihood_solve(const gsl_matrix *X, const double *y, const double *w, double *b)
{
    const size_t rows = X->size1, columns = X->size2;
    double chi, scale = 0;
    size_t rank;
    if (columns == 0)
        return true;
    if (rows < columns)
        return false;
    gsl_matrix *A = gsl_matrix_alloc(rows, columns), *C = gsl_matrix_alloc(columns, columns);
    gsl_vector *r = gsl_vector_alloc(rows), *c = gsl_vector_alloc(columns);
    gsl_multifit_linear_workspace *work = gsl_multifit_linear_alloc(rows, columns);
    for (size_t i = 0; i < rows; i++) {
        const double root = sqrt(w[i]);
        for (size_t j = 0; j < columns; j++)
            gsl_matrix_set(A, i, j, root * gsl_matrix_get(X, i, j));
        gsl_vector_set(r, i, root * y[i]);
        scale += w[i];
    }
    const bool done =
        scale > 0 &&
        gsl_multifit_linear_tsvd(A, r, SINGULAR, c, C, &chi, &rank, work) == GSL_SUCCESS &&
        rank == columns;
    for (size_t j = 0; done && j < columns; j++)
        b[j] = gsl_vector_get(c, j);
    gsl_multifit_linear_free(work);
    gsl_matrix_free(A);
    gsl_matrix_free(C);
    gsl_vector_free(r);
    gsl_vector_free(c);
    return done;
}

bool likelihood_invert(gsl_matrix *A)
{
    const size_t n = A->size1;
    double scale[2 * LEVELS_MAX];
    bool fine = n <= 2 * LEVELS_MAX;
    for (size_t i = 0; fine && i < n; i++) {
        const double diagonal = gsl_matrix_get(A, i, i);
        fine = diagonal > 0 && isfinite(diagonal);
        scale[i] = fine ? 1 / sqrt(diagonal) : 0;
    }
    for (size_t i = 0; fine && i < n; i++)
        for (size_t j = 0; j < n; j++)
            gsl_matrix_set(A, i, j, gsl_matrix_get(A, i, j) * scale[i] * scale[j]);
    fine = fine && (n == 0 || gsl_linalg_cholesky_decomp1(A) == GSL_SUCCESS);
    for (size_t i = 0; fine && i < n; i++) /* squared pivots: share not told by the others */
        fine = pow(gsl_matrix_get(A, i, i), 2) > 1e-11;
    if (!fine)
        return false;
    if (n > 0)
        gsl_linalg_cholesky_invert(A);
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j < n; j++)
            gsl_matrix_set(A, i, j, gsl_matrix_get(A, i, j) * scale[i] * scale[j]);
    return true;
}

/* ---- the model made ready ---- */

static void gather_data(struct likelihood_data *x, const struct design *d, const struct model *m,
                        const struct level_data *data)
{
    int place = 0;
    x->binary = d->type == ENDPOINT_BINARY;
    x->at = design_curve_levels(d, m, x->value);
    for (size_t k = 0; k < d->levels; k++) {
        const bool on = d->control_on_curve || (int)k != d->control;
        const size_t i = x->levels;
        const int at = on ? place++ : -1;
        if (!(data->n[k] > 0))
            continue;
        x->level[i] = k;
        x->place[i] = at;
        x->n[i] = data->n[k];
        x->y[i] = x->binary ? 0 : data->mean[k];
        x->events[i] = x->binary ? data->events[k] : 0;
        x->total += data->n[k];
        x->ss += x->binary ? 0 : data->ss[k];
        x->on_curve += on ? 1 : 0;
        x->levels++;
    }
}

void likelihood_model_init(struct likelihood_model *q, const struct design *d,
                           const struct model *m, const struct level_data *data)
{
    *q = (struct likelihood_model){.d = d, .m = m};
    gather_data(&q->x, d, m, data);
    for (size_t i = 0; i < m->parameters; i++) {
        const struct prior *p = &m->prior[i];
        switch (m->parameter[i]->role) {
        case ROLE_SHAPE:
            q->shape[q->shapes] = m->parameter[i];
            q->shape_prior[q->shapes++] = p;
            break;
        case ROLE_RESIDUAL:
            q->sd_free = !prior_is_fixed(p);
            q->sd_fixed = q->sd_free ? NAN : prior_quantile(p, 0.5);
            break;
        case ROLE_CONTROL:
            q->has_control = true;
            q->linear_prior[q->linear++] = p;
            break;
        case ROLE_LINEAR:
            q->linear_prior[q->linear++] = p;
            break;
        }
    }
}

static void name_rows(struct likelihood_fit *f, const struct model *m)
{
    for (size_t i = 0; i < m->parameters; i++)
        likelihood_row(f, m->parameter[i]->name);
}

void likelihood_fit_run(struct likelihood_fit *out, const struct design *d, const struct model *m,
                        const struct level_data *data)
{
    struct likelihood_model *q = mem_new(1, sizeof *q);
    *out = (struct likelihood_fit){.exists = true, .log_likelihood = NAN, .aic = NAN};
    for (size_t k = 0; k < LEVELS_MAX; k++)
        out->response[k] = NAN;
    likelihood_model_init(q, d, m, data);
    if (m->curve->kind == CURVE_WALK && q->x.binary) {
        out->exists = false;
    } else {
        name_rows(out, m);
        if (m->curve->kind == CURVE_BASIS)
            likelihood_basis_run(out, q);
        else if (m->curve->kind == CURVE_WALK)
            likelihood_walk_run(out, q);
        else
            likelihood_free_run(out, q);
    }
    mem_free(q);
}

void likelihood_fit_release(struct likelihood_fit *f)
{
    mem_free(f->message);
    *f = (struct likelihood_fit){0};
}

bool likelihood_fit_at(const struct likelihood_fit *f, const struct design *d,
                       const struct model *m, double x, double *response)
{
    double value[CURVE_PARAMETERS_MAX], theta[2], levels[LEVELS_MAX];
    size_t n = 0;
    if (!f->exists || !f->converged || m->curve->kind != CURVE_BASIS)
        return false;
    for (const struct parameter *p = m->curve->parameters; p->name; p++)
        value[n] = f->row[n].estimate, n++;
    const struct curve_levels all = design_curve_levels(d, m, levels);
    const double pair[2] = {x, all.value[all.count - 1]}; /* a curve may ask for the largest */
    const struct curve_levels at = {.count = 2, .value = pair, .shift = m->shift};
    curve_mean(m->curve, &at, value, theta);
    *response = d->type == ENDPOINT_BINARY ? 1 / (1 + exp(-theta[0])) : theta[0];
    return isfinite(*response);
}
