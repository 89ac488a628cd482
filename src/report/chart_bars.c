/* SPDX-License-Identifier: GPL-3.0-or-later */
/* chart_bars.c: shares or probabilities by level as bars, with marks over them. */
#include "report/chart.h"

#include <math.h>

#include "base/mem.h"
#include "report/svg.h"

/* Probabilities are solid; of two shares the first is pale, the second hatched. */
static const char *bar_class(const struct chart_bars *c, size_t bar)
{
    return !c->percent ? "bar-solid" : bar == 0 ? "bar-pale" : "bar-hatch";
}

struct drawing {
    const struct chart_bars *c;
    struct frame f;
    struct axis y;
    size_t columns;
    double *x, step;
};

static double largest(const struct chart_bars *c, size_t columns)
{
    double most = 0;
    for (size_t b = 0; b < 2 && c->bar_name[b]; b++)
        for (size_t k = 0; k < columns; k++)
            most = c->bar[b][k] > most ? c->bar[b][k] : most;
    return most;
}

static struct axis bars_axis(const struct chart_bars *c, size_t columns)
{
    if (!c->percent)
        return (struct axis){0, 1, 0.2};
    const double most = 100 * largest(c, columns);
    return axis_round(0, most > 0 ? most : 100, 5);
}

static double at_y(const struct drawing *w, double y)
{
    return axis_at(&w->y, w->f.bottom, w->f.top, w->c->percent ? 100 * y : y);
}

static void bars_draw(struct text *out, const struct drawing *w)
{
    const size_t bars = w->c->bar_name[1] ? 2 : 1;
    const double width = w->step * (bars == 2 ? 0.36 : 0.58);
    for (size_t b = 0; b < bars; b++)
        for (size_t k = 0; k < w->columns; k++) {
            const double y = at_y(w, w->c->bar[b][k]);
            const double x = w->x[k] + width * ((double)b - (double)bars / 2);
            if (w->c->bar[b][k] > 0)
                svg_rect(out, bar_class(w->c, b), x, y, width, w->f.bottom - y);
        }
}

static void dashes_draw(struct text *out, const struct drawing *w, const double *y)
{
    const double half = w->step * 0.4;
    for (size_t k = 0; k < w->columns; k++)
        if (!isnan(y[k]))
            svg_line(out, "dash-mark", w->x[k] - half, at_y(w, y[k]), w->x[k] + half,
                     at_y(w, y[k]));
}

static void diamonds_draw(struct text *out, const struct drawing *w, const double *p)
{
    const double r = w->step * 0.3 < 4.5 ? w->step * 0.3 : 4.5;
    double *y = mem_new(w->columns, sizeof *y);
    for (size_t k = 0; k < w->columns; k++)
        y[k] = at_y(w, p[k]);
    chart_line(out, "meets-line", w->columns, w->x, y);
    for (size_t k = 0; k < w->columns; k++)
        if (!isnan(y[k]))
            svg_mark(out, "meets-mark", MARK_DIAMOND, w->x[k], y[k], r < 1.2 ? 1.2 : r);
    mem_free(y);
}

static void marked_draw(struct text *out, const struct drawing *w)
{
    const int k = w->c->levels.marked;
    if (k < 0)
        return;
    svg_rect(out, "selected-ground", w->x[k] - w->step / 2, w->f.top, w->step,
             w->f.bottom - w->f.top);
    svg_mark(out, "selected-mark", MARK_TRIANGLE, w->x[k], w->f.top - 5, 4.5);
}

static void legend_draw(struct text *out, const struct drawing *w, const char *marked_name)
{
    struct legend g = legend_start(&w->f);
    const struct chart_bars *c = w->c;
    double x, y;
    for (size_t b = 0; b < 2 && c->bar_name[b]; b++) {
        legend_next(out, &g, c->bar_name[b], &x, &y);
        svg_rect(out, bar_class(c, b), x - 8, y - 6, 16, 12);
    }
    if (c->mark_name[0]) {
        legend_next(out, &g, c->mark_name[0], &x, &y);
        svg_line(out, "meets-line", x - 11, y, x + 11, y);
        svg_mark(out, "meets-mark", MARK_DIAMOND, x, y, 4.5);
    }
    if (c->mark_name[1]) {
        legend_next(out, &g, c->mark_name[1], &x, &y);
        svg_line(out, "dash-mark", x - 10, y, x + 10, y);
    }
    if (marked_name) {
        legend_next(out, &g, marked_name, &x, &y);
        svg_mark(out, "selected-mark", MARK_TRIANGLE, x, y, 4.5);
    }
}

static void draw(struct text *out, const struct chart_bars *c, bool narrow)
{
    const char *names[5];
    size_t n = 0;
    for (size_t b = 0; b < 2 && c->bar_name[b]; b++)
        names[n++] = c->bar_name[b];
    for (size_t m = 0; m < 2; m++)
        if (c->mark_name[m])
            names[n++] = c->mark_name[m];
    const char *marked = c->levels.marked >= 0 ? "selected level" : NULL;
    if (marked)
        names[n++] = marked;
    struct drawing w = {.c = c, .f = frame_new(narrow, 0)};
    w.columns = c->levels.n + (c->levels.extra ? 1 : 0);
    w.y = bars_axis(c, w.columns);
    const char *unit = c->percent ? "%" : "";
    w.f.left = axis_room(&w.y, unit);
    levels_make_room_left(&c->levels, &w.f, false);
    frame_fit(&w.f, names, n, c->title, narrow ? 180 : 210, levels_room(&c->levels, &w.f, false));
    w.f.top += marked ? 8 : 0; /* for the triangle */
    w.x = mem_new(c->levels.n + 1, sizeof *w.x);
    levels_place(&c->levels, &w.f, false, w.x);
    w.step = w.x[1] - w.x[0];
    frame_open(out, &w.f, c->label);
    marked_draw(out, &w);
    axis_draw(out, &w.y, &w.f, unit);
    levels_draw(out, &c->levels, &w.f, false, w.x);
    bars_draw(out, &w);
    if (c->mark_name[1])
        dashes_draw(out, &w, c->mark[1]);
    if (c->mark_name[0])
        diamonds_draw(out, &w, c->mark[0]);
    w.f.top -= marked ? 8 : 0;
    title_draw(out, &w.f, c->title);
    legend_draw(out, &w, marked);
    svg_close(out);
    mem_free(w.x);
}

void chart_bars(struct text *out, const struct chart_bars *c)
{
    draw(out, c, false);
    draw(out, c, true);
}
