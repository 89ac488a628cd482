/* SPDX-License-Identifier: GPL-3.0-or-later */
/* likelihood_polish.c: from the search's best place to every digit.
 *
 * Newton steps on the profile (its slope is the one at a fixed linear part, by the envelope
 * theorem; its bend by differences of the slope), which also settle where residuals are large and
 * Gauss-Newton steps crawl or diverge; then Gauss-Newton steps in all parameters.
 */
#include <math.h>

#include "posterior/likelihood_search.h"

enum { SIDES = 3, ITERATIONS = 200, NEWTON_STEPS = 30 };

#define STEP 3e-4 /* of derivatives of theta, in coordinates */
#define BEND 1e-4 /* of derivatives of the profile's slope */
#define STEP_LEAST 1e-12
/* A step is measured by what it moves the fit, in standard deviations of the data. */
#define MOVE_ENOUGH 1e-9
#define MOVE_ROUNDING 1e-6

/* What one unit of a coordinate is in the shape number. */
static double unit_of(const struct search *s, size_t dim)
{
    return search_is_log(s, dim) ? s->shape[s->shape_of[dim]] : 0.02 * (s->high[dim] - s->low[dim]);
}

/* d theta / d shape by the seven-point rule, in steps of the coordinate */
static void shape_derivative(const struct search *s, size_t dim, double *out)
{
    static const double weight[SIDES] = {45.0 / 60, -9.0 / 60, 1.0 / 60};
    const struct likelihood_model *q = s->q;
    const size_t j = s->shape_of[dim];
    double shape[SHAPES_MAX] = {s->shape[0], s->shape[1]}, theta[LEVELS_MAX];
    const double h = STEP * unit_of(s, dim);
    gsl_matrix *x = gsl_matrix_alloc(q->x.levels, q->linear);
    for (size_t i = 0; i < q->x.levels; i++)
        out[i] = 0;
    for (int k = -SIDES; k <= SIDES; k++) {
        if (k == 0)
            continue;
        const double times = (k > 0 ? weight[k - 1] : -weight[-k - 1]) / h;
        shape[j] = s->shape[j] + k * h;
        search_columns(q, shape, x);
        search_theta(s, x, theta);
        for (size_t i = 0; i < q->x.levels; i++)
            out[i] += times * theta[i];
    }
    gsl_matrix_free(x);
}

void search_jacobian(const struct search *s, gsl_matrix *J, double *theta)
{
    const size_t levels = s->q->x.levels;
    double slope[LEVELS_MAX];
    gsl_matrix *x = gsl_matrix_alloc(levels, s->q->linear);
    search_columns(s->q, s->shape, x);
    search_theta(s, x, theta);
    for (size_t f = 0; f < s->frees; f++)
        for (size_t i = 0; i < levels; i++)
            gsl_matrix_set(J, i, f, gsl_matrix_get(x, i, s->free[f]));
    for (size_t d = 0; d < s->dims && d < SHAPES_MAX; d++) {
        shape_derivative(s, d, slope);
        for (size_t i = 0; i < levels; i++)
            gsl_matrix_set(J, i, s->frees + d, slope[i]);
    }
    gsl_matrix_free(x);
}

static void move(struct search *s, const struct search *from, const double *step, double share)
{
    for (size_t f = 0; f < s->frees; f++)
        s->linear[s->free[f]] = from->linear[s->free[f]] + share * step[f];
    for (size_t d = 0; d < s->dims && d < SHAPES_MAX; d++) {
        double *shape = &s->shape[s->shape_of[d]];
        const double was = from->shape[s->shape_of[d]];
        *shape = was + share * step[s->frees + d];
        if (search_is_log(s, d) && !(*shape > 0.1 * was))
            *shape = 0.1 * was;
    }
}

void search_residuals(const struct search *s, const double *theta, double *r, double *w)
{
    const struct likelihood_data *x = &s->q->x;
    double z[LEVELS_MAX];
    if (x->binary)
        search_working(x, theta, z, w);
    for (size_t i = 0; i < x->levels; i++) {
        r[i] = x->binary ? z[i] - theta[i] : x->y[i] - theta[i];
        w[i] = x->binary ? w[i] : x->n[i];
    }
}

/* ---- Newton on the profile ---- */

/* Coordinates: the logarithm, or the number in units. */
static void read_coordinates(const struct search *s, double *c)
{
    for (size_t d = 0; d < s->dims && d < SHAPES_MAX; d++) {
        const double x = s->shape[s->shape_of[d]];
        c[d] = search_is_log(s, d) ? log(x) : x / unit_of(s, d);
    }
}

/* The profile at coordinates c, and its slope where wanted. */
static double profile_at(struct search *s, const double *c, double *slope)
{
    const struct likelihood_data *data = &s->q->x;
    double theta[LEVELS_MAX], moved[LEVELS_MAX];
    for (size_t d = 0; d < s->dims && d < SHAPES_MAX; d++)
        s->shape[s->shape_of[d]] = search_is_log(s, d) ? exp(c[d]) : c[d] * unit_of(s, d);
    const double value = search_profile(s);
    if (!slope)
        return value;
    gsl_matrix *x = gsl_matrix_alloc(data->levels, s->q->linear);
    search_columns(s->q, s->shape, x);
    search_theta(s, x, theta);
    gsl_matrix_free(x);
    for (size_t d = 0; d < s->dims && d < SHAPES_MAX; d++) {
        shape_derivative(s, d, moved);
        slope[d] = 0;
        for (size_t i = 0; i < data->levels; i++)
            slope[d] += unit_of(s, d) * moved[i] *
                        (data->binary ? data->events[i] - data->n[i] * search_rate(theta[i])
                                      : 2 * data->n[i] * (data->y[i] - theta[i]));
    }
    return value;
}

/* The step to where the slope vanishes; false unless the profile bends down there. */
static bool newton_step(struct search *s, const double *c, double *step)
{
    double g[SHAPES_MAX] = {0, 0}, H[SHAPES_MAX][SHAPES_MAX] = {{0, 0}, {0, 0}};
    for (size_t d = 0; d < s->dims && d < SHAPES_MAX; d++) {
        double up[SHAPES_MAX] = {c[0], c[1]}, down[SHAPES_MAX] = {c[0], c[1]};
        double g_up[SHAPES_MAX] = {0, 0}, g_down[SHAPES_MAX] = {0, 0};
        up[d] += BEND;
        down[d] -= BEND;
        (void)profile_at(s, up, g_up);
        (void)profile_at(s, down, g_down);
        for (size_t e = 0; e < s->dims && e < SHAPES_MAX; e++)
            H[d][e] = (g_down[e] - g_up[e]) / (2 * BEND);
    }
    (void)profile_at(s, c, g);
    const double off = 0.5 * (H[0][1] + H[1][0]), last = s->dims > 1 ? H[1][1] : 1;
    const double det = H[0][0] * last - off * off;
    if (!(H[0][0] > 0) || !(det > 1e-12 * H[0][0] * last))
        return false;
    step[0] = (last * g[0] - off * g[1]) / det;
    step[1] = (H[0][0] * g[1] - off * g[0]) / det;
    return isfinite(step[0]) && isfinite(step[1]);
}

/* Leaves s at the best it reaches. */
static void climb_profile(struct search *s)
{
    double c[SHAPES_MAX] = {0, 0}, step[SHAPES_MAX] = {0, 0}, to[SHAPES_MAX] = {0, 0};
    read_coordinates(s, c);
    double value = profile_at(s, c, NULL);
    for (int k = 0; k < NEWTON_STEPS && newton_step(s, c, step); k++) {
        double share = 1, next = -INFINITY;
        for (; share > 1e-4; share *= 0.5) {
            for (size_t d = 0; d < s->dims && d < SHAPES_MAX; d++)
                to[d] = c[d] + share * step[d];
            next = profile_at(s, to, NULL);
            if (next >= value - 1e-13 * fabs(value))
                break;
        }
        if (share <= 1e-4)
            break;
        c[0] = to[0];
        c[1] = to[1];
        value = next;
        if (fabs(step[0]) + fabs(step[1]) < STEP_LEAST)
            break;
    }
    (void)profile_at(s, c, NULL);
}

/* ---- Gauss-Newton in all parameters ---- */

/* Variance of one response, for measuring moves (binary: the weights hold it). */
static double move_variance(const struct search *s)
{
    const struct likelihood_data *x = &s->q->x;
    double size = 0;
    if (x->binary)
        return 1;
    if (!s->q->sd_free)
        return s->q->sd_fixed * s->q->sd_fixed;
    for (size_t i = 0; i < x->levels; i++)
        size += x->n[i] * x->y[i] * x->y[i];
    return fmax(x->ss - search_value(s), 1e-20 * size) / x->total;
}

/* How far a step moves the fit, in standard deviations. */
static double move_length(const struct search *s, const gsl_matrix *J, const double *w,
                          const double *step)
{
    double sum = 0;
    for (size_t i = 0; i < J->size1; i++) {
        double moved = 0;
        for (size_t f = 0; f < J->size2; f++)
            moved += gsl_matrix_get(J, i, f) * step[f];
        sum += w[i] * moved * moved;
    }
    return sqrt(sum / move_variance(s));
}

/* One step, halved until the fit is no worse; *length before halving. False: no step helps. */
static bool gauss_newton(struct search *s, gsl_matrix *J, double *length)
{
    double theta[LEVELS_MAX], r[LEVELS_MAX], w[LEVELS_MAX] = {0}, step[MEANS_MAX] = {0};
    const struct search before = *s;
    const double value = search_value(s);
    search_jacobian(s, J, theta);
    search_residuals(s, theta, r, w);
    *length = INFINITY;
    if (!likelihood_solve(J, r, w, step))
        return false;
    *length = move_length(s, J, w, step);
    for (double share = 1; share > 1e-6; share *= 0.5) {
        move(s, &before, step, share);
        if (search_value(s) >= value - 1e-14 * fabs(value))
            return true;
    }
    *s = before;
    return false;
}

bool search_polish(struct search *s)
{
    const size_t p = s->frees + s->dims;
    double length = INFINITY, last = INFINITY;
    if (p == 0)
        return true;
    if (s->dims > 0)
        climb_profile(s);
    gsl_matrix *J = gsl_matrix_alloc(s->q->x.levels, p);
    for (int k = 0; k < ITERATIONS; k++, last = length) {
        const bool moved = gauss_newton(s, J, &length);
        if (!moved || length < MOVE_ENOUGH || (length < MOVE_ROUNDING && length >= last))
            break;
    }
    gsl_matrix_free(J);
    return length < MOVE_ROUNDING;
}
