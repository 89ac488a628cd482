/* SPDX-License-Identifier: GPL-3.0-or-later */
/* chart_gauges.c: values against thresholds, one row each, on an axis from 0 to 1. */
#include "report/chart.h"

#include "base/number.h"
#include "report/svg.h"

enum { NAME_ROW = 18, DETAIL_ROW = 16, TRACK = 56, BETWEEN = 14, EDGE = 14 };

static double detail_room(const struct frame *f, const struct chart_gauge *g)
{
    return DETAIL_ROW * (double)svg_text_lines(NULL, "", 0, 0, f->width, DETAIL_ROW, g->detail);
}

static double at(const struct frame *f, double x)
{
    const double inside = x < 0 ? 0 : x > 1 ? 1 : x;
    return f->left + inside * (f->right - f->left);
}

/* Numbers near the ends of the track stay inside the figure. */
static void number_draw(struct text *out, const struct frame *f, const char *css_class, double x,
                        double y, const char *s)
{
    const double half = svg_text_width(s) / 2, place = at(f, x);
    const enum svg_anchor anchor = place - half < 0          ? ANCHOR_START
                                   : place + half > f->width ? ANCHOR_END
                                                             : ANCHOR_MIDDLE;
    const double edge = anchor == ANCHOR_START ? 0 : anchor == ANCHOR_END ? f->width : place;
    svg_text(out, css_class, anchor, edge, y, s);
}

static void track_draw(struct text *out, const struct frame *f, double y,
                       const struct chart_gauge *g)
{
    char s[NUMBER_CHARS];
    const double cut = at(f, g->threshold);
    const double from = g->above ? cut : f->left, to = g->above ? f->right : cut;
    svg_rect(out, "track", f->left, y - 6, f->right - f->left, 12);
    svg_rect(out, "zone", from, y - 6, to - from, 12);
    svg_line(out, "threshold", cut, y - 11, cut, y + 11);
    svg_line(out, "error", at(f, g->value - 3 * g->error), y, at(f, g->value + 3 * g->error), y);
    svg_mark(out, g->met ? "value-mark met" : "value-mark", MARK_DIAMOND, at(f, g->value), y, 6);
    number_draw(out, f, "gauge-value", g->value, y - 14, g->shown);
    number_draw(out, f, "tick", g->threshold, y + 25, number_shortest(s, g->threshold));
}

static double row_draw(struct text *out, const struct frame *f, double y,
                       const struct chart_gauge *g)
{
    svg_text(out, g->faint ? "gauge-name faint" : "gauge-name", ANCHOR_START, 0, y + 13, g->name);
    svg_text(out, g->met ? "gauge-verdict met" : "gauge-verdict", ANCHOR_END, f->width, y + 13,
             g->verdict);
    svg_text_lines(out, g->faint ? "gauge-detail faint" : "gauge-detail", 0, y + NAME_ROW + 12,
                   f->width, DETAIL_ROW, g->detail);
    y += NAME_ROW + detail_room(f, g);
    track_draw(out, f, y + 32, g);
    return y + TRACK + BETWEEN;
}

static void legend_draw(struct text *out, const struct frame *f, const char *const *names)
{
    struct legend g = legend_start(f);
    double x, y;
    legend_next(out, &g, names[0], &x, &y);
    svg_line(out, "error", x - 11, y, x + 11, y);
    svg_mark(out, "value-mark", MARK_DIAMOND, x, y, 5);
    legend_next(out, &g, names[1], &x, &y);
    svg_rect(out, "zone", x, y - 6, 11, 12);
    svg_line(out, "threshold", x, y - 8, x, y + 8);
}

static void draw(struct text *out, const char *title, const char *label, size_t n,
                 const struct chart_gauge *rows, bool narrow)
{
    static const char *const names[] = {"value, \xC2\xB1 3 Monte Carlo errors",
                                        "threshold, and the side that counts"};
    static const struct axis axis = {0, 1, 0.25};
    struct frame f = frame_new(narrow, 0);
    double room = 0;
    f.left = EDGE;
    f.right = f.width - EDGE;
    for (size_t i = 0; i < n; i++)
        room += NAME_ROW + detail_room(&f, &rows[i]) + TRACK + BETWEEN;
    frame_fit(&f, names, 2, "", room, 40);
    frame_open(out, &f, label);
    legend_draw(out, &f, names);
    double y = f.top;
    for (size_t i = 0; i < n; i++)
        y = row_draw(out, &f, y, &rows[i]);
    svg_line(out, "axis", f.left, y, f.right, y);
    for (int i = 0; i <= 4; i++) {
        char s[NUMBER_CHARS];
        const double x = axis.low + i * axis.step;
        svg_line(out, "axis", at(&f, x), y, at(&f, x), y + 4);
        svg_text(out, "tick", ANCHOR_MIDDLE, at(&f, x), y + 17, number_shortest(s, x));
    }
    svg_text(out, "axis-title", ANCHOR_END, f.right, f.height - 6, title);
    svg_close(out);
}

void chart_gauges(struct text *out, const char *title, const char *label, size_t n,
                  const struct chart_gauge *rows)
{
    draw(out, title, label, n, rows, false);
    draw(out, title, label, n, rows, true);
}
