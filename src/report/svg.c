/* SPDX-License-Identifier: GPL-3.0-or-later */
/* svg.c: writes the marks of a figure as SVG elements. */
#include "report/svg.h"

#include <stdbool.h>
#include <string.h>

#include "base/number.h"
#include "report/table.h"

static void add_number(struct text *out, double x)
{
    char s[NUMBER_CHARS];
    number_fixed(s, x, 1);
    const size_t n = strlen(s);
    if (n > 2 && strcmp(s + n - 2, ".0") == 0)
        s[n - 2] = '\0';
    text_add(out, s);
}

static void add_attribute(struct text *out, const char *name, double x)
{
    text_addf(out, " %s=\"", name);
    add_number(out, x);
    text_add(out, "\"");
}

static void add_point(struct text *out, double x, double y)
{
    add_number(out, x);
    text_add(out, ",");
    add_number(out, y);
    text_add(out, " ");
}

void svg_open(struct text *out, double width, double height, const char *css_class,
              const char *label)
{
    text_addf(out, "<svg class=\"%s\" role=\"img\" viewBox=\"0 0 ", css_class);
    add_number(out, width);
    text_add(out, " ");
    add_number(out, height);
    text_add(out, "\" aria-label=\"");
    text_add_html(out, label);
    text_add(out, "\">\n");
}

void svg_close(struct text *out)
{
    text_add(out, "</svg>\n");
}

void svg_line(struct text *out, const char *css_class, double x1, double y1, double x2, double y2)
{
    text_addf(out, "<line class=\"%s\"", css_class);
    add_attribute(out, "x1", x1);
    add_attribute(out, "y1", y1);
    add_attribute(out, "x2", x2);
    add_attribute(out, "y2", y2);
    text_add(out, "/>\n");
}

void svg_rect(struct text *out, const char *css_class, double x, double y, double width,
              double height)
{
    text_addf(out, "<rect class=\"%s\"", css_class);
    add_attribute(out, "x", x);
    add_attribute(out, "y", y);
    add_attribute(out, "width", width > 0 ? width : 0);
    add_attribute(out, "height", height > 0 ? height : 0);
    text_add(out, "/>\n");
}

void svg_polyline(struct text *out, const char *css_class, size_t n, const double *x,
                  const double *y)
{
    text_addf(out, "<polyline class=\"%s\" points=\"", css_class);
    for (size_t i = 0; i < n; i++)
        add_point(out, x[i], y[i]);
    text_add(out, "\"/>\n");
}

void svg_area(struct text *out, const char *css_class, size_t n, const double *x, const double *y1,
              const double *y2)
{
    text_addf(out, "<polygon class=\"%s\" points=\"", css_class);
    for (size_t i = 0; i < n; i++)
        add_point(out, x[i], y1[i]);
    for (size_t i = n; i > 0; i--)
        add_point(out, x[i - 1], y2[i - 1]);
    text_add(out, "\"/>\n");
}

/* Corners in units of the radius; areas are about equal. */
static const double corners[][4][2] = {
    [MARK_DIAMOND] = {{0, -1.25}, {1.25, 0}, {0, 1.25}, {-1.25, 0}},
    [MARK_SQUARE] = {{-0.9, -0.9}, {0.9, -0.9}, {0.9, 0.9}, {-0.9, 0.9}},
    [MARK_TRIANGLE] = {{-1.2, -0.9}, {1.2, -0.9}, {0, 1.2}, {-1.2, -0.9}},
};

void svg_mark(struct text *out, const char *css_class, enum svg_mark mark, double x, double y,
              double radius)
{
    if (mark == MARK_CIRCLE) {
        text_addf(out, "<circle class=\"%s\"", css_class);
        add_attribute(out, "cx", x);
        add_attribute(out, "cy", y);
        add_attribute(out, "r", radius);
        text_add(out, "/>\n");
        return;
    }
    text_addf(out, "<polygon class=\"%s\" points=\"", css_class);
    for (size_t i = 0; i < 4; i++)
        add_point(out, x + radius * corners[mark][i][0], y + radius * corners[mark][i][1]);
    text_add(out, "\"/>\n");
}

static const char *const anchors[] = {"start", "middle", "end"};

void svg_text(struct text *out, const char *css_class, enum svg_anchor anchor, double x, double y,
              const char *s)
{
    text_addf(out, "<text class=\"%s\" text-anchor=\"%s\"", css_class, anchors[anchor]);
    add_attribute(out, "x", x);
    add_attribute(out, "y", y);
    text_add(out, ">");
    table_add_people(out, s);
    text_add(out, "</text>\n");
}

void svg_text_turned(struct text *out, const char *css_class, double x, double y, const char *s)
{
    text_addf(out, "<text class=\"%s\" text-anchor=\"end\" transform=\"translate(", css_class);
    add_number(out, x);
    text_add(out, " ");
    add_number(out, y);
    text_add(out, ") rotate(-40)\">");
    table_add_people(out, s);
    text_add(out, "</text>\n");
}

void svg_patterns(struct text *out)
{
    text_add(out, "<svg class=\"patterns\" width=\"0\" height=\"0\" aria-hidden=\"true\"><defs>\n"
                  "<pattern id=\"hatch\" width=\"6\" height=\"6\" patternUnits=\"userSpaceOnUse\" "
                  "patternTransform=\"rotate(45)\"><rect class=\"hatch-ground\" width=\"6\" "
                  "height=\"6\"/><line class=\"hatch-line\" x1=\"1.5\" y1=\"0\" x2=\"1.5\" "
                  "y2=\"6\"/></pattern>\n"
                  "<pattern id=\"dots\" width=\"6\" height=\"6\" patternUnits=\"userSpaceOnUse\">"
                  "<circle class=\"dots-dot\" cx=\"3\" cy=\"3\" r=\"1\"/></pattern>\n"
                  "</defs></svg>\n");
}

double svg_text_width(const char *s)
{
    return 6.9 * (double)text_columns(s);
}

/* Bytes of s that make a line: up to the last blank that fits, at least one word. */
static size_t line_length(const char *s, double width)
{
    size_t best = 0;
    for (size_t i = 0;; i++) {
        if (s[i] != ' ' && s[i] != '\0')
            continue;
        struct text head = TEXT_INIT;
        text_add_n(&head, s, i);
        const bool fits = svg_text_width(text_s(&head)) <= width;
        text_release(&head);
        if (fits || best == 0)
            best = i;
        if (!fits || s[i] == '\0')
            return best;
    }
}

size_t svg_text_lines(struct text *out, const char *css_class, double x, double y, double width,
                      double line_height, const char *s)
{
    size_t lines = 0;
    while (*s) {
        const size_t n = line_length(s, width);
        if (out) {
            struct text line = TEXT_INIT;
            text_add_n(&line, s, n);
            svg_text(out, css_class, ANCHOR_START, x, y + (double)lines * line_height,
                     text_s(&line));
            text_release(&line);
        }
        lines++;
        s += n;
        s += *s == ' ';
    }
    return lines;
}
