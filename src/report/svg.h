/* SPDX-License-Identifier: GPL-3.0-or-later */
/* svg.h: the marks that figures are made of, as inline SVG. Positions are in the figure's own
 * pixels (x to the right, y down), written to a tenth. Looks (colour, stroke, pattern) come from
 * classes of page.css; shapes are told apart without colour.
 */
#ifndef TERRACE_SVG_H
#define TERRACE_SVG_H

#include <stddef.h>

#include "base/text.h"

enum svg_anchor { ANCHOR_START, ANCHOR_MIDDLE, ANCHOR_END };
enum svg_mark { MARK_CIRCLE, MARK_DIAMOND, MARK_SQUARE, MARK_TRIANGLE };

/* `label` is what a screen reader says instead of the figure. */
void svg_open(struct text *out, double width, double height, const char *css_class,
              const char *label);
void svg_close(struct text *out);
void svg_line(struct text *out, const char *css_class, double x1, double y1, double x2, double y2);
void svg_rect(struct text *out, const char *css_class, double x, double y, double width,
              double height);
void svg_polyline(struct text *out, const char *css_class, size_t n, const double *x,
                  const double *y);
/* The area between y1 and y2. */
void svg_area(struct text *out, const char *css_class, size_t n, const double *x, const double *y1,
              const double *y2);
void svg_mark(struct text *out, const char *css_class, enum svg_mark mark, double x, double y,
              double radius);
void svg_text(struct text *out, const char *css_class, enum svg_anchor anchor, double x, double y,
              const char *s);
/* The same turned by -40 degrees, ending at (x, y). */
void svg_text_turned(struct text *out, const char *css_class, double x, double y, const char *s);

/* Lines of at most `width` pixels, broken at blanks; returns how many. out NULL: only counts. */
size_t svg_text_lines(struct text *out, const char *css_class, double x, double y, double width,
                      double line_height, const char *s);

/* The fill patterns that page.css refers to; once a page, before the first figure. */
void svg_patterns(struct text *out);

/* Width of a text in pixels at the size of figure labels, on the safe side. */
double svg_text_width(const char *s);

#endif
