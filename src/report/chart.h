/* SPDX-License-Identifier: GPL-3.0-or-later */
/* chart.h: the few kinds of chart a report needs, from plain arrays. A chart is drawn twice: wide
 * for screens and paper, narrow for phones; page.css shows one of the two. NaN is not drawn.
 */
#ifndef TERRACE_CHART_H
#define TERRACE_CHART_H

#include <stdbool.h>
#include <stddef.h>

#include "base/text.h"

enum { LEVEL_PLACES = 129 }; /* 128 levels and an extra column */

/* The levels along the bottom. */
struct chart_levels {
    size_t n;
    const char *const *label;
    const double *value; /* increasing */
    const char *title;   /* "Dose (mg)" */
    int marked;          /* a level to point out, or -1 */
    const char *extra;   /* a last column after the levels ("no level"), or NULL */
};

/* Response by level: raw points with intervals, posterior points with intervals, a curve; the
 * likelihood's estimates as dashes and its curve as a broken line. */
struct chart_response {
    struct chart_levels levels;
    const char *title; /* of the response axis, with its unit */
    const char *label; /* for screen readers */
    const char *raw_name, *posterior_name, *curve_name;
    const double *raw, *raw_low, *raw_high, *size; /* size: outcomes; area of the point */
    const double *mean, *low, *high;
    size_t points; /* of the curve; 0 without */
    const double *at, *curve, *curve_low, *curve_high;
    const char *likelihood_name; /* NULL: none */
    const double *likelihood;    /* by level */
    const double *likelihood_curve;
    double reference; /* a horizontal line, or NaN */
    const char *reference_name;
};

/* Shares or probabilities by level: one or two bars and up to two marks. */
struct chart_bars {
    struct chart_levels levels;
    const char *title, *label;
    bool percent;             /* axis in percent, up to what is needed; else 0 to 1 */
    const char *bar_name[2];  /* second NULL: one bar a level */
    const double *bar[2];     /* levels.n (+ 1 with levels.extra) values */
    const char *mark_name[2]; /* diamond (joined by a line), short dash; NULL: none */
    const double *mark[2];
};

/* The mean by level of several models, one line each: a curve, or the levels joined. Lines differ
 * by their breaks and their marks; the first is full. */
struct chart_model {
    const char *name;
    const double *mean; /* by level */
    size_t points;      /* of the curve; 0: the level means are joined */
    const double *at, *curve;
};
struct chart_models {
    struct chart_levels levels;
    const char *title, *label;
    size_t n;
    const struct chart_model *model;
};

/* Values against thresholds, one row each, on an axis from 0 to 1. */
struct chart_gauge {
    const char *name, *detail; /* a heading, and what is measured */
    const char *shown;         /* the value as text */
    double value, error, threshold;
    bool above; /* the side that counts */
    const char *verdict;
    bool met, faint; /* faint: not in force */
};

void chart_response(struct text *out, const struct chart_response *c);
void chart_models(struct text *out, const struct chart_models *c);
void chart_bars(struct text *out, const struct chart_bars *c);
void chart_gauges(struct text *out, const char *title, const char *label, size_t n,
                  const struct chart_gauge *rows);

/* ---- shared by the chart kinds ---- */

struct frame {
    double width, height;
    double left, right, top, bottom; /* the plot's edges, in pixels from the top left */
    bool narrow;
};
struct frame frame_new(bool narrow, double plot_height);
void frame_open(struct text *out, const struct frame *f, const char *label);

/* A linear axis from low to high with ticks at multiples of a round step (1, 2 or 5 times a power
 * of ten). */
struct axis {
    double low, high, step;
};
struct axis axis_round(double low, double high, int ticks);
double axis_at(const struct axis *a, double from, double to, double x);
/* Room for the tick labels left of the plot. */
double axis_room(const struct axis *a, const char *unit);
/* Horizontal grid lines with labels, `unit` after each number. */
void axis_draw(struct text *out, const struct axis *a, const struct frame *f, const char *unit);

/* Legend keys and the title of the vertical axis stand above the plot. Sets f->top, f->bottom and
 * f->height from what they and the levels below need. */
void frame_fit(struct frame *f, const char *const *names, size_t n, const char *title,
               double plot_height, double below);
void title_draw(struct text *out, const struct frame *f, const char *title);

struct legend {
    const struct frame *f;
    double x, y;
};
struct legend legend_start(const struct frame *f);
/* Writes `name` and hands out the 28 x 16 pixel box left of it for its key: centre in *x, *y. */
void legend_next(struct text *out, struct legend *g, const char *name, double *x, double *y);

/* Positions of the levels (and of levels.extra after them) between the frame's edges; x has room
 * for levels.n + 1. In proportion to the values, or in equal steps. */
void levels_place(const struct chart_levels *l, const struct frame *f, bool to_scale, double *x);
/* Whether placing the levels in proportion leaves room for their labels. */
bool levels_fit_to_scale(const struct chart_levels *l, const struct frame *f);
void levels_make_room_left(const struct chart_levels *l, struct frame *f, bool to_scale);
double levels_room(const struct chart_levels *l, const struct frame *f, bool to_scale);
void levels_draw(struct text *out, const struct chart_levels *l, const struct frame *f,
                 bool to_scale, const double *x);
/* Where a level value stands, also between levels that stand in equal steps. */
double levels_at(const struct chart_levels *l, const double *x, double value);
/* Smallest distance between neighbours, in pixels. */
double levels_gap(const struct chart_levels *l, const double *x);

/* A polyline in pieces wherever x or y does not exist. */
void chart_line(struct text *out, const char *css_class, size_t n, const double *x,
                const double *y);

#endif
