/* SPDX-License-Identifier: GPL-3.0-or-later */
/* page_response.h: the figure of the response by level: raw data, posterior, likelihood fit, and
 * the table of figures by level. */
#ifndef TERRACE_PAGE_RESPONSE_H
#define TERRACE_PAGE_RESPONSE_H

#include "report/page_sheet.h"

/* keys: the table's figures (figures.h), NULL-terminated; those that do not exist are left out. */
void page_response(struct text *out, struct sheet *s, const char *const *keys);

#endif
