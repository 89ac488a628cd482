/* SPDX-License-Identifier: GPL-3.0-or-later */
/* chart_models.c: the mean by level of several models, one line each. */
#include <math.h>
#include <stdio.h>

#include "base/mem.h"
#include "report/chart.h"
#include "report/svg.h"

/* Looks of lines (page.css); further models repeat them, and the table tells them apart. */
enum { LOOKS = 4 };

struct drawing {
    const struct chart_models *c;
    struct frame f;
    struct axis y;
    double *x;
};

static void widen(double *low, double *high, size_t n, const double *x)
{
    for (size_t i = 0; i < n; i++) {
        *low = x[i] < *low ? x[i] : *low;
        *high = x[i] > *high ? x[i] : *high;
    }
}

static struct axis models_axis(const struct chart_models *c)
{
    double low = INFINITY, high = -INFINITY;
    for (size_t i = 0; i < c->n; i++) {
        widen(&low, &high, c->levels.n, c->model[i].mean);
        widen(&low, &high, c->model[i].points, c->model[i].curve);
    }
    return low <= high ? axis_round(low, high, 6) : axis_round(0, 1, 5);
}

/* "model-line model-2" */
static const char *look(char out[32], const char *part, size_t model)
{
    snprintf(out, 32, "%s model-%zu", part, model % LOOKS);
    return out;
}

static enum svg_mark mark_of(size_t model)
{
    static const enum svg_mark marks[LOOKS] = {MARK_DIAMOND, MARK_CIRCLE, MARK_SQUARE,
                                               MARK_TRIANGLE};
    return marks[model % LOOKS];
}

static double at_y(const struct drawing *w, double y)
{
    return axis_at(&w->y, w->f.bottom, w->f.top, y);
}

static void line_draw(struct text *out, const struct drawing *w, size_t i)
{
    const struct chart_model *m = &w->c->model[i];
    const size_t n = m->points ? m->points : w->c->levels.n;
    double *x = mem_new(2 * n, sizeof *x), *y = x + n;
    char css[32];
    for (size_t j = 0; j < n; j++) {
        x[j] = m->points ? levels_at(&w->c->levels, w->x, m->at[j]) : w->x[j];
        y[j] = at_y(w, m->points ? m->curve[j] : m->mean[j]);
    }
    chart_line(out, look(css, "model-line", i), n, x, y);
    mem_free(x);
}

static void marks_draw(struct text *out, const struct drawing *w, size_t i)
{
    const double gap = levels_gap(&w->c->levels, w->x), r = gap * 0.3 < 3.6 ? gap * 0.3 : 3.6;
    char css[32];
    for (size_t k = 0; k < w->c->levels.n; k++)
        if (!isnan(w->c->model[i].mean[k]))
            svg_mark(out, look(css, "model-mark", i), mark_of(i), w->x[k],
                     at_y(w, w->c->model[i].mean[k]), r < 1.2 ? 1.2 : r);
}

static void legend_draw(struct text *out, const struct drawing *w)
{
    struct legend g = legend_start(&w->f);
    char css[32];
    for (size_t i = 0; i < w->c->n; i++) {
        double x, y;
        legend_next(out, &g, w->c->model[i].name, &x, &y);
        svg_line(out, look(css, "model-line", i), x - 11, y, x + 11, y);
        svg_mark(out, look(css, "model-mark", i), mark_of(i), x, y, 3.6);
    }
}

static void draw(struct text *out, const struct chart_models *c, bool narrow)
{
    const char **names = mem_new(c->n, sizeof *names);
    struct drawing w = {.c = c, .f = frame_new(narrow, 0), .y = models_axis(c)};
    for (size_t i = 0; i < c->n; i++)
        names[i] = c->model[i].name;
    w.f.left = axis_room(&w.y, "");
    const bool to_scale = levels_fit_to_scale(&c->levels, &w.f);
    levels_make_room_left(&c->levels, &w.f, to_scale);
    frame_fit(&w.f, names, c->n, c->title, narrow ? 180 : 210,
              levels_room(&c->levels, &w.f, to_scale));
    w.x = mem_new(c->levels.n + 1, sizeof *w.x);
    levels_place(&c->levels, &w.f, to_scale, w.x);
    frame_open(out, &w.f, c->label);
    axis_draw(out, &w.y, &w.f, "");
    title_draw(out, &w.f, c->title);
    levels_draw(out, &c->levels, &w.f, to_scale, w.x);
    for (size_t i = 0; i < c->n; i++)
        line_draw(out, &w, i);
    for (size_t i = 0; i < c->n; i++)
        marks_draw(out, &w, i);
    legend_draw(out, &w);
    svg_close(out);
    mem_free(w.x);
    mem_free(names);
}

void chart_models(struct text *out, const struct chart_models *c)
{
    draw(out, c, false);
    draw(out, c, true);
}
