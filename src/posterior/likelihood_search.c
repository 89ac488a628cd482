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
#include <string.h>

#include "base/mem.h"
#include "posterior/climber.h"

/* Shape numbers are sought this far out in their default prior; nodes a dim; starts. */
#define SEARCH_TAIL 1e-9
enum { NODES = 25, STARTS = 6, STEPS = 60, STEPS_ROUGH = 20 };
/* nodes between two levels; levels where they are set; nodes of a dim at most */
enum { PARTS = 3, BETWEEN_MOST = 20, NODES_MOST = NODES + (PARTS - 1) * BETWEEN_MOST };

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

/* From the empirical logits, half an event added on both sides. */
static bool start_binary(struct search *s, const gsl_matrix *x)
{
    const struct likelihood_data *data = &s->q->x;
    double z[LEVELS_MAX], w[LEVELS_MAX];
    for (size_t i = 0; i < data->levels; i++) {
        const double p = (data->events[i] + 0.5) / (data->n[i] + 1);
        z[i] = log(p / (1 - p));
        w[i] = data->n[i] * p * (1 - p);
    }
    return solve_free(s, x, z, w);
}

/* Iterated weighted least squares with halved steps; the profile's value. */
static double binary_profile(struct search *s, const gsl_matrix *x)
{
    const struct likelihood_data *data = &s->q->x;
    double theta[LEVELS_MAX], z[LEVELS_MAX], w[LEVELS_MAX], before[COLUMNS_MAX + 1];
    search_theta(s, x, theta);
    double value = binomial_log(data, theta);
    for (int k = 0; k < (s->rough ? STEPS_ROUGH : STEPS); k++) {
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
        if (gained < (s->rough ? 1e-7 : 1e-13) * (1 + fabs(value)))
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
        value = start_binary(s, x) ? binary_profile(s, x) : -INFINITY;
    } else if (solve_free(s, x, data->y, data->n)) {
        value = -between_rss(s, x);
    }
    gsl_matrix_free(x);
    return isfinite(value) ? value : -INFINITY;
}

/* ---- the shape numbers ---- */

static void put_shapes(struct search *s, const double *c)
{
    for (size_t d = 0; d < s->dims && d < SHAPES_MAX; d++)
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

/* The largest level over the smallest step between two: how steep a rise can be and still be seen.
 */
static double level_ratio(const struct curve_levels *at)
{
    double gap = INFINITY;
    for (size_t k = 1; k < at->count; k++)
        gap = fmin(gap, at->value[k] - at->value[k - 1]);
    return fmax(1, fmax(fabs(at->value[0]), fabs(at->value[at->count - 1])) / gap);
}

/* How far out a shape number is sought: its default prior's outermost quantiles, and further where
 * levels are close. */
static void set_range(struct search *s, size_t d)
{
    const struct likelihood_model *q = s->q;
    const size_t index = (size_t)(q->shape[s->shape_of[d]] - q->m->curve->parameters);
    const struct default_scales scales = {
        .A = 1, .levels = &q->x.at, .shift = q->m->shift, .order = q->m->order, .known = true};
    bool scaled;
    const struct prior p = q->m->curve->default_prior(index, &scales, &scaled);
    const double low = prior_quantile(&p, SEARCH_TAIL), high = prior_quantile(&p, 1 - SEARCH_TAIL);
    const double *x = q->x.at.value, ratio = level_ratio(&q->x.at);
    s->low[d] = search_is_log(s, d) ? log(low / sqrt(ratio)) : low - (x[q->x.at.count - 1] - x[0]);
    s->high[d] =
        search_is_log(s, d) ? log(high * sqrt(ratio)) : high + (x[q->x.at.count - 1] - x[0]);
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
            s->linear[j] = likelihood_known(q, j);
        else
            s->free[s->frees++] = j;
}

/* Nodes of the scan in increasing order: even ones, and where the shape number may be a place among
 * the levels, some between each two of them, as a steep rise can hide there. */
static size_t fill_nodes(const struct search *s, size_t d, double *node)
{
    const struct curve_levels *at = &s->q->x.at;
    const bool log_scale = search_is_log(s, d);
    const double middle = 0.5 * (s->low[d] + s->high[d]), place = log_scale ? exp(middle) : middle;
    size_t count = 0;
    for (size_t i = 0; i < NODES; i++)
        node[count++] = s->low[d] + (s->high[d] - s->low[d]) * ((double)i + 0.5) / NODES;
    if (place < at->value[0] || place > at->value[at->count - 1])
        return count;
    for (size_t k = 1; k < at->count && k <= BETWEEN_MOST; k++)
        for (size_t part = 1; part < PARTS; part++) {
            const double x =
                at->value[k - 1] + (at->value[k] - at->value[k - 1]) * (double)part / PARTS;
            const double c = log_scale ? log(x) : x;
            size_t i = count;
            if (!(c > s->low[d] && c < s->high[d]))
                continue;
            for (; i > 0 && node[i - 1] > c; i--)
                node[i] = node[i - 1];
            node[i] = c;
            count++;
        }
    return count;
}

struct grid {
    size_t nodes[SHAPES_MAX];
    double node[SHAPES_MAX][NODES_MOST];
    double value[NODES_MOST * NODES_MOST]; /* [first * nodes[1] + second] */
};

static void fill_grid(struct search *s, struct grid *g)
{
    g->nodes[1] = 1;
    for (size_t d = 0; d < s->dims; d++)
        g->nodes[d] = fill_nodes(s, d, g->node[d]);
    s->rough = true;
    for (size_t i = 0; i < g->nodes[0]; i++)
        for (size_t j = 0; j < g->nodes[1]; j++) {
            const double c[SHAPES_MAX] = {g->node[0][i], s->dims > 1 ? g->node[1][j] : 0};
            g->value[i * g->nodes[1] + j] = objective(0, c, NULL, s);
        }
    s->rough = false;
}

/* No neighbour is higher. */
static bool is_hill(const struct grid *g, size_t i, size_t j)
{
    const double value = g->value[i * g->nodes[1] + j];
    for (size_t a = i > 0 ? i - 1 : 0; a <= i + 1 && a < g->nodes[0]; a++)
        for (size_t b = j > 0 ? j - 1 : 0; b <= j + 1 && b < g->nodes[1]; b++)
            if (g->value[a * g->nodes[1] + b] > value)
                return false;
    return true;
}

/* The highest hills of the grid, best first. */
static size_t scan(struct search *s, double best[STARTS][SHAPES_MAX])
{
    struct grid *g = mem_new(1, sizeof *g);
    double value[STARTS];
    size_t found = 0;
    fill_grid(s, g);
    for (size_t i = 0; i < g->nodes[0]; i++)
        for (size_t j = 0; j < g->nodes[1]; j++) {
            const double v = g->value[i * g->nodes[1] + j];
            if (!is_hill(g, i, j) || (found == STARTS && !(v > value[STARTS - 1])))
                continue;
            size_t at = found < STARTS ? found++ : STARTS - 1;
            for (; at > 0 && v > value[at - 1]; at--) {
                value[at] = value[at - 1];
                memcpy(best[at], best[at - 1], sizeof best[at]);
            }
            value[at] = v;
            best[at][0] = g->node[0][i];
            best[at][1] = s->dims > 1 ? g->node[1][j] : 0;
        }
    mem_free(g);
    return found;
}

static double climb(struct search *s, double *c)
{
    double step[SHAPES_MAX];
    for (size_t d = 0; d < s->dims; d++)
        step[d] = (s->high[d] - s->low[d]) / NODES;
    const struct climber climber = {.algorithm = NLOPT_LN_NELDERMEAD,
                                    .dims = (unsigned)s->dims,
                                    .function = objective,
                                    .data = s,
                                    .low = s->low,
                                    .high = s->high,
                                    .step = step,
                                    .value_tolerance = 1e-14,
                                    .place_tolerance = 1e-10,
                                    .most = 600};
    return climber_run(&climber, c);
}

/* The global climb: leaves the shape numbers and the linear part at their best. */
void search_climb(struct search *s)
{
    double c[SHAPES_MAX] = {0, 0};
    double start[STARTS][SHAPES_MAX], top = -INFINITY;
    const size_t starts = scan(s, start);
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

/* ---- the ends of the range ---- */

struct face {
    struct search *s;
    size_t dim;
    double end;
};

/* The profile with one shape number at an end, over the other. */
static double face_objective(unsigned n, const double *c, double *gradient, void *face)
{
    const struct face *f = face;
    double all[SHAPES_MAX] = {c[0], c[0]};
    all[f->dim] = f->end;
    return objective(n, all, gradient, f->s);
}

static double best_on_face(struct face *f)
{
    const size_t other = 1 - f->dim;
    double c = 0, best = 0, top = -INFINITY, value;
    if (f->s->dims == 1)
        return face_objective(1, &c, NULL, f);
    const double low = f->s->low[other], high = f->s->high[other], step = (high - low) / NODES;
    for (size_t i = 0; i <= NODES; i++) {
        c = low + step * (double)i;
        value = face_objective(1, &c, NULL, f);
        if (value > top) {
            top = value;
            best = c;
        }
    }
    const struct climber climber = {.algorithm = NLOPT_LN_NELDERMEAD,
                                    .dims = 1,
                                    .function = face_objective,
                                    .data = f,
                                    .low = &low,
                                    .high = &high,
                                    .step = &step,
                                    .place_tolerance = 1e-6,
                                    .most = 60};
    return fmax(top, climber_run(&climber, &best));
}

double search_best_end(const struct search *s, size_t *dim, bool *high)
{
    double top = -INFINITY;
    for (size_t d = 0; d < s->dims; d++)
        for (int end = 0; end < 2; end++) {
            struct search copy = *s;
            struct face f = {&copy, d, end ? s->high[d] : s->low[d]};
            const double value = best_on_face(&f);
            if (value > top) {
                top = value;
                *dim = d;
                *high = end;
            }
        }
    return top;
}
