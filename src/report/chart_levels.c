/* SPDX-License-Identifier: GPL-3.0-or-later */
/* chart_levels.c: the levels along the bottom of a chart: where they stand and which labels show.
 */
#include "report/chart.h"

#include <string.h>

#include "base/base.h"
#include "report/svg.h"

enum {
    LABEL_CHARS = 16, /* longer labels are cut: the table beside the chart has them in full */
    TURNED_GAP = 15,  /* pixels between turned labels when all are shown */
    THINNED_GAP = 28, /* and when some are left out */
    LABEL_GAP = 8     /* pixels between level labels */
};
#define SIN_40 0.643
#define COS_40 0.766

/* ---- positions ---- */

void levels_place(const struct chart_levels *l, const struct frame *f, bool to_scale, double *x)
{
    if (l->n + 1 > LEVEL_PLACES)
        BUG("more levels than a chart has places");
    const double edge = f->narrow ? 16 : 28;
    const double columns = (double)l->n + (l->extra ? 1.4 : 0);
    const double step = (f->right - f->left) / columns;
    const double range = l->value[l->n - 1] - l->value[0];
    for (size_t k = 0; k < l->n; k++) {
        if (to_scale)
            x[k] = f->left + edge +
                   (f->right - f->left - 2 * edge) * (l->value[k] - l->value[0]) / range;
        else
            x[k] = f->left + ((double)k + 0.5) * step;
    }
    x[l->n] = f->right - 0.7 * step;
}

double levels_at(const struct chart_levels *l, const double *x, double value)
{
    size_t k = 0;
    while (k + 2 < l->n && value > l->value[k + 1])
        k++;
    const double part = (value - l->value[k]) / (l->value[k + 1] - l->value[k]);
    return x[k] + part * (x[k + 1] - x[k]);
}

double levels_gap(const struct chart_levels *l, const double *x)
{
    double gap = x[1] - x[0];
    for (size_t k = 1; k + 1 < l->n; k++)
        gap = x[k + 1] - x[k] < gap ? x[k + 1] - x[k] : gap;
    return gap;
}

bool levels_fit_to_scale(const struct chart_levels *l, const struct frame *f)
{
    double x[LEVEL_PLACES] = {0};
    levels_place(l, f, true, x);
    const double gap = levels_gap(l, x);
    const double mean = (x[l->n - 1] - x[0]) / (double)(l->n - 1);
    return gap >= TURNED_GAP || gap >= 0.5 * mean;
}

/* ---- labels ---- */

static void short_label(struct text *out, const char *label)
{
    size_t bytes = 0, columns = 0;
    while (label[bytes] && columns < LABEL_CHARS) {
        bytes++;
        while (((unsigned char)label[bytes] & 0xC0) == 0x80)
            bytes++;
        columns++;
    }
    text_add_n(out, label, bytes);
    if (label[bytes])
        text_add(out, "\xE2\x80\xA6");
}

static double label_width(const char *label)
{
    struct text shown = TEXT_INIT;
    short_label(&shown, label);
    const double width = svg_text_width(text_s(&shown));
    text_release(&shown);
    return width;
}

/* Upright labels only if every one of them has room. */
static bool labels_are_turned(const struct chart_levels *l, const double *x)
{
    for (size_t k = 0; k + 1 < l->n; k++) {
        const double need = (label_width(l->label[k]) + label_width(l->label[k + 1])) / 2;
        if (x[k + 1] - x[k] < need + LABEL_GAP)
            return true;
    }
    return false;
}

/* Turned labels reach to the left of the plot: moves f->left where they would leave the figure. */
void levels_make_room_left(const struct chart_levels *l, struct frame *f, bool to_scale)
{
    double x[LEVEL_PLACES];
    levels_place(l, f, to_scale, x);
    if (!labels_are_turned(l, x))
        return;
    const double reach = COS_40 * label_width(l->label[0]) - (x[0] + 4);
    if (reach > 0)
        f->left += reach;
}

double levels_room(const struct chart_levels *l, const struct frame *f, bool to_scale)
{
    double x[LEVEL_PLACES], widest = l->extra ? label_width(l->extra) : 0;
    levels_place(l, f, to_scale, x);
    if (!labels_are_turned(l, x))
        return 44;
    for (size_t k = 0; k < l->n; k++)
        widest = label_width(l->label[k]) > widest ? label_width(l->label[k]) : widest;
    return 44 + SIN_40 * widest;
}

static void label_draw(struct text *out, const struct frame *f, bool turned, bool strong,
                       const char *label, double x)
{
    struct text shown = TEXT_INIT;
    const char *css_class = strong ? "tick strong" : "tick";
    short_label(&shown, label);
    svg_line(out, "axis", x, f->bottom, x, f->bottom + 4);
    if (turned)
        svg_text_turned(out, css_class, x + 4, f->bottom + 15, text_s(&shown));
    else
        svg_text(out, css_class, ANCHOR_MIDDLE, x, f->bottom + 18, text_s(&shown));
    text_release(&shown);
}

/* Labels from the left, leaving out those too close to the one before, to the marked level or to
 * the extra column. */
static void labels_draw(struct text *out, const struct chart_levels *l, const struct frame *f,
                        bool turned, const double *x)
{
    const double need = !turned ? 0 : levels_gap(l, x) < TURNED_GAP ? THINNED_GAP : TURNED_GAP;
    const double end = l->extra && turned ? x[l->n] - need : f->width;
    double last = -1e9;
    for (size_t k = 0; k < l->n; k++) {
        const bool marked = (int)k == l->marked;
        const bool before_marked =
            l->marked >= 0 && (int)k < l->marked && x[l->marked] - x[k] < need;
        if (!marked && (x[k] - last < need || before_marked || x[k] > end))
            continue;
        label_draw(out, f, turned, marked, l->label[k], x[k]);
        last = x[k];
    }
    if (l->extra)
        label_draw(out, f, turned, false, l->extra, x[l->n]);
}

void levels_draw(struct text *out, const struct chart_levels *l, const struct frame *f,
                 bool to_scale, const double *x)
{
    struct text title = TEXT_INIT;
    const bool turned = labels_are_turned(l, x);
    labels_draw(out, l, f, turned, x);
    if (l->extra) {
        const double between = (x[l->n - 1] + x[l->n]) / 2;
        svg_line(out, "divider", between, f->top, between, f->bottom);
    }
    text_add(&title, l->title);
    if (!to_scale && levels_fit_to_scale(l, f) == false)
        text_add(&title, ", in equal steps");
    svg_text(out, "axis-title", ANCHOR_END, f->right, f->height - 6, text_s(&title));
    text_release(&title);
}
