/* SPDX-License-Identifier: GPL-3.0-or-later */
/* likelihood_basis.c: maximum likelihood of a curve with a basis: from the best place of the search
 * by Gauss-Newton steps in all parameters to every digit; expected information; words where there
 * is no maximum. */
#include <gsl/gsl_blas.h>
#include <math.h>
#include <string.h>

#include "base/base.h"
#include "base/text.h"
#include "posterior/likelihood_search.h"

/* a shape number within this share of its range from an end has run off */
#define AT_END 0.005
enum { ITERATIONS = 200 };

/* ---- Gauss-Newton in all parameters ---- */

/* d theta / d shape by the five-point rule */
static void shape_derivative(const struct search *s, size_t dim, double *out)
{
    static const double at[4] = {-2, -1, 1, 2}, weight[4] = {1, -8, 8, -1};
    const struct likelihood_model *q = s->q;
    const size_t j = s->shape_of[dim];
    double shape[SHAPES_MAX] = {s->shape[0], s->shape[1]}, theta[LEVELS_MAX];
    const double spread = s->high[dim] - s->low[dim];
    const double h = 1e-3 * (search_is_log(s, dim) ? s->shape[j] : 0.02 * spread);
    gsl_matrix *x = gsl_matrix_alloc(q->x.levels, q->linear);
    for (size_t i = 0; i < q->x.levels; i++)
        out[i] = 0;
    for (size_t k = 0; k < 4; k++) {
        shape[j] = s->shape[j] + at[k] * h;
        search_columns(q, shape, x);
        search_theta(s, x, theta);
        for (size_t i = 0; i < q->x.levels; i++)
            out[i] += weight[k] * theta[i] / (12 * h);
    }
    gsl_matrix_free(x);
}

/* Jacobian of theta in the free parameters: linear ones, then shapes. */
static void fill_jacobian(const struct search *s, gsl_matrix *J, double *theta)
{
    const size_t levels = s->q->x.levels;
    double slope[LEVELS_MAX];
    gsl_matrix *x = gsl_matrix_alloc(levels, s->q->linear);
    search_columns(s->q, s->shape, x);
    search_theta(s, x, theta);
    for (size_t f = 0; f < s->frees; f++)
        for (size_t i = 0; i < levels; i++)
            gsl_matrix_set(J, i, f, gsl_matrix_get(x, i, s->free[f]));
    for (size_t d = 0; d < s->dims; d++) {
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
    for (size_t d = 0; d < s->dims; d++) {
        double *shape = &s->shape[s->shape_of[d]];
        const double was = from->shape[s->shape_of[d]];
        *shape = was + share * step[s->frees + d];
        if (search_is_log(s, d) && !(*shape > 0.1 * was))
            *shape = 0.1 * was;
    }
}

/* Residuals and weights about the present fit: continuous n_k and y - theta, binary the working
 * ones. */
static void residuals(const struct search *s, const double *theta, double *r, double *w)
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

/* true when the last full step was as good as none */
static bool polish(struct search *s)
{
    const size_t p = s->frees + s->dims, levels = s->q->x.levels;
    gsl_matrix *J = gsl_matrix_alloc(levels, p > 0 ? p : 1);
    bool settled = p == 0;
    for (int k = 0; k < ITERATIONS && !settled; k++) {
        double theta[LEVELS_MAX], r[LEVELS_MAX], w[LEVELS_MAX], step[MEANS_MAX], largest = 0;
        const struct search before = *s;
        const double value = search_value(s);
        fill_jacobian(s, J, theta);
        residuals(s, theta, r, w);
        if (!likelihood_solve(J, r, w, step))
            break;
        double share = 1;
        move(s, &before, step, share);
        while (share > 1e-6 && !(search_value(s) >= value - 1e-14 * fabs(value)))
            move(s, &before, step, share *= 0.5);
        for (size_t f = 0; f < p; f++) {
            const double size = f < s->frees ? fabs(before.linear[s->free[f]])
                                             : fabs(before.shape[s->shape_of[f - s->frees]]);
            largest = fmax(largest, fabs(step[f]) / (size + 1e-8));
        }
        if (share <= 1e-6)
            *s = before;
        settled = largest < 1e-10 || (share <= 1e-6 && largest < 1e-6);
        if (share <= 1e-6)
            break;
    }
    gsl_matrix_free(J);
    return settled;
}

/* ---- results ---- */

/* Covariance per unit variance of the free parameters. */
static bool information(const struct search *s, gsl_matrix *A)
{
    const size_t levels = s->q->x.levels, p = A->size1;
    double theta[LEVELS_MAX], r[LEVELS_MAX], w[LEVELS_MAX];
    gsl_matrix *J = gsl_matrix_alloc(levels, p);
    fill_jacobian(s, J, theta);
    residuals(s, theta, r, w);
    for (size_t i = 0; i < levels; i++)
        for (size_t f = 0; f < p; f++)
            gsl_matrix_set(J, i, f, gsl_matrix_get(J, i, f) * sqrt(w[i]));
    gsl_blas_dgemm(CblasTrans, CblasNoTrans, 1, J, J, 0, A);
    gsl_matrix_free(J);
    return likelihood_invert(A);
}

static void put_means(struct likelihood_fit *f, const struct search *s, const gsl_matrix *V,
                      double variance)
{
    const struct likelihood_model *q = s->q;
    size_t linear = 0, shape = 0, free_linear = 0, free_shape = 0;
    for (size_t i = 0; i < q->m->parameters; i++) {
        struct likelihood_row *row = likelihood_row(f, q->m->parameter[i]->name);
        const enum parameter_role role = q->m->parameter[i]->role;
        const bool fixed = prior_is_fixed(&q->m->prior[i]);
        size_t at = 0;
        if (role == ROLE_RESIDUAL)
            continue;
        row->estimate = role == ROLE_SHAPE ? s->shape[shape++] : s->linear[linear++];
        if (fixed)
            continue;
        at = role == ROLE_SHAPE ? s->frees + free_shape++ : free_linear++;
        row->se = sqrt(variance * gsl_matrix_get(V, at, at));
    }
}

static void put_residual(struct likelihood_fit *f, const struct likelihood_model *q, double sd,
                         double df)
{
    struct likelihood_row *row = likelihood_row(f, "sd");
    row->estimate = q->sd_free ? sd : q->sd_fixed;
    row->se = q->sd_free ? sd / sqrt(2 * df) : NAN; /* of a root mean square on df degrees */
}

/* All levels on the curve, with data or not. */
static void put_responses(struct likelihood_fit *f, const struct search *s)
{
    const struct likelihood_model *q = s->q;
    double value[CURVE_PARAMETERS_MAX], theta[LEVELS_MAX];
    size_t n = 0, place = 0;
    for (size_t j = 0; q->m->curve->parameters[n].name; n++)
        value[n] = f->row[n].estimate, (void)j;
    curve_mean(q->m->curve, &q->x.at, value, theta);
    for (size_t k = 0; k < q->d->levels; k++) {
        const bool on = q->d->control_on_curve || (int)k != q->d->control;
        const double t = on ? theta[place++] : s->linear[q->linear - 1];
        f->response[k] = q->x.binary ? search_rate(t) : t;
    }
}

static const char few_levels[] =
    "Fewer levels have data than the curve has parameters: the likelihood alone cannot tell them.";
static const char few_responses[] =
    "Too few responses for the curve and a residual sd: the likelihood has no standard errors.";
static const char perfect[] =
    "The curve passes exactly through the data: the likelihood has no maximum in the residual sd.";
static const char separated[] =
    "The events are separated by level (all below, none above, or the like): the likelihood rises "
    "without end as the curve steepens.";
static const char singular[] =
    "The data do not tell the parameters apart (flat responses, or levels that do not show the "
    "curve's bend): the likelihood has no single maximum.";

static bool runs_off(const struct search *s, struct likelihood_fit *f)
{
    for (size_t d = 0; d < s->dims; d++) {
        const double x = s->shape[s->shape_of[d]], c = search_is_log(s, d) ? log(x) : x;
        const double room = AT_END * (s->high[d] - s->low[d]);
        if (c > s->low[d] + room && c < s->high[d] - room)
            continue;
        struct text t = TEXT_INIT;
        text_addf(&t,
                  "%s runs off: the likelihood keeps rising as it goes to %s, so the data do not "
                  "determine it.",
                  s->q->shape[s->shape_of[d]]->name,
                  c <= s->low[d] + room ? (search_is_log(s, d) ? "0" : "minus infinity")
                                        : "infinity");
        likelihood_fails(f, text_s(&t));
        text_release(&t);
        return true;
    }
    return false;
}

static bool is_separated(const struct search *s)
{
    double theta[LEVELS_MAX];
    gsl_matrix *x = gsl_matrix_alloc(s->q->x.levels, s->q->linear);
    bool all = s->q->x.binary && s->frees > 0;
    search_columns(s->q, s->shape, x);
    search_theta(s, x, theta);
    for (size_t i = 0; i < s->q->x.levels; i++) /* no level says where between 0 and 1 it is */
        all = all && fabs(theta[i]) > 12;
    gsl_matrix_free(x);
    return all;
}

static void finish_continuous(struct likelihood_fit *f, const struct search *s, const gsl_matrix *V)
{
    const struct likelihood_model *q = s->q;
    const size_t p = s->frees + s->dims;
    const double rss = q->x.ss - search_value(s), df = q->x.total - (double)p;
    const double variance = q->sd_free ? rss / df : q->sd_fixed * q->sd_fixed;
    put_means(f, s, V, variance);
    put_residual(f, q, sqrt(variance), df);
    f->log_likelihood =
        likelihood_normal(q->x.total, rss, q->sd_free ? rss / q->x.total : variance);
    f->aic = 2 * ((double)p + (q->sd_free ? 1 : 0)) - 2 * f->log_likelihood;
}

static void finish_binary(struct likelihood_fit *f, const struct search *s, const gsl_matrix *V)
{
    put_means(f, s, V, 1);
    f->log_likelihood = search_value(s) + likelihood_coefficients(&s->q->x);
    f->aic = 2 * (double)(s->frees + s->dims) - 2 * f->log_likelihood;
}

/* What can be said before anything is computed. */
static const char *hopeless(const struct search *s)
{
    const struct likelihood_model *q = s->q;
    const size_t p = s->frees + s->dims;
    size_t on_curve = p;
    for (size_t f = 0; f < s->frees; f++)
        if (q->has_control && s->free[f] == q->linear - 1)
            on_curve--;
    if (on_curve > q->x.on_curve || p > q->x.levels)
        return few_levels;
    if (!q->x.binary && q->sd_free && !(q->x.total > (double)p))
        return few_responses;
    return NULL;
}

void likelihood_basis_run(struct likelihood_fit *f, struct likelihood_model *q)
{
    struct search s;
    search_init(&s, q);
    const size_t p = s.frees + s.dims;
    const char *fault = hopeless(&s);
    if (fault) {
        likelihood_fails(f, fault);
        return;
    }
    if (s.dims > 0)
        search_climb(&s);
    else
        (void)search_profile(&s);
    const bool settled = polish(&s);
    const double rss = q->x.binary ? 1 : q->x.ss - search_value(&s);
    double scale = q->x.ss;
    for (size_t i = 0; i < q->x.levels; i++)
        scale += q->x.n[i] * q->x.y[i] * q->x.y[i];
    gsl_matrix *V = gsl_matrix_calloc(p > 0 ? p : 1, p > 0 ? p : 1);
    if (runs_off(&s, f)) {
        ;
    } else if (is_separated(&s)) {
        likelihood_fails(f, separated);
    } else if (q->sd_free && !q->x.binary && !(rss > 1e-24 * scale)) {
        likelihood_fails(f, perfect);
    } else if ((p > 0 && !information(&s, V)) || !settled) {
        likelihood_fails(f, singular);
    } else {
        f->converged = true;
        if (q->x.binary)
            finish_binary(f, &s, V);
        else
            finish_continuous(f, &s, V);
        put_responses(f, &s);
    }
    gsl_matrix_free(V);
}

/* ---- every level on its own ---- */

/* The estimate of a level: its own mean or logit, or the known theta. */
static double level_estimate(const struct likelihood_model *q, size_t i, bool *known)
{
    const struct prior *prior = q->linear_prior[q->x.place[i] < 0 ? q->linear - 1 : 0];
    const double rate = q->x.events[i] / q->x.n[i];
    *known = prior_is_fixed(prior);
    if (*known)
        return prior->arg[0];
    return q->x.binary ? log(rate / (1 - rate)) : q->x.y[i];
}

/* n log r, 0 where n is 0 */
static double times_log(double n, double r)
{
    return n > 0 ? n * log(r) : 0;
}

struct free_sums {
    double rss, log_binomial, estimated;
};

static struct free_sums free_sums(const struct likelihood_model *q)
{
    const struct likelihood_data *x = &q->x;
    struct free_sums s = {x->ss, likelihood_coefficients(x), 0};
    for (size_t i = 0; i < x->levels; i++) {
        bool known;
        const double t = level_estimate(q, i, &known);
        const double rate = known ? search_rate(t) : x->events[i] / x->n[i];
        s.estimated += known ? 0 : 1;
        if (x->binary)
            s.log_binomial +=
                times_log(x->events[i], rate) + times_log(x->n[i] - x->events[i], 1 - rate);
        else
            s.rss += x->n[i] * pow(x->y[i] - t, 2);
    }
    return s;
}

static void put_free(struct likelihood_fit *f, const struct likelihood_model *q, double variance)
{
    const struct likelihood_data *x = &q->x;
    for (size_t i = 0; i < x->levels; i++) {
        bool known;
        const double t = level_estimate(q, i, &known), rate = search_rate(t);
        const double unit = x->binary ? 1 / (rate * (1 - rate)) : variance;
        const bool control = x->place[i] < 0;
        f->response[x->level[i]] = x->binary ? rate : t;
        if (x->place[i] > 0)
            continue; /* theta stands for the first level */
        struct likelihood_row *row = likelihood_row(f, control ? "control" : "theta");
        row->estimate = isfinite(t) ? t : NAN;
        row->se = isfinite(t) && !known ? sqrt(unit / x->n[i]) : NAN;
    }
}

void likelihood_free_run(struct likelihood_fit *f, struct likelihood_model *q)
{
    const struct likelihood_data *x = &q->x;
    const struct free_sums s = free_sums(q);
    const double df = x->total - s.estimated;
    const bool sd_wanted = !x->binary && q->sd_free;
    if (x->levels == 0 || (sd_wanted && !(df > 0))) {
        likelihood_fails(f, few_responses);
        return;
    }
    if (sd_wanted && !(s.rss > 0)) {
        likelihood_fails(f, perfect);
        return;
    }
    const double variance = sd_wanted ? s.rss / df : q->sd_fixed * q->sd_fixed;
    f->converged = true;
    put_free(f, q, variance);
    f->log_likelihood = s.log_binomial;
    if (!x->binary) {
        put_residual(f, q, sqrt(variance), df);
        f->log_likelihood =
            likelihood_normal(x->total, s.rss, sd_wanted ? s.rss / x->total : variance);
    }
    f->aic = 2 * (s.estimated + (sd_wanted ? 1 : 0)) - 2 * f->log_likelihood;
}
