/* SPDX-License-Identifier: GPL-3.0-or-later */
/* quadrature.c: scan, zoom, weigh all cells of a product grid, and draw from them. */
#include "posterior/quadrature.h"

#include <math.h>
#include <string.h>

#include "base/mem.h"
#include "base/vecmath.h"

/* Axes at most; log units below the maximum that belong to the box; passes of the zoom; reach of
 * the standard normals of a binary endpoint. */
enum { AXES_MAX = 3, PASSES = 8, REACH = 4, V_REACH = 20, BEND = 4 };
#define KEEP 18.0
#define NORMAL_REACH 9.0

/* cells an axis, by number of axes: while zooming, and at last */
static const size_t scan_cells[AXES_MAX + 1] = {1, 64, 40, 24};
static const size_t final_cells[AXES_MAX + 1] = {1, 8192, 448, 80};

/* In t, where the coordinate is middle + scale sinh(t), or t itself with scale 0. */
struct axis {
    double low, high, floor, ceiling;
    double middle, scale;
};

struct grid {
    const struct problem *p;
    size_t axes, cells; /* cells an axis */
    struct axis axis[AXES_MAX];
    struct points pt;
    double *normal, *theta, *response, *beta, *y, *w, *extra, *value;
    struct rng_lanes rng;
};

static size_t axis_count(const struct problem *p)
{
    return p->dims + (p->sd_free ? 1 : 0) + (problem_draws_first(p) ? problem_normal_rows(p) : 0);
}

/* A jump of the density inside the grid would cost it its accuracy. */
bool quadrature_reaches(const struct problem *p)
{
    return axis_count(p) <= AXES_MAX && !p->cliffs;
}

static double *block(size_t rows)
{
    return mem_aligned((rows ? rows : 1) * BLOCK, sizeof(double));
}

static void grid_init(struct grid *g, const struct problem *p, const struct proposal *q)
{
    *g = (struct grid){.p = p, .axes = axis_count(p)};
    points_init(&g->pt, p, BLOCK);
    g->normal = block(problem_normal_rows(p));
    double **const per_level[] = {&g->theta, &g->response, &g->y, &g->w};
    for (size_t i = 0; i < sizeof per_level / sizeof *per_level; i++)
        *per_level[i] = block(p->levels);
    g->beta = block(COLUMNS_MAX);
    g->extra = block(1);
    g->value = block(1);
    g->pt.y = g->y;
    g->pt.w = g->w;
    for (size_t k = 0; p->binary && k < p->levels; k++)
        for (size_t i = 0; i < BLOCK; i++) {
            g->y[k * BLOCK + i] = q->pseudo_y[q->best * p->levels + k];
            g->w[k * BLOCK + i] = q->pseudo_w[q->best * p->levels + k];
        }
}

static void grid_release(struct grid *g)
{
    points_release(&g->pt);
    double *const all[] = {g->normal, g->theta, g->response, g->beta,
                           g->y,      g->w,     g->extra,    g->value};
    for (size_t i = 0; i < sizeof all / sizeof *all; i++)
        mem_free(all[i]);
}

static double cube_root(double x)
{
    return x > 0.0 ? vm_exp(vm_log(x) / 3.0) : 0.0;
}

static double least(double a, double b)
{
    return a < b ? a : b;
}

static double most(double a, double b)
{
    return a > b ? a : b;
}

static double within(double x, double low, double high)
{
    return least(most(x, low), high);
}

static double asinh_of(double x)
{
    const double size = vm_log(fabs(x) + sqrt(x * x + 1.0));
    return x < 0.0 ? -size : size;
}

/* Cells small around the middle, wide in far tails. */
static void bend(struct axis *x, double middle, double scale)
{
    double *const ends[] = {&x->low, &x->high, &x->floor, &x->ceiling};
    x->middle = middle;
    x->scale = scale;
    for (size_t i = 0; i < sizeof ends / sizeof *ends; i++)
        *ends[i] = asinh_of((*ends[i] - middle) / scale);
}

/* A coordinate runs over its prior's range; a heavy-tailed one around the proposal's box (the zoom
 * widens it where an edge holds mass). One that reflects at 0 runs as c = t^3: cells are small
 * where such posteriors are steep.
 */
static struct axis shape_axis(const struct problem *p, const struct proposal *q, size_t d,
                              const struct coordinate_range *r)
{
    const double ceiling = p->edge_high[d], width = q->step[d] * (double)q->nodes[d];
    const double high =
        p->heavy[d] ? q->high[d] + REACH * width : most(q->high[d] + q->step[d], r->high[d]);
    if (p->reflect[d])
        return (struct axis){0.0, cube_root(least(high, ceiling)),
                             0.0, cube_root(least(2.0 * high, ceiling)),
                             0.0, 0.0};
    const double low =
        p->heavy[d] ? q->low[d] - REACH * width : least(q->low[d] - q->step[d], r->low[d]);
    const double room = high - low, floor = p->edge_low[d];
    struct axis x = {most(low, floor),
                     least(high, ceiling),
                     most(low - room, floor),
                     least(high + room, ceiling),
                     0.0,
                     0.0};
    if (p->coordinate[p->dim_shape[d]] == COORDINATE_SELF)
        bend(&x, q->mode[d], width / BEND);
    return x;
}

/* The prior's range, and where the proposal saw the likelihood, however far apart they are. */
static struct axis v_axis(const struct problem *p, const struct proposal *q,
                          const struct coordinate_range *r)
{
    const size_t columns = q->nodes[1] + 2;
    const struct cell *c =
        q->cell + (q->best / q->nodes[1] + 1) * columns + q->best % q->nodes[1] + 1;
    double low = r->v_low, high = r->v_high;
    if (!q->v_from_prior) {
        low = least(low, c->mode - V_REACH * c->scale);
        high = most(high, c->mode + V_REACH * c->scale);
    }
    const double floor = p->v_edge_low, ceiling = p->v_edge_high, room = high - low;
    return (struct axis){most(low, floor),
                         least(high, ceiling),
                         most(low - room, floor),
                         least(high + room, ceiling),
                         0.0,
                         0.0};
}

static void grid_axes(struct grid *g, const struct proposal *q, const struct coordinate_range *r)
{
    const struct problem *p = g->p;
    size_t a = 0;
    for (size_t d = 0; d < p->dims; d++)
        g->axis[a++] = shape_axis(p, q, d, r);
    if (p->sd_free)
        g->axis[a++] = v_axis(p, q, r);
    while (a < g->axes)
        g->axis[a++] =
            (struct axis){-NORMAL_REACH, NORMAL_REACH, -NORMAL_REACH, NORMAL_REACH, 0.0, 0.0};
}

/* where axis a's coordinates of the block stand */
static double *axis_values(struct grid *g, size_t a)
{
    const struct problem *p = g->p;
    if (a < p->dims)
        return g->pt.coord[a];
    if (p->sd_free && a == p->dims)
        return g->pt.v;
    return g->normal + (a - p->dims - (p->sd_free ? 1 : 0)) * BLOCK;
}

static double cell_width(const struct grid *g, size_t a)
{
    return (g->axis[a].high - g->axis[a].low) / (double)g->cells;
}

static size_t cell_total(const struct grid *g)
{
    size_t total = 1;
    for (size_t a = 0; a < g->axes; a++)
        total *= g->cells;
    return total;
}

/* cell -> its index on axis a (the last axis runs fastest) */
static size_t cell_index(const struct grid *g, size_t cell, size_t a)
{
    for (size_t b = g->axes - 1; b > a; b--)
        cell /= g->cells;
    return cell % g->cells;
}

/* c = t^3 where a coordinate reflects, middle + scale sinh(t) where its axis is bent; jacobian[i]
 * *= dc / dt */
static void place_axis(struct grid *g, size_t d, double *jacobian)
{
    const struct axis *x = &g->axis[d];
    double *c = g->pt.coord[d], e[BLOCK];
    if (g->p->reflect[d]) {
        for (size_t i = 0; i < BLOCK; i++) {
            const double t = c[i];
            c[i] = t * t * t;
            jacobian[i] *= 3.0 * t * t;
        }
    } else if (x->scale > 0.0) {
        g->p->math->exp(BLOCK, c, e);
        for (size_t i = 0; i < BLOCK; i++) {
            c[i] = within(x->middle + x->scale * 0.5 * (e[i] - 1.0 / e[i]), g->p->edge_low[d],
                          g->p->edge_high[d]);
            jacobian[i] *= x->scale * 0.5 * (e[i] + 1.0 / e[i]);
        }
    }
}

/* coordinates from t, and the log of their Jacobian */
static void place_coordinates(struct grid *g, double *jacobian)
{
    for (size_t i = 0; i < BLOCK; i++)
        jacobian[i] = 1.0;
    for (size_t d = 0; d < g->p->dims; d++)
        place_axis(g, d, jacobian);
    g->p->math->log(BLOCK, jacobian, jacobian);
}

static void evaluate(struct grid *g)
{
    const struct problem *p = g->p;
    double jacobian[BLOCK];
    place_coordinates(g, jacobian);
    density_at(p, &g->pt);
    for (size_t i = 0; i < BLOCK; i++)
        g->value[i] = g->pt.log_prior[i] + g->pt.log_m[i] + jacobian[i];
    if (problem_draws_first(p)) {
        p->marginal->draw(p, BLOCK, g->pt.x, g->pt.factor, g->normal, g->theta, g->beta);
        density_correction(p, BLOCK, g->theta, g->beta, g->value);
    }
    if (p->binary) {
        const struct observations o = {NULL, g->y, g->w};
        p->marginal->binomial(p, BLOCK, g->theta, &o, g->extra, g->response);
        for (size_t i = 0; i < BLOCK; i++)
            g->value[i] += g->extra[i];
    }
    if (problem_draws_first(p)) {
        for (size_t r = 0; r < problem_normal_rows(p); r++)
            for (size_t i = 0; i < BLOCK; i++)
                g->value[i] -= 0.5 * g->normal[r * BLOCK + i] * g->normal[r * BLOCK + i];
    }
    for (size_t i = 0; i < BLOCK; i++)
        if (!(g->value[i] < INFINITY))
            g->value[i] = -INFINITY;
}

/* log weights of all cells at their middles */
static void weigh_cells(struct grid *g, double *weight)
{
    const size_t total = cell_total(g);
    for (size_t first = 0; first < total; first += BLOCK) {
        for (size_t i = 0; i < BLOCK; i++) {
            const size_t cell = first + i < total ? first + i : total - 1;
            for (size_t a = 0; a < g->axes; a++)
                axis_values(g, a)[i] =
                    g->axis[a].low + cell_width(g, a) * ((double)cell_index(g, cell, a) + 0.5);
        }
        evaluate(g);
        const size_t count = total - first < BLOCK ? total - first : BLOCK;
        memcpy(weight + first, g->value, count * sizeof *weight);
    }
}

static double top_of(const double *x, size_t n)
{
    double top = -INFINITY;
    for (size_t i = 0; i < n; i++)
        top = x[i] > top ? x[i] : top;
    return top;
}

/* New ends of one axis around the cells that hold mass; widened where an edge does. */
static bool zoom_axis(struct grid *g, const double *weight, double top, size_t a)
{
    size_t first = g->cells - 1, last = 0;
    const size_t total = cell_total(g);
    for (size_t cell = 0; cell < total; cell++) {
        if (weight[cell] < top - KEEP)
            continue;
        const size_t index = cell_index(g, cell, a);
        first = index < first ? index : first;
        last = index > last ? index : last;
    }
    struct axis *x = &g->axis[a];
    const double h = cell_width(g, a), width = x->high - x->low;
    double low = x->low + h * ((double)first - (first == 0 ? 2.0 : 1.0));
    double high = x->low + h * ((double)last + (last == g->cells - 1 ? 3.0 : 2.0));
    low = low < x->floor ? x->floor : low;
    high = high > x->ceiling ? x->ceiling : high;
    const bool changed = high - low < 0.8 * width || low < x->low || high > x->high;
    x->low = low;
    x->high = high;
    return changed;
}

static void fit_box(struct grid *g, double *weight)
{
    g->cells = scan_cells[g->axes];
    for (int pass = 0; pass < PASSES; pass++) {
        bool changed = false;
        weigh_cells(g, weight);
        const double top = top_of(weight, cell_total(g));
        for (size_t a = 0; a < g->axes; a++)
            changed = zoom_axis(g, weight, top, a) || changed;
        if (!changed)
            break;
    }
}

/* log weights -> running sums, last = 1; false when no cell holds any mass */
static bool accumulate(const struct problem *p, double *weight, size_t total)
{
    const double top = top_of(weight, total);
    if (!(top > -INFINITY))
        return false;
    for (size_t i = 0; i < total; i++)
        weight[i] -= top;
    p->math->exp(total, weight, weight);
    double sum = 0.0;
    for (size_t i = 0; i < total; i++)
        weight[i] = sum += weight[i];
    for (size_t i = 0; i < total; i++)
        weight[i] /= sum;
    weight[total - 1] = 1.0;
    return true;
}

static void write_block(struct grid *g, const struct draw_rows *out, size_t at)
{
    const struct problem *p = g->p;
    double jacobian[BLOCK];
    place_coordinates(g, jacobian);
    density_at(p, &g->pt);
    if (!problem_draws_first(p)) {
        p->kernel->normals(&g->rng, (problem_normal_rows(p)) * BLOCK, g->normal);
        if (out->response_mean)
            p->marginal->moments(p, BLOCK, g->pt.x, g->pt.factor, out->stride,
                                 out->response_mean + at, out->response_sd + at,
                                 out->difference_mean ? out->difference_mean + at : NULL,
                                 out->difference_sd ? out->difference_sd + at : NULL);
    }
    p->marginal->draw(p, BLOCK, g->pt.x, g->pt.factor, g->normal, g->theta, g->beta);
    for (size_t k = 0; k < p->levels; k++) {
        double *link = out->link + k * out->stride + at;
        memcpy(link, g->theta + k * BLOCK, BLOCK * sizeof *link);
        if (p->binary)
            p->math->logistic(BLOCK, link, out->response + k * out->stride + at);
    }
    sampler_parameters(p, BLOCK, BLOCK, g->pt.shape[0], g->pt.shape[1], g->pt.sd, g->beta, g->theta,
                       out, at);
}

/* Systematic draws: the j-th stands at (j + u) / count of the running sums. */
static void draw_cells(struct grid *g, const double *sums, size_t count,
                       const struct draw_rows *out)
{
    double move[BLOCK], u[RNG_LANES];
    g->p->kernel->uniforms(&g->rng, RNG_LANES, u);
    size_t cell = 0, chosen[BLOCK];
    for (size_t at = 0; at < count; at += BLOCK) {
        for (size_t i = 0; i < BLOCK; i++) {
            const double place = ((double)(at + i) + u[0]) / (double)count;
            while (sums[cell] <= place)
                cell++;
            chosen[i] = cell;
        }
        for (size_t a = 0; a < g->axes; a++) {
            g->p->kernel->uniforms(&g->rng, BLOCK, move);
            for (size_t i = 0; i < BLOCK; i++)
                axis_values(g, a)[i] =
                    g->axis[a].low +
                    cell_width(g, a) * ((double)cell_index(g, chosen[i], a) + move[i]);
        }
        write_block(g, out, at);
    }
}

void quadrature_run(const struct problem *p, const struct proposal *q,
                    const struct coordinate_range *r, const struct rng_key *key, size_t count,
                    const struct draw_rows *out)
{
    struct grid g;
    grid_init(&g, p, q);
    grid_axes(&g, q, r);
    rng_lanes_init(&g.rng, key);
    size_t most = final_cells[g.axes], scan = scan_cells[g.axes], total = 1, scans = 1;
    for (size_t a = 0; a < g.axes; a++) {
        total *= most;
        scans *= scan;
    }
    double *weight = mem_new(total > scans ? total : scans, sizeof *weight);
    if (g.axes > 0)
        fit_box(&g, weight);
    g.cells = most;
    weigh_cells(&g, weight);
    if (!accumulate(p, weight,
                    total)) /* nothing found: a draw everywhere, which no check accepts */
        for (size_t i = 0; i < total; i++)
            weight[i] = (double)(i + 1) / (double)total;
    draw_cells(&g, weight, count, out);
    mem_free(weight);
    grid_release(&g);
}
