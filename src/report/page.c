/* SPDX-License-Identifier: GPL-3.0-or-later */
/* page.c: writes the frame of a page. */
#include "report/page.h"

#include "base/base.h"
#include "report/svg.h"

/* Rows beyond which a table scrolls in its box on screen. */
enum { LONG_TABLE = 24 };

static void banner_add(struct text *out, const char *banner)
{
    if (!banner)
        return;
    text_add(out, "<p class=\"banner\" role=\"alert\">");
    text_add_html(out, banner);
    text_add(out, "</p>\n<p class=\"watermark\" aria-hidden=\"true\">");
    text_add_html(out, banner);
    text_add(out, "</p>\n");
}

void page_open(struct text *out, const char *title, const char *banner)
{
    text_add(out, "<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n"
                  "<meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none'; "
                  "style-src 'unsafe-inline'; img-src data:; script-src 'unsafe-inline'\">\n"
                  "<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n"
                  "<meta name=\"generator\" content=\"" TERRACE_PROGRAM "\">\n<title>");
    text_add_html(out, title);
    text_add(out, "</title>\n<style>\n");
    text_add(out, page_css);
    text_add(out, "</style>\n</head>\n");
    text_add(out, banner ? "<body class=\"unusable\">\n" : "<body>\n");
    banner_add(out, banner);
    svg_patterns(out);
}

void page_close(struct text *out)
{
    text_add(out, "</body>\n</html>\n");
}

void page_section_open(struct text *out, const char *id, const char *heading)
{
    text_addf(out, "<section id=\"%s\">\n<h2>", id);
    text_add_html(out, heading);
    text_add(out, "</h2>\n");
}

void page_section_close(struct text *out)
{
    text_add(out, "</section>\n");
}

void page_paragraph(struct text *out, const char *css_class, const char *sentence)
{
    if (css_class)
        text_addf(out, "<p class=\"%s\">", css_class);
    else
        text_add(out, "<p>");
    table_add_people(out, sentence);
    text_add(out, "</p>\n");
}

void page_item(struct text *out, const char *sentence)
{
    text_add(out, "<li>");
    table_add_people(out, sentence);
    text_add(out, "</li>\n");
}

void page_figure_open(struct text *out, const struct page_figure *f)
{
    text_addf(out, "<figure class=\"plate%s%s\" id=\"figure-%d\">\n<figcaption><span>Figure %d",
              f->aside ? " aside" : "", f->rows > LONG_TABLE ? " long" : "", f->number, f->number);
    text_add(out, "</span> ");
    table_add_people(out, f->title);
    text_add(out, "</figcaption>\n<div class=\"plot\">\n");
}

void page_figure_beside(struct text *out)
{
    text_add(out, "</div>\n<div class=\"beside\">\n");
}

void page_figure_below(struct text *out)
{
    text_add(out, "</div>\n<div class=\"below\">\n");
}

void page_figure_close(struct text *out)
{
    text_add(out, "</div>\n</figure>\n");
}

void page_table(struct text *out, struct table *t, const char *caption)
{
    text_add(out, "<div class=\"box\" tabindex=\"0\" role=\"region\" aria-label=\"");
    text_add_html(out, caption);
    text_add(out, "\">\n");
    table_html(out, t, caption);
    text_add(out, "</div>\n");
    /* The caption itself would scroll away with the table: shown once more beneath the box. */
    text_add(out, "<p class=\"note\" aria-hidden=\"true\">");
    text_add_html(out, caption);
    text_add(out, "</p>\n");
    table_free(t);
}
