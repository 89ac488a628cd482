/* SPDX-License-Identifier: GPL-3.0-or-later */
/* likelihood_basis.c: maximum likelihood of a curve with a basis, from the best place of the
 * search: expected information, rows, and words where there is no maximum. */
#include <gsl/gsl_blas.h>
#include <math.h>
#include <string.h>

#include "base/base.h"
#include "base/text.h"
#include "posterior/likelihood_search.h"

/* a shape number within this share of its range from an end has run off */
#define AT_END 0.005
/* the likelihood must fall by this much, in its logarithm, towards the ends of the range */
#define GAIN_LEAST 1e-3
/* standard errors of shape numbers above this many times their size are not reported */
#define VAGUE 10.0
/* a logit at a level with data is not determined when its standard error is above this */
#define LARGEST_SE 100.0

/* ---- results ---- */

/* Covariance per unit variance of the free parameters. */
static bool information(const struct search *s, gsl_matrix *A)
{
    const size_t levels = s->q->x.levels, p = A->size1;
    double theta[LEVELS_MAX], r[LEVELS_MAX], w[LEVELS_MAX];
    gsl_matrix *J = gsl_matrix_alloc(levels, p);
    search_jacobian(s, J, theta);
    search_residuals(s, theta, r, w);
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
        if (role == ROLE_SHAPE) {
            row->estimate = s->shape[shape++];
        } else {
            row->estimate = s->linear[linear] + likelihood_shift(q, linear);
            linear++;
        }
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
    for (; q->m->curve->parameters[n].name; n++)
        value[n] = f->row[n].estimate;
    curve_mean(q->m->curve, &q->x.at, value, theta);
    for (size_t k = 0; k < q->d->levels; k++) {
        const bool on = q->d->control_on_curve || (int)k != q->d->control;
        const double t = on ? theta[place++] : s->linear[q->linear - 1] + q->x.base;
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

/* What a gain of the searched value is in log likelihood, over the value `best`. */
static double likelihood_gain(const struct search *s, double best, double other)
{
    const struct likelihood_model *q = s->q;
    if (q->x.binary)
        return best - other;
    if (!q->sd_free)
        return (best - other) / (2 * q->sd_fixed * q->sd_fixed);
    return 0.5 * q->x.total * log((q->x.ss - other) / (q->x.ss - best));
}

static void put_run_off(struct likelihood_fit *f, const struct search *s, size_t d, bool high)
{
    struct text t = TEXT_INIT;
    text_addf(&t,
              "%s runs off: the likelihood does not fall as it goes to %s, so the data do not "
              "determine it.",
              s->q->shape[s->shape_of[d]]->name,
              high                  ? "infinity"
              : search_is_log(s, d) ? "0"
                                    : "minus infinity");
    likelihood_fails(f, text_s(&t));
    text_release(&t);
}

/* The maximum lies at an end of the searched range, or an end is as good. */
static bool runs_off(const struct search *s, struct likelihood_fit *f)
{
    size_t dim = 0;
    bool high = false;
    for (size_t d = 0; d < s->dims; d++) {
        const double x = s->shape[s->shape_of[d]], c = search_is_log(s, d) ? log(x) : x;
        const double room = AT_END * (s->high[d] - s->low[d]);
        if (c > s->low[d] + room && c < s->high[d] - room)
            continue;
        put_run_off(f, s, d, c > s->low[d] + room);
        return true;
    }
    if (s->dims == 0)
        return false;
    const double end = search_best_end(s, &dim, &high);
    if (likelihood_gain(s, search_value(s), end) > GAIN_LEAST)
        return false;
    put_run_off(f, s, dim, high);
    return true;
}

/* Largest standard error of a logit at a level with data, by the covariance V of the parameters. */
static double largest_logit_se(const struct search *s, const gsl_matrix *V)
{
    const size_t levels = s->q->x.levels, p = V->size1;
    double theta[LEVELS_MAX], largest = 0;
    gsl_matrix *J = gsl_matrix_alloc(levels, p);
    search_jacobian(s, J, theta);
    for (size_t i = 0; i < levels; i++) {
        double sum = 0;
        for (size_t f = 0; f < p; f++)
            for (size_t g = 0; g < p; g++)
                sum += gsl_matrix_get(J, i, f) * gsl_matrix_get(V, f, g) * gsl_matrix_get(J, i, g);
        largest = fmax(largest, sqrt(sum));
    }
    gsl_matrix_free(J);
    return largest;
}

/* Some logit runs off to infinity. Where the information is singular, a logit this far out tells.
 */
static bool is_separated(const struct search *s, bool inverted, const gsl_matrix *V)
{
    double theta[LEVELS_MAX];
    if (!s->q->x.binary || s->frees + s->dims == 0)
        return false;
    if (inverted)
        return !(largest_logit_se(s, V) < LARGEST_SE);
    gsl_matrix *x = gsl_matrix_alloc(s->q->x.levels, s->q->linear);
    bool far = false;
    search_columns(s->q, s->shape, x);
    search_theta(s, x, theta);
    for (size_t i = 0; i < s->q->x.levels; i++)
        far = far || !(fabs(theta[i]) < 12);
    gsl_matrix_free(x);
    return far;
}

/* Variance of one response on n - p degrees, or the known one; binary: 1. */
static double fit_variance(const struct search *s)
{
    const struct likelihood_model *q = s->q;
    if (q->x.binary)
        return 1;
    if (!q->sd_free)
        return q->sd_fixed * q->sd_fixed;
    return (q->x.ss - search_value(s)) / (q->x.total - (double)(s->frees + s->dims));
}

/* A shape number whose standard error dwarfs it (or the levels' range) is no estimate. */
static bool is_vague(const struct search *s, const gsl_matrix *V, struct likelihood_fit *f)
{
    const struct curve_levels *at = &s->q->x.at;
    const double variance = fit_variance(s), range = at->value[at->count - 1] - at->value[0];
    for (size_t d = 0; d < s->dims; d++) {
        const double se = sqrt(variance * gsl_matrix_get(V, s->frees + d, s->frees + d));
        const double size = search_is_log(s, d) ? s->shape[s->shape_of[d]] : range;
        if (se < VAGUE * size)
            continue;
        struct text t = TEXT_INIT;
        text_addf(
            &t,
            "The data do not determine %s: its standard error would be more than %.0f times %s.",
            s->q->shape[s->shape_of[d]]->name, VAGUE,
            search_is_log(s, d) ? "its estimate" : "the range of the levels");
        likelihood_fails(f, text_s(&t));
        text_release(&t);
        return true;
    }
    return false;
}

static void finish_continuous(struct likelihood_fit *f, const struct search *s, const gsl_matrix *V)
{
    const struct likelihood_model *q = s->q;
    const size_t p = s->frees + s->dims;
    const double rss = q->x.ss - search_value(s), df = q->x.total - (double)p;
    const double variance = fit_variance(s);
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
    const bool settled = search_polish(&s);
    const double rss = q->x.binary ? 1 : q->x.ss - search_value(&s);
    double scale = q->x.ss;
    for (size_t i = 0; i < q->x.levels; i++)
        scale += q->x.n[i] * q->x.y[i] * q->x.y[i];
    gsl_matrix *V = gsl_matrix_calloc(p > 0 ? p : 1, p > 0 ? p : 1);
    const bool inverted = p == 0 || information(&s, V);
    if (is_separated(&s, inverted, V)) {
        likelihood_fails(f, separated);
    } else if (q->sd_free && !q->x.binary && !(rss > 1e-24 * scale)) {
        likelihood_fails(f, perfect);
    } else if (runs_off(&s, f)) {
        ;
    } else if (!inverted || !settled) {
        likelihood_fails(f, singular);
    } else if (!is_vague(&s, V, f)) {
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
    const size_t j = q->x.place[i] < 0 ? q->linear - 1 : 0;
    const double rate = q->x.events[i] / q->x.n[i];
    *known = prior_is_fixed(q->linear_prior[j]);
    if (*known)
        return likelihood_known(q, j);
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
        f->response[x->level[i]] = x->binary ? rate : t + x->base;
        if (x->place[i] > 0)
            continue; /* theta stands for the first level */
        struct likelihood_row *row = likelihood_row(f, control ? "control" : "theta");
        row->estimate = isfinite(t) ? t + x->base : NAN;
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
