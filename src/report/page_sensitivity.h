/* SPDX-License-Identifier: GPL-3.0-or-later */
/* page_sensitivity.h: the figure of the sensitivity models with its tables. */
#ifndef TERRACE_PAGE_SENSITIVITY_H
#define TERRACE_PAGE_SENSITIVITY_H

#include "report/page_sheet.h"

/* Nothing where the design has no sensitivity models. */
void page_sensitivity(struct text *out, struct sheet *s);

#endif
