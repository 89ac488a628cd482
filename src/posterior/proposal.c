/* SPDX-License-Identifier: GPL-3.0-or-later */
/* proposal.c: scan, zoom and weigh the grid of the independence sampler's proposal. */
#include "posterior/proposal.h"

#include <math.h>
#include <string.h>

#include "base/mem.h"
#include "base/vecmath.h"

/* Log units below the maximum that still belong to the box; passes of the zoom; rounds of the
 * search for the mode of v; prior quantiles that integrate v where it is proposed from its prior.
 */
#define KEEP 9.0
/* an outermost node of equal probability stands for its interval up to this share of it */
#define OUTER 0.05
enum { PASSES = 6, ROUNDS = 6, PRIOR_POINTS = 16 };

struct proposal_work {
    struct points pt;
    double *mode, *scale, *weight, *below, *at, *above;         /* [NODES_MAX] */
    double *y, *w, *theta, *normal, *beta, *rates, *likelihood; /* binary rows */
};

struct box {
    double low[SHAPES_MAX], high[SHAPES_MAX];
};

static double *rows_of(size_t rows)
{
    return mem_aligned((rows ? rows : 1) * NODES_MAX, sizeof(double));
}

struct proposal_work *proposal_work_new(const struct problem *p)
{
    struct proposal_work *w = mem_new(1, sizeof *w);
    points_init(&w->pt, p, NODES_MAX);
    double **const one[] = {&w->mode, &w->scale, &w->weight,    &w->below,
                            &w->at,   &w->above, &w->likelihood};
    for (size_t i = 0; i < sizeof one / sizeof *one; i++)
        *one[i] = rows_of(1);
    const size_t K = p->binary ? p->levels : 0;
    w->y = rows_of(K);
    w->w = rows_of(K);
    w->theta = rows_of(K);
    w->rates = rows_of(K);
    w->normal = rows_of(p->binary ? problem_normal_rows(p) : 0);
    w->beta = rows_of(COLUMNS_MAX);
    return w;
}

void proposal_work_free(struct proposal_work *w)
{
    if (!w)
        return;
    points_release(&w->pt);
    double *const all[] = {w->mode, w->scale, w->weight, w->below,  w->at,   w->above,     w->y,
                           w->w,    w->theta, w->rates,  w->normal, w->beta, w->likelihood};
    for (size_t i = 0; i < sizeof all / sizeof *all; i++)
        mem_free(all[i]);
    mem_free(w);
}

void proposal_init(struct proposal *q, const struct problem *p)
{
    *q = (struct proposal){.dims = p->dims, .nodes = {1, 1}};
    if (p->dims == 1)
        q->nodes[0] = NODES_ONE;
    if (p->dims == 2) {
        q->nodes[0] = NODES_FIRST;
        q->nodes[1] = NODES_SECOND;
    }
    if (p->binary) {
        q->pseudo_y = mem_aligned(NODES_MAX * p->levels, sizeof(double));
        q->pseudo_w = mem_aligned(NODES_MAX * p->levels, sizeof(double));
    }
}

void proposal_release(struct proposal *q)
{
    mem_free(q->pseudo_y);
    mem_free(q->pseudo_w);
    *q = (struct proposal){0};
}

static size_t node_count(const struct proposal *q)
{
    return q->nodes[0] * q->nodes[1];
}

/* index of a node on dimension d; there is at least one node */
static size_t node_index(const struct proposal *q, size_t node, size_t d)
{
    const size_t columns = q->nodes[1] > 0 ? q->nodes[1] : 1;
    return d == 0 ? node / columns : node % columns;
}

/* points in lanes: the nodes, the last one repeated up to a multiple of 8 */
static size_t padded(size_t n)
{
    return (n + 7) / 8 * 8;
}

static void place_nodes(struct proposal *q, const struct box *box, struct points *pt)
{
    for (size_t d = 0; d < SHAPES_MAX; d++) {
        const double width = d < q->dims ? box->high[d] - box->low[d] : 0.0;
        q->low[d] = d < q->dims ? box->low[d] : 0.0;
        q->step[d] = q->nodes[d] > 1 ? width / (double)(q->nodes[d] - 1) : 1.0;
        q->inverse_step[d] = 1.0 / q->step[d];
        q->high[d] = d < q->dims ? box->high[d] : 0.0;
    }
    const size_t count = node_count(q);
    pt->n = padded(count);
    for (size_t i = 0; i < pt->n; i++) {
        const size_t node = i < count ? i : count - 1;
        for (size_t d = 0; d < SHAPES_MAX; d++)
            pt->coord[d][i] = q->low[d] + q->step[d] * (double)node_index(q, node, d);
    }
}

static double within(double x, double low, double high)
{
    return x < low ? low : x > high ? high : x;
}

/* log posterior at v = mode + shift * scale; basis and shape priors are kept */
static void evaluate_v(const struct problem *p, struct proposal_work *w, double shift, double *out)
{
    struct points *pt = &w->pt;
    for (size_t i = 0; i < pt->n; i++)
        pt->v[i] = within(w->mode[i] + shift * w->scale[i], p->v_edge_low, p->v_edge_high);
    density_at(p, pt);
    pt->same_shapes = true;
    for (size_t i = 0; i < pt->n; i++)
        out[i] = pt->log_prior[i] + pt->log_m[i];
}

/* One step of the search: the parabola through three points. Returns its step in units of the new
 * scale; the node's weight is the Gaussian approximation's integral. */
static double parabola(const struct problem *p, struct proposal_work *w, size_t i)
{
    const double d = w->scale[i];
    const double slope = (w->above[i] - w->below[i]) / (2.0 * d);
    const double bend = (w->above[i] - 2.0 * w->at[i] + w->below[i]) / (d * d);
    double scale = bend < 0.0 ? 1.0 / sqrt(-bend) : 4.0 * d;
    scale = scale > 4.0 * d ? 4.0 * d : scale < 0.25 * d ? 0.25 * d : scale;
    w->weight[i] = w->at[i];
    if (!(scale > 0.0) || !(slope == slope))
        return 0.0; /* impossible points: no parabola, no mass */
    double step = slope * scale * scale;
    step = step > 3.0 * d ? 3.0 * d : step < -3.0 * d ? -3.0 * d : step;
    w->weight[i] = w->at[i] + 0.5 * slope * step; /* and ln scale, when the search is over */
    w->mode[i] = within(w->mode[i] + step, p->v_edge_low, p->v_edge_high);
    w->scale[i] = scale;
    return fabs(step) / scale;
}

static double largest(const double *x, size_t n, size_t *where)
{
    *where = 0;
    for (size_t i = 1; i < n; i++)
        if (x[i] > x[*where] || x[*where] != x[*where])
            *where = i;
    return x[*where];
}

/* At most `rounds` steps of the search; true when every node that matters has settled. */
static bool weigh_by_mode(const struct problem *p, struct proposal_work *w, size_t count,
                          int rounds)
{
    size_t best;
    double worst = 0.0;
    for (int round = 0; round < rounds; round++) {
        worst = 0.0;
        evaluate_v(p, w, 0.0, w->at);
        evaluate_v(p, w, -1.0, w->below);
        evaluate_v(p, w, 1.0, w->above);
        const double top = largest(w->at, count, &best);
        for (size_t i = 0; i < w->pt.n; i++) {
            const double step = parabola(p, w, i);
            if (w->at[i] > top - KEEP && step > worst)
                worst = step;
        }
        if (worst < 1.0)
            break;
    }
    p->math->log(w->pt.n, w->scale, w->at);
    for (size_t i = 0; i < w->pt.n; i++)
        w->weight[i] += w->at[i];
    return worst < 1.0;
}

/* v integrated over its prior by equally likely points */
static void weigh_by_prior(const struct problem *p, struct proposal_work *w)
{
    const size_t n = w->pt.n;
    for (size_t i = 0; i < n; i++)
        w->weight[i] = -INFINITY;
    for (int k = 0; k < PRIOR_POINTS; k++) {
        const double v = problem_log_quantile(p->sd_prior, (k + 0.5) / PRIOR_POINTS);
        for (size_t i = 0; i < n; i++)
            w->pt.v[i] = v;
        density_at(p, &w->pt);
        w->pt.same_shapes = true;
        for (size_t i = 0; i < n; i++) {
            const double a = w->pt.log_prior_shape[i] + w->pt.log_m[i], b = w->weight[i];
            const double high = a > b ? a : b;
            if (high > -INFINITY)
                w->weight[i] = high + vm_log(vm_exp(a - high) + vm_exp(b - high));
        }
    }
}

static void weigh_binary(const struct problem *p, struct proposal_work *w)
{
    struct points *pt = &w->pt;
    proposal_pseudo(p, pt, w->y, w->w, w->theta, w->normal, w->beta);
    const struct observations o = {NULL, w->y, w->w};
    p->marginal->binomial(p, pt->n, w->theta, &o, w->likelihood, w->rates);
    for (size_t i = 0; i < pt->n; i++)
        w->weight[i] = pt->log_prior[i] + pt->log_m[i] + w->likelihood[i];
}

/* false: the search for the mode of v, cut short while the box is still moving, has to go on */
static bool weigh_nodes(const struct proposal *q, const struct problem *p, struct proposal_work *w,
                        int rounds)
{
    bool settled = true;
    if (p->binary) {
        weigh_binary(p, w);
    } else if (!p->sd_free) {
        density_at(p, &w->pt);
        for (size_t i = 0; i < w->pt.n; i++)
            w->weight[i] = w->pt.log_prior[i] + w->pt.log_m[i];
    } else if (q->v_from_prior) {
        weigh_by_prior(p, w);
    } else {
        settled = weigh_by_mode(p, w, node_count(q), rounds);
    }
    for (size_t i = 0; i < w->pt.n; i++)
        if (!(w->weight[i] < INFINITY))
            w->weight[i] = -INFINITY; /* a NaN holds no mass */
    return settled;
}

/* Index range of dimension d whose nodes lie within KEEP of the top. */
static void kept_range(const struct proposal *q, const double *weight, double top, size_t d,
                       size_t *first, size_t *last)
{
    *first = q->nodes[d] - 1;
    *last = 0;
    for (size_t i = 0; i < node_count(q); i++) {
        const size_t index = node_index(q, i, d);
        if (weight[i] < top - KEEP)
            continue;
        *first = index < *first ? index : *first;
        *last = index > *last ? index : *last;
    }
}

/* An end of the support within a step of the box becomes the box's. */
static void snap(const struct problem *p, size_t d, double steps, double *low, double *high)
{
    const double step = (*high - *low) / steps;
    if (*low < p->edge_low[d] + step)
        *low = p->edge_low[d];
    if (*high > p->edge_high[d] - step)
        *high = p->edge_high[d];
}

/* Narrows (or widens, where an edge holds mass) the box; false when it fits well. */
static bool zoom(const struct proposal *q, const struct problem *p, const double *weight,
                 const struct coordinate_range *r, struct box *box)
{
    size_t best;
    const double top = largest(weight, node_count(q), &best);
    bool changed = false;
    for (size_t d = 0; d < q->dims; d++) {
        size_t first, last;
        kept_range(q, weight, top, d, &first, &last);
        const double width = box->high[d] - box->low[d], h = q->step[d];
        const double room = r->high[d] - r->low[d];
        double low = q->low[d] + h * ((double)first - 1.0);
        double high = q->low[d] + h * ((double)last + 1.0);
        if (first == 0)
            low -= h;
        if (last == q->nodes[d] - 1)
            high += h;
        low = within(low, r->low[d] - room, r->high[d] + room);
        high = within(high, r->low[d] - room, r->high[d] + room);
        snap(p, d, (double)(q->nodes[d] - 1), &low, &high);
        if (high - low < 0.7 * width || low < box->low[d] || high > box->high[d]) {
            box->low[d] = low;
            box->high[d] = high;
            changed = true;
        }
    }
    return changed;
}

static void fill_cells(struct proposal *q, const struct problem *p, struct proposal_work *w)
{
    const double top = largest(w->weight, node_count(q), &q->best);
    const size_t rows = q->nodes[0] + 2, columns = q->nodes[1] + 2;
    const double least = p->residual_df > 0.0 ? 1.0 / p->residual_df : 0.0;
    double *weight = w->below; /* e^(weight - top); all alike where nothing holds mass */
    for (size_t i = 0; i < w->pt.n; i++)
        weight[i] = top > -INFINITY ? w->weight[i] - top : 0.0;
    p->math->exp(w->pt.n, weight, weight);
    for (size_t r = 0; r < rows; r++)
        for (size_t c = 0; c < columns; c++) {
            const size_t i1 = r == 0 ? 0 : r > q->nodes[0] ? q->nodes[0] - 1 : r - 1;
            const size_t i2 = c == 0 ? 0 : c > q->nodes[1] ? q->nodes[1] - 1 : c - 1;
            const size_t node = i1 * q->nodes[1] + i2;
            const bool inside = r == i1 + 1 && (c == i2 + 1);
            const double scale = 0.6 * w->scale[node];
            q->cell[r * columns + c] = (struct cell){
                .weight = inside ? weight[node] : 0.0,
                .mode = w->mode[node],
                .scale = scale > least ? scale : least,
            };
        }
}

static void fill_picking(struct proposal *q)
{
    const size_t count = node_count(q), columns = q->nodes[1] + 2;
    double sum = 0.0;
    for (size_t i = 0; i < count; i++) {
        const size_t i1 = node_index(q, i, 0), i2 = node_index(q, i, 1);
        double weight = q->cell[(i1 + 1) * columns + i2 + 1].weight;
        if ((q->folds_low[0] && i1 == 0) || (q->folds_high[0] && i1 == q->nodes[0] - 1))
            weight *= 0.5;
        if ((q->folds_low[1] && i2 == 0) || (q->folds_high[1] && i2 == q->nodes[1] - 1))
            weight *= 0.5;
        sum += weight;
        q->cumulative[i] = sum;
    }
    q->density_scale = 1.0 / sum;
    for (size_t d = 0; d < q->dims; d++)
        q->density_scale *= q->inverse_step[d];
    for (size_t i = 0; i < count; i++)
        q->cumulative[i] /= sum;
    q->cumulative[count - 1] = 1.0;
    for (size_t g = 0, i = 0; g < GUIDE; g++) {
        while (q->cumulative[i] <= (double)g / GUIDE)
            i++;
        q->guide[g] = (unsigned char)i;
    }
}

static void keep_pseudo(struct proposal *q, const struct problem *p, const struct proposal_work *w)
{
    const size_t n = w->pt.n;
    for (size_t i = 0; i < node_count(q); i++)
        for (size_t k = 0; k < p->levels; k++) {
            q->pseudo_y[i * p->levels + k] = w->y[k * n + i];
            q->pseudo_w[i * p->levels + k] = w->w[k * n + i];
        }
    for (size_t k = 0; k < p->levels; k++)
        if (p->n[k] > 0.0 && (p->events[k] == 0.0 || p->events[k] == p->n[k]))
            q->heavy_tails = true;
}

static void start_v(const struct problem *p, struct proposal_work *w)
{
    double total = p->ss_within, mean_df = p->residual_df > 1.0 ? p->residual_df : 1.0;
    if (total <= 0.0)
        for (size_t k = 0; k < p->levels; k++)
            total += p->n[k] * p->y[k] * p->y[k];
    const double v =
        total > 0.0 ? 0.5 * vm_log(total / mean_df) : problem_log_quantile(p->sd_prior, 0.5);
    for (size_t i = 0; i < NODES_MAX; i++) {
        w->mode[i] = within(v, p->v_edge_low, p->v_edge_high);
        w->scale[i] = 1.0 / sqrt(2.0 * mean_df);
    }
}

/* the next pass starts its search for v where the best node's ended */
static void restart_v(struct proposal_work *w, size_t count)
{
    size_t best;
    largest(w->weight, count, &best);
    const double mode = w->mode[best], scale = w->scale[best];
    for (size_t i = 0; i < NODES_MAX; i++) {
        w->mode[i] = mode;
        w->scale[i] = scale;
    }
}

/* The box along a heavy-tailed dim: nodes equally likely under the prior, of which those within
 * KEEP of the best likelihood stay. */
static void box_by_probability(struct proposal *q, const struct problem *p, size_t d,
                               struct proposal_work *w, struct box *box)
{
    struct points *pt = &w->pt;
    const size_t count = node_count(q), nodes = q->nodes[d];
    size_t first, last, best;
    place_nodes(q, box, pt);
    for (size_t i = 0; i < pt->n; i++) {
        const size_t node = i < count ? i : count - 1;
        pt->coord[d][i] =
            problem_coordinate(p, d, ((double)node_index(q, node, d) + 0.5) / (double)nodes);
    }
    pt->same_shapes = false;
    weigh_nodes(q, p, w, ROUNDS);
    for (size_t i = 0; i < count; i++)
        w->weight[i] -= pt->log_prior_shape[i];
    kept_range(q, w->weight, largest(w->weight, count, &best), d, &first, &last);
    const double low = first == 0 ? OUTER : (double)first - 0.5;
    const double high = last == nodes - 1 ? (double)nodes - OUTER : (double)last + 1.5;
    box->low[d] = problem_coordinate(p, d, low / (double)nodes);
    box->high[d] = problem_coordinate(p, d, high / (double)nodes);
    if (p->sd_free)
        start_v(p, w);
}

static void first_box(struct proposal *q, const struct problem *p, const struct coordinate_range *r,
                      struct proposal_work *w, struct box *box)
{
    memcpy(box->low, r->low, sizeof box->low);
    memcpy(box->high, r->high, sizeof box->high);
    for (size_t d = 0; d < q->dims; d++)
        if (p->heavy[d])
            box_by_probability(q, p, d, w, box);
    for (size_t d = 0; d < q->dims; d++)
        snap(p, d, (double)(q->nodes[d] - 1), &box->low[d], &box->high[d]);
}

void proposal_build(struct proposal *q, const struct problem *p, const struct coordinate_range *r,
                    struct proposal_work *w)
{
    struct box box;
    q->v_from_prior = p->sd_free && p->residual_df < 2.0;
    if (p->sd_free)
        start_v(p, w);
    first_box(q, p, r, w, &box);
    for (int pass = 0; pass < PASSES; pass++) {
        place_nodes(q, &box, &w->pt);
        w->pt.same_shapes = false;
        const bool settled = weigh_nodes(q, p, w, 1);
        if (pass == PASSES - 1 || !zoom(q, p, w->weight, r, &box)) {
            if (!settled)
                weigh_nodes(q, p, w, ROUNDS);
            break;
        }
        if (p->sd_free && !q->v_from_prior)
            restart_v(w, node_count(q));
    }
    for (size_t d = 0; d < q->dims; d++) {
        q->folds_low[d] = q->low[d] <= p->edge_low[d];
        q->folds_high[d] = q->high[d] >= p->edge_high[d];
    }
    fill_cells(q, p, w);
    fill_picking(q);
    for (size_t d = 0; d < q->dims; d++) {
        q->mode[d] = w->pt.coord[d][q->best];
        memcpy(q->node[d], w->pt.coord[d], node_count(q) * sizeof *q->node[d]);
    }
    q->mode_v = w->mode[q->best];
    q->heavy_tails = p->weighed;
    if (p->binary)
        keep_pseudo(q, p, w);
}
