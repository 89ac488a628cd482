/* SPDX-License-Identifier: GPL-3.0-or-later */
/* grid_inverse.c: inversion of a piecewise linear density, one coordinate after the other. */
#include "posterior/grid_inverse.h"

#include <math.h>

/* Where a share u of the mass below a line from a to b lies: t with
 * a t + (b - a) t^2 / 2 = u (a + b) / 2, in the form without cancellation. */
static double invert_line(double a, double b, double u)
{
    const double root = a + sqrt(a * a + u * (b * b - a * a));
    return root > 0.0 ? u * (a + b) / root : u;
}

/* Mass of the segment from knot s to s + 1; the outer ones are closed where the grid ends at an end
 * of the support. */
static double segment_mass(const struct proposal *q, size_t d, size_t s, double a, double b)
{
    if ((s == 0 && q->folds_low[d]) || (s == q->nodes[d] && q->folds_high[d]))
        return 0.0;
    return 0.5 * (a + b);
}

/* Density of the first coordinate at knot r: the second's integral along the row. */
static double row_mass(struct grid_inverse *g, const struct proposal *q, size_t r)
{
    const struct cell *row = q->cell + r * (q->nodes[1] + 2);
    double sum = 0.0;
    if (q->dims == 1)
        return row[1].weight;
    for (size_t s = 0; s <= q->nodes[1]; s++)
        g->row[r][s] = sum += segment_mass(q, 1, s, row[s].weight, row[s + 1].weight);
    return sum;
}

void grid_inverse_fill(struct grid_inverse *g, const struct proposal *q)
{
    const size_t n = q->nodes[0];
    double sum = 0.0;
    for (size_t r = 0; r < n + 2; r++)
        g->marginal[r] = row_mass(g, q, r);
    for (size_t s = 0; s <= n; s++)
        g->cumulative[s] = sum += segment_mass(q, 0, s, g->marginal[s], g->marginal[s + 1]);
}

/* The first segment whose running sum exceeds `mass`; *share of it lies below. */
static size_t find_segment(const double *cumulative, size_t last, double mass, double *share)
{
    size_t s = 0;
    while (s < last && cumulative[s] <= mass)
        s++;
    const double below = s > 0 ? cumulative[s - 1] : 0.0, width = cumulative[s] - below;
    const double inside = width > 0.0 ? (mass - below) / width : 0.5;
    *share = inside < 1.0 ? inside : 1.0;
    return s;
}

static double place(const struct proposal *q, size_t d, size_t s, double t)
{
    return q->low[d] + q->step[d] * ((double)s + t - 1.0);
}

static double between(double a, double b, double t)
{
    return a + t * (b - a);
}

/* Second coordinate given that the first lies at t between knots r and r + 1: the conditional's
 * running sums are the rows' interpolated. */
static double place_second(const struct grid_inverse *g, const struct proposal *q, size_t r,
                           double t, double u)
{
    const size_t last = q->nodes[1];
    const double *a = g->row[r], *b = g->row[r + 1];
    const struct cell *low = q->cell + r * (last + 2), *high = low + last + 2;
    const double mass = u * between(a[last], b[last], t);
    double below = 0.0, above = between(a[0], b[0], t);
    size_t s = 0;
    while (s < last && above <= mass) {
        below = above;
        s++;
        above = between(a[s], b[s], t);
    }
    const double share = above > below ? (mass - below) / (above - below) : 0.5;
    return place(q, 1, s,
                 invert_line(between(low[s].weight, high[s].weight, t),
                             between(low[s + 1].weight, high[s + 1].weight, t),
                             share < 1.0 ? share : 1.0));
}

void grid_inverse_place(const struct grid_inverse *g, const struct proposal *q, size_t n,
                        double *const u[SHAPES_MAX], double *const coord[SHAPES_MAX])
{
    const size_t last = q->nodes[0];
    for (size_t i = 0; i < n; i++) {
        double share;
        const size_t s = find_segment(g->cumulative, last, u[0][i] * g->cumulative[last], &share);
        const double t = invert_line(g->marginal[s], g->marginal[s + 1], share);
        coord[0][i] = place(q, 0, s, t);
        if (q->dims == 2)
            coord[1][i] = place_second(g, q, s, t, u[1][i]);
    }
}
