/* SPDX-License-Identifier: GPL-3.0-or-later */
/* likelihood_search.c: the profile likelihood over the shape numbers and its climb.
 *
 * The linear part is exact given them: weighted least squares, or iterated for a binary endpoint
 * (McCullagh & Nelder 1989, Generalized Linear Models, 2.5). The profile (Golub & Pereyra 1973,
 * SIAM Journal on Numerical Analysis 10:413) is scanned on a grid and climbed from its best nodes
 * (Nelder & Mead 1965, Computer Journal 7:308, as NLopt has it).
 */
#include "posterior/likelihood_search.h"

#include <math.h>
#include <nlopt.h>
#include <string.h>

/* Shape numbers are sought this far out in their default prior; nodes a dim; starts. */
#define SEARCH_TAIL 1e-9
enum { NODES = 25, STARTS = 4, STEPS = 60 };

bool search_is_log(const struct search *s, size_t dim)
{
    return s->q->shape[s->shape_of[dim]]->positive;
}

/* ---- the linear part ---- */

/* Design columns of all linear parameters at the shape numbers: x[level][parameter]. */
void search_columns(const struct likelihood_model *q, const double *shape, gsl_matrix *x)
{
    const struct curve *c = q->m->curve;
    const size_t columns = curve_columns(c), at = q->x.at.count;
    double log_shape[SHAPES_MAX] = {0, 0}, basis[(COLUMNS_MAX - 1) * LEVELS_MAX];
    for (size_t j = 0; j < q->shapes; j++)
        log_shape[j] = shape[j] > 0 ? log(shape[j]) : -700;
    const double *const values[SHAPES_MAX] = {&shape[0], &shape[1]};
    const double *const logs[SHAPES_MAX] = {&log_shape[0], &log_shape[1]};
    c->basis(&q->x.at, 1, values, logs, basis);
    gsl_matrix_set_zero(x);
    for (size_t i = 0; i < q->x.levels; i++) {
        const int place = q->x.place[i];
        if (place < 0) {
            gsl_matrix_set(x, i, q->linear - 1, 1);
            continue;
        }
        gsl_matrix_set(x, i, 0, 1);
        for (size_t j = 1; j < columns; j++)
            gsl_matrix_set(x, i, j, basis[(j - 1) * at + (size_t)place]);
    }
}

/* theta of each level with data */
void search_theta(const struct search *s, const gsl_matrix *x, double *theta)
{
    for (size_t i = 0; i < s->q->x.levels; i++) {
        theta[i] = 0;
        for (size_t j = 0; j < s->q->linear; j++)
            theta[i] += s->linear[j] * gsl_matrix_get(x, i, j);
    }
}

/* Solves for the free linear parameters: working values z, weights w. */
static bool solve_free(struct search *s, const gsl_matrix *x, const double *z, const double *w)
{
    const size_t levels = s->q->x.levels;
    double rest[LEVELS_MAX], b[COLUMNS_MAX + 1];
    if (s->frees == 0)
        return true;
    gsl_matrix *X = gsl_matrix_alloc(levels, s->frees);
    for (size_t i = 0; i < levels; i++) {
        rest[i] = z[i];
        for (size_t j = 0, f = 0; j < s->q->linear; j++)
            if (f < s->frees && s->free[f] == j)
                gsl_matrix_set(X, i, f++, gsl_matrix_get(x, i, j));
            else
                rest[i] -= s->linear[j] * gsl_matrix_get(x, i, j);
    }
    const bool done = likelihood_solve(X, rest, w, b);
    for (size_t f = 0; done && f < s->frees; f++)
        s->linear[s->free[f]] = b[f];
    gsl_matrix_free(X);
    return done;
}

double search_rate(double theta)
{
    return 1 / (1 + exp(-theta));
}

/* log likelihood without its binomial coefficients */
static double binomial_log(const struct likelihood_data *x, const double *theta)
{
    double sum = 0;
    for (size_t i = 0; i < x->levels; i++) {
        const double t = theta[i], softplus = t > 0 ? t + log1p(exp(-t)) : log1p(exp(t));
        sum += x->events[i] * t - x->n[i] * softplus;
    }
    return sum;
}

void search_working(const struct likelihood_data *x, const double *theta, double *z, double *w)
{
    for (size_t i = 0; i < x->levels; i++) {
        const double rate = search_rate(theta[i]);
        w[i] = fmax(x->n[i] * rate * (1 - rate), 1e-12 * x->n[i]);
        z[i] = theta[i] + (x->events[i] - x->n[i] * rate) / w[i];
    }
}

/* Iterated weighted least squares with halved steps; the profile's value. */
static double binary_profile(struct search *s, const gsl_matrix *x)
{
    const struct likelihood_data *data = &s->q->x;
    double theta[LEVELS_MAX], z[LEVELS_MAX], w[LEVELS_MAX], before[COLUMNS_MAX + 1];
    search_theta(s, x, theta);
    double value = binomial_log(data, theta);
    for (int k = 0; k < STEPS; k++) {
        memcpy(before, s->linear, sizeof before);
        search_working(data, theta, z, w);
        if (!solve_free(s, x, z, w))
            return -INFINITY;
        search_theta(s, x, theta);
        double next = binomial_log(data, theta);
        for (int half = 0; half < 30 && !(next >= value - 1e-12 * fabs(value)); half++) {
            for (size_t j = 0; j < s->q->linear; j++)
                s->linear[j] = 0.5 * (s->linear[j] + before[j]);
            search_theta(s, x, theta);
            next = binomial_log(data, theta);
        }
        const double gained = next - value;
        value = next;
        if (k > 0 && gained < 1e-13 * (1 + fabs(value)))
            break;
    }
    return value;
}

static double between_rss(const struct search *s, const gsl_matrix *x)
{
    double theta[LEVELS_MAX], sum = 0;
    search_theta(s, x, theta);
    for (size_t i = 0; i < s->q->x.levels; i++)
        sum += s->q->x.n[i] * pow(s->q->x.y[i] - theta[i], 2);
    return sum;
}

/* The profile at s->shape: what is climbed (binary: log likelihood; else minus the residual sum of
 * squares); s->linear is left at its best. */
double search_profile(struct search *s)
{
    const struct likelihood_data *data = &s->q->x;
    gsl_matrix *x = gsl_matrix_alloc(data->levels, s->q->linear);
    double value = -INFINITY;
    search_columns(s->q, s->shape, x);
    if (data->binary) {
        for (size_t f = 0; f < s->frees; f++)
            s->linear[s->free[f]] = 0;
        value = binary_profile(s, x);
    } else if (solve_free(s, x, data->y, data->n)) {
        value = -between_rss(s, x);
    }
    gsl_matrix_free(x);
    return isfinite(value) ? value : -INFINITY;
}

/* ---- the shape numbers ---- */

static void put_shapes(struct search *s, const double *c)
{
    for (size_t d = 0; d < s->dims; d++)
        s->shape[s->shape_of[d]] = search_is_log(s, d) ? exp(c[d]) : c[d];
}

static double objective(unsigned n, const double *c, double *gradient, void *search)
{
    struct search *s = search;
    (void)n, (void)gradient;
    put_shapes(s, c);
    const double value = search_profile(s);
    return value > -INFINITY ? value : -1e300;
}

/* How far out a shape number is sought: its default prior's outermost quantiles. */
static void set_range(struct search *s, size_t d)
{
    const struct likelihood_model *q = s->q;
    const size_t index = (size_t)(q->shape[s->shape_of[d]] - q->m->curve->parameters);
    const struct default_scales scales = {
        .A = 1, .levels = &q->x.at, .shift = q->m->shift, .order = q->m->order, .known = true};
    bool scaled;
    const struct prior p = q->m->curve->default_prior(index, &scales, &scaled);
    const double low = prior_quantile(&p, SEARCH_TAIL), high = prior_quantile(&p, 1 - SEARCH_TAIL);
    s->low[d] = search_is_log(s, d) ? log(low) : low;
    s->high[d] = search_is_log(s, d) ? log(high) : high;
}

void search_init(struct search *s, struct likelihood_model *q)
{
    *s = (struct search){.q = q};
    for (size_t j = 0; j < q->shapes; j++) {
        if (prior_is_fixed(q->shape_prior[j])) {
            s->shape[j] = prior_quantile(q->shape_prior[j], 0.5);
            continue;
        }
        s->shape_of[s->dims] = j;
        set_range(s, s->dims++);
    }
    for (size_t j = 0; j < q->linear; j++)
        if (prior_is_fixed(q->linear_prior[j]))
            s->linear[j] = q->linear_prior[j]->arg[0];
        else
            s->free[s->frees++] = j;
}

/* Keeps the STARTS best nodes, best first. */
static void keep(double best[STARTS][SHAPES_MAX], double *value, size_t *found, const double *c,
                 double v)
{
    size_t at = *found < STARTS ? (*found)++ : STARTS;
    while (at > 0 && v > value[at - 1]) {
        at--;
        if (at + 1 < STARTS) {
            value[at + 1] = value[at];
            memcpy(best[at + 1], best[at], sizeof best[at]);
        }
    }
    if (at < STARTS) {
        value[at] = v;
        memcpy(best[at], c, sizeof best[at]);
    }
}

static size_t scan(struct search *s, double best[STARTS][SHAPES_MAX], double *value)
{
    const size_t second = s->dims == 2 ? NODES : 1;
    size_t found = 0;
    for (size_t i = 0; i < NODES; i++)
        for (size_t j = 0; j < second; j++) {
            const size_t node[SHAPES_MAX] = {i, j};
            double c[SHAPES_MAX] = {0, 0};
            for (size_t d = 0; d < s->dims; d++)
                c[d] = s->low[d] + (s->high[d] - s->low[d]) * ((double)node[d] + 0.5) / NODES;
            keep(best, value, &found, c, objective(0, c, NULL, s));
        }
    return found;
}

static double climb(struct search *s, double *c)
{
    double value = -INFINITY, step[SHAPES_MAX];
    nlopt_opt opt = nlopt_create(NLOPT_LN_NELDERMEAD, (unsigned)s->dims);
    if (!opt)
        return value;
    for (size_t d = 0; d < s->dims; d++)
        step[d] = (s->high[d] - s->low[d]) / NODES;
    nlopt_set_max_objective(opt, objective, s);
    nlopt_set_lower_bounds(opt, s->low);
    nlopt_set_upper_bounds(opt, s->high);
    nlopt_set_initial_step(opt, step);
    nlopt_set_ftol_rel(opt, 1e-14);
    nlopt_set_xtol_rel(opt, 1e-10);
    nlopt_set_maxeval(opt, 600);
    nlopt_optimize(opt, c, &value);
    nlopt_destroy(opt);
    return value;
}

/* The global climb: leaves the shape numbers and the linear part at their best. */
void search_climb(struct search *s)
{
    double c[SHAPES_MAX] = {0, 0};
    double start[STARTS][SHAPES_MAX], value[STARTS], top = -INFINITY;
    const size_t starts = scan(s, start, value);
    for (size_t i = 0; i < starts; i++) {
        const double v = climb(s, start[i]);
        if (v > top) {
            top = v;
            memcpy(c, start[i], sizeof start[i]);
        }
    }
    put_shapes(s, c);
    (void)search_profile(s);
}

double search_value(const struct search *s)
{
    const struct likelihood_data *data = &s->q->x;
    double theta[LEVELS_MAX];
    gsl_matrix *x = gsl_matrix_alloc(data->levels, s->q->linear);
    search_columns(s->q, s->shape, x);
    search_theta(s, x, theta);
    const double value = data->binary ? binomial_log(data, theta) : -between_rss(s, x);
    gsl_matrix_free(x);
    return value;
}
