/* SPDX-License-Identifier: GPL-3.0-or-later */
/* selfcheck_report.h: the evidence of the built-in checks, for the terminal, as JSON and as a page
 * that a quality department can file. */
#ifndef TERRACE_SELFCHECK_REPORT_H
#define TERRACE_SELFCHECK_REPORT_H

#include "base/text.h"
#include "selfcheck/selfcheck.h"

void selfcheck_text(struct text *out, const struct selfcheck *s);
void selfcheck_json(struct text *out, const struct selfcheck *s);
void selfcheck_page(struct text *out, const struct selfcheck *s);

#endif
