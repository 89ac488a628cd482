/* SPDX-License-Identifier: GPL-3.0-or-later */
/* chart.c: what all chart kinds share: frame, response axis, legend. */
#include "report/chart.h"

#include <math.h>

#include "base/number.h"
#include "report/svg.h"

enum { LEGEND_ROW = 20, TITLE_ROW = 16, KEY = 28, TITLE_GAP = 10, LEGEND_GAP = 6 };

/* ---- frame ---- */

struct frame frame_new(bool narrow, double plot_height)
{
    struct frame f = {narrow ? 340 : 680, plot_height, 8, 0, 0, plot_height, narrow};
    f.right = f.width - 8;
    return f;
}

void frame_open(struct text *out, const struct frame *f, const char *label)
{
    svg_open(out, f->width, f->height, f->narrow ? "chart narrow" : "chart wide", label);
}

static double key_width(const char *name)
{
    return KEY + svg_text_width(name) + 14;
}

static size_t legend_rows(const struct frame *f, const char *const *names, size_t n)
{
    size_t rows = n > 0;
    double x = 0;
    for (size_t i = 0; i < n; i++) {
        if (x > 0 && x + key_width(names[i]) > f->width) {
            rows++;
            x = 0;
        }
        x += key_width(names[i]);
    }
    return rows;
}

static double title_room(const struct frame *f, const char *title)
{
    return TITLE_ROW * (double)svg_text_lines(NULL, "", 0, 0, f->width, TITLE_ROW, title);
}

void frame_fit(struct frame *f, const char *const *names, size_t n, const char *title,
               double plot_height, double below)
{
    f->top = LEGEND_ROW * (double)legend_rows(f, names, n) + LEGEND_GAP + title_room(f, title) +
             TITLE_GAP;
    f->bottom = f->top + plot_height;
    f->height = f->bottom + below;
}

void title_draw(struct text *out, const struct frame *f, const char *title)
{
    const double y = f->top - TITLE_GAP - title_room(f, title) + TITLE_ROW - 4;
    svg_text_lines(out, "axis-title", 0, y, f->width, TITLE_ROW, title);
}

struct legend legend_start(const struct frame *f)
{
    return (struct legend){f, 0, LEGEND_ROW / 2};
}

void legend_next(struct text *out, struct legend *g, const char *name, double *x, double *y)
{
    if (g->x > 0 && g->x + key_width(name) > g->f->width) {
        g->x = 0;
        g->y += LEGEND_ROW;
    }
    *x = g->x + KEY / 2 - 2;
    *y = g->y;
    svg_text(out, "key", ANCHOR_START, g->x + KEY, g->y + 4, name);
    g->x += key_width(name);
}

/* ---- response axis ---- */

/* The smallest of 1, 2, 5, 10 times a power of ten that is at least x > 0. */
static double round_step(double x)
{
    double power = 1;
    while (power > x)
        power /= 10;
    while (power * 10 <= x)
        power *= 10;
    return x <= power       ? power
           : x <= 2 * power ? 2 * power
           : x <= 5 * power ? 5 * power
                            : 10 * power;
}

struct axis axis_round(double low, double high, int ticks)
{
    const double size = fabs(low) > fabs(high) ? fabs(low) : fabs(high);
    if (!(size < 1e290) || (size > 0 && size < 1e-290))
        return (struct axis){0, 1, 0.2}; /* beyond what can be drawn */
    if (!(high - low > 1e-12 * size)) {
        const double apart = size > 0 ? size / 10 : 1;
        low -= apart;
        high += apart;
    }
    const double step = round_step((high - low) / ticks);
    return (struct axis){floor(low / step) * step, ceil(high / step) * step, step};
}

double axis_at(const struct axis *a, double from, double to, double x)
{
    return from + (to - from) * (x - a->low) / (a->high - a->low);
}

static size_t tick_count(const struct axis *a)
{
    return (size_t)((a->high - a->low) / a->step + 1.5);
}

static void tick_label(struct text *out, const struct axis *a, size_t i, const char *unit)
{
    char s[NUMBER_CHARS];
    double x = a->low + (double)i * a->step;
    const bool fixed = a->step >= 1e-5 && fabs(a->low) < 1e7 && fabs(a->high) < 1e7;
    if (fabs(x) < a->step / 2)
        x = 0;
    text_add(out, fixed ? number_fixed(s, x, number_decimals_for(a->step * 1.0000001, 0))
                        : number_significant(s, x, 4));
    text_add(out, unit);
}

double axis_room(const struct axis *a, const char *unit)
{
    double widest = 0;
    for (size_t i = 0; i < tick_count(a); i++) {
        struct text label = TEXT_INIT;
        tick_label(&label, a, i, unit);
        const double width = svg_text_width(text_s(&label));
        widest = width > widest ? width : widest;
        text_release(&label);
    }
    return widest + 10;
}

void axis_draw(struct text *out, const struct axis *a, const struct frame *f, const char *unit)
{
    for (size_t i = 0; i < tick_count(a); i++) {
        const double x = a->low + (double)i * a->step;
        const double y = axis_at(a, f->bottom, f->top, x);
        struct text label = TEXT_INIT;
        tick_label(&label, a, i, unit);
        svg_line(out, i == 0 ? "axis" : "grid", f->left, y, f->right, y);
        svg_text(out, "tick", ANCHOR_END, f->left - 6, y + 4, text_s(&label));
        text_release(&label);
    }
}

void chart_line(struct text *out, const char *css_class, size_t n, const double *x, const double *y)
{
    for (size_t i = 0; i < n;) {
        size_t end = i;
        while (end < n && !isnan(x[end]) && !isnan(y[end]))
            end++;
        if (end - i > 1)
            svg_polyline(out, css_class, end - i, x + i, y + i);
        i = end + 1;
    }
}
