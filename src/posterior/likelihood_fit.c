/* SPDX-License-Identifier: GPL-3.0-or-later */
/* likelihood_fit.c: the likelihood fit's door: the model made ready, rows, words. */
#include "posterior/likelihood_fit.h"

#include <gsl/gsl_linalg.h>
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

/* sqrt(w) X with columns of length 1, into a[rows][columns]; scale: their lengths. False where one
 * has none. */
static bool scale_columns(const gsl_matrix *X, const double *w, double *a, double *scale)
{
    const size_t rows = X->size1, columns = X->size2;
    for (size_t j = 0; j < columns; j++) {
        double largest = 0, sum = 0;
        for (size_t i = 0; i < rows; i++) {
            a[i * columns + j] = sqrt(w[i]) * gsl_matrix_get(X, i, j);
            largest = fmax(largest, fabs(a[i * columns + j]));
        }
        if (!(largest > 0) || !isfinite(largest))
            return false;
        for (size_t i = 0; i < rows; i++)
            sum += pow(a[i * columns + j] / largest, 2);
        scale[j] = largest * sqrt(sum);
        for (size_t i = 0; i < rows; i++)
            a[i * columns + j] /= scale[j];
    }
    return true;
}

bool likelihood_solve(const gsl_matrix *X, const double *y, const double *w, double *b)
{
    const size_t rows = X->size1, columns = X->size2;
    double a[LEVELS_MAX * MEANS_MAX], v[MEANS_MAX * MEANS_MAX], size[MEANS_MAX], scale[MEANS_MAX];
    if (columns == 0)
        return true;
    if (rows < columns || !scale_columns(X, w, a, scale))
        return false;
    gsl_matrix_view A = gsl_matrix_view_array(a, rows, columns);
    gsl_matrix_view V = gsl_matrix_view_array(v, columns, columns);
    gsl_vector_view S = gsl_vector_view_array(size, columns);
    gsl_linalg_SV_decomp_jacobi(&A.matrix, &V.matrix, &S.vector);
    if (!(size[columns - 1] > SINGULAR * size[0]))
        return false;
    for (size_t j = 0; j < columns; j++)
        b[j] = 0;
    for (size_t c = 0; c < columns; c++) {
        double along = 0;
        for (size_t i = 0; i < rows; i++)
            along += a[i * columns + c] * sqrt(w[i]) * y[i];
        for (size_t j = 0; j < columns; j++)
            b[j] += v[j * columns + c] * along / size[c] / scale[j];
    }
    return true;
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

static void take_base_off(struct likelihood_data *x)
{
    for (size_t i = 0; i < x->levels; i++)
        x->base += x->n[i] * x->y[i] / x->total;
    for (size_t i = 0; i < x->levels; i++)
        x->y[i] -= x->base;
}

double likelihood_shift(const struct likelihood_model *q, size_t j)
{
    return j == 0 || (q->has_control && j == q->linear - 1) ? q->x.base : 0;
}

double likelihood_known(const struct likelihood_model *q, size_t j)
{
    return prior_quantile(q->linear_prior[j], 0.5) - likelihood_shift(q, j);
}

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
    take_base_off(x);
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

static bool control_lacks_data(const struct likelihood_model *q)
{
    return q->has_control && !prior_is_fixed(q->linear_prior[q->linear - 1]) &&
           q->x.on_curve == q->x.levels;
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
        if (control_lacks_data(q))
            likelihood_fails(out, "The control has no responses, and it is not on the curve.");
        else if (m->curve->kind == CURVE_BASIS)
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
    for (; m->curve->parameters[n].name; n++)
        value[n] = f->row[n].estimate;
    const struct curve_levels all = design_curve_levels(d, m, levels);
    const double pair[2] = {x, all.value[all.count - 1]}; /* a curve may ask for the largest */
    const struct curve_levels at = {.count = 2, .value = pair, .shift = m->shift};
    curve_mean(m->curve, &at, value, theta);
    *response = d->type == ENDPOINT_BINARY ? 1 / (1 + exp(-theta[0])) : theta[0];
    return isfinite(*response);
}
