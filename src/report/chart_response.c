/* SPDX-License-Identifier: GPL-3.0-or-later */
/* chart_response.c: response by level: raw points with intervals, posterior, curve with its band,
 * likelihood estimates. */
#include "report/chart.h"

#include <math.h>

#include "base/mem.h"
#include "report/svg.h"

/* One drawing: positions of the levels, the response axis, and how large marks may be. */
struct drawing {
    const struct chart_response *c;
    struct frame f;
    struct axis y;
    bool to_scale;
    double *x;            /* levels */
    double shift, radius; /* raw points stand left of the posterior's; largest radius */
};

static void widen(double *low, double *high, size_t n, const double *x)
{
    for (size_t i = 0; x && i < n; i++) {
        *low = x[i] < *low ? x[i] : *low;
        *high = x[i] > *high ? x[i] : *high;
    }
}

static struct axis response_axis(const struct chart_response *c)
{
    const size_t n = c->levels.n;
    double low = INFINITY, high = -INFINITY;
    widen(&low, &high, n, c->raw);
    widen(&low, &high, n, c->raw_low);
    widen(&low, &high, n, c->raw_high);
    widen(&low, &high, n, c->low);
    widen(&low, &high, n, c->high);
    widen(&low, &high, c->points, c->curve_low);
    widen(&low, &high, c->points, c->curve_high);
    if (c->likelihood_name) {
        widen(&low, &high, n, c->likelihood);
        widen(&low, &high, c->points, c->likelihood_curve);
    }
    widen(&low, &high, 1, &c->reference);
    return low <= high ? axis_round(low, high, 6) : axis_round(0, 1, 5);
}

static double at_y(const struct drawing *w, double y)
{
    return axis_at(&w->y, w->f.bottom, w->f.top, y);
}

static void curve_draw(struct text *out, const struct drawing *w)
{
    const struct chart_response *c = w->c;
    const size_t n = c->points;
    if (n == 0)
        return;
    double *x = mem_new(4 * n, sizeof *x), *mean = x + n, *low = x + 2 * n, *high = x + 3 * n;
    for (size_t i = 0; i < n; i++) {
        x[i] = levels_at(&c->levels, w->x, c->at[i]);
        mean[i] = at_y(w, c->curve[i]);
        low[i] = at_y(w, c->curve_low[i]);
        high[i] = at_y(w, c->curve_high[i]);
    }
    svg_area(out, "band", n, x, low, high);
    svg_polyline(out, "curve", n, x, mean);
    mem_free(x);
}

/* A broken line and dashes: told from the posterior's full line and diamonds without colour. */
static void likelihood_draw(struct text *out, const struct drawing *w)
{
    const struct chart_response *c = w->c;
    const double half = w->radius < 4 ? w->radius + 1 : 8;
    if (!c->likelihood_name)
        return;
    double *x = mem_new(2 * c->points, sizeof *x), *y = x + c->points;
    for (size_t i = 0; i < c->points; i++) {
        x[i] = levels_at(&c->levels, w->x, c->at[i]);
        y[i] = at_y(w, c->likelihood_curve[i]);
    }
    chart_line(out, "likelihood", c->points, x, y);
    mem_free(x);
    for (size_t k = 0; k < c->levels.n; k++) {
        const double at = at_y(w, c->likelihood[k]);
        if (!isnan(at))
            svg_line(out, "likelihood-mark", w->x[k] - half, at, w->x[k] + half, at);
    }
}

static void reference_draw(struct text *out, const struct drawing *w)
{
    if (isnan(w->c->reference))
        return;
    const double y = at_y(w, w->c->reference);
    svg_line(out, "reference", w->f.left, y, w->f.right, y);
    svg_text(out, "tick", ANCHOR_END, w->f.right - 2, y - 5, w->c->reference_name);
}

static void posterior_draw(struct text *out, const struct drawing *w, size_t k)
{
    const struct chart_response *c = w->c;
    const double x = w->x[k] + (c->points ? 0 : w->shift), r = w->radius < 4 ? w->radius : 4;
    if (isnan(c->low[k]) || isnan(c->high[k]))
        return;
    svg_line(out, r < 3 ? "posterior thin" : "posterior", x, at_y(w, c->low[k]), x,
             at_y(w, c->high[k]));
    svg_mark(out, "posterior-mark", MARK_DIAMOND, x, at_y(w, c->mean[k]), r);
}

static void raw_draw(struct text *out, const struct drawing *w, size_t k, double most)
{
    const struct chart_response *c = w->c;
    const double x = w->x[k] - w->shift;
    if (isnan(c->raw[k]))
        return;
    if (!isnan(c->raw_low[k])) {
        const double low = at_y(w, c->raw_low[k]), high = at_y(w, c->raw_high[k]);
        svg_line(out, "raw", x, low, x, high);
        if (w->radius >= 4) {
            svg_line(out, "raw cap", x - 3.5, low, x + 3.5, low);
            svg_line(out, "raw cap", x - 3.5, high, x + 3.5, high);
        }
    }
    const double r = w->radius * (0.35 + 0.65 * sqrt(c->size[k] / most));
    svg_mark(out, "raw-mark", MARK_CIRCLE, x, at_y(w, c->raw[k]), r);
}

static void points_draw(struct text *out, const struct drawing *w)
{
    double most = 1;
    for (size_t k = 0; k < w->c->levels.n; k++)
        most = w->c->size[k] > most ? w->c->size[k] : most;
    for (size_t k = 0; k < w->c->levels.n; k++)
        raw_draw(out, w, k, most);
    for (size_t k = 0; k < w->c->levels.n; k++)
        posterior_draw(out, w, k);
}

static void legend_draw(struct text *out, const struct drawing *w)
{
    struct legend g = legend_start(&w->f);
    double x, y;
    legend_next(out, &g, w->c->raw_name, &x, &y);
    svg_line(out, "raw", x - 11, y, x + 11, y);
    svg_mark(out, "raw-mark", MARK_CIRCLE, x, y, 5);
    legend_next(out, &g, w->c->posterior_name, &x, &y);
    svg_line(out, "posterior", x - 11, y, x + 11, y);
    svg_mark(out, "posterior-mark", MARK_DIAMOND, x, y, 4);
    if (w->c->points > 0) {
        legend_next(out, &g, w->c->curve_name, &x, &y);
        svg_rect(out, "band", x - 11, y - 7, 22, 14);
        svg_line(out, "curve", x - 11, y, x + 11, y);
    }
    if (!w->c->likelihood_name)
        return;
    legend_next(out, &g, w->c->likelihood_name, &x, &y);
    if (w->c->points > 0)
        svg_line(out, "likelihood", x - 11, y - 6, x + 11, y + 6);
    svg_line(out, "likelihood-mark", x - 8, y, x + 8, y);
}

static void sizes(struct drawing *w)
{
    const double gap = levels_gap(&w->c->levels, w->x);
    w->shift = gap * 0.22 < 8 ? gap * 0.22 : 8;
    w->radius = gap * 0.3 < 6.5 ? gap * 0.3 : 6.5;
    w->radius = w->radius < 1.4 ? 1.4 : w->radius;
}

static void draw(struct text *out, const struct chart_response *c, bool narrow)
{
    const char *names[4] = {c->raw_name, c->posterior_name};
    size_t named = 2;
    if (c->points > 0)
        names[named++] = c->curve_name;
    if (c->likelihood_name)
        names[named++] = c->likelihood_name;
    struct drawing w = {.c = c, .f = frame_new(narrow, 0), .y = response_axis(c)};
    w.f.left = axis_room(&w.y, "");
    w.to_scale = levels_fit_to_scale(&c->levels, &w.f);
    levels_make_room_left(&c->levels, &w.f, w.to_scale);
    frame_fit(&w.f, names, named, c->title, narrow ? 230 : 300,
              levels_room(&c->levels, &w.f, w.to_scale));
    w.x = mem_new(c->levels.n + 1, sizeof *w.x);
    levels_place(&c->levels, &w.f, w.to_scale, w.x);
    sizes(&w);
    frame_open(out, &w.f, c->label);
    axis_draw(out, &w.y, &w.f, "");
    title_draw(out, &w.f, c->title);
    levels_draw(out, &c->levels, &w.f, w.to_scale, w.x);
    curve_draw(out, &w);
    reference_draw(out, &w);
    points_draw(out, &w);
    likelihood_draw(out, &w);
    legend_draw(out, &w);
    svg_close(out);
    mem_free(w.x);
}

void chart_response(struct text *out, const struct chart_response *c)
{
    draw(out, c, false);
    draw(out, c, true);
}
